//! The grammar of species: `[mass number] element [stage | charge | stage..stage]`.
//!
//! Upper and lower case tell `Ni` (nickel) from `NI` (N I) and `Si` from `SI`. Where the letters
//! make no sense as typed, they are tried in any case, and accepted if one reading is left.

use super::element::{Element, elements, similar_symbols};
use super::isotope::{isotope, nearest_mass_number};
use super::request::{SpeciesRequest, Stages};
use super::{SpeciesError, from_roman, to_roman};

/// Element and fixed isotope that a symbol stands for.
#[derive(Clone, Copy)]
struct Symbol {
    element: &'static Element,
    isotope: Option<u16>,
    text: &'static str,
}

/// Reads one species or a range of its stages.
pub(super) fn read(typed: &str) -> Result<SpeciesRequest, SpeciesError> {
    let text = typed.trim();
    if text.is_empty() {
        return Err(SpeciesError::Empty);
    }
    let letters_at = text.find(|c: char| !c.is_ascii_digit());
    let (digits, rest) = text.split_at(letters_at.unwrap_or(text.len()));
    let (symbol, tail) = split_symbol(text, rest)?;
    let isotope = fixed_isotope(text, digits, symbol)?;
    let stages = read_stages(text, tail, symbol)?;
    Ok(SpeciesRequest {
        atomic_number: symbol.element.atomic_number,
        isotope,
        stages,
    })
}

/// All symbols that element names can take, D and T included.
fn symbols() -> impl Iterator<Item = Symbol> {
    let hydrogen = &elements()[0];
    let isotopes = [("D", 2), ("T", 3)].map(|(text, mass_number)| Symbol {
        element: hydrogen,
        isotope: Some(mass_number),
        text,
    });
    let natural = elements().iter().map(|element| Symbol {
        element,
        isotope: None,
        text: element.symbol,
    });
    natural.chain(isotopes)
}

/// Splits the element off, as typed or else in any case.
fn split_symbol<'a>(text: &str, rest: &'a str) -> Result<(Symbol, &'a str), SpeciesError> {
    let exact = exact_readings(rest);
    let fitting = exact.iter().find(|(_, tail)| is_stage_like(tail, false));
    if let Some(&found) = fitting {
        return Ok(found);
    }
    let any_case = |whole: &str, symbol: &str| {
        whole
            .get(..symbol.len())
            .is_some_and(|start| start.eq_ignore_ascii_case(symbol))
    };
    let mut loose: Vec<_> = readings(rest, any_case)
        .filter(|(_, tail)| is_stage_like(tail, true))
        .filter(|(symbol, tail)| !is_glued(tail) || is_sound_glued(rest, tail, *symbol))
        .collect();
    match (loose.pop(), loose.is_empty()) {
        (Some(only), true) => Ok(only),
        (Some(last), false) => {
            loose.push(last);
            Err(ambiguous(text, &loose))
        }
        (None, _) => Err(no_reading(text, rest, &exact)),
    }
}

/// The symbols that stand in front as typed, with what follows; the longer one first.
fn exact_readings(rest: &str) -> Vec<(Symbol, &str)> {
    let taken = |length: usize| {
        let (front, tail) = rest.split_at_checked(length)?;
        let symbol = symbols().find(|symbol| symbol.text == front)?;
        Some((symbol, tail))
    };
    [2, 1].into_iter().filter_map(taken).collect()
}

/// Every way to take a symbol off the front in any case, with what follows.
fn readings<'a>(
    rest: &'a str,
    begins: impl Fn(&'a str, &'static str) -> bool,
) -> impl Iterator<Item = (Symbol, &'a str)> {
    symbols()
        .filter(move |symbol| begins(rest, symbol.text))
        .map(move |symbol| (symbol, &rest[symbol.text.len()..]))
}

/// Whether what follows an element can be a stage, so that the split is right.
fn is_stage_like(tail: &str, any_case: bool) -> bool {
    if tail.is_empty() {
        return true;
    }
    let first = tail.split("..").next().unwrap_or("").trim();
    let first = if any_case {
        first.to_ascii_uppercase()
    } else {
        first.to_owned()
    };
    let spaced = tail.starts_with(char::is_whitespace) && !first.is_empty();
    spaced || from_roman(&first).is_some() || charge(&first).is_some()
}

/// Whether a stage follows the element without a blank.
fn is_glued(tail: &str) -> bool {
    tail.starts_with(|c: char| c.is_alphabetic())
}

