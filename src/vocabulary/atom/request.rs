//! What somebody asks for: an element or isotope, in all stages or some.

use std::fmt;
use std::str::FromStr;

use super::{Species, SpeciesError, element, notation, to_roman};

/// Stages of ionisation that are asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Stages {
    /// Every stage that is held.
    All,
    /// From `first` to `last`, both included, 1 being the neutral atom.
    Range {
        /// First stage.
        first: u8,
        /// Last stage, at most Z.
        last: u8,
    },
}

/// One entry of a species list: `Fe`, `Fe I`, `FeI`, `Fe+`, `Fe2+`, `Fe I..III`, `D`, `6Li I`.
///
/// Without a mass number it means the natural isotope mixture, and only that: `H` does not match
/// D I, and `Li` does not match 6Li I, so that no line is counted twice.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct SpeciesRequest {
    /// Nuclear charge Z.
    pub atomic_number: u8,
    /// Mass number; `None` for the natural mixture.
    pub isotope: Option<u16>,
    /// Stages.
    pub stages: Stages,
}

impl SpeciesRequest {
    /// Whether a species is asked for.
    pub fn matches(self, species: Species) -> bool {
        self.atomic_number == species.atomic_number
            && self.isotope == species.isotope
            && self.stage_range().contains(&species.stage)
    }

    /// First and last stage that can match; 1 to Z for all stages.
    pub fn stage_range(self) -> std::ops::RangeInclusive<u8> {
        match self.stages {
            Stages::All => 1..=self.atomic_number,
            Stages::Range { first, last } => first..=last,
        }
    }

    /// The one species that is meant, where one stage is fixed.
    pub fn single(self) -> Option<Species> {
        match self.stages {
            Stages::Range { first, last } if first == last => Some(Species {
                atomic_number: self.atomic_number,
                stage: first,
                isotope: self.isotope,
            }),
            _ => None,
        }
    }

    /// Reads a list separated by commas: `Na, Ne I, He`. Entries that stand twice count once.
    ///
    /// # Errors
    /// The first entry that cannot be read; an empty entry; and an entry such as `II` behind one
    /// with a stage (`Fe I,II`), which could mean Fe II or I I (iodine).
    pub fn parse_list(list: &str) -> Result<Vec<Self>, SpeciesError> {
        let mut requests: Vec<Self> = Vec::new();
        for entry in list.split(',') {
            let request = Self::from_str(entry)?;
            refuse_loose_numeral(entry.trim(), requests.last())?;
            if !requests.contains(&request) {
                requests.push(request);
            }
        }
        Ok(requests)
    }
}

fn refuse_loose_numeral(entry: &str, before: Option<&SpeciesRequest>) -> Result<(), SpeciesError> {
    let numeral = entry.len() > 1 && super::from_roman(entry).is_some();
    let Some(before) = before.filter(|b| numeral && b.stages != Stages::All) else {
        return Ok(());
    };
    let symbol = symbol_text(before.atomic_number, before.isotope);
    let (element, stage) = entry.split_at(1);
    Err(SpeciesError::Ambiguous {
        text: entry.to_owned(),
        readings: vec![format!("{symbol} {entry}"), format!("{element} {stage}")],
    })
}

impl FromStr for SpeciesRequest {
    type Err = SpeciesError;

    fn from_str(text: &str) -> Result<Self, SpeciesError> {
        notation::read(text)
    }
}

impl fmt::Display for SpeciesRequest {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&symbol_text(self.atomic_number, self.isotope))?;
        match self.stages {
            Stages::All => Ok(()),
            Stages::Range { first, last } if first == last => write!(f, " {}", to_roman(first)),
            Stages::Range { first, last } => {
                write!(f, " {}..{}", to_roman(first), to_roman(last))
            }
        }
    }
}

/// `Fe`, `D`, `198Hg`.
pub(super) fn symbol_text(atomic_number: u8, isotope: Option<u16>) -> String {
    let symbol = element(atomic_number).map_or("?", |e| e.symbol);
    match (atomic_number, isotope) {
        (1, Some(2)) => "D".to_owned(),
        (1, Some(3)) => "T".to_owned(),
        (_, Some(mass_number)) => format!("{mass_number}{symbol}"),
        (_, None) => symbol.to_owned(),
    }
}
