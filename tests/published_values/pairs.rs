//! Spectral overlaps that published methods warn of: both lines of the pair are held.

use super::held::nearest;
use super::printed::{Row, number, table, wavenumber_per_cm};

/// Printed analytical wavelengths are rounded to 0.001 nm and of mixed age: up to 0.01 nm off (see `decisions.csv`).
const SAME_NM: f64 = 0.012;

fn is_held(row: &Row, side: &str) -> bool {
    let column = format!("{side}_nm");
    let wavenumber = wavenumber_per_cm(row, &column);
    ["I", "II"].iter().any(|stage| {
        let species = format!("{} {stage}", row[side]);
        nearest(&species, wavenumber).is_some_and(|line| {
            let off_per_cm = (line.wavenumber_per_cm - wavenumber).abs();
            off_per_cm / wavenumber * number(row, &column) <= SAME_NM
        })
    })
}

#[test]
fn known_interferences_are_held_on_both_sides() {
    let rows = table("interference_pairs.csv");
    assert!(rows.iter().all(|row| row["source"].len() > 10));
    let named: Vec<&Row> = rows
        .iter()
        .filter(|row| !row["interferer_nm"].is_empty())
        .collect();
    let both = named
        .iter()
        .filter(|row| is_held(row, "target") && is_held(row, "interferer"))
        .count();
    println!(
        "interference_pairs.csv: {both} of {} pairs held",
        named.len()
    );
    // The rest names lines that the bundled tables do not hold: weak lines of Fe, Ti, Co, Cu.
    assert!(both >= 19, "{both} of {}", named.len());
}
