//! One-electron species in the catalogue: what the calculator adds, and how it stands beside tables.

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    reason = "a panic in a test is its report"
)]

mod gap_fill_support;

use std::collections::BTreeSet;

use gap_fill_support::common::json;
use gap_fill_support::{D, H, HE_II, all_lines, bundled, copy, import, label, line_record};
use importers::record::{LevelEnd, Record};
use lineclear::calc::one_electron::{Nucleus, levels, lines_between};
use lineclear::catalogue::Catalogue;
use lineclear::{importers, vocabulary};
use vocabulary::atom::Species;
use vocabulary::light::Air;
use vocabulary::light::constants::RYDBERG_PER_CM;
use vocabulary::spectrum::{Line, PositionOrigin, RateOrigin};

/// Lines between two shells of a one-electron species.
fn between(catalogue: &Catalogue, species: Species, lower: u32, upper: u32) -> Vec<Line> {
    let shell = |configuration: &str| -> u32 {
        let digits: String = configuration
            .chars()
            .take_while(char::is_ascii_digit)
            .collect();
        digits.parse().unwrap()
    };
    all_lines(catalogue, species)
        .into_iter()
        .filter(|line| {
            label(line).is_some_and(|[from, to]| shell(&from.0) == lower && shell(&to.0) == upper)
        })
        .collect()
}

/// Mean wavenumber, weighted with the light of each component at a high temperature.
fn mean_per_cm(lines: &[Line]) -> f64 {
    let weight = |l: &Line| l.rate_per_s.unwrap() * l.upper.as_ref().unwrap().g.unwrap();
    let total: f64 = lines.iter().map(weight).sum();
    lines
        .iter()
        .map(|l| weight(l) * l.wavenumber_per_cm)
        .sum::<f64>()
        / total
}

fn air_nm(wavenumber_per_cm: f64) -> f64 {
    let air = Air::standard().to_air_nm(1e7 / wavenumber_per_cm);
    air.unwrap().nm
}

#[test]
fn balmer_alpha_of_hydrogen_and_deuterium() {
    let catalogue = bundled();
    let found = [H, D].map(|species| between(&catalogue, species, 2, 3));
    for lines in &found {
        // Seven components: common practice.
        assert_eq!(lines.len(), 7);
        assert!(lines.iter().all(|l| l.rate_per_s.is_some()));
    }
    let [h, d] = found.map(|lines| air_nm(mean_per_cm(&lines)));
    // 656.28 nm, 656.10 nm, D to the blue by 0.179 nm: common practice, to the last digit given.
    assert!((h - 656.28).abs() < 0.005, "{h}");
    assert!((d - 656.10).abs() < 0.005, "{d}");
    assert!((h - d - 0.179).abs() < 0.0005, "{}", h - d);
}

#[test]
fn paschen_alpha_of_ionised_helium() {
    let lines = between(&bundled(), HE_II, 3, 4);
    // 13 components, 468.57 nm in air: common practice.
    assert_eq!(lines.len(), 13);
    let mean = air_nm(mean_per_cm(&lines));
    assert!((mean - 468.57).abs() < 0.005, "{mean}");
}

#[test]
fn series_follow_the_rydberg_formula() {
    let catalogue = bundled();
    // Nuclear masses in electron masses: CODATA 2022.
    for (species, charge, mass) in [
        (H, 1.0, 1_836.152_673),
        (D, 1.0, 3_670.482_968),
        (HE_II, 2.0, 7_294.299_542),
    ] {
        let rydberg = RYDBERG_PER_CM * charge * charge / (1.0 + 1.0 / mass);
        for (m, n) in [
            (2u32, 3u32),
            (2, 4),
            (2, 20),
            (3, 4),
            (3, 10),
            (4, 5),
            (6, 7),
        ] {
            let mean = mean_per_cm(&between(&catalogue, species, m, n));
            let step = 1.0 / f64::from(m * m) - 1.0 / f64::from(n * n);
            // Fine structure moves the levels by at most (Zα)² of themselves: 5.3e-5 Z².
            let ratio = mean / (rydberg * step);
            assert!(
                (ratio - 1.0).abs() < 5.4e-5 * charge * charge,
                "{species} {n}-{m}: {ratio}"
            );
        }
    }
}

