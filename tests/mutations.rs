//! Seeded mutations: a copy of a bundled table is damaged in one way, and `audit` or `contrast`
//! must name just that; they must say nothing of the copy as it is.
//!
//! The catalogues are small: four species of Morton 2003 (ApJS 149, 205), the tables entered by
//! hand for them, and the specimen, which is Morton's table under another key.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

use std::fs::File;
use std::path::{Path, PathBuf};
use std::sync::OnceLock;

use lineclear::advise::audit::{Audit, Finding, KnownFindings, Rule, audit};
use lineclear::advise::contrast::{Contrast, Trend, contrast};
use lineclear::catalogue::{Catalogue, Incoming};
use lineclear::importers::record::{LevelEnd, LineRecord, Record};
use lineclear::importers::source::SourceDescription;
use lineclear::importers::{self, ReadOptions, ReadReport, Sink, read_source};
use lineclear::vocabulary::atom::{HalfInteger, Species};
use lineclear::vocabulary::light::Air;

const SPECIMEN: &str = "specimen";
const ORIGINAL: &str = "morton2003";
const NA_I: Species = Species::new(11, 1);
const MG_I: Species = Species::new(12, 1);
const SI_II: Species = Species::new(14, 2);
const FE_I: Species = Species::new(26, 1);
const HELD: [Species; 4] = [NA_I, MG_I, SI_II, FE_I];

fn data() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("data")
}

type Source = (SourceDescription, Vec<Record>);

/// The sources that stand beside the specimen.
const WITNESSES: [&str; 5] = [
    ORIGINAL,
    "curated-na-i",
    "curated-mg-i",
    "curated-si-ii",
    "curated-fe-i",
];

/// Records of the witnesses, of the species held here; read once.
fn witnesses() -> &'static [Source] {
    static READ: OnceLock<Vec<Source>> = OnceLock::new();
    READ.get_or_init(|| WITNESSES.iter().map(|key| records(key)).collect())
}

fn records(key: &str) -> Source {
    let folder = data().join(key);
    let text = std::fs::read_to_string(folder.join("source.toml")).unwrap();
    let description = SourceDescription::parse(&text, key).unwrap();
    let mut open = |file: &str| -> std::io::Result<Box<dyn std::io::Read>> {
        Ok(Box::new(File::open(folder.join(file))?))
    };
    let mut records: Vec<Record> = Vec::new();
    read_source(
        &description,
        &mut open,
        &ReadOptions::default(),
        &mut records,
    )
    .unwrap();
    records.retain(|record| HELD.contains(&species_of(record)));
    (description, records)
}

fn species_of(record: &Record) -> Species {
    match record {
        Record::Level(level) => level.species,
        Record::Line(line) => line.species,
    }
}

fn import(catalogue: &mut Catalogue, description: &SourceDescription, records: &[Record]) {
    let incoming = Incoming {
        description,
        checksum: &description.key,
        bundled: false,
    };
    let feed = |sink: &mut dyn Sink| {
        for record in records {
            sink.accept(record.clone())
                .map_err(importers::ImportError::Sink)?;
        }
        let count = records.len() as u64;
        Ok(ReadReport {
            read: count,
            records: count,
            ..ReadReport::default()
        })
    };
    catalogue.import(&incoming, feed, false).unwrap();
}

/// What is found in a catalogue with the specimen in it, known findings of the others left out.
struct Found {
    findings: Vec<Finding>,
    contrast: Contrast,
}

fn examine(mutate: impl FnOnce(&mut Vec<Record>)) -> Found {
    let mut catalogue = Catalogue::empty_in_memory().unwrap();
    for (description, records) in witnesses() {
        import(&mut catalogue, description, records);
    }
    let (mut description, mut specimen) = witnesses()[0].clone();
    description.key = SPECIMEN.to_owned();
    mutate(&mut specimen);
    import(&mut catalogue, &description, &specimen);
    let species = catalogue.species().unwrap();
    let reports = catalogue.reports(&species).unwrap();
    let Audit { mut findings, .. } = audit(&reports, &[]);
    let text = std::fs::read_to_string(data().join("known_findings.toml")).unwrap();
    let known = KnownFindings::parse(&text).unwrap();
    findings.retain(|f| known.of(f).is_none());
    Found {
        findings,
        contrast: contrast(&reports, ORIGINAL, SPECIMEN),
    }
}

