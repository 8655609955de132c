//! How an answer changes with temperature, density and tilt.

use serde_json::{Value, json};

use super::number::{percent, purity};
use crate::advise::Verdict;
use crate::advise::scan::{DensityPoint, TemperaturePoint, TiltPoint};

/// Purity by electron temperature.
pub(super) fn temperature_words(scan: &[TemperaturePoint]) -> Option<String> {
    let known = || scan.iter().filter_map(|p| Some((p.kt_per_cm, p.purity?)));
    let words: Vec<String> = thinned(known().collect())
        .iter()
        .map(|(kt, pure)| {
            let ev = kt / vocabulary::light::constants::PER_CM_PER_EV;
            format!("{} at {}", purity(*pure), temperature(ev))
        })
        .collect();
    (!words.is_empty()).then(|| {
        format!(
            "Purity (lines alone) by electron temperature: {}.",
            words.join(", ")
        )
    })
}

/// A temperature with three digits.
pub(super) fn temperature(ev: f64) -> String {
    let digits = format!("{ev:.2e}");
    format!("{} eV", digits.parse::<f64>().unwrap_or(ev))
}

/// Purity by electron density.
pub(super) fn density_words(scan: &[DensityPoint]) -> Option<String> {
    let known = || {
        scan.iter()
            .filter_map(|p| Some((p.electron_density_per_m3, p.purity?)))
    };
    let words: Vec<String> = thinned(known().collect())
        .iter()
        .map(|(density, pure)| format!("{} at {density:.1e} m⁻³", purity(*pure)))
        .collect();
    (!words.is_empty()).then(|| {
        format!(
            "Purity (lines alone) by electron density: {}.",
            words.join(", ")
        )
    })
}

/// Purity and transmission by tilt.
pub(super) fn tilt_words(tilts: &[TiltPoint]) -> Option<String> {
    let known = tilts
        .iter()
        .filter_map(|p| Some((p.tilt_deg, (p.transmission?, p.purity?))))
        .collect();
    let words: Vec<String> = thinned(known)
        .iter()
        .map(|(tilt, (through, pure))| {
            format!("{tilt}° {} at {}", purity(*pure), percent(*through))
        })
        .collect();
    (!words.is_empty()).then(|| format!("Purity and transmission by tilt: {}.", words.join(", ")))
}

/// At most six entries, first and last among them.
pub(super) fn thinned<T: Copy>(all: Vec<T>) -> Vec<T> {
    const MOST: usize = 6;
    if all.len() <= MOST {
        return all;
    }
    (0..MOST)
        .map(|k| all[k * (all.len() - 1) / (MOST - 1)])
        .collect()
}

/// The stable keys of one temperature.
pub(super) fn temperature_value(point: &TemperaturePoint) -> Value {
    json!({
        "electron_temperature_ev": point.kt_per_cm / vocabulary::light::constants::PER_CM_PER_EV,
        "purity": point.purity,
        "interference_fraction": point.interference_fraction,
        "verdict": word(point.interference_fraction),
    })
}

/// The stable keys of one density.
pub(super) fn density_value(point: &DensityPoint) -> Value {
    json!({
        "electron_density_per_m3": point.electron_density_per_m3,
        "purity": point.purity,
        "interference_fraction": point.interference_fraction,
        "verdict": word(point.interference_fraction),
    })
}

/// The stable keys of one tilt.
pub(super) fn tilt_value(point: &TiltPoint) -> Value {
    json!({
        "tilt_deg": point.tilt_deg,
        "seen_centre_nm": point.centre_nm,
        "transmission": point.transmission,
        "purity": point.purity,
        "interference_fraction": point.interference_fraction,
        "verdict": word(point.interference_fraction),
    })
}

/// What the rated lines alone say.
pub(super) fn word(fraction: Option<f64>) -> &'static str {
    fraction.map_or(Verdict::Unrated, Verdict::of).word()
}
