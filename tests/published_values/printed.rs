//! The printed tables and the decisions on values that are not met.

use std::collections::HashMap;
use std::path::PathBuf;

use vocabulary::light::Air;

/// One row, by column name.
pub type Row = HashMap<String, String>;

/// All rows of one table of `tests/reference/published`.
pub fn table(name: &str) -> Vec<Row> {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/reference/published");
    let mut reader = csv::Reader::from_path(folder.join(name)).unwrap();
    reader.deserialize().map(Result::unwrap).collect()
}

/// A number that must be there.
pub fn number(row: &Row, column: &str) -> f64 {
    let text = &row[column];
    text.parse()
        .unwrap_or_else(|_| panic!("{column}: `{text}` in {row:?}"))
}

/// Vacuum wavenumber and its 1 σ of a printed wavelength, cm⁻¹.
pub fn wavenumber_per_cm(row: &Row, column: &str) -> f64 {
    let printed_nm = number(row, column);
    1e7 / vacuum_nm(printed_nm, &row["medium"])
}

fn vacuum_nm(printed_nm: f64, medium: &str) -> f64 {
    match medium {
        "vacuum" => printed_nm,
        "air" => Air::standard().to_vacuum_nm(printed_nm).unwrap().nm,
        other => panic!("no medium: {other}"),
    }
}

/// What was decided on a value that the catalogue does not meet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Decision {
    /// No such line is in the catalogue.
    NotHeld,
    /// The printed value, or the memory of it, is the weaker one.
    PrintedValue,
    /// What is held is the weaker one.
    HeldValue,
    /// Some decays of the level are not held.
    Incomplete,
    /// Not settled.
    Open,
}

/// Decisions on one table: (species, value as printed) → decision. Each carries a reason.
pub fn decisions(file: &str) -> HashMap<(String, String), Decision> {
    table("decisions.csv")
        .into_iter()
        .filter(|row| row["file"] == file)
        .map(|row| {
            assert!(
                row["reason"].len() > 20,
                "a decision without a reason: {row:?}"
            );
            let decision = match row["decision"].as_str() {
                "not held" => Decision::NotHeld,
                "printed value" => Decision::PrintedValue,
                "held value" => Decision::HeldValue,
                "incomplete" => Decision::Incomplete,
                "open" => Decision::Open,
                other => panic!("no decision: {other}"),
            };
            ((row["species"].clone(), row["value"].clone()), decision)
        })
        .collect()
}

#[test]
fn every_decision_is_on_a_value_that_was_printed() {
    let column = |file: &str| match file {
        "lines.csv" | "lamp_lists.csv" => "wavelength_nm",
        "limits.csv" => "limit_ev",
        "lifetimes.csv" => "strongest_decay_nm",
        other => panic!("no such table: {other}"),
    };
    for decision in table("decisions.csv") {
        let file = decision["file"].as_str();
        let found = table(file).iter().any(|row| {
            row["species"] == decision["species"] && row[column(file)] == decision["value"]
        });
        assert!(found, "{decision:?}");
    }
}

#[test]
fn every_printed_value_has_a_source_and_an_uncertainty() {
    for (file, sigma) in [
        ("lines.csv", "uncertainty_nm"),
        ("lamp_lists.csv", "uncertainty_nm"),
        ("limits.csv", "uncertainty_ev"),
        ("lifetimes.csv", "uncertainty_ns"),
    ] {
        for row in table(file) {
            assert!(number(&row, sigma) > 0.0, "{file}: {row:?}");
            assert!(row["source"].len() > 10, "{file}: {row:?}");
            assert!(
                ["printed, from memory", "from memory", "common practice"]
                    .contains(&row["basis"].as_str()),
                "{file}: {row:?}"
            );
        }
    }
}
