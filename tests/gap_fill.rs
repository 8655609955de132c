//! Gap fill in the catalogue: what the calculator adds to tables, and what it must leave alone.

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    reason = "a panic in a test is its report"
)]

mod gap_fill_support;

use std::path::Path;
use std::sync::{Mutex, MutexGuard, OnceLock};

use gap_fill_support::{RUBIDIUM, all_lines, bundled, common, label};
use lineclear::calc::coulomb::{ComputedLevel, Setting, predict_scaled_series};
use lineclear::calc::series::label::{bare_term, shell};
use lineclear::calc::series::{LabelledLevel, outer_electron};
use lineclear::catalogue::{Catalogue, SourceFiles};
use lineclear::vocabulary;
use vocabulary::atom::HalfInteger;
use vocabulary::spectrum::{LineKind, PositionOrigin, RateOrigin};

/// All bundled tables imported as a user would: a catalogue without the calculator.
fn tables_alone() -> MutexGuard<'static, Catalogue> {
    static CATALOGUE: OnceLock<Mutex<Catalogue>> = OnceLock::new();
    let make = || {
        let mut catalogue = Catalogue::empty_in_memory().unwrap();
        let data = Path::new(env!("CARGO_MANIFEST_DIR")).join("data");
        for entry in std::fs::read_dir(data).unwrap() {
            let folder = entry.unwrap().path();
            let has_tables = ["levels.csv", "lines.csv"].map(|file| folder.join(file).exists());
            if has_tables.contains(&true) {
                let source = SourceFiles::find(&folder).unwrap();
                source.import(&mut catalogue, 0, false).unwrap();
            }
        }
        Mutex::new(catalogue)
    };
    CATALOGUE
        .get_or_init(make)
        .lock()
        .unwrap_or_else(std::sync::PoisonError::into_inner)
}

#[test]
fn computed_never_displaces_measured() {
    let (catalogue, tables) = (bundled(), tables_alone());
    let (mut compared, mut rated) = (0, 0);
    for species in tables.species().unwrap() {
        let filled = all_lines(&catalogue, species);
        for line in all_lines(&tables, species) {
            // Tables of one-electron species that are theory themselves: the better theory counts.
            if line.position_origin == PositionOrigin::Computed {
                assert!(species.is_one_electron(), "{species}: {line:?}");
                continue;
            }
            // What no table lists gives way to what is computed with a rate.
            if line.kind == LineKind::Ritz {
                continue;
            }
            let same = filled
                .iter()
                .find(|f| {
                    f.wavenumber_per_cm == line.wavenumber_per_cm
                        && f.position_source == line.position_source
                        && (line.lower.is_none() || label(f) == label(&line))
                        && (line.rate_per_s.is_none() || f.rate_per_s == line.rate_per_s)
                })
                .unwrap_or_else(|| panic!("{species}: lost {line:?}"));
            if line.rate_per_s.is_some() {
                assert_eq!(same.rate_source, line.rate_source);
            } else if same.rate_per_s.is_some() {
                assert_eq!(same.rate_origin, Some(RateOrigin::Computed));
                rated += 1;
            }
            compared += 1;
        }
    }
    println!("{compared} lines of tables, {rated} of them rated by the calculator");
    assert!(compared > 15_000, "{compared}");
    assert!(rated > 200, "{rated}");
}

#[test]
fn no_computed_line_stands_beside_a_table_line_of_the_same_name() {
    let catalogue = bundled();
    let mut computed = 0;
    for species in catalogue.species().unwrap() {
        let mut named = std::collections::HashMap::new();
        let full = |level: &Option<std::sync::Arc<vocabulary::spectrum::Level>>| {
            let level = level.as_ref()?;
            Some((level.configuration.clone()?, level.term.clone()?, level.j?))
        };
        for line in all_lines(&catalogue, species) {
            if let Some(name) = full(&line.lower).zip(full(&line.upper)) {
                let is_computed = line.position_origin == PositionOrigin::Computed;
                computed += usize::from(is_computed);
                let others: &mut Vec<bool> = named.entry(name.clone()).or_default();
                others.push(is_computed);
                let twins = others.len() > 1 && others.contains(&true);
                assert!(!twins, "{species}: {name:?} stands twice");
            }
        }
    }
    assert!(computed > 100_000, "{computed}");
}

