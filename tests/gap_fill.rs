//! Gap fill in the catalogue: what the calculator adds, and what it must leave alone.

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    reason = "a panic in a test is its report"
)]

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::process::Command;
use std::sync::{Mutex, MutexGuard, OnceLock};

use importers::record::{LevelRecord, LineRecord, Place, Record};
use importers::source::SourceDescription;
use importers::{ReadReport, Sink};
use lineclear::calc::coulomb::{ComputedLevel, Setting, predict_series};
use lineclear::calc::one_electron::{Nucleus, levels, lines_between};
use lineclear::calc::series::LabelledLevel;
use lineclear::catalogue::{Catalogue, Incoming, SourceFiles};
use lineclear::{importers, vocabulary};
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::light::Air;
use vocabulary::light::constants::RYDBERG_PER_CM;
use vocabulary::spectrum::{Line, LineKind, PositionOrigin, RateOrigin};

const H: Species = Species::new(1, 1);
const D: Species = Species {
    isotope: Some(2),
    ..H
};
const HE_II: Species = Species::new(2, 2);

/// The bundled catalogue, built once.
fn bundled() -> MutexGuard<'static, Catalogue> {
    static CATALOGUE: OnceLock<Mutex<Catalogue>> = OnceLock::new();
    CATALOGUE
        .get_or_init(|| Mutex::new(Catalogue::bundled_in_memory(&mut |_, _| {}).unwrap()))
        .lock()
        .unwrap_or_else(std::sync::PoisonError::into_inner)
}

fn all_lines(catalogue: &Catalogue, species: Species) -> Vec<Line> {
    let levels = catalogue.levels(species).unwrap();
    catalogue.lines(species, &levels, 0.0, 1e12).unwrap()
}