#[test]
fn the_catalogue_gives_what_the_calculator_gives() {
    let catalogue = bundled();
    let (mut lines_compared, mut from_tables) = (0, 0);
    for (species, highest) in [(H, 20), (D, 20), (HE_II, 20), (Species::new(26, 26), 10)] {
        let nucleus = Nucleus::of(species).unwrap();
        let computed = levels(&nucleus, highest).unwrap();
        let mut held = std::collections::HashMap::new();
        for line in all_lines(&catalogue, species) {
            if let Some(label) = label(&line) {
                assert!(
                    held.insert(label, line).is_none(),
                    "{species}: a line twice"
                );
            }
        }
        for line in lines_between(&nucleus, &computed, highest).unwrap() {
            let [lower, upper] = [&computed[line.lower], &computed[line.upper]];
            let key = [lower, upper].map(|l| (l.configuration(), l.j));
            let held = &held[&key];
            assert!(held.rate_per_s.is_some(), "{species} {key:?}");
            if held.position_origin == PositionOrigin::Computed {
                assert_eq!(held.wavenumber_per_cm, line.wavenumber_per_cm);
                assert_eq!(held.wavenumber_uncertainty_per_cm, line.uncertainty_per_cm);
                lines_compared += 1;
            } else {
                from_tables += 1;
                // What a table measured agrees with theory within its own uncertainty.
                let sigma = held
                    .wavenumber_uncertainty_per_cm
                    .hypot(line.uncertainty_per_cm);
                let off = held.wavenumber_per_cm - line.wavenumber_per_cm;
                assert!(
                    off.abs() <= 4.0 * sigma + 1e-5 * line.wavenumber_per_cm,
                    "{species} {key:?}: {off} against {sigma}"
                );
            }
            if held.rate_origin == Some(RateOrigin::Computed) {
                assert_eq!(held.rate_per_s, Some(line.rate_per_s));
            }
        }
    }
    assert!(lines_compared > 21_000, "{lines_compared}");
    // The measured lines of deuterium.
    assert!(from_tables >= 10, "{from_tables}");
}

#[test]
fn no_pair_of_levels_and_no_label_stands_twice() {
    let catalogue = bundled();
    for z in 1..=30 {
        let species = Species::new(z, z);
        let held = catalogue.levels(species).unwrap();
        let labels: BTreeSet<_> = held
            .iter()
            .map(|l| (l.configuration.clone(), l.j))
            .collect();
        assert_eq!(labels.len(), held.len(), "{species}");
        let lines = all_lines(&catalogue, species);
        let pairs: BTreeSet<_> = lines
            .iter()
            .map(|l| [&l.lower, &l.upper].map(|end| end.as_ref().map(|l| l.number)))
            .collect();
        assert_eq!(pairs.len(), lines.len(), "{species}");
        assert!(lines.iter().all(|l| l.rate_per_s.is_some()), "{species}");
    }
}

#[test]
fn window_rates_both_balmer_alphas() {
    let answer = json("lineclear window 656..657nm --of H,D --fwhm 0.05nm --te 3eV");
    assert_eq!(answer["lines"].as_array().unwrap().len(), 14);
    let features = answer["features"].as_array().unwrap();
    assert_eq!(features.len(), 2);
    for feature in features {
        assert_eq!(feature["verdict"], "clear", "{feature}");
    }
    assert!(answer["unrated"].as_array().unwrap().is_empty());
    let helium = json("lineclear window 468.4..468.7nm --of \"He II\"");
    assert_eq!(helium["lines"].as_array().unwrap().len(), 13);
}