/// Where coupling is not LS no rate is computed, and where it begins to fail the rate is uncertain.
#[test]
fn rates_are_computed_only_where_coupling_is_ls() {
    let catalogue = bundled();
    let (mut computed, mut open) = (0, Vec::new());
    for species in catalogue.species().unwrap() {
        for line in all_lines(&catalogue, species) {
            if line.rate_source.as_deref() != Some("computed-series") {
                continue;
            }
            computed += 1;
            let mut cores = Vec::new();
            let mut multiplicities = Vec::new();
            for end in [&line.lower, &line.upper] {
                let level = end.as_ref().unwrap();
                let term = bare_term(level.term.as_deref().unwrap());
                // Pair coupling writes K in brackets, jj coupling has no letter of L.
                assert!(!term.contains(['[', '(']), "{species}: {term}");
                multiplicities.push(term.chars().next());
                let outer = outer_electron(level.configuration.as_deref().unwrap()).unwrap();
                cores.push(outer.core);
            }
            assert_eq!(
                multiplicities[0], multiplicities[1],
                "{species}: the spin changes"
            );
            let shells = |core: &str| -> Vec<(u32, u32, u32)> {
                core.split_whitespace().filter_map(shell).collect()
            };
            let is_open = |&(_, l, q): &(u32, u32, u32)| q < 4 * l + 2;
            for core in &cores {
                let deep = |s: &(u32, u32, u32)| s.1 > 1 && is_open(s);
                assert!(
                    !shells(core).iter().any(deep),
                    "{species}: open shell in {core}"
                );
            }
            // An open p shell that is not half filled.
            let split = |core: &String| {
                let of = |s: &(u32, u32, u32)| s.1 == 1 && is_open(s);
                shells(core).iter().any(of) && !core.contains("S)")
            };
            if cores.iter().any(split) {
                open.push(line.rate_relative_uncertainty.unwrap());
            }
        }
    }
    assert!(computed > 5_000, "{computed}");
    assert!(open.len() > 200, "{}", open.len());
    open.sort_by(f64::total_cmp);
    // The median σ of rigid cores is 2 % (reference/coulomb/withheld.md); that of these ten times more.
    assert!(open[open.len() / 2] > 0.2, "{}", open[open.len() / 2]);
}

#[test]
fn computed_levels_of_rubidium_are_those_of_the_calculator() {
    let setting = Setting::of(RUBIDIUM).unwrap();
    let held = tables_alone().levels(RUBIDIUM).unwrap();
    let names: Vec<(String, &vocabulary::spectrum::Level)> = held
        .iter()
        .filter_map(|level| {
            let configuration = level.configuration.as_deref()?;
            Some((setting.one_form(configuration)?, &**level))
        })
        .collect();
    let labelled: Vec<LabelledLevel<'_>> = names
        .iter()
        .map(|(configuration, level)| LabelledLevel {
            energy_per_cm: level.energy_per_cm,
            uncertainty_per_cm: level.energy_uncertainty_per_cm,
            configuration,
            term: level.term.as_deref().unwrap(),
            twice_j: level.j.unwrap().twice(),
        })
        .collect();
    // The scales that the two tables declare, cm⁻¹.
    let scale = |level: &vocabulary::spectrum::Level| match &*level.source {
        "morton2000" => 0.1,
        "curated-rb-i" => 0.05,
        other => panic!("a level of {other}"),
    };
    let scales: Vec<f64> = names.iter().map(|(_, level)| scale(level)).collect();
    let made = predict_scaled_series(&labelled, &scales, &setting.calc(), 20);
    let calculated: Vec<ComputedLevel> =
        made.into_iter().flat_map(|series| series.levels).collect();
    let catalogue = bundled().levels(RUBIDIUM).unwrap();
    let computed = || {
        catalogue
            .iter()
            .filter(|l| l.origin == PositionOrigin::Computed)
    };
    assert_eq!(computed().count(), calculated.len());
    for level in computed() {
        let same = calculated
            .iter()
            .find(|c| {
                Some(c.configuration.as_str()) == level.configuration.as_deref()
                    && Some(c.twice_j) == level.j.map(HalfInteger::twice)
            })
            .unwrap();
        assert_eq!(same.prediction.energy_per_cm, level.energy_per_cm);
        assert_eq!(
            same.prediction.uncertainty_per_cm,
            level.energy_uncertainty_per_cm
        );
    }
}

#[test]
fn a_source_of_the_calculator_cannot_be_forgotten() {
    let error = bundled()
        .forget("computed-one-electron")
        .unwrap_err()
        .to_string();
    assert!(
        error.contains("computed") && !error.contains('\n'),
        "{error}"
    );
}

#[test]
fn the_catalogue_keeps_within_its_size() {
    let size = std::fs::metadata(common::catalogue()).unwrap().len();
    let catalogue = bundled();
    let (mut levels, mut lines, mut computed_levels, mut computed_lines) = (0, 0, 0, 0);
    for species in catalogue.species().unwrap() {
        let held = catalogue.levels(species).unwrap();
        let found = catalogue.lines(species, &held, 0.0, 1e12).unwrap();
        let is_computed = |origin| origin == PositionOrigin::Computed;
        levels += held.len();
        lines += found.len();
        computed_levels += held.iter().filter(|l| is_computed(l.origin)).count();
        computed_lines += found
            .iter()
            .filter(|l| is_computed(l.position_origin))
            .count();
    }
    println!("{size} bytes; {levels} levels, {computed_levels} computed");
    println!("{lines} lines, {computed_lines} computed");
    // The budget of the bundled catalogue: 60 MB.
    assert!(size < 60_000_000, "{size}");
    assert!(computed_lines > 120_000, "{computed_lines}");
    assert!(computed_levels > 8_000, "{computed_levels}");
    assert!(levels > computed_levels + 10_000, "{levels}");
}
