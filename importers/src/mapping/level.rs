//! Levels and the ends of lines.

use vocabulary::atom::HalfInteger;

use super::cell::Bound;
use super::problem::{Fault, Problem};
use crate::record::LevelEnd;
use crate::row::Row;

/// The cells of one level, with factors to cm⁻¹.
#[derive(Debug, Default)]
pub(super) struct LevelPlan {
    pub energy: Option<(Bound, f64)>,
    pub uncertainty: Option<(Bound, f64)>,
    pub configuration: Option<Bound>,
    pub term: Option<Bound>,
    pub j: Option<Bound>,
    pub g: Option<Bound>,
}

/// What a row says about one level.
#[derive(Debug, Default)]
pub(super) struct LevelCells {
    pub energy: Option<Energy>,
    pub configuration: Option<String>,
    pub term: Option<String>,
    pub j: Option<HalfInteger>,
    pub g: Option<f64>,
}

/// An energy and how well it is known.
#[derive(Clone, Copy, Debug)]
pub(super) struct Energy {
    pub per_cm: f64,
    /// 1 σ that the row states.
    pub stated_per_cm: Option<f64>,
    /// One unit of the last printed digit.
    pub last_digit_per_cm: f64,
}

impl Energy {
    /// The stated uncertainty, else one unit of the last digit; a printed zero is the ground
    /// level by definition and exact.
    pub fn uncertainty_per_cm(&self) -> f64 {
        match self.stated_per_cm {
            Some(stated) => stated,
            None if self.per_cm == 0.0 => 0.0,
            None => self.last_digit_per_cm,
        }
    }
}

impl LevelPlan {
    pub fn is_empty(&self) -> bool {
        let texts = [&self.configuration, &self.term, &self.j, &self.g];
        self.energy.is_none() && texts.iter().all(|bound| bound.is_none())
    }

    pub fn read(&self, row: &Row) -> Result<LevelCells, Fault> {
        let energy = self.read_energy(row)?;
        let j = self.read_j(row)?;
        let g = self.read_g(row, j)?;
        Ok(LevelCells {
            energy,
            configuration: label(self.configuration.as_ref(), row)?,
            term: label(self.term.as_ref(), row)?,
            j,
            g,
        })
    }

    fn read_energy(&self, row: &Row) -> Result<Option<Energy>, Fault> {
        let Some((bound, factor)) = &self.energy else {
            return Ok(None);
        };
        let Some(value) = bound.number(row)? else {
            return Ok(None);
        };
        if value.printed.value < 0.0 {
            let text = bound.text(row)?.unwrap_or_default();
            return Err(bound.fault(&text, Problem::NegativeEnergy));
        }
        let per_cm = value.printed.value * factor;
        let bracket = value.bracket.map(|bracket| bracket * factor);
        let column = self.read_uncertainty(row, per_cm)?;
        Ok(Some(Energy {
            per_cm,
            stated_per_cm: column.or(bracket),
            last_digit_per_cm: value.printed.last_digit * factor,
        }))
    }

    fn read_uncertainty(&self, row: &Row, energy: f64) -> Result<Option<f64>, Fault> {
        let Some((bound, factor)) = &self.uncertainty else {
            return Ok(None);
        };
        let Some(value) = bound.number(row)? else {
            return Ok(None);
        };
        let sigma = value.printed.value;
        if sigma < 0.0 || (sigma == 0.0 && energy != 0.0) {
            let text = bound.text(row)?.unwrap_or_default();
            return Err(bound.fault(&text, Problem::Uncertainty));
        }
        Ok(Some(sigma * factor))
    }

    fn read_j(&self, row: &Row) -> Result<Option<HalfInteger>, Fault> {
        let Some(bound) = &self.j else {
            return Ok(None);
        };
        let Some(text) = bound.text(row)? else {
            return Ok(None);
        };
        HalfInteger::parse(&text)
            .map(Some)
            .ok_or_else(|| bound.fault(&text, Problem::Momentum))
    }

    fn read_g(&self, row: &Row, j: Option<HalfInteger>) -> Result<Option<f64>, Fault> {
        let Some(bound) = &self.g else {
            return Ok(None);
        };
        let Some(value) = bound.number(row)? else {
            return Ok(None);
        };
        let weight = value.printed.value;
        let fail = |problem| {
            let text = bound.text(row)?.unwrap_or_default();
            Err(bound.fault(&text, problem))
        };
        if weight <= 0.0 {
            return fail(Problem::Weight);
        }
        // Weights are whole numbers, so anything beyond rounding is a contradiction.
        match j.map(HalfInteger::weight) {
            Some(expected) if (expected - weight).abs() > 1e-6 => {
                fail(Problem::WeightAgainstMomentum { expected })
            }
            _ => Ok(Some(weight)),
        }
    }
}

impl LevelCells {
    /// 2J + 1, or the stated weight.
    pub fn weight(&self) -> Option<f64> {
        self.j.map(HalfInteger::weight).or(self.g)
    }

    /// Whether the row says anything about the level.
    pub fn is_named(&self) -> bool {
        self.energy.is_some()
            || self.configuration.is_some()
            || self.term.is_some()
            || self.weight().is_some()
    }

    /// The end of a line; `None` where the row says nothing about it. Without a table of levels
    /// in the same source an energy has at least the uncertainty of its last digit.
    pub fn into_end(self, level_table: bool) -> Option<LevelEnd> {
        if !self.is_named() {
            return None;
        }
        let uncertainty = self.energy.and_then(|energy| {
            let known = energy.stated_per_cm;
            known.or_else(|| (!level_table).then(|| energy.uncertainty_per_cm()))
        });
        Some(LevelEnd {
            energy_per_cm: self.energy.map(|energy| energy.per_cm),
            energy_uncertainty_per_cm: uncertainty,
            configuration: self.configuration,
            term: self.term,
            j: self.j,
            g: self.g,
        })
    }
}

/// A label with single blanks.
fn label(bound: Option<&Bound>, row: &Row) -> Result<Option<String>, Fault> {
    let Some(bound) = bound else {
        return Ok(None);
    };
    let Some(text) = bound.text(row)? else {
        return Ok(None);
    };
    let bytes = text.as_bytes();
    let plain = bytes.iter().all(|b| (b' '..0x7f).contains(b));
    if plain && !bytes.windows(2).any(|pair| pair == b"  ") {
        return Ok(Some(text.into_owned()));
    }
    let mut out = String::with_capacity(text.len());
    for word in text.split_whitespace() {
        if !out.is_empty() {
            out.push(' ');
        }
        out.push_str(word);
    }
    if out.chars().any(char::is_control) {
        return Err(bound.fault(&text, Problem::Control));
    }
    Ok(Some(out))
}
