//! Whose level or line a row is about.

use std::collections::HashMap;

use vocabulary::atom::{Species, SpeciesError, SpeciesRequest, element};

use super::cell::Bound;
use super::problem::{Fault, Problem};
use crate::row::Row;

/// How the species is found in a row, with those already read.
#[derive(Debug)]
pub(super) struct SpeciesPlan {
    words: Words,
    isotope: Option<Bound>,
    known: HashMap<String, Species>,
    last: Option<(String, Species)>,
    key: String,
}

#[derive(Debug)]
pub(super) enum Words {
    /// `Fe II` in one cell.
    Whole(Bound),
    /// Element and stage apart.
    Parts { element: Bound, stage: Bound },
    /// Element and net charge apart.
    Charge { element: Bound, charge: Bound },
}

/// Distinct species texts worth remembering; a table with more is read without memory.
const KNOWN: usize = 10_000;

impl SpeciesPlan {
    pub fn new(words: Words, isotope: Option<Bound>) -> Self {
        Self {
            words,
            isotope,
            known: HashMap::new(),
            last: None,
            key: String::new(),
        }
    }

    pub fn read(&mut self, row: &Row) -> Result<Species, Fault> {
        self.fill_key(row)?;
        if let Some((text, species)) = &self.last
            && *text == self.key
        {
            return Ok(*species);
        }
        let species = match self.known.get(&self.key) {
            Some(species) => *species,
            None => {
                let species = self.parse(row)?;
                if self.known.len() < KNOWN {
                    self.known.insert(self.key.clone(), species);
                }
                species
            }
        };
        let last = self.last.get_or_insert_with(|| (String::new(), species));
        last.0.clone_from(&self.key);
        last.1 = species;
        Ok(species)
    }

    fn fill_key(&mut self, row: &Row) -> Result<(), Fault> {
        self.key.clear();
        let (first, second) = match &self.words {
            Words::Whole(whole) => (whole, None),
            Words::Parts { element, stage } => (element, Some(stage)),
            Words::Charge { element, charge } => (element, Some(charge)),
        };
        for bound in [Some(first), second, self.isotope.as_ref()]
            .into_iter()
            .flatten()
        {
            match bound.text(row)? {
                Some(text) => self.key.push_str(&text),
                None if self
                    .isotope
                    .as_ref()
                    .is_some_and(|i| std::ptr::eq(i, bound)) => {}
                None => return Err(bound.fault("", Problem::Missing)),
            }
            self.key.push('\n');
        }
        Ok(())
    }

    fn parse(&self, row: &Row) -> Result<Species, Fault> {
        let text =
            |bound: &Bound| Ok::<_, Fault>(bound.text(row)?.unwrap_or_default().into_owned());
        let mut species = match &self.words {
            Words::Whole(bound) => {
                let words = text(bound)?;
                parse_words(&words).map_err(|problem| bound.fault(&words, problem))?
            }
            Words::Parts { element, stage } => {
                let (symbol, numeral) = (text(element)?, text(stage)?);
                let stage_number =
                    read_stage(&numeral).ok_or_else(|| stage.fault(&numeral, Problem::Stage))?;
                from_parts(&symbol, stage_number)
                    .map_err(|problem| element.fault(&symbol, problem))?
            }
            Words::Charge { element, charge } => {
                let (symbol, digits) = (text(element)?, text(charge)?);
                let stage = read_charge(&digits)
                    .and_then(|charge| charge.checked_add(1))
                    .ok_or_else(|| charge.fault(&digits, Problem::Stage))?;
                from_parts(&symbol, stage).map_err(|problem| element.fault(&symbol, problem))?
            }
        };
        if let Some(bound) = &self.isotope
            && let Some(digits) = bound.text(row)?
        {
            species =
                with_isotope(species, &digits).map_err(|problem| bound.fault(&digits, problem))?;
        }
        Ok(species)
    }
}

/// A species in words, with its stage.
pub(crate) fn parse_words(words: &str) -> Result<Species, Problem> {
    let request: SpeciesRequest = words.parse()?;
    request.single().ok_or(Problem::NoStage)
}

fn read_stage(text: &str) -> Option<u8> {
    match text.parse() {
        Ok(0) => None,
        Ok(stage) => Some(stage),
        Err(_) => vocabulary::atom::from_roman(text),
    }
}

fn read_charge(text: &str) -> Option<u8> {
    text.strip_suffix('+').unwrap_or(text).parse().ok()
}

fn from_parts(symbol: &str, stage: u8) -> Result<Species, Problem> {
    let symbol = match symbol.parse::<u8>() {
        Ok(number) => element(number).map_or(symbol, |element| element.symbol),
        Err(_) => symbol,
    };
    parse_words(&format!("{symbol} {}", vocabulary::atom::to_roman(stage)))
}

fn with_isotope(species: Species, digits: &str) -> Result<Species, Problem> {
    let symbol = element(species.atomic_number).map_or("", |element| element.symbol);
    let words = format!(
        "{digits}{symbol} {}",
        vocabulary::atom::to_roman(species.stage)
    );
    if digits.is_empty() || !digits.bytes().all(|b| b.is_ascii_digit()) {
        return Err(SpeciesError::NoSuchIsotope {
            text: words,
            name: symbol.to_owned(),
            mass_number: digits.to_owned(),
            nearest: symbol.to_owned(),
        }
        .into());
    }
    parse_words(&words)
}