impl Found {
    /// All findings are about the specimen and of these rules, and each rule is there.
    #[track_caller]
    fn names_only(&self, rules: &[Rule]) {
        for rule in rules {
            assert!(
                self.of(*rule).next().is_some(),
                "{rule} is missing: {:#?}",
                self.findings
            );
        }
        for finding in &self.findings {
            assert!(rules.contains(&finding.rule), "{finding:#?}");
            assert_eq!(finding.source, SPECIMEN, "{finding:#?}");
        }
    }

    fn of(&self, rule: Rule) -> impl Iterator<Item = &Finding> {
        self.findings.iter().filter(move |f| f.rule == rule)
    }
}

fn lines(records: &mut [Record]) -> impl Iterator<Item = &mut LineRecord> {
    records.iter_mut().filter_map(|record| match record {
        Record::Line(line) => Some(line),
        Record::Level(_) => None,
    })
}

/// What a wavelength in air becomes where it is taken for one in vacuum: σ n, cm⁻¹.
fn air_as_vacuum(wavenumber_per_cm: f64) -> f64 {
    match Air::standard().index(1e7 / wavenumber_per_cm) {
        Ok(at) if wavenumber_per_cm < 5e4 => wavenumber_per_cm * at.index,
        _ => wavenumber_per_cm,
    }
}

#[test]
fn nothing_is_said_of_the_unchanged_data() {
    let found = examine(|_| ());
    assert_eq!(found.findings, []);
    assert_eq!(found.contrast.trend, Trend::None);
    let total = &found.contrast.total;
    assert!(total.both > 400, "{total:?}");
    assert_eq!((total.only_first, total.only_second), (0, 0));
    assert_eq!((total.beyond_three_sigma, total.beyond_quarter), (0, 0));
    assert!(found.contrast.worst_positions.is_empty() && found.contrast.worst_rates.is_empty());
}

#[test]
fn a_source_shifted_to_air_is_named_in_words() {
    let found = examine(|records| {
        for line in lines(records) {
            line.wavenumber_per_cm = line.wavenumber_per_cm.map(air_as_vacuum);
        }
    });
    found.names_only(&[Rule::AirAsVacuum]);
    for species in HELD.into_iter().filter(|s| *s != SI_II) {
        let of: Vec<&Finding> = found
            .findings
            .iter()
            .filter(|f| f.species == species)
            .collect();
        assert_eq!(of.len(), 1, "{species}: {of:?}");
        assert!(
            of[0].advice.contains("in air: declare the column as air"),
            "{}",
            of[0].advice
        );
        // The whole shift, to what the printed digits allow.
        assert!((of[0].size - 1.0).abs() < 0.02, "{}", of[0].size);
    }
    assert_eq!(found.contrast.trend, Trend::SecondInAir);
}

#[test]
fn a_source_shifted_to_vacuum_is_named_as_well() {
    let found = examine(|records| {
        for line in lines(records) {
            line.wavenumber_per_cm = line.wavenumber_per_cm.map(|w| w * w / air_as_vacuum(w));
        }
    });
    found.names_only(&[Rule::VacuumAsAir]);
    assert_eq!(found.contrast.trend, Trend::FirstInAir);
}

#[test]
fn a_list_of_lines_without_levels_shifted_to_air_is_named() {
    let found = examine(|records| {
        records.retain(|r| matches!(r, Record::Line(_)) && species_of(r) == FE_I);
        for line in lines(records) {
            line.wavenumber_per_cm = line.wavenumber_per_cm.map(air_as_vacuum);
            (line.lower, line.upper) = (None, None);
        }
    });
    found.names_only(&[Rule::AirAsVacuum]);
    assert!(
        found.findings[0]
            .advice
            .contains("declare the column as air")
    );
    assert_eq!(found.contrast.trend, Trend::SecondInAir);
}

