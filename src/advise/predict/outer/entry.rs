//! A level of the answer in the making, held, given or predicted.

use vocabulary::atom::HalfInteger;

use crate::calc::coulomb::OuterLevel;
use crate::calc::series::label::bare_term;
use crate::calc::series::{LabelledLevel, SeriesKey, orbital_letter, outer_electron};

/// A level in the making.
#[derive(Clone, Debug)]
pub(super) struct Entry {
    pub configuration: String,
    pub term: String,
    pub twice_j: u16,
    pub n: u32,
    pub l: u32,
    pub core: String,
    pub energy_per_cm: f64,
    pub uncertainty_per_cm: f64,
    /// By how much the scale of its table may be off, cm⁻¹.
    pub scale_per_cm: f64,
    pub method: String,
}

impl Entry {
    pub fn labelled(&self) -> LabelledLevel<'_> {
        LabelledLevel {
            energy_per_cm: self.energy_per_cm,
            uncertainty_per_cm: self.uncertainty_per_cm,
            configuration: &self.configuration,
            term: &self.term,
            twice_j: self.twice_j,
        }
    }

    pub fn is_of(&self, key: &SeriesKey) -> bool {
        self.core == key.core
            && self.l == key.l
            && self.twice_j == key.twice_j
            && bare_term(&self.term) == key.term
    }

    pub fn words(&self) -> String {
        let electron = self.configuration.split_whitespace().last().unwrap_or("");
        format!(
            "{electron} {} {}",
            self.term,
            HalfInteger::from_twice(self.twice_j)
        )
    }
}

pub(super) fn entry(level: &OuterLevel) -> Option<Entry> {
    let outer = outer_electron(&level.configuration)?;
    Some(Entry {
        configuration: level.configuration.clone(),
        term: level.term.clone(),
        twice_j: level.twice_j,
        n: outer.n,
        l: outer.l,
        core: if outer.occupancy > 1 {
            String::new()
        } else {
            outer.core
        },
        energy_per_cm: level.energy_per_cm,
        uncertainty_per_cm: level.uncertainty_per_cm,
        scale_per_cm: level.scale_per_cm,
        method: format!("held, {}", level.source),
    })
}

/// `nS1/2` of `2S`, for lists.
pub(super) fn key_words(key: &SeriesKey) -> String {
    let letter = orbital_letter(key.l).unwrap_or('?');
    format!(
        "n{letter} {} {}",
        key.term,
        HalfInteger::from_twice(key.twice_j)
    )
}

pub(super) fn predicted_entry(key: &SeriesKey, n: u32, energy: (f64, f64), method: &str) -> Entry {
    let letter = orbital_letter(key.l).unwrap_or('?');
    Entry {
        configuration: format!("{} {n}{letter}", key.core).trim().to_owned(),
        term: key.term.clone(),
        twice_j: key.twice_j,
        n,
        l: key.l,
        core: key.core.clone(),
        energy_per_cm: energy.0,
        uncertainty_per_cm: energy.1,
        scale_per_cm: 0.0,
        method: method.to_owned(),
    }
}
