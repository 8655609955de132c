//! Printed ionisation energies.

use super::printed::{Decision, decisions, number, table};
use vocabulary::atom::{Species, limit};

/// 1 eV in cm⁻¹: e / (h c), exact constants of the SI (CODATA 2022).
const PER_CM_PER_EV: f64 = 8_065.543_937;

#[test]
fn printed_limits_are_met() {
    let decisions = decisions("limits.csv");
    let (mut met, mut decided, mut failures) = (0, 0, Vec::new());
    for row in table("limits.csv") {
        let species: Species = row["species"].parse().unwrap();
        let held = limit(species).unwrap_or_else(|| panic!("{species}: no limit"));
        let held_ev = held.energy_per_cm / PER_CM_PER_EV;
        let sigma = number(&row, "uncertainty_ev").hypot(held.uncertainty_per_cm / PER_CM_PER_EV);
        let difference = (held_ev - number(&row, "limit_ev")).abs();
        let key = (row["species"].clone(), row["limit_ev"].clone());
        if difference <= 3.0 * sigma {
            met += 1;
        } else if decisions.get(&key) == Some(&Decision::PrintedValue) && difference < 0.005 {
            decided += 1;
        } else {
            failures.push(format!(
                "{species}: printed {} held {held_ev}",
                row["limit_ev"]
            ));
        }
    }
    assert!(failures.is_empty(), "{}", failures.join("\n"));
    println!("limits.csv: {met} met, {decided} decided");
    assert!(met >= 98, "{met}");
}