#[test]
fn rates_scaled_by_three_are_named() {
    let found = examine(|records| {
        for line in lines(records) {
            line.rate_per_s = line.rate_per_s.map(|rate| 3.0 * rate);
        }
    });
    found.names_only(&[Rule::RateScale]);
    for finding in &found.findings {
        // The curated tables, the other witness, agree with Morton's to some per cent.
        assert!((finding.size - 3.0).abs() < 0.15, "{finding:?}");
    }
    let species: Vec<Species> = found.findings.iter().map(|f| f.species).collect();
    assert!(
        species.contains(&FE_I) && species.contains(&MG_I),
        "{species:?}"
    );
    let total = &found.contrast.total;
    assert!((total.rate_ratio.unwrap() - 3.0).abs() < 1e-9, "{total:?}");
    assert_eq!(total.beyond_quarter, total.rated);
    assert!(
        found
            .contrast
            .decades
            .iter()
            .all(|d| (d.rate_ratio - 3.0).abs() < 1e-9)
    );
    assert_eq!(found.contrast.worst_rates.len(), 10);
}

#[test]
fn rates_converted_with_the_wrong_weight_are_named() {
    let found = examine(|records| {
        for line in lines(records) {
            let weight = |end: &Option<LevelEnd>| end.as_ref().unwrap().j.map(|j| j.weight());
            let weights = weight(&line.upper).zip(weight(&line.lower));
            line.rate_per_s = line.rate_per_s.zip(weights).map(|(r, (u, l))| r * u / l);
        }
    });
    let of_iron: Vec<Rule> = found
        .findings
        .iter()
        .filter(|f| f.species == FE_I)
        .map(|f| f.rule)
        .collect();
    assert_eq!(of_iron, [Rule::WeightFactor], "{:#?}", found.findings);
    assert!(
        found.findings.iter().all(|f| f.source == SPECIMEN),
        "{:#?}",
        found.findings
    );
}

/// The energies of Fe I z 5Do J = 3 and J = 2, as Morton prints them.
const SWAPPED: [(f64, u16); 2] = [(26140.177, 6), (26339.694, 4)];

#[test]
fn two_swapped_j_are_named() {
    let other = |energy: f64| {
        let at = SWAPPED.iter().position(|(e, _)| *e == energy)?;
        Some(HalfInteger::from_twice(SWAPPED[1 - at].1))
    };
    let mut changed = 0;
    let found = examine(|records| {
        for record in records.iter_mut().filter(|r| species_of(r) == FE_I) {
            match record {
                Record::Level(level) => {
                    if let Some(j) = other(level.energy_per_cm) {
                        (level.j, level.g) = (Some(j), Some(j.weight()));
                        changed += 1;
                    }
                }
                Record::Line(line) => {
                    for end in [&mut line.lower, &mut line.upper].into_iter().flatten() {
                        if let Some(j) = end.energy_per_cm.and_then(other) {
                            (end.j, end.g) = (Some(j), Some(j.weight()));
                        }
                    }
                }
            }
        }
    });
    assert_eq!(changed, 2);
    found.names_only(&[Rule::JDiffers, Rule::DeltaJ]);
    let places: Vec<&str> = found
        .of(Rule::JDiffers)
        .map(|f| f.place.subject.as_str())
        .collect();
    assert_eq!(
        places,
        ["Fe I level 26140.177 J=2", "Fe I level 26339.694 J=3"]
    );
}

/// Moves one level by 1 cm⁻¹, in the table of levels, and in the lines where asked.
fn shift(records: &mut [Record], species: Species, energy_per_cm: f64, lines_too: bool) {
    let mut changed = 0;
    for record in records.iter_mut().filter(|r| species_of(r) == species) {
        match record {
            Record::Level(level) if level.energy_per_cm == energy_per_cm => {
                level.energy_per_cm += 1.0;
                changed += 1;
            }
            Record::Line(line) if lines_too => {
                for end in [&mut line.lower, &mut line.upper].into_iter().flatten() {
                    if end.energy_per_cm == Some(energy_per_cm) {
                        end.energy_per_cm = Some(energy_per_cm + 1.0);
                    }
                }
            }
            _ => (),
        }
    }
    assert_eq!(changed, 1, "{species} {energy_per_cm}");
}

