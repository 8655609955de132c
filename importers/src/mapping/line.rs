//! Lines, checked against their levels.

use vocabulary::spectrum::LineKind;

use super::cell::Bound;
use super::level::{Energy, LevelCells, LevelPlan};
use super::position::{Position, PositionPlan};
use super::problem::{CellFault, Fault, Problem};
use super::rate::{RatePlan, Weights};
use crate::row::Row;

/// The cells of a line.
#[derive(Debug)]
pub(super) struct LinePlan {
    pub kind: Option<Bound>,
    pub position: Option<PositionPlan>,
    pub from_levels: Option<Bound>,
    pub lower: LevelPlan,
    pub upper: LevelPlan,
    pub rate: RatePlan,
    pub intensity: Option<Bound>,
}

/// Relative and absolute uncertainty of the source's level scale.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct LevelScale {
    pub per_cm: f64,
    pub relative: f64,
}

/// Positions that depart from their levels by more than this many combined standard
/// uncertainties, and by more than [`CONTRADICTION_RELATIVE`], are refused.
const CONTRADICTION_SIGMAS: f64 = 5.0;
/// The relative departure below which blends and shifted lines are let through.
const CONTRADICTION_RELATIVE: f64 = 1e-4;

impl LinePlan {
    pub fn kind(&self, row: &Row) -> Result<LineKind, Fault> {
        let Some(bound) = &self.kind else {
            return Ok(LineKind::Line);
        };
        let Some(text) = bound.text(row)? else {
            return Ok(LineKind::Line);
        };
        match text.as_ref() {
            "line" => Ok(LineKind::Line),
            "mean" => Ok(LineKind::Mean),
            "blend" => Ok(LineKind::Blend),
            "isotope" => Ok(LineKind::Isotope),
            _ => Err(bound.fault(&text, Problem::Kind)),
        }
    }

    pub fn reads_from_levels(&self, row: &Row) -> Result<bool, Fault> {
        let Some(bound) = &self.from_levels else {
            return Ok(false);
        };
        let Some(text) = bound.text(row)? else {
            return Ok(false);
        };
        match text.as_ref() {
            "true" | "yes" | "1" => Ok(true),
            "false" | "no" | "0" => Ok(false),
            _ => Err(bound.fault(&text, Problem::Truth)),
        }
    }

    pub fn intensity(&self, row: &Row) -> Result<Option<f64>, Fault> {
        let Some(bound) = &self.intensity else {
            return Ok(None);
        };
        let Some(value) = bound.number(row)? else {
            return Ok(None);
        };
        if value.printed.value < 0.0 {
            let text = bound.text(row)?.unwrap_or_default();
            return Err(bound.fault(&text, Problem::NotPositive));
        }
        Ok(Some(value.printed.value))
    }

    pub fn position(&self, row: &Row) -> Result<Option<Position>, Fault> {
        self.position
            .as_ref()
            .map_or(Ok(None), |plan| plan.read(row))
    }
}

/// Where only the lower energy is printed, the upper one follows from the position.
pub(super) fn complete_upper(
    plan: &LevelPlan,
    upper: &mut LevelCells,
    lower: &LevelCells,
    position: Option<&Position>,
) {
    let (Some(lower), Some(position)) = (lower.energy, position) else {
        return;
    };
    if plan.energy.is_some() || plan.is_empty() {
        return;
    }
    let sigma = lower
        .uncertainty_per_cm()
        .hypot(position.uncertainty_per_cm);
    upper.energy = Some(Energy {
        per_cm: lower.per_cm + position.wavenumber_per_cm,
        stated_per_cm: Some(sigma),
        last_digit_per_cm: sigma,
    });
}

/// Order of the levels, and the position against them.
pub(super) fn check(
    lower: &LevelCells,
    upper: &LevelCells,
    position: Option<&Position>,
    scale: LevelScale,
) -> Result<(), Fault> {
    let named = position.is_some() || (lower.is_named() && upper.is_named());
    if !named {
        return Err(CellFault::row(Problem::NoPosition));
    }
    let (Some(lower), Some(upper)) = (lower.energy, upper.energy) else {
        return Ok(());
    };
    let apart = upper.per_cm - lower.per_cm;
    if apart <= 0.0 {
        return Err(CellFault::row(Problem::LevelOrder {
            lower_per_cm: lower.per_cm,
            upper_per_cm: upper.per_cm,
        }));
    }
    let Some(position) = position else {
        return Ok(());
    };
    let off = (position.wavenumber_per_cm - apart).abs();
    let sigma = lower
        .uncertainty_per_cm()
        .hypot(upper.uncertainty_per_cm())
        .hypot(position.uncertainty_per_cm)
        .hypot(scale.per_cm)
        .hypot(scale.relative * upper.per_cm);
    // Written so that a NaN counts as a contradiction.
    let agrees = off <= CONTRADICTION_SIGMAS * sigma || off <= CONTRADICTION_RELATIVE * apart;
    if agrees {
        return Ok(());
    }
    Err(CellFault::row(Problem::PositionAgainstLevels {
        line_per_cm: position.wavenumber_per_cm,
        levels_per_cm: apart,
        hint: hint(position, apart),
    }))
}

/// Names the two common mistakes: a unit off by ten, and air for vacuum.
fn hint(position: &Position, apart: f64) -> &'static str {
    let ratio = position.wavenumber_per_cm / apart;
    let near = |target: f64| (ratio / target - 1.0).abs() < 1e-3;
    // Refractivity of standard air between 185 and 2500 nm, Ciddor 1996.
    let refractivity = 2.6e-4..=3.3e-4;
    if near(10.0) || near(0.1) {
        "; they differ by a factor of ten: check the units (0.1 nm, nm)"
    } else if position.wavelength
        && !position.from_air
        && refractivity.contains(&(1.0 - 1.0 / ratio))
    {
        "; they differ by the index of air: the wavelengths seem to be in air, not vacuum"
    } else if position.from_air && refractivity.contains(&(1.0 / ratio - 1.0)) {
        "; they differ by the index of air: the wavelengths seem to be in vacuum, not air"
    } else {
        ""
    }
}

/// Whether both levels have an energy.
pub(super) fn has_energies(lower: &LevelCells, upper: &LevelCells) -> bool {
    lower.energy.is_some() && upper.energy.is_some()
}

/// What a strength needs to become a rate.
pub(super) fn weights(
    lower: &LevelCells,
    upper: &LevelCells,
    position: Option<&Position>,
) -> Weights {
    let apart = match (lower.energy, upper.energy) {
        (Some(lower), Some(upper)) => Some(upper.per_cm - lower.per_cm),
        _ => None,
    };
    Weights {
        lower: lower.weight(),
        upper: upper.weight(),
        wavenumber_per_cm: position.map(|p| p.wavenumber_per_cm).or(apart),
    }
}