#[test]
fn lyman_lines_stand_once_whether_tables_resolve_them_or_not() {
    // Tables give means over J from n = 11 to 31; the calculator gives both J up to n = 20.
    let catalogue = bundled();
    for n in 2..=20 {
        let lines = between(&catalogue, H, 1, n);
        let p: Vec<&Line> = (lines.iter())
            .filter(|line| label(line).is_some_and(|ends| ends[1].0.ends_with('p')))
            .collect();
        assert_eq!(p.len(), 2, "n = {n}");
        assert_eq!(lines.len(), 2, "n = {n}: a mean beside its components");
    }
    let levels = catalogue.levels(H).unwrap();
    let means: Vec<u32> = (all_lines(&catalogue, H).iter())
        .filter_map(|line| {
            let upper = line.upper.as_ref()?;
            upper
                .j
                .is_none()
                .then_some(upper.configuration.as_deref()?)?;
            upper
                .configuration
                .as_deref()?
                .strip_suffix('p')?
                .parse()
                .ok()
        })
        .collect();
    let mut sorted = means.clone();
    sorted.sort_unstable();
    assert_eq!(sorted, (21..=31).collect::<Vec<u32>>());
    assert!(levels.iter().filter(|l| l.j.is_none()).count() == means.len());
}

#[test]
fn tables_that_took_their_values_from_theory_do_not_displace_better_theory() {
    let catalogue = bundled();
    let mut compared = 0;
    for z in 1..=26 {
        let species = Species::new(z, z);
        for line in all_lines(&catalogue, species) {
            if line.upper.as_ref().is_some_and(|upper| upper.j.is_none()) {
                continue;
            }
            let computed = "computed-one-electron";
            assert_eq!(&*line.position_source, computed, "{species}: {line:?}");
            assert_eq!(line.rate_source.as_deref(), Some(computed), "{species}");
            assert_eq!(line.position_origin, PositionOrigin::Computed, "{species}");
            assert_eq!(line.rate_origin, Some(RateOrigin::Computed), "{species}");
            compared += 1;
        }
    }
    assert!(compared > 40_000, "{compared}");
    // Ly-α of He II: 30.378 nm, the fine structure of 2p being 5.857 cm⁻¹ (common practice), both to
    // the last digit given; theory knows the position better than 1e-6 of it.
    let alpha = between(&catalogue, HE_II, 1, 2);
    assert!((1e7 / mean_per_cm(&alpha) - 30.378).abs() < 0.0005);
    let split = alpha[1].wavenumber_per_cm - alpha[0].wavenumber_per_cm;
    assert!((split - 5.857).abs() < 0.0005, "{split}");
    assert!(
        alpha
            .iter()
            .all(|line| line.wavenumber_uncertainty_per_cm < 0.01)
    );
}

#[test]
fn a_measured_position_displaces_theory_even_where_it_is_worse() {
    let (_folder, mut catalogue) = copy();
    let line = between(&catalogue, HE_II, 3, 4).remove(0);
    let end = |level: &Option<std::sync::Arc<vocabulary::spectrum::Level>>| {
        let level = level.as_ref().unwrap();
        Some(LevelEnd {
            energy_per_cm: Some(level.energy_per_cm),
            energy_uncertainty_per_cm: Some(1.0),
            configuration: level.configuration.as_deref().map(str::to_owned),
            term: level.term.as_deref().map(str::to_owned),
            j: level.j,
            g: None,
        })
    };
    // Invented: a lamp's line, 0.05 cm⁻¹ off.
    let seen = line.wavenumber_per_cm + 0.05;
    let record = importers::record::LineRecord {
        lower: end(&line.lower),
        upper: end(&line.upper),
        ..line_record(HE_II, seen, 0.04)
    };
    import(&mut catalogue, "invented-lamp", &[Record::Line(record)]);
    let found = between(&catalogue, HE_II, 3, 4);
    assert_eq!(found.len(), 13);
    let measured: Vec<&Line> = (found.iter())
        .filter(|l| l.position_origin == PositionOrigin::Measured)
        .collect();
    assert_eq!(measured.len(), 1);
    assert_eq!(measured[0].wavenumber_per_cm, seen);
    assert_eq!(&*measured[0].position_source, "invented-lamp");
}
