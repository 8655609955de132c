//! Values with their units and accuracies.

use super::tree::Tree;
use crate::number::{self, Printed};
use crate::unit::{self, Dialect, Unit};

/// A value with its unit and, where stated, its 1 σ in the same unit.
#[derive(Clone, Copy, Debug)]
pub(super) struct Quantity {
    pub printed: Printed,
    pub unit: Unit,
    pub sigma: Option<f64>,
}

/// Half-widths of confidence intervals in units of the normal σ (common practice).
const INTERVALS: [(f64, f64); 6] = [
    (0.68, 1.0),
    (0.6827, 1.0),
    (0.90, 1.6449),
    (0.95, 1.9600),
    (0.99, 2.5758),
    (0.997, 3.0),
];

impl Quantity {
    /// Reads an element of the schema's data type.
    pub fn read(tree: &Tree) -> Result<Self, String> {
        let name = &tree.name;
        let value = tree
            .at(&["Value"])
            .ok_or_else(|| format!("`{name}` has no Value"))?;
        let text = tree.text_at(&["Value"]).unwrap_or_default();
        let printed = number::parse(&text)
            .map_err(|error| format!("`{name}`: `{}`: {error}", crate::sink::shown(&text)))?;
        let unit_text = value.attribute("units").unwrap_or_default();
        let unit =
            unit::parse(unit_text, Dialect::Xsams).map_err(|error| format!("`{name}`: {error}"))?;
        Ok(Self {
            printed,
            unit,
            sigma: sigma(tree, printed.value)?,
        })
    }

    /// The stated 1 σ, else one unit of the last digit; zero for a printed zero.
    pub fn uncertainty(&self) -> f64 {
        match self.sigma {
            Some(sigma) => sigma,
            None if self.printed.value == 0.0 => 0.0,
            None => self.printed.last_digit,
        }
    }
}

fn sigma(tree: &Tree, value: f64) -> Result<Option<f64>, String> {
    let Some(accuracy) = tree.at(&["Accuracy"]) else {
        return Ok(None);
    };
    let text = tree.text_at(&["Accuracy"]).unwrap_or_default();
    let stated =
        number::parse(&text).map_err(|error| format!("`Accuracy` of `{}`: {error}", tree.name))?;
    let relative = matches!(accuracy.attribute("relative"), Some("true" | "1"));
    let size = if relative {
        stated.value * value.abs()
    } else {
        stated.value
    };
    let divisor = match accuracy.attribute("confidenceInterval") {
        None => 1.0,
        Some(interval) => half_width(interval)?,
    };
    let sigma = size / divisor;
    if sigma > 0.0 && sigma.is_finite() {
        Ok(Some(sigma))
    } else {
        Err(format!(
            "`Accuracy` of `{}` should be above zero",
            tree.name
        ))
    }
}

fn half_width(interval: &str) -> Result<f64, String> {
    let unknown = || {
        format!(
            "the confidence interval `{}` is not known",
            crate::sink::shown(interval)
        )
    };
    let stated = number::parse(interval).map_err(|_| unknown())?.value;
    let share = if stated > 1.0 { stated / 100.0 } else { stated };
    let found = INTERVALS
        .iter()
        .find(|(known, _)| (known - share).abs() < 1e-6);
    found.map(|(_, width)| *width).ok_or_else(unknown)
}
