//! Radiative transitions as lines.

use std::collections::HashMap;

use vocabulary::light::Air;

use super::quantity::Quantity;
use super::state::{State, column};
use super::tree::Tree;
use crate::number::double_text;
use crate::row::ColumnInfo;
use crate::spectral;
use crate::unit::ToPerCm;

/// A transition before its states are known.
#[derive(Clone, Debug)]
pub(super) struct Transition {
    pub line: u64,
    upper: Option<String>,
    lower: Option<String>,
    /// Vacuum wavenumber and 1 σ, cm⁻¹.
    position: Result<Option<(f64, f64)>, String>,
    strength: Result<Option<(Strength, f64, Option<f64>)>, String>,
}

/// Which quantity stands for the rate.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Strength {
    Rate,
    Absorption,
    Weighted,
    LogWeighted,
}

/// The columns of a table of lines.
pub(super) fn columns() -> Vec<ColumnInfo> {
    let mut columns = vec![
        column("element", None),
        column("charge", None),
        column("isotope", None),
        column("wavenumber", Some("cm-1")),
        column("wavenumber_uncertainty", Some("cm-1")),
        column("rate", Some("s-1")),
        column("rate_uncertainty", None),
    ];
    for side in ["lower", "upper"] {
        columns.push(column(&format!("{side}_energy"), Some("cm-1")));
        columns.push(column(&format!("{side}_energy_uncertainty"), Some("cm-1")));
        for name in ["configuration", "term", "j", "g"] {
            columns.push(column(&format!("{side}_{name}"), None));
        }
    }
    columns
}

impl Transition {
    pub fn new(tree: &Tree, line: u64) -> Self {
        Self {
            line,
            upper: tree.text_at(&["UpperStateRef"]),
            lower: tree.text_at(&["LowerStateRef"]),
            position: position(tree),
            strength: strength(tree),
        }
    }

    /// Whether nothing that stands further down can change the line: both states are there, or one
    /// is not named.
    pub fn is_linked(&self, states: &HashMap<String, State>) -> bool {
        let known = |id: &Option<String>| id.as_ref().is_none_or(|id| states.contains_key(id));
        known(&self.lower) && known(&self.upper)
    }

    /// The cells of a line, or why it is none.
    pub fn cells(&self, states: &HashMap<String, State>) -> Result<Vec<String>, String> {
        let find = |reference: &Option<String>| match reference {
            None => Err("the transition does not name both of its states".to_owned()),
            Some(id) => states
                .get(id)
                .ok_or_else(|| format!("no state is called `{}`", crate::sink::shown(id))),
        };
        let (lower, upper) = (find(&self.lower)?, find(&self.upper)?);
        if lower.owner != upper.owner {
            return Err("the two states belong to different ions".to_owned());
        }
        let position = self.position.clone()?;
        let mut cells = lower.owner.to_vec();
        let (wavenumber, sigma) = match position {
            Some((wavenumber, sigma)) => (double_text(wavenumber), double_text(sigma)),
            None => (String::new(), String::new()),
        };
        cells.extend([wavenumber, sigma]);
        cells.extend(self.rate(lower, upper, position.map(|p| p.0))?);
        cells.extend(lower.end()?);
        cells.extend(upper.end()?);
        Ok(cells)
    }

    /// Rate and its relative 1 σ.
    fn rate(
        &self,
        lower: &State,
        upper: &State,
        wavenumber: Option<f64>,
    ) -> Result<[String; 2], String> {
        let Some((kind, value, relative)) = self.strength.clone()? else {
            return Ok([String::new(), String::new()]);
        };
        let apart = || {
            let (upper, lower) = (upper.energy.clone().ok()??, lower.energy.clone().ok()??);
            Some(upper.0 - lower.0)
        };
        let rate = match kind {
            Strength::Rate => Some(value),
            _ => {
                let gf = match kind {
                    Strength::Absorption => lower.weight().map(|weight| weight * value),
                    Strength::LogWeighted => Some(10f64.powf(value)),
                    _ => Some(value),
                };
                let wavenumber = wavenumber.or_else(apart);
                gf.zip(upper.weight())
                    .zip(wavenumber)
                    .map(|((gf, weight), wavenumber)| spectral::rate_per_s(gf, weight, wavenumber))
            }
        };
        Ok(match rate {
            Some(rate) => [
                double_text(rate),
                relative.map(double_text).unwrap_or_default(),
            ],
            None => [String::new(), String::new()],
        })
    }
}