/// In the wrong case, letters are split into element and stage only if all are of one case (`fei`,
/// not `Fx`) and the element has that stage.
fn is_sound_glued(rest: &str, tail: &str, symbol: Symbol) -> bool {
    let one_case = rest == rest.to_ascii_lowercase() || rest == rest.to_ascii_uppercase();
    let first = tail.split("..").next().unwrap_or("").trim();
    let stage = from_roman(&first.to_ascii_uppercase());
    one_case && stage.is_some_and(|stage| stage <= symbol.element.atomic_number)
}

fn ambiguous(text: &str, readings: &[(Symbol, &str)]) -> SpeciesError {
    let mut readings: Vec<String> = readings
        .iter()
        .map(|(symbol, tail)| {
            let stage = tail.trim().to_ascii_uppercase();
            format!("{} {stage}", symbol.text).trim().to_owned()
        })
        .collect();
    readings.sort();
    SpeciesError::Ambiguous {
        text: text.to_owned(),
        readings,
    }
}

/// No split fits: the element is unknown, or what follows a known one is no stage.
fn no_reading(text: &str, rest: &str, exact: &[(Symbol, &str)]) -> SpeciesError {
    let end = rest.find(|c: char| !c.is_alphabetic());
    let letters = &rest[..end.unwrap_or(rest.len())];
    let whole = exact.iter().find(|(symbol, _)| symbol.text == letters);
    match whole {
        Some((symbol, tail)) => bad_stage(text, tail, *symbol),
        None => SpeciesError::NoSuchElement {
            text: if letters.is_empty() { text } else { letters }.to_owned(),
            suggestions: similar_symbols(letters)
                .into_iter()
                .map(str::to_owned)
                .collect(),
        },
    }
}

fn bad_stage(text: &str, rest: &str, symbol: Symbol) -> SpeciesError {
    SpeciesError::BadStage {
        text: text.to_owned(),
        rest: rest.trim().to_owned(),
        symbol: symbol.text.to_owned(),
    }
}

fn fixed_isotope(text: &str, digits: &str, symbol: Symbol) -> Result<Option<u16>, SpeciesError> {
    if digits.is_empty() {
        return Ok(symbol.isotope);
    }
    let atomic_number = symbol.element.atomic_number;
    let mass_number = digits.parse().unwrap_or(u16::MAX);
    let doubled = symbol.isotope.is_some_and(|fixed| fixed != mass_number);
    if !doubled && isotope(atomic_number, mass_number).is_some() {
        return Ok(Some(mass_number));
    }
    let nearest = symbol
        .isotope
        .or_else(|| nearest_mass_number(atomic_number, mass_number))
        .unwrap_or_default();
    Err(SpeciesError::NoSuchIsotope {
        text: text.to_owned(),
        name: symbol.element.name.to_lowercase(),
        mass_number: digits.to_owned(),
        nearest: format!("{nearest}{}", symbol.element.symbol),
    })
}

fn read_stages(text: &str, tail: &str, symbol: Symbol) -> Result<Stages, SpeciesError> {
    let tail = tail.trim();
    if tail.is_empty() {
        return Ok(Stages::All);
    }
    let (first, last) = match tail.split_once("..") {
        Some((first, last)) => (
            read_stage(text, tail, first, symbol)?,
            read_stage(text, tail, last, symbol)?,
        ),
        None => {
            let stage = read_stage(text, tail, tail, symbol)?;
            (stage, stage)
        }
    };
    if first > last {
        return Err(SpeciesError::ReversedStages {
            text: text.to_owned(),
        });
    }
    Ok(Stages::Range { first, last })
}

fn read_stage(text: &str, tail: &str, word: &str, symbol: Symbol) -> Result<u8, SpeciesError> {
    let word = word.trim().to_ascii_uppercase();
    let stage = from_roman(&word)
        .map(u32::from)
        .or_else(|| charge(&word).map(|charge| charge + 1))
        .ok_or_else(|| bad_stage(text, tail, symbol))?;
    u8::try_from(stage)
        .ok()
        .filter(|&stage| stage <= symbol.element.atomic_number)
        .ok_or_else(|| SpeciesError::StageBeyondNucleus {
            text: text.to_owned(),
            name: symbol.element.name.to_lowercase(),
            symbol: symbol.text.to_owned(),
            last: to_roman(symbol.element.atomic_number),
        })
}

/// Reads `+`, `++`, `2+` as a charge; zero and huge ones are none.
fn charge(word: &str) -> Option<u32> {
    let digits = word.trim_end_matches('+');
    let signs = word.len() - digits.len();
    match (digits.is_empty(), signs) {
        (_, 0) => None,
        (true, signs) => u32::try_from(signs).ok(),
        (false, 1) if digits.bytes().all(|b| b.is_ascii_digit()) => {
            let charge = digits.parse().ok()?;
            (1..1000).contains(&charge).then_some(charge)
        }
        _ => None,
    }
}
