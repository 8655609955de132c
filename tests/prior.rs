//! The prior for unknown rates, learned anew from the bundled tables and checked on the ions that
//! it was not learned from.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

#[path = "common/mod.rs"]
mod common;
#[path = "prior/learn.rs"]
mod learn;

use std::collections::BTreeMap;

use learn::{Rated, coverage, learn, quantile, rated_lines, teaches};
use lineclear::calc::prior::{GROUPS, Group, TransitionKind, chance_above, group};
use lineclear::vocabulary::atom::Species;

/// The group of a rated line, as an index into `GROUPS`.
fn index_of(rated: &Rated) -> usize {
    let found = group(rated.features.kind, rated.features.class).unwrap();
    GROUPS.iter().position(|g| g == found).unwrap()
}

fn by_group(lines: &[Rated]) -> BTreeMap<usize, Vec<&Rated>> {
    let mut groups: BTreeMap<usize, Vec<&Rated>> = BTreeMap::new();
    for line in lines {
        groups.entry(index_of(line)).or_default().push(line);
    }
    groups
}

#[test]
fn table_follows_from_the_bundled_rates() {
    let lines = rated_lines(common::catalogue());
    let taught: Vec<Rated> = lines.into_iter().filter(|l| teaches(l.species)).collect();
    let groups = by_group(&taught);
    assert_eq!(groups.len(), GROUPS.len(), "a group without lines");
    let mut stale = Vec::new();
    for (index, lines) in groups {
        let held = &GROUPS[index];
        let fresh = learn(held, &lines);
        println!(
            "{:?} {:?} [{}], {:.2}; {} lines",
            held.kind,
            held.class,
            fresh.coefficients.map(|c| format!("{c:.2}")).join(", "),
            fresh.sigma_dex,
            lines.len()
        );
        // What the table says of the very lines: coefficients may trade against each other.
        let square: f64 = lines
            .iter()
            .map(|l| (held.strength(&l.features) - fresh.strength(&l.features)).powi(2))
            .sum();
        let shift = (square / lines.len() as f64).sqrt();
        // A tenth of σ moves the chance at 2 σ by half a per cent: new tables may do as much.
        let near =
            shift <= 0.1 * fresh.sigma_dex && (held.sigma_dex / fresh.sigma_dex - 1.0).abs() <= 0.1;
        if !near {
            stale.push(format!("{:?} {:?}: {shift:.2} dex", held.kind, held.class));
        }
    }
    assert!(
        stale.is_empty(),
        "learn src/calc/prior/table.rs anew: {stale:?}"
    );
}

#[test]
fn withheld_rates_lie_within_the_stated_spread() {
    let lines = rated_lines(common::catalogue());
    let withheld: Vec<Rated> = lines.into_iter().filter(|l| !teaches(l.species)).collect();
    let mut all = Vec::new();
    let mut sigmas = Vec::new();
    for (index, lines) in by_group(&withheld) {
        let held = &GROUPS[index];
        let deviations: Vec<f64> = lines.iter().map(|l| l.deviation(held)).collect();
        let (one, two) = coverage(&deviations);
        println!(
            "{:?} {:?}: {} lines, {:.1} % within 1 σ = {:.2} dex, {:.1} % within 2 σ",
            held.kind,
            held.class,
            lines.len(),
            100.0 * one,
            held.sigma_dex,
            100.0 * two
        );
        all.extend(deviations);
        sigmas.extend(lines.iter().map(|_| held.sigma_dex));
    }
    let (one, two) = coverage(&all);
    println!(
        "withheld: {} lines, {:.1} % within 1 σ, {:.1} % within 2 σ, median σ {:.2} dex",
        all.len(),
        100.0 * one,
        100.0 * two,
        quantile(&mut sigmas, 0.5)
    );
    assert!(all.len() > 4000, "only {} lines checked", all.len());
    // The promise: 68 ± 8 % within 1 σ, 93 % at least within 2 σ.
    assert!((0.60..=0.76).contains(&one), "{one}");
    assert!(two >= 0.93, "{two}");
}

#[test]
fn ions_that_teach_are_half_of_all() {
    let lines = rated_lines(common::catalogue());
    let ions = |teaching: bool| {
        let of = lines.iter().filter(|l| teaches(l.species) == teaching);
        of.map(|l| l.species)
            .collect::<std::collections::BTreeSet<_>>()
    };
    let (teaching, checking) = (ions(true), ions(false));
    let names = |ions: &std::collections::BTreeSet<Species>| {
        let names: Vec<String> = ions.iter().map(ToString::to_string).collect();
        names.join(", ")
    };
    println!(
        "learned on {}\nchecked on {}",
        names(&teaching),
        names(&checking)
    );
    let part = teaching.len() as f64 / (teaching.len() + checking.len()) as f64;
    assert!((0.4..=0.6).contains(&part), "{part}"); // half, as far as ions with rates allow
}

/// Chances for sums of two and of twenty from scipy (see `reference/prior/sums.py`).
#[test]
fn sums_of_log_normals_agree_with_integration() {
    let table = include_str!("reference/prior/sums.csv");
    let mut checked = 0;
    for row in table.lines().skip(1) {
        let numbers: Vec<f64> = row.split(',').map(|n| n.parse().unwrap()).collect();
        let [count, median, sigma, bound, chance] = numbers[..] else {
            panic!("{row}")
        };
        let parts = vec![(median, sigma); count as usize];
        let found = chance_above(&parts, bound);
        // Stated: below 0.01.
        assert!((found - chance).abs() < 0.01, "{row}: {found}");
        checked += 1;
    }
    assert_eq!(checked, 18);
}

#[test]
fn kinds_of_line_are_ordered_as_the_rules_say() {
    let typical = |kind: TransitionKind| -> f64 {
        let of: Vec<&Group> = GROUPS.iter().filter(|g| g.kind == kind).collect();
        let features = learn::typical(kind);
        of.iter().map(|g| g.strength(&features)).sum::<f64>() / of.len() as f64
    };
    let allowed = typical(TransitionKind::Allowed);
    assert!(allowed > typical(TransitionKind::OrbitalForbidden));
    assert!(allowed > typical(TransitionKind::Intercombination));
}
