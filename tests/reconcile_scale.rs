//! Reconciliation of all bundled tables: how much there is, and no line twice.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::collections::BTreeMap;

use lineclear::catalogue::{Catalogue, SourceRow};
use lineclear::vocabulary::spectrum::{Line, LineKind, Parity};

fn is_computed(source: &str, sources: &[SourceRow]) -> bool {
    sources
        .iter()
        .any(|s| s.key == source && s.kind == "computed")
}

/// All lines of tables and curation, species by species.
fn lines() -> Vec<Vec<Line>> {
    with_ritz(false)
}

/// The same with the lines that no table lists but that follow from levels, if wanted.
fn with_ritz(ritz: bool) -> Vec<Vec<Line>> {
    let catalogue = Catalogue::open(common::catalogue()).unwrap();
    let sources = catalogue.sources().unwrap();
    let of = |species| {
        let levels = catalogue.levels(species).unwrap();
        let mut lines = catalogue.lines(species, &levels, 0.0, f64::MAX).unwrap();
        lines.retain(|l| !is_computed(&l.position_source, &sources));
        lines.retain(|l| ritz || l.kind != LineKind::Ritz);
        lines
    };
    catalogue.species().unwrap().into_iter().map(of).collect()
}

#[test]
fn tables_and_curation_reach_their_counts() {
    let catalogue = Catalogue::open(common::catalogue()).unwrap();
    let sources = catalogue.sources().unwrap();
    let levels: u64 = sources
        .iter()
        .filter(|s| s.kind == "curated")
        .map(|s| s.levels)
        .sum();
    let reports: u64 = sources
        .iter()
        .filter(|s| matches!(s.kind.as_str(), "paper" | "model"))
        .map(|s| s.lines)
        .sum();
    let all = lines();
    let distinct: usize = all.iter().map(Vec::len).sum();
    let rated = all.iter().flatten().filter(|l| l.rate_per_s.is_some());
    let rated = rated.count();
    let ritz = with_ritz(true).iter().map(Vec::len).sum::<usize>() - distinct;
    println!(
        "{distinct} distinct lines of tables and curation, {rated} rated; {reports} line reports \
         of papers and model atoms; {levels} curated levels; besides, {ritz} lines that follow from \
         levels alone"
    );
    assert!(ritz >= 4_000, "{ritz}");
    // The counts that the tables were chosen for; what is computed or follows from levels alone
    // is counted apart.
    assert!(distinct >= 18_000, "{distinct}");
    assert!(rated >= 13_000, "{rated}");
    assert!(reports >= 15_600, "{reports}");
    assert!(levels >= 2_900, "{levels}");
}

/// Two entries that may be one line, as words.
fn suspicion(a: &Line, b: &Line) -> Option<String> {
    let sigma = a
        .wavenumber_uncertainty_per_cm
        .hypot(b.wavenumber_uncertainty_per_cm);
    if (a.wavenumber_per_cm - b.wavenumber_per_cm).abs() > 3.0 * sigma {
        return None;
    }
    let number = |l: &Line| {
        let level = |l: &Option<std::sync::Arc<_>>| -> Option<u32> {
            l.as_ref()
                .map(|l: &std::sync::Arc<lineclear::vocabulary::spectrum::Level>| l.number)
        };
        (level(&l.lower), level(&l.upper))
    };
    let same_pair = number(a) == number(b) && number(a).0.is_some();
    if !same_pair && (a.position_source == b.position_source || !compatible(a, b)) {
        return None;
    }
    Some(format!(
        "{} {:.3} ({}) and {:.3} ({})",
        a.species, a.wavenumber_per_cm, a.position_source, b.wavenumber_per_cm, b.position_source
    ))
}

/// J and parity of both ends do not contradict each other.
fn compatible(a: &Line, b: &Line) -> bool {
    let ends = [(&a.lower, &b.lower), (&a.upper, &b.upper)];
    ends.iter().all(|(one, other)| {
        let (Some(one), Some(other)) = (one.as_ref(), other.as_ref()) else {
            return true;
        };
        let j = one.j.zip(other.j).is_none_or(|(x, y)| x == y);
        let parity: Option<(Parity, Parity)> = one.parity.zip(other.parity);
        j && parity.is_none_or(|(x, y)| x == y)
    })
}

/// Pairs that are two lines, each with what tells them apart. Keyed by the start of the words.
const EXPLAINED: [(&str, &str); 1] = [(
    "S I 95206.360 (verner1996) and 95207.991 (cashman2017)",
    "cashman2017 names no level; its upper J is 1, that of the other line 2",
)];

#[test]
fn no_line_is_held_twice() {
    let mut found = Vec::new();
    for lines in with_ritz(true) {
        for (index, line) in lines.iter().enumerate() {
            let reach = lines[index + 1..]
                .iter()
                .take_while(|other| other.wavenumber_per_cm - line.wavenumber_per_cm < 10.0);
            found.extend(reach.filter_map(|other| suspicion(line, other)));
        }
    }
    let reason = |pair: &String| {
        EXPLAINED
            .iter()
            .find(|(p, _)| p == pair)
            .map(|(_, why)| why)
    };
    let (explained, rest): (Vec<&String>, Vec<&String>) =
        found.iter().partition(|pair| reason(pair).is_some());
    println!(
        "{} pairs of like place, {} explained:",
        found.len(),
        explained.len()
    );
    for pair in &found {
        println!("  {pair}: {}", reason(pair).unwrap_or(&"NOT EXPLAINED"));
    }
    assert!(rest.is_empty(), "held twice: {rest:?}");
    // An explanation that nothing needs any more is to be taken out.
    assert_eq!(explained.len(), EXPLAINED.len());
}

#[test]
fn a_better_scale_gives_the_position_where_one_holds_both_levels() {
    // He I singlets of the model atoms lie 4 and 6 cm⁻¹ too low: no line between levels that a
    // table or the curation holds may take its position from there.
    let mut by_species: BTreeMap<String, usize> = BTreeMap::new();
    for line in lines().iter().flatten() {
        let better = |level: &Option<std::sync::Arc<lineclear::vocabulary::spectrum::Level>>| {
            level.as_ref().is_some_and(|l| &*l.source != "model-atoms")
        };
        if &*line.position_source == "model-atoms" {
            *by_species.entry(line.species.to_string()).or_default() += 1;
            // What only the model atoms place claims no more than they can: 0.3 cm⁻¹ per level,
            // by which their levels scatter about those of the papers.
            assert!(
                line.wavenumber_uncertainty_per_cm >= 0.3,
                "{} {}",
                line.species,
                line.wavenumber_per_cm
            );
            let both = better(&line.lower) && better(&line.upper);
            assert!(
                !both || line.lower.as_ref().unwrap().source != line.upper.as_ref().unwrap().source,
                "{} {}",
                line.species,
                line.wavenumber_per_cm
            );
        }
    }
    println!("positions that only model atoms give: {by_species:?}");
}