#[test]
fn one_level_shifted_by_one_wavenumber_is_named() {
    let found = examine(|records| shift(records, FE_I, 26140.177, true));
    found.names_only(&[Rule::LevelOff, Rule::LevelDiffers]);
    for (rule, size) in [(Rule::LevelOff, -1.0), (Rule::LevelDiffers, 1.0)] {
        let of: Vec<&Finding> = found.of(rule).collect();
        assert_eq!(of.len(), 1, "{of:?}");
        assert_eq!(of[0].place.subject, "Fe I level 26141.177 J=3");
        // Morton's wavelengths are printed to 1e-5 nm: 0.005 cm⁻¹ here.
        assert!((of[0].size - size).abs() < 0.01, "{of:?}");
    }
}

#[test]
fn a_level_shifted_in_its_own_table_only_is_named() {
    let found = examine(|records| shift(records, FE_I, 26140.177, false));
    assert!(
        found.findings.iter().all(|f| f.source == SPECIMEN),
        "{:#?}",
        found.findings
    );
    let unlisted: Vec<&Finding> = found.of(Rule::LevelUnlisted).collect();
    assert_eq!(unlisted.len(), 1, "{:#?}", found.findings);
    assert_eq!(unlisted[0].place.subject, "Fe I level 26140.177 J=3");
    assert!((unlisted[0].size + 1.0).abs() < 1e-6);
}

#[test]
fn every_excited_level_shifted_by_one_wavenumber_is_named() {
    let (_, records) = &witnesses()[0];
    let mut shifted = 0;
    for level in records.iter().filter_map(|r| match r {
        Record::Level(l) if l.species == MG_I && l.energy_per_cm > 0.0 => Some(l),
        _ => None,
    }) {
        let found = examine(|records| shift(records, MG_I, level.energy_per_cm, true));
        let place = format!("Mg I level {} ", level.energy_per_cm + 1.0);
        // Where the level has one line, the line is what can be named.
        let named = |f: &Finding| {
            f.source == SPECIMEN
                && (f.place.subject.starts_with(&place) || f.rule == Rule::RitzMisfit)
        };
        assert!(
            found.findings.iter().any(named),
            "{level:?}: {:#?}",
            found.findings
        );
        shifted += 1;
    }
    assert!(shifted >= 10, "{shifted}");
}

/// Gives the specimen's rows of one species the name of another.
fn relabel(records: &mut Vec<Record>, from: Species, to: Species) {
    records.retain(|r| species_of(r) != to);
    for record in records.iter_mut() {
        match record {
            Record::Level(level) if level.species == from => level.species = to,
            Record::Line(line) if line.species == from => line.species = to,
            _ => (),
        }
    }
}

#[test]
fn a_species_under_the_name_of_another_is_named() {
    // One that others hold, and one that nobody holds.
    for to in [NA_I, Species::new(39, 3)] {
        let found = examine(|records| relabel(records, MG_I, to));
        found.names_only(&[Rule::Species]);
        assert_eq!(found.findings.len(), 1, "{:#?}", found.findings);
        assert_eq!(found.findings[0].species, to);
        let advice = &found.findings[0].advice;
        assert!(advice.contains("fall on lines of Mg I"), "{advice}");
    }
}

#[test]
fn energies_in_another_unit_are_named() {
    let found = examine(|records| {
        records.retain(|r| species_of(r) == MG_I);
        for record in records.iter_mut() {
            let scale = |energy: &mut f64| *energy /= 8_065.543_94;
            match record {
                Record::Level(level) => {
                    scale(&mut level.energy_per_cm);
                    scale(&mut level.energy_uncertainty_per_cm);
                }
                Record::Line(line) => {
                    for end in [&mut line.lower, &mut line.upper].into_iter().flatten() {
                        end.energy_per_cm.as_mut().map(scale);
                        end.energy_uncertainty_per_cm.as_mut().map(scale);
                    }
                }
            }
        }
    });
    let units: Vec<&Finding> = found.of(Rule::EnergyUnit).collect();
    assert!(!units.is_empty(), "{:#?}", found.findings);
    assert!(
        units.iter().all(|f| f.advice.contains("eV taken for cm-1")),
        "{units:#?}"
    );
    assert!(
        found.findings.iter().all(|f| f.source == SPECIMEN),
        "{:#?}",
        found.findings
    );
}
