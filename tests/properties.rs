//! Properties of the catalogue that must hold whatever the tables say.
//!
//! * order: the catalogue does not depend on the order of imports;
//! * twice: importing the same source again changes nothing;
//! * forget: taking a source out leaves the catalogue that never saw it.
//!
//! Failing seeds are kept by proptest beside this file.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

use std::sync::Arc;

use importers::record::{LevelEnd, LevelRecord, LineRecord, Place, Record};
use importers::source::SourceDescription;
use importers::{ReadReport, Sink};
use lineclear::catalogue::{Catalogue, Incoming};
use lineclear::{importers, vocabulary};
use proptest::prelude::*;
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::spectrum::{LineKind, RateOrigin};

/// A small table: levels and lines of one or two species.
#[derive(Clone, Debug)]
struct Table {
    key: String,
    kind: &'static str,
    scale: f64,
    levels: Vec<LevelRecord>,
    lines: Vec<LineRecord>,
}

fn place(line: u64) -> Place {
    Place {
        file: Arc::from("invented.csv"),
        line,
    }
}

/// Energies near a few true ones, so that sources agree, nearly agree and disagree.
fn level() -> impl Strategy<Value = LevelRecord> {
    let energy = (0usize..6, -3.0f64..3.0);
    (energy, 0u8..2, 0u16..3, prop::option::of(0usize..3), 1u8..3).prop_map(
        |((which, shift), stage, j, label, sigma)| {
            let energy = [0.0, 1000.0, 1000.2, 20_000.0, 20_000.05, 30_000.0][which];
            let term = label.map(|l| ["2S", "2Po", "2D"][l].to_owned());
            LevelRecord {
                species: Species::new(11, stage + 1),
                energy_per_cm: if which == 0 {
                    0.0
                } else {
                    energy + 0.02 * shift.round()
                },
                energy_uncertainty_per_cm: 0.01 * f64::from(sigma),
                configuration: term.as_ref().map(|_| "3p".to_owned()),
                term,
                j: Some(HalfInteger::from_twice(2 * j + 1)),
                g: None,
                computed: false,
                place: place(1),
            }
        },
    )
}

fn end(level: &LevelRecord) -> LevelEnd {
    LevelEnd {
        energy_per_cm: Some(level.energy_per_cm),
        energy_uncertainty_per_cm: None,
        configuration: level.configuration.clone(),
        term: level.term.clone(),
        j: level.j,
        g: None,
    }
}

fn line(
    levels: &[LevelRecord],
    a: usize,
    b: usize,
    rate: Option<f64>,
    loose: bool,
) -> Option<LineRecord> {
    let (a, b) = (&levels[a % levels.len()], &levels[b % levels.len()]);
    let difference = b.energy_per_cm - a.energy_per_cm;
    (a.species == b.species && difference > 1.0).then(|| LineRecord {
        species: a.species,
        wavenumber_per_cm: Some(difference + 0.003),
        wavenumber_uncertainty_per_cm: Some(0.02),
        from_levels: false,
        lower: (!loose).then(|| end(a)),
        upper: (!loose).then(|| end(b)),
        rate_per_s: rate,
        rate_relative_uncertainty: rate.map(|_| 0.1),
        rate_origin: rate.map(|_| RateOrigin::Published),
        intensity: None,
        kind: LineKind::Line,
        computed: false,
        place: place(2),
    })
}

fn table(index: usize) -> impl Strategy<Value = Table> {
    let levels = prop::collection::vec(level(), 2..8);
    let pick = (
        0usize..8,
        0usize..8,
        prop::option::of(1e6..1e9),
        any::<bool>(),
    );
    (levels, prop::collection::vec(pick, 0..8), 0usize..3, 0u8..3).prop_map(
        move |(levels, picks, kind, scale)| {
            let lines = picks
                .into_iter()
                .filter_map(|(a, b, rate, loose)| line(&levels, a, b, rate, loose))
                .collect();
            Table {
                key: format!("invented-{index}"),
                kind: ["paper", "curated", "model"][kind],
                scale: 0.05 * f64::from(scale),
                levels,
                lines,
            }
        },
    )
}

fn import(catalogue: &mut Catalogue, table: &Table) -> bool {
    let text = format!(
        "key = \"{}\"\ntitle = \"t\"\ncitation = \"invented\"\nlicence = \"CC0-1.0\"\n\
         kind = \"{}\"\nlevel_scale_uncertainty_per_cm = {:?}\n",
        table.key, table.kind, table.scale
    );
    let description = SourceDescription::parse(&text, "invented").unwrap();
    let incoming = Incoming {
        description: &description,
        checksum: "invented",
        bundled: false,
    };
    let feed = |sink: &mut dyn Sink| {
        let mut report = ReadReport::default();
        let records = (table.levels.iter().cloned().map(Record::Level))
            .chain(table.lines.iter().cloned().map(Record::Line));
        for record in records {
            sink.accept(record).map_err(importers::ImportError::Sink)?;
            report.read += 1;
            report.records += 1;
        }
        Ok(report)
    };
    let summary = catalogue.import(&incoming, feed, false).unwrap();
    assert_eq!(
        summary.read,
        if summary.unchanged {
            summary.read
        } else {
            summary.kept + summary.merged
        }
    );
    summary.unchanged
}

/// Everything that is concluded, in words.
fn dump(catalogue: &Catalogue) -> String {
    let mut out = String::new();
    for species in catalogue.species().unwrap() {
        let levels = catalogue.levels(species).unwrap();
        let lines = catalogue.lines(species, &levels, 0.0, 1e9).unwrap();
        out.push_str(&format!("{levels:#?}\n{lines:#?}\n"));
    }
    out
}

fn catalogue_of(tables: &[&Table]) -> Catalogue {
    let mut catalogue = Catalogue::empty_in_memory().unwrap();
    for table in tables {
        import(&mut catalogue, table);
    }
    catalogue
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]

    #[test]
    fn order_of_imports_does_not_matter((a, b, c) in (table(0), table(1), table(2))) {
        let first = dump(&catalogue_of(&[&a, &b, &c]));
        prop_assert_eq!(&first, &dump(&catalogue_of(&[&c, &a, &b])));
        prop_assert_eq!(&first, &dump(&catalogue_of(&[&b, &c, &a])));
    }

    #[test]
    fn importing_twice_changes_nothing((a, b) in (table(0), table(1))) {
        let mut catalogue = catalogue_of(&[&a, &b]);
        let before = dump(&catalogue);
        prop_assert!(import(&mut catalogue, &a));
        prop_assert_eq!(before, dump(&catalogue));
    }

    #[test]
    fn forget_leaves_what_never_saw_the_source((a, b, c) in (table(0), table(1), table(2))) {
        let mut catalogue = catalogue_of(&[&a, &b, &c]);
        catalogue.forget("invented-1").unwrap();
        prop_assert_eq!(dump(&catalogue), dump(&catalogue_of(&[&a, &c])));
        prop_assert_eq!(catalogue.sources().unwrap().len(), 2);
    }
}
