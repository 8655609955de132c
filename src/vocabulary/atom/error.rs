//! What can be wrong with a species that somebody typed.

/// A species that cannot be read. Each message is one sentence without a stop.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum SpeciesError {
    /// Nothing was typed where a species should stand.
    #[error("a species is missing; write a list such as Na, Ne I, He")]
    Empty,
    /// The letters name no element.
    #[error("`{text}`: no such element{}", did_you_mean(.suggestions))]
    NoSuchElement {
        /// The letters that should be an element.
        text: String,
        /// Symbols that may be meant.
        suggestions: Vec<String>,
    },
    /// Letters in the wrong case that can be read in more than one way.
    #[error("`{text}` can be read as {}; write one of them", one_of(.readings))]
    Ambiguous {
        /// What was typed.
        text: String,
        /// Its readings.
        readings: Vec<String>,
    },
    /// What follows the element is neither a stage nor a charge.
    #[error(
        "`{text}`: `{rest}` is no stage of ionisation; write {symbol} I, {symbol}+ or {symbol} I..III"
    )]
    BadStage {
        /// What was typed.
        text: String,
        /// What follows the element.
        rest: String,
        /// The element.
        symbol: String,
    },
    /// More electrons are gone than the atom has, or all of them.
    #[error("`{text}`: {name} has {}; a bare nucleus has no lines", stages(.symbol, .last))]
    StageBeyondNucleus {
        /// What was typed.
        text: String,
        /// Name of the element, lower case.
        name: String,
        /// Symbol of the element or isotope.
        symbol: String,
        /// The last stage, as a Roman numeral.
        last: String,
    },
    /// A range of stages that runs downwards.
    #[error("`{text}`: the stages run backwards; write the lower one first")]
    ReversedStages {
        /// What was typed.
        text: String,
    },
    /// No isotope with this mass number is known.
    #[error(
        "`{text}`: no isotope of {name} with mass number {mass_number} is known; the nearest is {nearest}"
    )]
    NoSuchIsotope {
        /// What was typed.
        text: String,
        /// Name of the element, lower case.
        name: String,
        /// Mass number that was typed.
        mass_number: String,
        /// The nearest isotope that is known.
        nearest: String,
    },
    /// One species was asked for, but the stage is open.
    #[error("`{text}` names no single stage; write one, such as {example}")]
    StageMissing {
        /// What was typed.
        text: String,
        /// A species that would do.
        example: String,
    },
}

fn did_you_mean(suggestions: &[String]) -> String {
    if suggestions.is_empty() {
        "; write a symbol such as Fe, He or W".to_owned()
    } else {
        format!("; did you mean {}?", suggestions.join(", "))
    }
}

fn one_of(readings: &[String]) -> String {
    readings.join(" or ")
}

fn stages(symbol: &str, last: &str) -> String {
    if last == "I" {
        format!("one stage, {symbol} I")
    } else {
        format!("the stages {symbol} I to {symbol} {last}")
    }
}
