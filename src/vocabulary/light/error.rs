//! What can be wrong with a quantity that somebody typed.

use super::AirError;

/// A quantity, range, width or condition that cannot be read. Each message is one sentence
/// without a stop.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum QuantityError {
    /// Nothing was typed.
    #[error("a {what} is missing; write one such as {example}")]
    Empty {
        /// What should stand there.
        what: &'static str,
        /// One that can be read.
        example: &'static str,
    },
    /// No number where one should stand.
    #[error("`{text}`: `{number}` is not a number; write a {what} such as {example}")]
    NotANumber {
        /// What was typed.
        text: String,
        /// The part that should be a number.
        number: String,
        /// What should stand there.
        what: &'static str,
        /// One that can be read.
        example: &'static str,
    },
    /// NaN, infinity or a number beyond what a float holds.
    #[error("`{text}`: a {what} must be a finite number, such as {example}")]
    NotFinite {
        /// What was typed.
        text: String,
        /// What should stand there.
        what: &'static str,
        /// One that can be read.
        example: &'static str,
    },
    /// Zero or below.
    #[error("`{text}`: a {what} must be above zero")]
    NotPositive {
        /// What was typed.
        text: String,
        /// What should stand there.
        what: &'static str,
    },
    /// A unit that this quantity does not have.
    #[error("`{text}`: `{unit}` is no unit of a {what}{}; write {known}", did_you_mean(.suggestion))]
    UnknownUnit {
        /// What was typed.
        text: String,
        /// The part that should be a unit.
        unit: String,
        /// What should stand there.
        what: &'static str,
        /// The unit that may be meant.
        suggestion: Option<&'static str>,
        /// The units there are.
        known: &'static str,
    },
    /// A unit is required.
    #[error("`{text}`: a {what} needs its unit; write {example}")]
    UnitMissing {
        /// What was typed.
        text: String,
        /// What should stand there.
        what: &'static str,
        /// How to write it.
        example: String,
    },
    /// One position where a range should stand.
    #[error("`{text}` is a position, not a range; write 656..657nm or 656.28+-0.3nm")]
    NotARange {
        /// What was typed.
        text: String,
    },
    /// Both ends are the same.
    #[error("`{text}`: the range is empty; its ends must differ")]
    EmptyRange {
        /// What was typed.
        text: String,
    },
    /// The first end is above the second.
    #[error("`{text}`: the range runs backwards; write the smaller number first")]
    ReversedRange {
        /// What was typed.
        text: String,
    },
    /// The half width is not smaller than the centre.
    #[error("`{text}`: the range reaches down to zero; make it narrower than its centre")]
    ReachesZero {
        /// What was typed.
        text: String,
    },
    /// The reading of the wavelengths changes inside the range.
    #[error(
        "`{text}` crosses {border_nm} nm, where the medium changes between air and vacuum; \
         add --medium vacuum or --medium air"
    )]
    CrossesMedium {
        /// What was typed.
        text: String,
        /// The border that is crossed, nm.
        border_nm: f64,
    },
    /// A medium that is not known.
    #[error("`{text}` is no medium; write auto, vacuum or air")]
    NoSuchMedium {
        /// What was typed.
        text: String,
    },
    /// A wavelength in air where air cannot be reckoned with.
    #[error(transparent)]
    Air(#[from] AirError),
}

fn did_you_mean(suggestion: &Option<&'static str>) -> String {
    suggestion.map_or_else(String::new, |unit| format!(" (did you mean {unit}?)"))
}
