//! The isotopes against the natural mixture.

use std::collections::HashMap;
use std::path::PathBuf;

use super::tables::{Row, close, half, number, table};

fn rows_of(path: &str) -> Vec<Row> {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join(path);
    let mut reader = csv::Reader::from_path(path).unwrap();
    reader.deserialize().map(Result::unwrap).collect()
}

/// `87Rb I` → (`Rb`, `I`, 87).
fn parts(species: &str) -> (&str, &str, &str) {
    let (name, stage) = species.split_once(' ').unwrap();
    if name == "D" {
        return ("H", stage, "2");
    }
    let letters = name.find(|c: char| c.is_ascii_alphabetic()).unwrap();
    (&name[letters..], stage, &name[..letters])
}

/// Share of a natural element, 0 to 1.
fn abundance(elements: &[Row], isotopes: &[Row], species: &str) -> f64 {
    let (symbol, _, mass) = parts(species);
    let element = elements.iter().find(|row| row["symbol"] == symbol).unwrap();
    isotopes
        .iter()
        .find(|row| row["atomic_number"] == element["atomic_number"] && row["mass_number"] == mass)
        .map_or(0.0, |row| {
            row["abundance_percent"].parse().unwrap_or(0.0) / 100.0
        })
}

/// Centres of the isotopes, weighted by abundance, against the entered levels of the natural mixture: within 3 of the
/// entered σ. Only levels for which two thirds of the mixture are held; mercury's entered levels have σ 0.1 cm⁻¹.
#[test]
fn weighted_isotopes_agree_with_the_levels_of_the_mixture() {
    let elements = rows_of("data/elements/elements.csv");
    let isotopes = rows_of("data/elements/isotopes.csv");
    let mut sums: HashMap<[String; 4], (f64, f64)> = HashMap::new();
    for row in table("levels.csv") {
        let (symbol, stage, _) = parts(&row["species"]);
        let share = abundance(&elements, &isotopes, &row["species"]);
        let species = format!("{symbol} {stage}");
        let key = [
            species,
            row["configuration"].clone(),
            row["term"].clone(),
            row["j"].clone(),
        ];
        let sum = sums.entry(key).or_default();
        *sum = (sum.0 + share, sum.1 + share * number(&row, "energy_per_cm"));
    }
    let mut compared = 0;
    for ([species, _, term, j], (share, weighted)) in sums {
        let mean = weighted / share;
        let folder = species.to_lowercase().replace(' ', "-");
        let path = format!("data/curated-{folder}/levels.csv");
        let held = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join(&path);
        if share < 0.66 || mean <= 0.0 || !held.is_file() {
            continue;
        }
        let entered = rows_of(&path);
        let level = entered.iter().find(|row| {
            row["term"] == term
                && half(&row["j"]) == half(&j)
                && (number(row, "energy_per_cm") - mean).abs() < 1.0
        });
        let level =
            level.unwrap_or_else(|| panic!("{species} {term} {j} at {mean} is not entered"));
        let sigma = number(level, "uncertainty_per_cm");
        close(
            &format!("{species} {term} {j}"),
            mean,
            number(level, "energy_per_cm"),
            3.0 * sigma,
        );
        compared += 1;
    }
    assert!(compared >= 28, "{compared} levels");
}
