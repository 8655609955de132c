//! Lifetimes of papers against the sum of the held rates of the level.

use super::held::{HeldLine, lines_of};
use super::printed::{Decision, Row, decisions, number, table, wavenumber_per_cm};

/// The printed decay and the held line lie closer, cm⁻¹ (printed to 0.001 nm).
const SAME_LINE_PER_CM: f64 = 1.5;

/// The lines that leave the level of the row's strongest decay.
fn decays(row: &Row) -> Vec<&'static HeldLine> {
    let printed = wavenumber_per_cm(row, "strongest_decay_nm");
    let all = lines_of(&row["species"]);
    let stated_j = half(&row["upper_j"]);
    let upper = all
        .iter()
        .filter(|line| (line.wavenumber_per_cm - printed).abs() < SAME_LINE_PER_CM)
        .filter(|line| stated_j.is_none() || line.upper_j == stated_j)
        .find_map(|line| line.upper);
    all.iter()
        .filter(|line| upper.is_some() && line.upper == upper)
        .collect()
}

fn half(text: &str) -> Option<f64> {
    match text.split_once('/') {
        Some((over, under)) => Some(over.parse::<f64>().unwrap() / under.parse::<f64>().unwrap()),
        None => text.parse().ok(),
    }
}

/// Lifetime in ns and its relative 1 σ, from the rates that are held.
fn held_lifetime(row: &Row) -> Option<(f64, f64)> {
    let rates: Vec<(f64, f64)> = decays(row).iter().filter_map(|line| line.rate).collect();
    let total: f64 = rates.iter().map(|(rate, _)| rate).sum();
    let spread = rates
        .iter()
        .map(|(rate, relative)| rate * relative)
        .fold(0.0, f64::hypot);
    (total > 0.0).then(|| (1e9 / total, spread / total))
}

/// A level with decays not held must live too long; a weak held rate must not be off by more than a tenth.
fn explained(decision: Option<&Decision>, held: Option<(f64, f64)>, paper_ns: f64) -> bool {
    match decision {
        Some(Decision::Incomplete) => held.is_none_or(|(held_ns, _)| held_ns > paper_ns),
        Some(Decision::HeldValue) => {
            held.is_some_and(|(held_ns, _)| (held_ns / paper_ns - 1.0).abs() < 0.1)
        }
        _ => false,
    }
}

#[test]
fn published_lifetimes_are_met() {
    let decisions = decisions("lifetimes.csv");
    let (mut met, mut decided, mut failures) = (0, 0, Vec::new());
    for row in table("lifetimes.csv") {
        let key = (row["species"].clone(), row["strongest_decay_nm"].clone());
        let (paper_ns, sigma_ns) = (number(&row, "lifetime_ns"), number(&row, "uncertainty_ns"));
        let held = held_lifetime(&row);
        let agrees = held.is_some_and(|(held_ns, relative)| {
            (held_ns - paper_ns).abs() <= 3.0 * sigma_ns.hypot(held_ns * relative)
        });
        if agrees {
            met += 1;
        } else if explained(decisions.get(&key), held, paper_ns) {
            decided += 1;
        } else {
            failures.push(format!(
                "{key:?}: paper {paper_ns} ± {sigma_ns} ns, held {held:?}"
            ));
        }
    }
    assert!(failures.is_empty(), "{}", failures.join("\n"));
    println!("lifetimes.csv: {met} met, {decided} decided");
    assert!(met >= 50, "{met}");
}
