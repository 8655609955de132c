//! Where a line is: wavelength, wavenumber, frequency or photon energy, and how well.

use std::collections::BTreeMap;

use vocabulary::light::{Air, PUBLISHED_AIR_NM};

use super::cell::{Bound, Place};
use super::problem::{CellFault, Fault, Problem};
use crate::row::Row;
use crate::source::MediumName;
use crate::unit::ToPerCm;

/// The cells of a position.
#[derive(Debug)]
pub(super) struct PositionPlan {
    pub value: Bound,
    pub to_per_cm: ToPerCm,
    /// Present for wavelengths only, with the factor to nm.
    pub medium: Option<(MediumPlan, f64)>,
    /// Uncertainty and the factor to the unit of the value.
    pub uncertainty: Option<(Bound, f64)>,
}

/// The medium of the wavelengths.
#[derive(Debug)]
pub(super) enum MediumPlan {
    Fixed(MediumName),
    Column {
        place: Place,
        name: String,
        words: BTreeMap<String, MediumName>,
    },
}

/// A position in vacuum.
#[derive(Clone, Copy, Debug)]
pub(super) struct Position {
    pub wavenumber_per_cm: f64,
    pub uncertainty_per_cm: f64,
    /// The value was a wavelength in air.
    pub from_air: bool,
    pub wavelength: bool,
    /// The index of air was extrapolated beyond its published range.
    pub extrapolated: bool,
}

impl PositionPlan {
    pub fn read(&self, row: &Row) -> Result<Option<Position>, Fault> {
        let Some(value) = self.value.number(row)? else {
            return Ok(None);
        };
        let text = || self.value.text(row).ok().flatten().unwrap_or_default();
        let stated = value.printed.value;
        if stated <= 0.0 {
            return Err(self.value.fault(&text(), Problem::NotPositive));
        }
        let column = self.read_uncertainty(row)?;
        let sigma = column.or(value.bracket).unwrap_or(value.printed.last_digit);
        let factor = self.in_air(stated, row)?;
        let in_vacuum = match factor {
            None => stated,
            Some(nm) => self
                .out_of_air(stated, nm)
                .map_err(|problem| self.value.fault(&text(), problem))?,
        };
        let wavenumber_per_cm = match self.to_per_cm {
            ToPerCm::Times(factor) => factor * in_vacuum,
            ToPerCm::Over(factor) => factor / in_vacuum,
        };
        if !(wavenumber_per_cm.is_finite() && wavenumber_per_cm > 0.0) {
            return Err(self.value.fault(&text(), Problem::NotPositive));
        }
        Ok(Some(Position {
            wavenumber_per_cm,
            // To first order the relative uncertainty is that of the value as stated.
            uncertainty_per_cm: wavenumber_per_cm * (sigma / stated),
            from_air: factor.is_some(),
            wavelength: self.medium.is_some(),
            extrapolated: factor.is_some_and(|nm| !PUBLISHED_AIR_NM.contains(&(in_vacuum * nm))),
        }))
    }

    fn read_uncertainty(&self, row: &Row) -> Result<Option<f64>, Fault> {
        let Some((bound, factor)) = &self.uncertainty else {
            return Ok(None);
        };
        let Some(value) = bound.number(row)? else {
            return Ok(None);
        };
        if value.printed.value <= 0.0 {
            let text = bound.text(row)?.unwrap_or_default();
            return Err(bound.fault(&text, Problem::Uncertainty));
        }
        Ok(Some(value.printed.value * factor))
    }

    /// The factor to nm where the value is a wavelength in air.
    fn in_air(&self, stated: f64, row: &Row) -> Result<Option<f64>, Fault> {
        let Some((medium, nm)) = &self.medium else {
            return Ok(None);
        };
        let in_air = match medium.read(row)? {
            MediumName::Vacuum => false,
            MediumName::Air => true,
            MediumName::AirAbove { boundary_nm } => stated * nm >= boundary_nm,
        };
        Ok(in_air.then_some(*nm))
    }

    /// The value in vacuum, in its own unit (Ciddor 1996, standard air).
    fn out_of_air(&self, stated: f64, nm: f64) -> Result<f64, Problem> {
        let air_nm = stated * nm;
        let vacuum = Air::standard().to_vacuum_nm(air_nm)?;
        Ok(stated * (vacuum.nm / air_nm))
    }
}

impl MediumPlan {
    fn read(&self, row: &Row) -> Result<MediumName, Fault> {
        match self {
            Self::Fixed(medium) => Ok(*medium),
            Self::Column { place, name, words } => {
                let text = match place {
                    Place::Column(index) => row.cell(*index).trim(),
                    Place::Constant(text) => text,
                };
                let known = words.get(text).copied();
                known.or_else(|| MediumName::parse(text)).ok_or_else(|| {
                    Box::new(CellFault {
                        column: Some(name.clone()),
                        text: text.to_owned(),
                        problem: Problem::Medium,
                    })
                })
            }
        }
    }
}
