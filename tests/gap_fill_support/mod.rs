//! Reading the catalogue and importing invented records, for the tests of the gap fill.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]
#![allow(dead_code, reason = "each test file uses a part")]

#[path = "../common/mod.rs"]
pub mod common;

use importers::record::{LevelRecord, LineRecord, Place, Record};
use importers::source::SourceDescription;
use importers::{ReadReport, Sink};
use lineclear::catalogue::{Catalogue, Incoming};
use lineclear::{importers, vocabulary};
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::spectrum::{Line, LineKind, RateOrigin};

pub const H: Species = Species::new(1, 1);
pub const D: Species = Species {
    isotope: Some(2),
    ..H
};
pub const HE_II: Species = Species::new(2, 2);
pub const RUBIDIUM: Species = Species::new(37, 1);

/// The catalogue that the binary built of the bundled tables.
pub fn bundled() -> Catalogue {
    Catalogue::open(common::catalogue()).unwrap()
}

/// The same as a file of its own, to be changed; the folder goes when it is dropped.
pub fn copy() -> (tempfile::TempDir, Catalogue) {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("catalogue.sqlite");
    std::fs::copy(common::catalogue(), &path).unwrap();
    let catalogue = Catalogue::open(&path).unwrap();
    (folder, catalogue)
}

pub fn all_lines(catalogue: &Catalogue, species: Species) -> Vec<Line> {
    let levels = catalogue.levels(species).unwrap();
    catalogue.lines(species, &levels, 0.0, 1e12).unwrap()
}

pub fn label(line: &Line) -> Option<[(String, HalfInteger); 2]> {
    let end = |level: &Option<std::sync::Arc<vocabulary::spectrum::Level>>| {
        let level = level.as_ref()?;
        Some((level.configuration.as_deref()?.to_owned(), level.j?))
    };
    Some([end(&line.lower)?, end(&line.upper)?])
}

/// Everything that is concluded of some species, in words.
pub fn dump(catalogue: &Catalogue, species: &[Species]) -> String {
    let mut out = String::new();
    for &species in species {
        let levels = catalogue.levels(species).unwrap();
        let lines = catalogue.lines(species, &levels, 0.0, 1e12).unwrap();
        let scopes = catalogue.scopes(species).unwrap();
        out.push_str(&format!("{levels:?}\n{lines:?}\n{scopes:?}\n"));
    }
    out
}

/// A level as an invented table reports it.
pub fn level_record(
    species: Species,
    (configuration, term, twice_j): (&str, &str, u16),
    energy_per_cm: f64,
    sigma_per_cm: f64,
) -> LevelRecord {
    LevelRecord {
        species,
        energy_per_cm,
        energy_uncertainty_per_cm: sigma_per_cm,
        configuration: Some(configuration.to_owned()),
        term: Some(term.to_owned()),
        j: Some(HalfInteger::from_twice(twice_j)),
        g: None,
        computed: false,
        place: place(1),
    }
}

/// A line without levels as an invented table reports it.
pub fn line_record(species: Species, wavenumber_per_cm: f64, sigma_per_cm: f64) -> LineRecord {
    LineRecord {
        species,
        wavenumber_per_cm: Some(wavenumber_per_cm),
        wavenumber_uncertainty_per_cm: Some(sigma_per_cm),
        from_levels: false,
        lower: None,
        upper: None,
        rate_per_s: Some(1e3),
        rate_relative_uncertainty: Some(0.1),
        rate_origin: Some(RateOrigin::Published),
        intensity: None,
        kind: LineKind::Line,
        computed: false,
        place: place(2),
    }
}

fn place(line: u64) -> Place {
    Place {
        file: "invented.csv".into(),
        line,
    }
}

/// Imports records as a paper whose levels have an uncertain scale.
pub fn import_scaled(catalogue: &mut Catalogue, key: &str, scale_per_cm: f64, records: &[Record]) {
    let text = format!(
        "key = \"{key}\"\ntitle = \"t\"\ncitation = \"invented\"\nlicence = \"CC0-1.0\"\n\
         kind = \"paper\"\nlevel_scale_uncertainty_per_cm = {scale_per_cm:?}\n"
    );
    let description = SourceDescription::parse(&text, "invented").unwrap();
    let incoming = Incoming {
        description: &description,
        checksum: "invented",
        bundled: false,
    };
    let feed = |sink: &mut dyn Sink| {
        let mut report = ReadReport::default();
        for record in records {
            sink.accept(record.clone())
                .map_err(importers::ImportError::Sink)?;
            report.read += 1;
            report.records += 1;
        }
        Ok(report)
    };
    catalogue.import(&incoming, feed, false).unwrap();
}

/// Imports records as a paper.
pub fn import(catalogue: &mut Catalogue, key: &str, records: &[Record]) {
    import_scaled(catalogue, key, 0.0, records);
}
