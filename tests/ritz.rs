//! Lines that no table lists but that follow from levels: which are made, and what they may not do.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

use importers::record::{LevelEnd, LevelRecord, LineRecord, Place, Record};
use importers::source::SourceDescription;
use importers::{ReadReport, Sink};
use lineclear::calc::prior::prior;
use lineclear::catalogue::{Catalogue, Incoming};
use lineclear::{importers, vocabulary};
use vocabulary::atom::{HalfInteger, Species, Term, limit};
use vocabulary::spectrum::{Level, Line, LineKind, PositionOrigin, RateOrigin};

fn lines(catalogue: &Catalogue, species: Species) -> Vec<Line> {
    let levels = catalogue.levels(species).unwrap();
    catalogue.lines(species, &levels, 0.0, f64::MAX).unwrap()
}

fn ends(line: &Line) -> (&Level, &Level) {
    (line.lower.as_ref().unwrap(), line.upper.as_ref().unwrap())
}

/// The rule again, spelled out from S, L, J and parity alone.
fn is_allowed(lower: &Level, upper: &Level) -> bool {
    let twice = |l: &Level| i32::from(l.j.unwrap().twice());
    let (step, sum) = (
        (twice(lower) - twice(upper)).abs(),
        twice(lower) + twice(upper),
    );
    if lower.parity == upper.parity {
        return step <= 4 && sum >= 2;
    }
    let ls = |l: &Level| match Term::parse(l.term.as_deref().unwrap_or_default()) {
        Term::Ls {
            multiplicity, l, ..
        } => Some((multiplicity, i32::from(l))),
        _ => None,
    };
    let dipole = step <= 2 && sum >= 2;
    match (ls(lower), ls(upper)) {
        (Some((s, l)), Some((s2, l2))) => dipole && s == s2 && (l - l2).abs() <= 1 && l + l2 >= 1,
        _ => dipole,
    }
}

#[test]
fn lines_that_follow_from_levels_keep_to_the_rules() {
    let catalogue = Catalogue::open(common::catalogue()).unwrap();
    let mut count: BTreeMap<String, usize> = BTreeMap::new();
    let mut rated = 0;
    for species in catalogue.species().unwrap() {
        let all = lines(&catalogue, species);
        let pair = |l: &Line| (ends(l).0.number, ends(l).1.number);
        let mut seen = BTreeSet::new();
        for line in all
            .iter()
            .filter(|l| l.lower.is_some() && l.upper.is_some())
        {
            assert!(
                seen.insert(pair(line)),
                "{species} {} twice",
                line.wavenumber_per_cm
            );
        }
        for line in all.iter().filter(|l| l.kind == LineKind::Ritz) {
            let (lower, upper) = ends(line);
            let name = format!("{species} {:.3}", line.wavenumber_per_cm);
            *count.entry(species.to_string()).or_default() += 1;
            if line.rate_per_s.is_some() {
                assert_eq!(line.rate_origin, Some(RateOrigin::Computed), "{name}");
                rated += 1;
                continue;
            }
            assert_eq!(line.rate_origin, None, "{name}");
            assert_eq!(line.position_origin, PositionOrigin::Ritz, "{name}");
            assert!(is_allowed(lower, upper), "{name}");
            for level in [lower, upper] {
                assert_eq!(level.origin, PositionOrigin::Measured, "{name}");
            }
            // Never without the prior.
            let limit_per_cm = limit(species).unwrap().energy_per_cm;
            assert!(prior(line, limit_per_cm).is_some(), "{name}");
            assert!(
                species.isotope.is_none() && !species.is_one_electron(),
                "{name}"
            );
        }
    }
    let total: usize = count.values().sum();
    let mut most: Vec<(&String, &usize)> = count.iter().collect();
    most.sort_by_key(|(_, n)| std::cmp::Reverse(**n));
    println!(
        "{total} lines of {} species, most: {:?}; {rated} more with a computed rate",
        count.len(),
        &most[..10]
    );
    // What the levels of the bundled tables allow by these rules beyond what tables list.
    assert!((4_000..17_000).contains(&total), "{total}");
}

const TITANIUM: Species = Species::new(22, 1);

fn level(energy: f64, configuration: &str, term: &str, j: u16) -> LevelRecord {
    LevelRecord {
        species: TITANIUM,
        energy_per_cm: energy,
        energy_uncertainty_per_cm: if energy > 0.0 { 0.01 } else { 0.0 },
        configuration: Some(configuration.to_owned()),
        term: Some(term.to_owned()),
        j: Some(HalfInteger::from_twice(2 * j)),
        g: None,
        computed: false,
        place: place(),
    }
}

fn place() -> Place {
    Place {
        file: Arc::from("invented.csv"),
        line: 1,
    }
}

fn rated(lower: &LevelRecord, upper: &LevelRecord) -> LineRecord {
    let end = |l: &LevelRecord| LevelEnd {
        energy_per_cm: Some(l.energy_per_cm),
        energy_uncertainty_per_cm: None,
        configuration: l.configuration.clone(),
        term: l.term.clone(),
        j: l.j,
        g: None,
    };
    LineRecord {
        species: TITANIUM,
        wavenumber_per_cm: None,
        wavenumber_uncertainty_per_cm: None,
        from_levels: true,
        lower: Some(end(lower)),
        upper: Some(end(upper)),
        rate_per_s: Some(1e7),
        rate_relative_uncertainty: Some(0.1),
        rate_origin: Some(RateOrigin::Published),
        intensity: None,
        kind: LineKind::Line,
        computed: false,
        place: place(),
    }
}

