//! The lines that the bundled catalogue holds, as positions, upper levels and rates.

use std::collections::HashMap;
use std::sync::{Mutex, OnceLock};

use lineclear::catalogue::Catalogue;
use vocabulary::atom::Species;
use vocabulary::spectrum::LineKind;

/// A line that is held.
#[derive(Clone, Debug)]
pub struct HeldLine {
    pub wavenumber_per_cm: f64,
    pub uncertainty_per_cm: f64,
    /// Number of the upper level.
    pub upper: Option<u32>,
    pub upper_j: Option<f64>,
    /// Rate in s⁻¹ with its relative 1 σ.
    pub rate: Option<(f64, f64)>,
}

/// Relative σ of a rate without a stated one (as the curated tables take it).
const UNSTATED_RATE_SIGMA: f64 = 0.15;

fn catalogue() -> &'static Mutex<Catalogue> {
    static HELD: OnceLock<Mutex<Catalogue>> = OnceLock::new();
    HELD.get_or_init(|| Mutex::new(Catalogue::bundled_in_memory(&mut |_, _| {}).unwrap()))
}

/// All lines of a species such as `Fe II`, in order of wavenumber; multiplet means are no lines, and what
/// follows from levels alone is not held for certain.
pub fn lines_of(name: &str) -> &'static [HeldLine] {
    static READ: OnceLock<Mutex<HashMap<String, &'static [HeldLine]>>> = OnceLock::new();
    let mut read = READ.get_or_init(Mutex::default).lock().unwrap();
    read.entry(name.to_owned())
        .or_insert_with(|| read_lines(name).leak())
}

fn read_lines(name: &str) -> Vec<HeldLine> {
    let species: Species = name.parse().unwrap();
    let catalogue = catalogue().lock().unwrap();
    let levels = catalogue.levels(species).unwrap();
    let lines = catalogue.lines(species, &levels, 0.0, f64::MAX).unwrap();
    lines
        .into_iter()
        .filter(|line| line.kind != LineKind::Mean && !line.is_unlisted_and_unrated())
        .map(|line| HeldLine {
            wavenumber_per_cm: line.wavenumber_per_cm,
            uncertainty_per_cm: line.wavenumber_uncertainty_per_cm,
            upper: line.upper.as_ref().map(|level| level.number),
            upper_j: line
                .upper
                .as_ref()
                .and_then(|level| level.j)
                .map(|j| j.value()),
            rate: line.rate_per_s.map(|rate| {
                (
                    rate,
                    line.rate_relative_uncertainty
                        .unwrap_or(UNSTATED_RATE_SIGMA),
                )
            }),
        })
        .collect()
}

/// The line nearest to a wavenumber.
pub fn nearest(species: &str, wavenumber_per_cm: f64) -> Option<&'static HeldLine> {
    let distance = |line: &&HeldLine| (line.wavenumber_per_cm - wavenumber_per_cm).abs();
    lines_of(species)
        .iter()
        .min_by(|one, other| distance(one).total_cmp(&distance(other)))
}