fn label(line: &Line) -> Option<[(String, HalfInteger); 2]> {
    let end = |level: &Option<std::sync::Arc<vocabulary::spectrum::Level>>| {
        let level = level.as_ref()?;
        Some((level.configuration.as_deref()?.to_owned(), level.j?))
    };
    Some([end(&line.lower)?, end(&line.upper)?])
}

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
    assert!(from_tables > 70, "{from_tables}");
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
            // Means of one-electron lines fall away where their components are computed.
            if species.is_one_electron() && line.kind == LineKind::Mean {
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

#[test]
fn computed_levels_of_rubidium_are_those_of_the_calculator() {
    // 0.1 per cm: the scale that the table of the lowest levels declares, the widest of its sources.
    let setting = Setting::of(RUBIDIUM, 0.1).unwrap();
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
    let calculated: Vec<ComputedLevel> = predict_series(&labelled, &setting.calc(), 20)
        .into_iter()
        .flat_map(|series| series.levels)
        .collect();
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

/// Everything that is concluded of some species, in words.
fn dump(catalogue: &Catalogue, species: &[Species]) -> String {
    let mut out = String::new();
    for &species in species {
        let levels = catalogue.levels(species).unwrap();
        let lines = catalogue.lines(species, &levels, 0.0, 1e12).unwrap();
        let scopes = catalogue.scopes(species).unwrap();
        out.push_str(&format!("{levels:?}\n{lines:?}\n{scopes:?}\n"));
    }
    out
}

fn place(line: u64) -> Place {
    Place {
        file: "invented.csv".into(),
        line,
    }
}

/// An invented table of a level and a line of some species.
fn invented(species: Species, shell: &str, term: &str, energy_per_cm: f64) -> Vec<Record> {
    let level = |energy_per_cm: f64, configuration: &str, term: &str, twice_j| LevelRecord {
        species,
        energy_per_cm,
        energy_uncertainty_per_cm: 0.5,
        configuration: Some(configuration.to_owned()),
        term: Some(term.to_owned()),
        j: Some(HalfInteger::from_twice(twice_j)),
        g: None,
        computed: false,
        place: place(1),
    };
    let line = LineRecord {
        species,
        wavenumber_per_cm: Some(energy_per_cm),
        wavenumber_uncertainty_per_cm: Some(0.5),
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
    };
    vec![
        Record::Level(level(energy_per_cm, shell, term, 3)),
        Record::Line(line),
    ]
}

fn import(catalogue: &mut Catalogue, key: &str, records: &[Record]) {
    let text = format!(
        "key = \"{key}\"\ntitle = \"t\"\ncitation = \"invented\"\nlicence = \"CC0-1.0\"\n\
         kind = \"paper\"\n"
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

const RUBIDIUM: Species = Species::new(37, 1);

#[test]
fn order_twice_and_forget_leave_the_gap_fill_the_same() {
    let species = [H, RUBIDIUM];
    let mut catalogue = bundled();
    let before = dump(&catalogue, &species);
    let hydrogen = invented(H, "19p", "2Po", 109_374.8);
    let rubidium = invented(RUBIDIUM, "4p6 17p", "2Po", 33_170.3);
    import(&mut catalogue, "invented-a", &hydrogen);
    import(&mut catalogue, "invented-b", &rubidium);
    let one_way = dump(&catalogue, &species);
    assert_ne!(before, one_way);
    import(&mut catalogue, "invented-b", &rubidium);
    assert!(
        dump(&catalogue, &species) == one_way,
        "importing twice changed something"
    );
    catalogue.forget("invented-a").unwrap();
    catalogue.forget("invented-b").unwrap();
    assert!(
        dump(&catalogue, &species) == before,
        "forgetting left something behind"
    );
    import(&mut catalogue, "invented-b", &rubidium);
    import(&mut catalogue, "invented-a", &hydrogen);
    assert!(
        dump(&catalogue, &species) == one_way,
        "the order of imports matters"
    );
    catalogue.forget("invented-a").unwrap();
    catalogue.forget("invented-b").unwrap();
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

/// The catalogue file that the binary builds, once.
fn built() -> &'static Path {
    static PATH: OnceLock<PathBuf> = OnceLock::new();
    PATH.get_or_init(|| {
        let name = format!("gap-fill-{}.sqlite", std::process::id());
        let path = Path::new(env!("CARGO_TARGET_TMPDIR")).join(name);
        let run = run_on(&path, &["sources"]);
        assert!(
            run.status.success(),
            "{}",
            String::from_utf8_lossy(&run.stderr)
        );
        path
    })
}

fn run_on(catalogue: &Path, arguments: &[&str]) -> std::process::Output {
    Command::new(env!("CARGO_BIN_EXE_lineclear"))
        .args(arguments)
        .arg("--catalogue")
        .arg(catalogue)
        .output()
        .unwrap()
}

fn json(arguments: &[&str]) -> serde_json::Value {
    let mut all = arguments.to_vec();
    all.extend(["--as", "json"]);
    let run = run_on(built(), &all);
    assert!(
        run.status.success(),
        "{}",
        String::from_utf8_lossy(&run.stderr)
    );
    serde_json::from_slice(&run.stdout).unwrap()
}

#[test]
fn window_rates_both_balmer_alphas() {
    let answer = json(&[
        "window",
        "656..657nm",
        "--of",
        "H,D",
        "--fwhm",
        "0.05nm",
        "--te",
        "3eV",
    ]);
    assert_eq!(answer["lines"].as_array().unwrap().len(), 14);
    let features = answer["features"].as_array().unwrap();
    assert_eq!(features.len(), 2);
    for feature in features {
        assert_eq!(feature["verdict"], "clear", "{feature}");
    }
    assert!(answer["unrated"].as_array().unwrap().is_empty());
    let helium = json(&["window", "468.4..468.7nm", "--of", "He II"]);
    assert_eq!(helium["lines"].as_array().unwrap().len(), 13);
}

#[test]
fn the_catalogue_keeps_within_its_size() {
    let size = std::fs::metadata(built()).unwrap().len();
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