fn import(catalogue: &mut Catalogue, key: &str, records: &[Record]) {
    let text = format!(
        "key = \"{key}\"\ntitle = \"t\"\ncitation = \"invented\"\nlicence = \"CC0-1.0\"\nkind = \"paper\"\n\
         level_scale_uncertainty_per_cm = 0.1\n"
    );
    let description = SourceDescription::parse(&text, "invented").unwrap();
    let incoming = Incoming {
        description: &description,
        checksum: key,
        bundled: false,
    };
    let feed = |sink: &mut dyn Sink| {
        let mut report = ReadReport::default();
        for record in records.iter().cloned() {
            sink.accept(record).map_err(importers::ImportError::Sink)?;
            report.read += 1;
            report.records += 1;
        }
        Ok(report)
    };
    catalogue.import(&incoming, feed, false).unwrap();
}

/// Energies of the ends of the lines that follow from levels.
fn made(catalogue: &Catalogue) -> Vec<(f64, f64)> {
    lines(catalogue, TITANIUM)
        .iter()
        .filter(|l| l.kind == LineKind::Ritz)
        .map(|l| (ends(l).0.energy_per_cm, ends(l).1.energy_per_cm))
        .collect()
}

#[test]
fn an_invented_table_gives_the_lines_counted_by_hand() {
    // Invented levels: 3P and 1S of one configuration, 3Po and 1Po of another.
    let triplet = [(0.0, 0), (100.0, 1), (300.0, 2)].map(|(e, j)| level(e, "3d2 4s2", "a 3P", j));
    let upper = [(25_000.0, 0), (25_110.0, 1), (25_330.0, 2)]
        .map(|(e, j)| level(e, "3d2 4s 4p", "z 3Po", j));
    let singlet = level(15_000.0, "3d2 4s2", "a 1S", 0);
    let singlet_upper = level(30_000.0, "3d2 4s 4p", "z 1Po", 1);
    let listed = rated(&triplet[0], &upper[1]);
    let mut records: Vec<Record> = (triplet.iter().chain(&upper).cloned())
        .chain([singlet, singlet_upper])
        .map(Record::Level)
        .collect();
    records.push(Record::Line(listed));
    let mut catalogue = Catalogue::empty_in_memory().unwrap();
    import(&mut catalogue, "invented-a", &records);
    let made = made(&catalogue);
    // 3P–3Po has six components (0–0 is forbidden), one of which is listed: five. 1S–1Po: one. Between
    // spins none. Inside the ground configuration M1 0–1, 1–2, 1–1S0 and E2 0–2, 2–1S0: five.
    let dipole = made.iter().filter(|(_, upper)| *upper > 20_000.0).count();
    assert_eq!((dipole, made.len()), (6, 11), "{made:?}");
    assert!(
        !made.contains(&(0.0, 25_110.0)),
        "the listed line is not made again"
    );
    assert!(
        !made.contains(&(100.0, 30_000.0)),
        "intercombination lines stay out"
    );
}

#[test]
fn levels_of_different_sources_make_no_line_and_a_listed_line_is_never_displaced() {
    let lower = level(0.0, "3d2 4s2", "a 3P", 1);
    let upper = level(25_000.0, "3d2 4s 4p", "z 3Po", 1);
    let other = level(26_000.0, "3d2 4s 4p", "y 3Po", 1);
    let mut catalogue = Catalogue::empty_in_memory().unwrap();
    let first = [
        Record::Level(lower.clone()),
        Record::Level(upper.clone()),
        Record::Line(rated(&lower, &upper)),
    ];
    import(&mut catalogue, "invented-a", &first);
    import(
        &mut catalogue,
        "invented-b",
        &[Record::Level(other.clone())],
    );
    assert_eq!(
        made(&catalogue),
        [],
        "one source holds the one level, one the other"
    );
    // A third source holds both, and places the upper level of the listed line 0.6 cm⁻¹ off, too far
    // to join it: its line at that place would be the listed one again. So would one at 0.35 cm⁻¹
    // to a level without a name.
    let mut shifted = upper;
    shifted.energy_per_cm += 0.6;
    let mut nameless = shifted.clone();
    nameless.energy_per_cm -= 0.25;
    nameless.configuration = None;
    nameless.term = Some("2[1]o".to_owned());
    let third = [lower, other, shifted, nameless].map(Record::Level);
    import(&mut catalogue, "invented-c", &third);
    assert_eq!(made(&catalogue), [(0.0, 26_000.0)]);
}

#[test]
fn a_catalogue_of_an_older_rule_is_brought_up_to_date() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("catalogue.sqlite");
    std::fs::copy(common::catalogue(), &path).unwrap();
    let iron = Species::new(26, 2);
    let count = |path| lines(&Catalogue::open(path).unwrap(), iron).len();
    let before = count(&path);
    let file = rusqlite::Connection::open(&path).unwrap();
    file.execute("DELETE FROM line WHERE kind = 4", []).unwrap();
    file.execute(
        "UPDATE about SET value = 'an older one' WHERE name IN ('bundle', 'rule')",
        [],
    )
    .unwrap();
    drop(file);
    assert!(count(&path) < before);
    Catalogue::open_or_build(&path, &mut |_, _| {}).unwrap();
    assert_eq!(count(&path), before);
}
