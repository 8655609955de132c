//! The tables as files: checksums, counts, and every bundled row traced to what was entered.

use super::support::{data, ions, rows, rows_if_there};
use sha2::{Digest, Sha256};
use std::collections::{HashMap, HashSet};

#[test]
fn checksums_and_counts_in_source_toml_are_those_of_the_tables() {
    for ion in ions() {
        let text = std::fs::read_to_string(ion.folder.join("source.toml")).unwrap();
        let source: toml::Table = text.parse().unwrap();
        let tables = source["table"].as_array().unwrap();
        assert_eq!(
            tables.len(),
            1 + usize::from(!ion.lines.is_empty()),
            "{}",
            ion.species
        );
        for table in tables {
            let name = table["file"].as_str().unwrap();
            let bytes = std::fs::read(ion.folder.join(name)).unwrap();
            let digest: String = Sha256::digest(&bytes)
                .iter()
                .map(|b| format!("{b:02x}"))
                .collect();
            assert_eq!(
                table["sha256"].as_str(),
                Some(digest.as_str()),
                "{} {name}",
                ion.species
            );
            let count = if name == "levels.csv" {
                ion.levels.len()
            } else {
                ion.lines.len()
            };
            assert_eq!(
                table["rows"].as_integer(),
                Some(count as i64),
                "{} {name}",
                ion.species
            );
        }
        assert_eq!(source["licence"].as_str(), Some("CC0-1.0"));
        assert!(
            source["level_scale_uncertainty_per_cm"].as_float().unwrap() >= 0.05,
            "{}",
            ion.species
        );
    }
}

/// What was entered: the counts of the two entries' comparison.
#[test]
fn kept_input_holds_what_both_entries_agreed_on() {
    let (mut levels, mut lines, mut rates) = (0, 0, 0);
    let ions = ions();
    for ion in ions {
        levels += rows(&ion.folder.join("entered_levels.csv")).len();
        let entered = &ion.entered_lines;
        lines += entered.len();
        rates += entered
            .iter()
            .filter(|row| !row["rate_per_s"].is_empty())
            .count();
    }
    assert_eq!((ions.len(), levels, lines, rates), (125, 3255, 4614, 2801));
}

/// A level by energy text and J.
type Key = (String, Option<u32>);

fn key(energy: &str, j: Option<f64>) -> Key {
    (energy.to_owned(), j.map(|j| (2.0 * j) as u32))
}

/// Every entered level is bundled, or left out because nothing tests it. The exceptions are in W I (one level entered twice) and the
/// twelve levels whose J a paper table settles; those are known findings.
#[test]
fn every_entered_level_is_accounted_for() {
    let findings = std::fs::read_to_string(data().join("known_findings.toml")).unwrap();
    let mut totals: HashMap<String, (usize, usize)> = HashMap::new();
    let mut settled = 0;
    for ion in ions() {
        let bundled: HashSet<Key> = ion.levels.iter().map(|l| key(&l.text, l.j)).collect();
        for row in rows(&ion.folder.join("entered_levels.csv")) {
            let energy = &row["energy_per_cm"];
            let mut kept = bundled.contains(&key(energy, row["j"].parse().ok()));
            let place = format!("\"{} level {energy}", ion.species);
            if !kept && row["tested"] != "none" && findings.contains(&place) {
                assert!(ion.levels.iter().any(|l| &l.text == energy), "{place}");
                settled += 1;
                kept = true;
            }
            let count = totals.entry(row["tested"].clone()).or_default();
            *if kept { &mut count.0 } else { &mut count.1 } += 1;
            let excused = row["tested"] == "none" || energy == "26189.19";
            assert!(kept || excused, "{} {row:?}", ion.species);
        }
    }
    println!("bundled and left out, by what tests a level: {totals:?}; {settled} with another J");
    assert_eq!(settled, 12);
    assert_eq!(totals["line"], (2864, 1));
    assert_eq!(totals["term"], (86, 0));
    assert_eq!(totals["ground"], (55, 0));
    assert_eq!(totals["coarse"], (7, 0));
    assert_eq!(totals["none"], (5, 237));
    let bundled: usize = totals.values().map(|t| t.0).sum();
    assert!(bundled >= 2900, "{bundled} levels");
}

