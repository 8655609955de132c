//! How fast a line decays, from whatever the source prints.

use vocabulary::spectrum::RateOrigin;

use super::cell::Bound;
use super::problem::{Fault, Problem};
use crate::row::Row;
use crate::source::{Grades, NumberScale};
use crate::spectral;

/// The quantity that stands for the rate.
#[derive(Debug)]
pub(super) enum RateQuantity {
    /// A, with the factor to s⁻¹.
    Rate(f64),
    /// Absorption oscillator strength f.
    OscillatorStrength,
    /// g f.
    WeightedStrength,
    /// Its decimal logarithm.
    LogWeightedStrength,
}

/// The cells of a rate.
#[derive(Debug, Default)]
pub(super) struct RatePlan {
    pub value: Option<(Bound, RateQuantity)>,
    pub uncertainty: Option<UncertaintyPlan>,
    pub origin: Option<Bound>,
}

/// How the uncertainty of a rate is stated.
#[derive(Debug)]
pub(super) struct UncertaintyPlan {
    pub value: Bound,
    pub grades: Option<Grades>,
    /// Factor to a plain number, or to s⁻¹ where it is absolute.
    pub factor: f64,
    pub absolute: bool,
}

/// What a row says about its rate.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Rate {
    pub per_s: Option<f64>,
    pub relative_uncertainty: Option<f64>,
    pub origin: Option<RateOrigin>,
    /// A strength was given, but the weights to turn it into a rate are missing.
    pub weightless: bool,
}

/// What a strength needs to become a rate.
#[derive(Clone, Copy, Debug)]
pub(super) struct Weights {
    pub lower: Option<f64>,
    pub upper: Option<f64>,
    pub wavenumber_per_cm: Option<f64>,
}

impl RatePlan {
    pub fn read(&self, row: &Row, weights: Weights, computed: bool) -> Result<Rate, Fault> {
        let Some((bound, quantity)) = &self.value else {
            return Ok(Rate::default());
        };
        let Some(value) = bound.number(row)? else {
            return Ok(Rate::default());
        };
        let stated = value.printed.value;
        if stated <= 0.0 && !matches!(quantity, RateQuantity::LogWeightedStrength) {
            let text = bound.text(row)?.unwrap_or_default();
            return Err(bound.fault(&text, Problem::NoRate));
        }
        let Some(per_s) = quantity.rate_per_s(stated, weights) else {
            return Ok(Rate {
                weightless: true,
                ..Rate::default()
            });
        };
        if !per_s.is_finite() || per_s <= 0.0 {
            let text = bound.text(row)?.unwrap_or_default();
            return Err(bound.fault(&text, Problem::NoRate));
        }
        let relative = self.relative_uncertainty(row, per_s)?;
        let bracket = value.bracket.map(|bracket| match quantity {
            RateQuantity::LogWeightedStrength => bracket * std::f64::consts::LN_10,
            _ => bracket / stated,
        });
        Ok(Rate {
            per_s: Some(per_s),
            relative_uncertainty: relative.or(bracket),
            origin: Some(self.read_origin(row, computed)?),
            weightless: false,
        })
    }

    fn relative_uncertainty(&self, row: &Row, per_s: f64) -> Result<Option<f64>, Fault> {
        let Some(plan) = &self.uncertainty else {
            return Ok(None);
        };
        let Some(text) = plan.value.text(row)? else {
            return Ok(None);
        };
        if let Some(grades) = &plan.grades {
            return grades.get(text.as_ref()).copied().map(Some).ok_or_else(|| {
                let known = grades
                    .keys()
                    .map(String::as_str)
                    .collect::<Vec<_>>()
                    .join(", ");
                plan.value.fault(&text, Problem::Grade { known })
            });
        }
        let Some(value) = plan.value.number(row)? else {
            return Ok(None);
        };
        let number = value.printed.value * plan.factor;
        let relative = match plan.value.scale {
            Some(NumberScale::Dex) => 10f64.powf(number) - 1.0,
            _ if plan.absolute => number / per_s,
            _ => number,
        };
        if !(relative > 0.0 && relative.is_finite()) {
            return Err(plan.value.fault(&text, Problem::Uncertainty));
        }
        Ok(Some(relative))
    }

    fn read_origin(&self, row: &Row, computed: bool) -> Result<RateOrigin, Fault> {
        let usual = if computed {
            RateOrigin::Computed
        } else {
            RateOrigin::Published
        };
        let Some(bound) = &self.origin else {
            return Ok(usual);
        };
        let Some(text) = bound.text(row)? else {
            return Ok(usual);
        };
        match text.as_ref() {
            "published" => Ok(RateOrigin::Published),
            "derived" => Ok(RateOrigin::Derived),
            "computed" => Ok(RateOrigin::Computed),
            _ => Err(bound.fault(&text, Problem::Origin)),
        }
    }
}

impl RateQuantity {
    fn rate_per_s(&self, stated: f64, weights: Weights) -> Option<f64> {
        let gf = match self {
            Self::Rate(factor) => return Some(stated * factor),
            Self::OscillatorStrength => stated * weights.lower?,
            Self::WeightedStrength => stated,
            Self::LogWeightedStrength => 10f64.powf(stated),
        };
        Some(spectral::rate_per_s(
            gf,
            weights.upper?,
            weights.wavenumber_per_cm?,
        ))
    }
}