/// The best of the stated positions: measured before derived before computed, then wavenumber,
/// energy, frequency, wavelength.
fn position(tree: &Tree) -> Result<Option<(f64, f64)>, String> {
    let Some(all) = tree.at(&["EnergyWavelength"]) else {
        return Ok(None);
    };
    let order = ["Wavenumber", "Energy", "Frequency", "Wavelength"];
    let rank = |tree: &Tree| {
        let method = tree
            .attribute("methodRef")
            .unwrap_or_default()
            .to_ascii_lowercase();
        let method = if method.contains("exp") {
            0
        } else if method.contains("ritz") {
            1
        } else {
            2
        };
        (method, order.iter().position(|name| *name == tree.name))
    };
    let stated = all
        .children
        .iter()
        .filter(|child| order.contains(&child.name.as_str()));
    match stated.min_by_key(|child| rank(child)) {
        None => Ok(None),
        Some(best) => in_vacuum(best).map(Some),
    }
}

fn in_vacuum(tree: &Tree) -> Result<(f64, f64), String> {
    let quantity = Quantity::read(tree)?;
    let value = quantity.printed.value;
    if value <= 0.0 {
        return Err(format!("`{}` should be above zero", tree.name));
    }
    let to_per_cm = quantity.unit.to_per_cm();
    let wavenumber = match (to_per_cm, tree.name == "Wavelength") {
        (Some(ToPerCm::Times(factor)), false) => value * factor,
        (Some(ToPerCm::Over(factor)), true) => factor / vacuum_value(tree, &quantity)?,
        _ => return Err(format!("the unit of `{}` does not fit it", tree.name)),
    };
    Ok((wavenumber, wavenumber * quantity.uncertainty() / value))
}

/// The schema says that a wavelength is in vacuum unless `vacuum` is false.
fn vacuum_value(tree: &Tree, quantity: &Quantity) -> Result<f64, String> {
    let value = quantity.printed.value;
    match tree.attribute("vacuum") {
        None | Some("true" | "1") => Ok(value),
        Some("false" | "0") => {
            let air_nm = value * quantity.unit.scaled_factor(9);
            let vacuum = Air::standard()
                .to_vacuum_nm(air_nm)
                .map_err(|error| error.to_string())?;
            Ok(value * (vacuum.nm / air_nm))
        }
        Some(other) => Err(format!(
            "`vacuum` should be true or false, not `{}`",
            crate::sink::shown(other)
        )),
    }
}

fn strength(tree: &Tree) -> Result<Option<(Strength, f64, Option<f64>)>, String> {
    let kinds = [
        ("TransitionProbabilityA", Strength::Rate),
        ("OscillatorStrength", Strength::Absorption),
        ("WeightedOscillatorStrength", Strength::Weighted),
        ("Log10WeightedOscillatorStrength", Strength::LogWeighted),
    ];
    let found = kinds.iter().find_map(|(name, kind)| {
        let mut probabilities = tree.all("Probability");
        probabilities
            .find_map(|one| one.at(&[name]))
            .map(|value| (value, *kind))
    });
    let Some((value, kind)) = found else {
        return Ok(None);
    };
    let quantity = Quantity::read(value)?;
    let factor = match kind {
        Strength::Rate => quantity.unit.to_per_s(),
        _ => quantity.unit.to_number(),
    };
    let factor = factor.ok_or_else(|| format!("the unit of `{}` does not fit it", value.name))?;
    let size = quantity.printed.value;
    let relative = quantity.sigma.map(|sigma| match kind {
        Strength::LogWeighted => sigma * std::f64::consts::LN_10,
        _ => sigma / size,
    });
    Ok(Some((kind, size * factor, relative)))
}
