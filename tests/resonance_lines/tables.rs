//! Reading of the tables, and the hyperfine formula.

use std::collections::HashMap;
use std::path::PathBuf;

/// Speed of light, exact by the definition of the metre: 1 cm⁻¹ in MHz.
pub const MHZ_PER_CM: f64 = 29979.2458;

pub type Row = HashMap<String, String>;

/// Configuration, term and J.
pub type LevelName = (&'static str, &'static str, &'static str);

pub fn folder() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("data/resonance-lines")
}

pub fn table(name: &str) -> Vec<Row> {
    let mut reader = csv::Reader::from_path(folder().join(name)).unwrap();
    reader.deserialize().map(Result::unwrap).collect()
}

pub fn number(row: &Row, column: &str) -> f64 {
    let text = &row[column];
    text.parse()
        .unwrap_or_else(|_| panic!("{column}: `{text}` in {row:?}"))
}

/// `3/2` or `2`.
pub fn half(text: &str) -> f64 {
    match text.split_once('/') {
        Some((over, under)) => over.parse::<f64>().unwrap() / under.parse::<f64>().unwrap(),
        None => text.parse().unwrap(),
    }
}

pub fn is_level(row: &Row, side: &str, level: (&str, &str, &str)) -> bool {
    row[&format!("{side}configuration")] == level.0
        && row[&format!("{side}term")] == level.1
        && row[&format!("{side}j")] == level.2
}

pub fn energy_mhz(levels: &[Row], species: &str, level: (&str, &str, &str)) -> f64 {
    let mut found = levels
        .iter()
        .filter(|row| row["species"] == species && is_level(row, "", level));
    let row = found
        .next()
        .unwrap_or_else(|| panic!("{species} {level:?} is not held"));
    assert!(found.next().is_none(), "{species} {level:?} stands twice");
    number(row, "energy_per_cm") * MHZ_PER_CM
}

pub fn constants<'a>(rows: &'a [Row], species: &str, level: (&str, &str, &str)) -> &'a Row {
    rows.iter()
        .find(|row| row["species"] == species && is_level(row, "", level))
        .unwrap_or_else(|| panic!("no hyperfine constants of {species} {level:?}"))
}

/// Energy of F above the centre of gravity, MHz (Casimir 1936, magnetic dipole and electric quadrupole).
pub fn hyperfine_mhz(row: &Row, f: f64) -> f64 {
    let (i, j) = (half(&row["nuclear_spin"]), half(&row["j"]));
    let k = f * (f + 1.0) - i * (i + 1.0) - j * (j + 1.0);
    let magnetic = number(row, "a_mhz") * k / 2.0;
    if row["b_mhz"].is_empty() {
        return magnetic;
    }
    let over = 0.75 * k * (k + 1.0) - i * (i + 1.0) * j * (j + 1.0);
    magnetic + number(row, "b_mhz") * over / (2.0 * i * (2.0 * i - 1.0) * j * (2.0 * j - 1.0))
}

/// `|value − expected| ≤ tolerance`, and NaN fails.
pub fn close(what: &str, value: f64, expected: f64, tolerance: f64) {
    assert!(
        (value - expected).abs() <= tolerance,
        "{what}: {value} against {expected} ± {tolerance}"
    );
}
