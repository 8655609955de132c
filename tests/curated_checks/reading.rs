//! The importers read every curated source as it is described, row for row.

use super::support::{Ion, ions};
use lineclear::importers::record::{LevelEnd, LineRecord, Record};
use lineclear::importers::source::{Completeness, SourceDescription, SourceKind};
use lineclear::importers::{ReadOptions, read_source};
use lineclear::vocabulary::spectrum::{LineKind, RateOrigin};
use std::fs::File;
use std::io::Read;

/// The description of an ion and its records.
fn read(ion: &Ion) -> (SourceDescription, Vec<Record>) {
    let text = std::fs::read_to_string(ion.folder.join("source.toml")).unwrap();
    let description = SourceDescription::parse(&text, "source.toml")
        .unwrap_or_else(|e| panic!("{}: {e}", ion.species));
    let mut records: Vec<Record> = Vec::new();
    let mut open = |name: &str| Ok(Box::new(File::open(ion.folder.join(name))?) as Box<dyn Read>);
    let report = read_source(
        &description,
        &mut open,
        &ReadOptions::default(),
        &mut records,
    )
    .unwrap_or_else(|e| panic!("{}: {e}", ion.species));
    assert!(
        report.refused.is_empty() && report.skipped.is_empty(),
        "{} {report:?}",
        ion.species
    );
    // The only thing worth a warning: remembered air wavelengths of 200-300 and above 1690 nm.
    let air = |text: &String| text.contains("index of air is extrapolated");
    assert!(
        report.warnings.iter().all(air),
        "{} {report:?}",
        ion.species
    );
    (description, records)
}

#[test]
fn importers_read_all_curated_sources() {
    let (mut levels, mut lines, mut scopes) = (0, 0, 0);
    for ion in ions() {
        let (description, records) = read(ion);
        assert_eq!(description.kind, SourceKind::Curated);
        assert!(
            description
                .scope
                .iter()
                .all(|s| s.completeness == Completeness::Strong)
        );
        scopes += description.scope.len();
        let read: Vec<&LineRecord> = records
            .iter()
            .filter_map(|record| match record {
                Record::Line(line) => Some(line),
                Record::Level(_) => None,
            })
            .collect();
        assert_eq!(
            (records.len() - read.len(), read.len()),
            (ion.levels.len(), ion.lines.len()),
            "{}",
            ion.species
        );
        levels += ion.levels.len();
        lines += read.len();
        for (record, line) in read.iter().zip(&ion.lines) {
            assert_eq!(record.rate_per_s, line.rate_per_s, "{}", ion.species);
            assert_eq!(
                record.kind == LineKind::Blend,
                line.kind == "blend",
                "{}",
                ion.species
            );
            assert_eq!(
                record.rate_origin == Some(RateOrigin::Derived),
                line.rate_origin == "derived",
                "{}",
                ion.species
            );
            let end = |end: &Option<LevelEnd>| end.as_ref().unwrap().energy_per_cm.unwrap();
            assert_eq!(
                end(&record.lower),
                ion.level(&line.lower).unwrap().energy_per_cm,
                "{}",
                ion.species
            );
            assert_eq!(
                end(&record.upper),
                ion.level(&line.upper).unwrap().energy_per_cm,
                "{}",
                ion.species
            );
        }
    }
    println!("{levels} levels, {lines} lines, {scopes} scopes");
    assert!(levels >= 2900 && lines >= 4614 && scopes >= 80);
}
