//! Printed wavelengths, hydrogen to uranium.

use std::collections::{BTreeMap, HashMap};

use super::held::nearest;
use super::printed::{Decision, Row, decisions, number, table, wavenumber_per_cm};

/// Resonance lines and lamp lines are held more closely than the rest.
const LAMPS_AND_RESONANCE: [&str; 14] = [
    "He I", "Ne I", "Ar I", "Hg I", "Na I", "K I", "Ca I", "Ca II", "Mg I", "Mg II", "Al I",
    "Cd I", "Zn I", "Pb I",
];

/// Beyond this distance the nearest line of the species is another line, cm⁻¹: about ten times the
/// largest difference between printed tables and levels that was met.
const ANOTHER_LINE_PER_CM: f64 = 2.0;

/// Largest distance allowed, whatever the uncertainties, cm⁻¹.
fn bound_per_cm(species: &str) -> f64 {
    if LAMPS_AND_RESONANCE.contains(&species) {
        0.3
    } else {
        0.5
    }
}

/// How far the nearest held line lies from a printed one.
#[derive(Clone, Copy, Debug)]
pub struct Distance {
    per_cm: f64,
    combined_sigmas: f64,
    printed_sigma_per_cm: f64,
}

/// Distance to the nearest held line.
pub fn distance(row: &Row, shift_per_cm: f64) -> Option<Distance> {
    let wavenumber = wavenumber_per_cm(row, "wavelength_nm");
    let sigma = wavenumber * number(row, "uncertainty_nm") / number(row, "wavelength_nm");
    let line = nearest(&row["species"], wavenumber + shift_per_cm)?;
    let distance = (line.wavenumber_per_cm - wavenumber - shift_per_cm).abs();
    Some(Distance {
        per_cm: distance,
        combined_sigmas: distance / sigma.hypot(line.uncertainty_per_cm),
        printed_sigma_per_cm: sigma,
    })
}

/// Whether the distance keeps both bounds; NaN does not. A figure of few digits in the far ultraviolet (He II 25.63 nm,
/// 4 cm⁻¹ to the last digit) cannot be held to a bound finer than itself.
pub fn met(found: Option<Distance>, bound_per_cm: f64) -> bool {
    found.is_some_and(|found| {
        found.per_cm <= bound_per_cm.max(found.printed_sigma_per_cm) && found.combined_sigmas <= 3.0
    })
}

/// Whether a decision explains what was found; a line said to be absent must have nothing near it.
fn explained(decision: Option<&Decision>, found: Option<Distance>) -> bool {
    match decision {
        None => false,
        Some(Decision::NotHeld) => found.is_none_or(|found| found.per_cm > ANOTHER_LINE_PER_CM),
        Some(_) => found.is_some(),
    }
}

/// Compares a table and returns the number met per species; panics with every row that is neither met nor explained.
pub fn compare(file: &str, bound: impl Fn(&str) -> f64) -> BTreeMap<String, usize> {
    let decisions: HashMap<_, _> = decisions(file);
    let (mut per_species, mut decided, mut failures) = (BTreeMap::new(), 0, Vec::new());
    for row in table(file) {
        let key = (row["species"].clone(), row["wavelength_nm"].clone());
        let found = distance(&row, 0.0);
        if met(found, bound(&key.0)) {
            *per_species.entry(key.0).or_default() += 1;
        } else if explained(decisions.get(&key), found) {
            decided += 1;
        } else {
            failures.push(format!("{key:?}: {found:?}"));
        }
    }
    assert!(failures.is_empty(), "{file}:\n{}", failures.join("\n"));
    let met: usize = per_species.values().sum();
    println!(
        "{file}: {met} met, {decided} decided, {} species",
        per_species.len()
    );
    per_species
}

#[test]
fn printed_lines_are_met_from_hydrogen_to_uranium() {
    let met = compare("lines.csv", bound_per_cm);
    let total: usize = met.values().sum();
    assert!(total >= 1040, "only {total} lines were met");
    let several = met.values().filter(|count| **count >= 3).count();
    assert!(
        several >= 100,
        "only {several} species have three lines or more"
    );
    for species in LAMPS_AND_RESONANCE {
        assert!(met[species] >= 5, "{species}: {met:?}");
    }
}

/// The comparison can fail: the same list shifted by a few cm⁻¹ meets next to nothing.
#[test]
fn shifted_lines_are_not_met() {
    for shift_per_cm in [-23.0, -9.0, 9.0, 23.0] {
        let rows = table("lines.csv");
        let chance = rows
            .iter()
            .filter(|row| met(distance(row, shift_per_cm), bound_per_cm(&row["species"])))
            .count();
        // A line density of one in 50 cm⁻¹ and a window of ± 0.3 cm⁻¹ would give about one in a hundred.
        assert!(
            chance * 50 <= rows.len(),
            "{chance} of {} by chance",
            rows.len()
        );
    }
}
