//! The lines that the bundled tables hold, as positions, upper levels and rates.

use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::OnceLock;

use super::printed::Row;
use vocabulary::light::Air;

/// A line that is held.
#[derive(Clone, Debug)]
pub struct HeldLine {
    pub wavenumber_per_cm: f64,
    pub uncertainty_per_cm: f64,
    pub upper_per_cm: Option<f64>,
    pub upper_j: Option<f64>,
    /// Rate in s⁻¹ with its relative 1 σ.
    pub rate: Option<(f64, f64)>,
}

/// Relative σ of a rate without a stated one (as the curated tables take it).
const UNSTATED_RATE_SIGMA: f64 = 0.15;

/// All lines of a species such as `Fe II`, in order of wavenumber.
pub fn lines_of(species: &str) -> &'static [HeldLine] {
    static HELD: OnceLock<HashMap<String, Vec<HeldLine>>> = OnceLock::new();
    HELD.get_or_init(read)
        .get(species)
        .map_or(&[], Vec::as_slice)
}

/// The line nearest to a wavenumber.
pub fn nearest(species: &str, wavenumber_per_cm: f64) -> Option<&'static HeldLine> {
    let distance = |line: &&HeldLine| (line.wavenumber_per_cm - wavenumber_per_cm).abs();
    lines_of(species)
        .iter()
        .min_by(|one, other| distance(one).total_cmp(&distance(other)))
}

fn read() -> HashMap<String, Vec<HeldLine>> {
    let data = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("data");
    let mut held: HashMap<String, Vec<HeldLine>> = HashMap::new();
    for folder in std::fs::read_dir(data).unwrap() {
        let folder = folder.unwrap().path();
        if !is_compared(&folder) {
            continue;
        }
        let mut reader = csv::Reader::from_path(folder.join("lines.csv")).unwrap();
        for row in reader.deserialize::<Row>().map(Result::unwrap) {
            if row["kind"] != "mean" && !row["wavelength_nm"].is_empty() {
                held.entry(row["species"].clone())
                    .or_default()
                    .push(held_line(&row));
            }
        }
    }
    for lines in held.values_mut() {
        lines.sort_by(|one, other| one.wavenumber_per_cm.total_cmp(&other.wavenumber_per_cm));
    }
    held
}

/// The tables whose positions are their own: the two papers of resonance lines and the entered ions. The others repeat
/// levels of these at lower accuracy, and single isotopes are species of their own.
fn is_compared(folder: &Path) -> bool {
    let name = folder.file_name().unwrap().to_str().unwrap();
    (name.starts_with("morton") || name.starts_with("curated-"))
        && folder.join("lines.csv").is_file()
}

fn optional(row: &Row, column: &str) -> Option<f64> {
    row.get(column)?.parse().ok()
}

/// Vacuum wavelength, nm; from the levels where a wavelength in air lies beyond the index of air.
fn vacuum_nm(row: &Row) -> f64 {
    let given_nm: f64 = row["wavelength_nm"].parse().unwrap();
    if row["medium"] != "air" {
        return given_nm;
    }
    Air::standard().to_vacuum_nm(given_nm).map_or_else(
        |_| {
            let [low, high] = ["lower_energy_per_cm", "upper_energy_per_cm"]
                .map(|column| optional(row, column).unwrap());
            1e7 / (high - low)
        },
        |found| found.nm,
    )
}

fn held_line(row: &Row) -> HeldLine {
    let vacuum_nm = vacuum_nm(row);
    let wavenumber_per_cm = 1e7 / vacuum_nm;
    let sigma_nm = optional(row, "wavelength_uncertainty_nm").unwrap();
    let relative = optional(row, "rate_relative_uncertainty").unwrap_or(UNSTATED_RATE_SIGMA);
    HeldLine {
        wavenumber_per_cm,
        uncertainty_per_cm: wavenumber_per_cm * sigma_nm / vacuum_nm,
        upper_per_cm: optional(row, "upper_energy_per_cm"),
        upper_j: optional(row, "upper_j"),
        rate: optional(row, "rate_per_s").map(|rate| (rate, relative)),
    }
}