/// What was entered later (Kr II, Mo II, Hg II) is bundled whole, and two lines or the wavelength itself support each level.
#[test]
fn later_entries_are_bundled_and_supported() {
    let (mut levels, mut lines) = (0, 0);
    for ion in ions() {
        for row in rows_if_there(&ion.folder.join("later_levels.csv")) {
            levels += 1;
            let energy = &row["energy_per_cm"];
            assert!(
                ion.levels.iter().any(|l| &l.text == energy),
                "{} {energy}",
                ion.species
            );
            let supporting = ion
                .lines
                .iter()
                .filter(|l| &l.upper.0 == energy || &l.lower.0 == energy)
                .count();
            assert!(supporting >= 1, "{} {energy}", ion.species);
        }
        lines += ion
            .lines
            .iter()
            .filter(|l| l.row.starts_with("later"))
            .count();
    }
    assert_eq!((levels, lines), (8, 11));
}

/// What a second pair of entries agrees on is bundled whole: its levels have a bundled line each, its lines are there once.
#[test]
fn second_entries_are_bundled_and_supported() {
    let (mut levels, mut lines, mut rates) = (0, 0, 0);
    for ion in ions() {
        for row in rows_if_there(&ion.folder.join("second_levels.csv")) {
            levels += 1;
            let energy = &row["energy_per_cm"];
            let place = format!("{} {energy}", ion.species);
            assert!(ion.levels.iter().any(|l| &l.text == energy), "{place}");
            let mut supporting = ion
                .lines
                .iter()
                .filter(|l| &l.upper.0 == energy || &l.lower.0 == energy);
            assert!(supporting.next().is_some(), "{place}");
        }
        for row in &ion.second_lines {
            lines += 1;
            rates += usize::from(!row["rate_per_s"].is_empty());
            let same = ion.lines.iter().filter(|l| {
                l.kind == "line"
                    && l.lower.0 == row["lower_energy_per_cm"]
                    && l.upper.0 == row["upper_energy_per_cm"]
            });
            assert_eq!(same.count(), 1, "{} {}", ion.species, row["wavelength_nm"]);
        }
    }
    println!("second entries: {levels} levels, {lines} lines, {rates} rates");
    assert_eq!((levels, lines, rates), (48, 179, 24));
}

/// Entered lines are all there, but for the three of the W I level that had been entered twice.
#[test]
fn every_entered_line_is_accounted_for() {
    let mut missing = Vec::new();
    for ion in ions() {
        let there: HashSet<&str> = ion.lines.iter().map(|line| line.row.as_str()).collect();
        let entered = &ion.entered_lines;
        missing.extend(
            (1..=entered.len())
                .filter(|n| !there.contains(n.to_string().as_str()))
                .map(|n| format!("{} row {n}", ion.species)),
        );
    }
    assert_eq!(missing, ["W I row 26", "W I row 35", "W I row 41"]);
}

/// A bundled rate is the kept one, or follows from others of its multiplet and says so.
#[test]
fn entered_rates_are_bundled_as_entered() {
    let (mut entered, mut followed, mut published) = (0, 0, 0);
    for ion in ions() {
        for line in ion.lines.iter().filter(|line| line.rate_per_s.is_some()) {
            let place = format!("{} {line:?}", ion.species);
            let kept: Option<f64> = ion
                .kept_row(line)
                .and_then(|row| row["rate_per_s"].parse().ok());
            if let Some(rate) = kept.or_else(|| ion.second_rate(line)) {
                // The bundled rate has four digits, the kept one at most as many.
                assert!(
                    (line.rate_per_s.unwrap() / rate - 1.0).abs() < 1e-6,
                    "{place}"
                );
                entered += usize::from(kept.is_some() && !line.row.contains(' '));
            } else {
                assert_eq!(line.rate_origin, "derived", "{place}");
                followed += 1;
            }
            assert!(
                line.rate_uncertainty.is_some_and(|s| s > 0.0 && s <= 1.0),
                "{place}"
            );
            published += usize::from(line.rate_origin == "published");
        }
    }
    println!(
        "{entered} entered rates, {followed} that follow from them, {published} of all published"
    );
    // Four of the 2801 are withheld by decision: Fe I 443.5149, Ag I 206.985 and 206.1175, In I 256.015.
    assert_eq!(entered, 2801 - 4);
    assert!(followed > 190 && published > 2650);
}

#[test]
fn folders_are_complete() {
    for ion in ions() {
        for name in [
            "entered_levels.csv",
            "entered_lines.csv",
            "levels.csv",
            "lines.csv",
            "source.toml",
        ] {
            assert!(ion.folder.join(name).is_file(), "{} {name}", ion.species);
        }
    }
    assert!(data().join("known_findings.toml").is_file());
}
