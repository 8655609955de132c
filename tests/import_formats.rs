//! Reading tables through their descriptions: the bundled sources, and what goes wrong with bad
//! files. Records are collected in memory; no catalogue is involved.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

use std::fs::File;
use std::io::{self, Cursor, Read};
use std::path::{Path, PathBuf};

use importers::record::{LevelRecord, LineRecord, Record};
use importers::source::SourceDescription;
use importers::{ImportError, ReadOptions, ReadReport, read_source};
use lineclear::vocabulary::spectrum::RateOrigin;

fn bundled() -> Vec<PathBuf> {
    let data = Path::new(env!("CARGO_MANIFEST_DIR")).join("data");
    let mut sources: Vec<PathBuf> = std::fs::read_dir(data)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|folder| {
            let text = std::fs::read_to_string(folder.join("source.toml"));
            text.is_ok_and(|text| text.contains("records = "))
        })
        .collect();
    sources.sort();
    sources
}

fn read_folder(folder: &Path) -> (SourceDescription, ReadReport, Vec<Record>) {
    let text = std::fs::read_to_string(folder.join("source.toml")).unwrap();
    let description = SourceDescription::parse(&text, &folder.display().to_string())
        .unwrap_or_else(|error| panic!("{error}"));
    let mut records = Vec::new();
    let mut open =
        |file: &str| -> io::Result<Box<dyn Read>> { Ok(Box::new(File::open(folder.join(file))?)) };
    let report = read_source(
        &description,
        &mut open,
        &ReadOptions::default(),
        &mut records,
    )
    .unwrap_or_else(|error| panic!("{}: {error}", folder.display()));
    (description, report, records)
}

#[test]
fn every_bundled_source_reads_without_a_refusal() {
    let sources = bundled();
    assert!(sources.len() > 100, "{}", sources.len());
    for folder in sources {
        let (description, report, records) = read_folder(&folder);
        let stated: u64 = description.table.iter().filter_map(|t| t.rows).sum();
        assert_eq!(report.read, stated, "{}", description.key);
        assert_eq!(report.records, records.len() as u64, "{}", description.key);
        assert!(report.refused.is_empty());
        for warning in &report.warnings {
            assert!(
                warning.contains("wavelengths in air"),
                "{}: {warning}",
                description.key
            );
        }
    }
}

/// Reads one table held in memory, described by `toml` without the source's own keys.
fn read_text(
    toml: &str,
    table: &str,
    skip_bad: usize,
) -> Result<(ReadReport, Vec<Record>), ImportError> {
    let text = format!(
        "key = \"harrow\"\ntitle = \"Invented table\"\ncitation = \"Harrow Bay bench, invented\"\nlicence = \"CC0-1.0\"\nkind = \"paper\"\n{toml}"
    );
    let description =
        SourceDescription::parse(&text, "source.toml").unwrap_or_else(|error| panic!("{error}"));
    let bytes = table.as_bytes().to_vec();
    let mut open =
        |_: &str| -> io::Result<Box<dyn Read>> { Ok(Box::new(Cursor::new(bytes.clone()))) };
    let options = ReadOptions {
        skip_bad,
        ..ReadOptions::default()
    };
    let mut records = Vec::new();
    let report = read_source(&description, &mut open, &options, &mut records)?;
    Ok((report, records))
}

fn line(record: &Record) -> &LineRecord {
    match record {
        Record::Line(line) => line,
        Record::Level(level) => panic!("a level: {level:?}"),
    }
}

fn level(record: &Record) -> &LevelRecord {
    match record {
        Record::Level(level) => level,
        Record::Line(line) => panic!("a line: {line:?}"),
    }
}

const LINES: &str = r#"
[[table]]
file = "lines.csv"
records = "lines"
[table.columns]
species = { column = "species" }
wavelength = { column = "nm", unit = "nm", medium = { column = "medium" } }
lower_energy = { column = "lower", unit = "cm-1" }
lower_j = { column = "jl" }
upper_energy = { column = "upper", unit = "cm-1" }
upper_j = { column = "ju" }
rate = { column = "a", unit = "s-1" }
"#;
const HEADER: &str = "species,nm,medium,lower,jl,upper,ju,a\n";

/// Na D2 in air, 588.995095 nm, between 0 and 16973.366 cm⁻¹, A = 6.16e7 s⁻¹ (common practice).
const SODIUM: &str = "Na I,588.995095,air,0,1/2,16973.366,1.5,6.16e7\n";

#[test]
fn an_air_wavelength_becomes_the_vacuum_wavenumber_of_its_levels() {
    let (_, records) = read_text(LINES, &format!("{HEADER}{SODIUM}"), 0).unwrap();
    let line = line(&records[0]);
    let wavenumber = line.wavenumber_per_cm.unwrap();
    // The printed levels are good to 0.001 cm⁻¹, the wavelength to 1e-6 nm = 3e-5 cm⁻¹.
    assert!((wavenumber - 16_973.366).abs() < 0.003, "{wavenumber}");
    // One unit of the last digit: 1e-6 nm / 588.995 nm of the wavenumber.
    let sigma = line.wavenumber_uncertainty_per_cm.unwrap();
    assert!(
        (sigma / (wavenumber * 1e-6 / 588.995_095) - 1.0).abs() < 1e-9,
        "{sigma}"
    );
    assert_eq!(line.rate_per_s, Some(6.16e7));
    assert_eq!(line.rate_relative_uncertainty, None);
    assert_eq!(line.place.line, 2);
}

fn refusal(table: &str) -> String {
    match read_text(LINES, &format!("{HEADER}{table}"), 0) {
        Err(ImportError::BadRow(refusal)) => refusal.to_string(),
        Err(other) => other.to_string(),
        Ok((report, _)) => panic!("accepted: {report:?}"),
    }
}

#[test]
#[allow(clippy::too_many_lines, reason = "one table of cases")]
fn bad_rows_are_refused_with_file_line_column_and_text() {
    let cases = [
        (
            "Fx I,500,air,0,0,20000,1,1e8",
            "lines.csv:2: column `species`: `Fx I`: `Fx`: no such element; did you mean F, Fe, Fr?",
        ),
        (
            "Fe,500,air,0,0,20000,1,1e8",
            "lines.csv:2: column `species`: `Fe`: the species has no single stage of ionisation; write Fe II, not Fe",
        ),
        (
            ",500,air,0,0,20000,1,1e8",
            "lines.csv:2: column `species`: expected a value, found nothing",
        ),
        (
            "Na I,-5,vacuum,0,0,20000,1,1e8",
            "lines.csv:2: column `nm`: `-5`: expected a value above zero",
        ),
        (
            "Na I,0,vacuum,0,0,20000,1,1e8",
            "lines.csv:2: column `nm`: `0`: expected a value above zero",
        ),
        (
            "Na I,NaN,vacuum,0,0,20000,1,1e8",
            "lines.csv:2: column `nm`: `NaN`: expected a number such as 12.5, -0.3 or 1.2e-5",
        ),
        (
            "Na I,1e999,vacuum,0,0,20000,1,1e8",
            "lines.csv:2: column `nm`: `1e999`: the number is too large to hold",
        ),
        (
            "Na I,500,,0,0,20000,1,1e8",
            "lines.csv:2: column `medium`: expected vacuum or air",
        ),
        (
            "Na I,500,water,0,0,20000,1,1e8",
            "lines.csv:2: column `medium`: `water`: expected vacuum or air",
        ),
        (
            "Na I,500,vacuum,-3,0,20000,1,1e8",
            "lines.csv:2: column `lower`: `-3`: expected an energy above the ground level, zero or more",
        ),
        (
            "Na I,500,vacuum,0,0.3,20000,1,1e8",
            "lines.csv:2: column `jl`: `0.3`: expected an angular momentum such as 2, 5/2 or 2.5",
        ),
        (
            "Na I,500,vacuum,0,0,20000,-1,1e8",
            "lines.csv:2: column `ju`: `-1`: expected an angular momentum such as 2, 5/2 or 2.5",
        ),
        (
            "Na I,500,vacuum,20000,0,0,1,1e8",
            "lines.csv:2: the upper level (0 cm-1) does not lie above the lower one (20000 cm-1)",
        ),
        (
            "Na I,500,vacuum,0,0,20000,1,0",
            "lines.csv:2: column `a`: `0`: expected a value above zero; a mark for unknown rates belongs under `missing`",
        ),
        (
            "Na I,500,vacuum,0,0,20000,1",
            "lines.csv:2: `Na I 500 vacuum 0 0 20000 1`: 7 cells where the header has 8",
        ),
        (
            "Na I,500,vacuum,0,0,20000,1,1e8,9",
            "lines.csv:2: `Na I 500 vacuum 0 0 20000 1 1e8 9`: 9 cells where the header has 8",
        ),
        (
            "Na I,5\"00,vacuum,0,0,20000,1,1e8",
            "lines.csv:2: column `nm`: `5`: a quote stands inside a cell that does not begin with one",
        ),
        (
            "Na I,\"500\"x,vacuum,0,0,20000,1,1e8",
            "lines.csv:2: column `nm`: `500`: text follows a closing quote; a quote inside quotes is written twice",
        ),
        (
            "Na I,\"500,vacuum,0,0,20000,1,1e8\nNa I,1\n",
            "lines.csv:2: the quote opened here is never closed",
        ),
        (
            "Na I,5\u{0}00,vacuum,0,0,20000,1,1e8",
            "lines.csv:2: column `nm`: `5`: a zero byte: this is no text table",
        ),
        (
            "Na I,589.7558,vacuum,0,1/2,16973.366,1.5,1",
            "lines.csv:2: the line at 16956.171 cm-1 contradicts its levels, which are 16973.366 cm-1 apart",
        ),
        (
            "Na I,588.995095,vacuum,0,1/2,16973.366,1.5,1",
            "lines.csv:2: the line at 16978.070 cm-1 contradicts its levels, which are 16973.366 cm-1 apart; they differ by the index of air: the wavelengths seem to be in air, not vacuum",
        ),
        (
            "Na I,589.158,air,0,1/2,16973.366,1.5,1",
            "lines.csv:2: the line at 16968.673 cm-1 contradicts its levels, which are 16973.366 cm-1 apart; they differ by the index of air: the wavelengths seem to be in vacuum, not air",
        ),
        (
            "Na I,5891.58,vacuum,0,1/2,16973.366,1.5,1",
            "lines.csv:2: the line at 1697.338 cm-1 contradicts its levels, which are 16973.366 cm-1 apart; they differ by a factor of ten: check the units (0.1 nm, nm)",
        ),
        ("Na I,120,air,0,0,,1,1", "lines.csv:2: column `nm`: `120`: "),
    ];
    for (row, expected) in cases {
        let found = refusal(row);
        assert!(
            found.starts_with(expected),
            "{row}\n found {found}\nwanted {expected}"
        );
    }
}

#[test]
fn where_no_index_of_air_is_known_the_levels_say_where_the_line_is() {
    let row = "Xe I,3273.926,air,77269.145,1,80322.746,2,\n";
    let (report, records) = read_text(LINES, &format!("{HEADER}{row}"), 0).unwrap();
    assert_eq!(line(&records[0]).wavenumber_per_cm, None);
    assert_eq!(report.warnings.len(), 1);
}

#[test]
fn bad_rows_are_listed_when_they_are_allowed_and_the_sum_is_right() {
    let table =
        format!("{HEADER}{SODIUM}Na I,x,air,0,1/2,16973.366,1.5,1\n{SODIUM}Na I,1\n{SODIUM}");
    let (report, records) = read_text(LINES, &table, 2).unwrap();
    assert_eq!(
        (report.read, report.records, report.refused.len()),
        (5, 3, 2)
    );
    assert_eq!(records.len(), 3);
    assert_eq!(report.refused[1].line, 5);
    let error = read_text(LINES, &table, 1).unwrap_err();
    assert_eq!(
        error.to_string(),
        "more than 1 bad rows; the first is lines.csv:3: column `nm`: `x`: expected a number such as 12.5, -0.3 or 1.2e-5"
    );
}

#[test]
fn control_characters_never_reach_a_message() {
    let found = refusal("Na\u{1b}[2J I,500,air,0,0,20000,1,1e8");
    assert!(!found.chars().any(char::is_control), "{found:?}");
}

const FIXED: &str = r#"
[[table]]
file = "levels.dat"
records = "levels"
format = "fixed"
header_rows = 2
missing = ["---"]
comment = ";"
skip = [{ contains = "limit", reason = "series limits are no levels" }]
[table.columns]
element = { bytes = [1, 2] }
stage = { bytes = [3, 6] }
energy = { bytes = [8, 18], unit = "cm-1", flags = "?*", split = "bracketed" }
configuration = { bytes = [20, 31], split = { at = " ", take = 1 } }
term = { bytes = [20, 31], split = { at = " ", take = -1 } }
j = { bytes = [33, 35] }
g = { bytes = [37, 38] }
"#;

#[test]
fn fixed_width_takes_ranges_flags_brackets_and_merged_columns() {
    let table = "\
Invented levels
-----------------------
Na I          0     2p6.3s 2S   1/2  2
; a comment
Na I   16973.3(2)? 2p6.3p 2Po   3/2  4
Na I   41449.45    limit
Na I   29172.89*   2p6.3d 2D    ---
";
    let (report, records) = read_text(FIXED, table, 0).unwrap();
    assert_eq!(
        report.skipped,
        [("series limits are no levels".to_owned(), 1)]
    );
    assert_eq!((report.read, report.records), (4, 3));
    let ground = level(&records[0]);
    assert_eq!(
        (ground.energy_per_cm, ground.energy_uncertainty_per_cm),
        (0.0, 0.0)
    );
    let upper = level(&records[1]);
    // Two units of the last digit, 0.1 cm⁻¹; a product of decimals is good to a few ulp.
    assert!((upper.energy_uncertainty_per_cm - 0.2).abs() < 1e-15);
    assert_eq!(upper.configuration.as_deref(), Some("2p6.3p"));
    assert_eq!(upper.term.as_deref(), Some("2Po"));
    let third = level(&records[2]);
    assert_eq!((third.j, third.g), (None, None));
    assert!((third.energy_uncertainty_per_cm - 0.01).abs() < 1e-15);
}

#[test]
fn a_strength_becomes_a_rate_with_the_weights_of_both_levels() {
    let toml = r#"
[[table]]
file = "lines.csv"
records = "lines"
delimiter = ";"
decimal_mark = ","
[table.columns]
species = { constant = "H I" }
wavelength = { column = "nm", unit = "nm", medium = "vacuum" }
lower_g = { column = "gl" }
upper_g = { column = "gu" }
oscillator_strength = { column = "f" }
rate_uncertainty = { column = "grade", grades = { good = 0.03, fair = 0.1 } }
"#;
    // Lyman α, multiplet: λ = 121.567 nm, f = 0.4162, A = 4.699e8 s⁻¹ for g = 2 and 8
    // (Bethe & Salpeter 1957, § 63); three figures.
    let table = "nm;gl;gu;f;grade\n121,567;2;8;0,4162;good\n121,567;2;;0,4162;good\n";
    let (report, records) = read_text(toml, table, 0).unwrap();
    let first = line(&records[0]);
    assert!((first.rate_per_s.unwrap() / 4.699e8 - 1.0).abs() < 2e-3);
    assert_eq!(first.rate_relative_uncertainty, Some(0.03));
    assert_eq!(line(&records[1]).rate_per_s, None);
    assert_eq!(report.warnings.len(), 1);
    let bad = read_text(toml, "nm;gl;gu;f;grade\n121,567;2;8;0,4162;poor\n", 0);
    assert!(
        bad.unwrap_err()
            .to_string()
            .ends_with("it knows fair, good")
    );
}

#[test]
fn a_column_that_no_target_uses_is_an_error_until_it_is_ignored() {
    let table = "species,nm,medium,lower,jl,upper,ju,a,note\nNa I,588.995,air,0,1/2,16973.366,1.5,6.16e7,x\n";
    let error = read_text(LINES, table, 0).unwrap_err();
    assert_eq!(
        error.to_string(),
        "lines.csv: no target uses `note`; map them or list them under ignore (\"rest\" for all)"
    );
    let ignoring = LINES.replace(
        "records = \"lines\"",
        "records = \"lines\"\nignore = \"rest\"",
    );
    assert_eq!(read_text(&ignoring, table, 0).unwrap().1.len(), 1);
}

#[test]
fn descriptions_with_a_slip_are_refused_at_their_place() {
    let head = "key = \"k\"\ntitle = \"t\"\ncitation = \"c\"\nkind = \"paper\"\n";
    for (tail, expected) in [
        ("colour = 1\n", "source.toml:5: unknown field `colour`"),
        (
            "[[table]]\nfile = \"../x\"\nrecords = \"levels\"\n",
            "source.toml: table 1 file: must be a plain file name without folders",
        ),
        (
            "[[table]]\nfile = \"x\"\nrecords = \"lines\"\n[table.columns]\nspecies = { constant = \"H I\" }\nwavelength = { column = \"w\", unit = \"nm\" }\n",
            "source.toml: table 1 (x) column `wavelength`: needs medium",
        ),
        (
            "[[table]]\nfile = \"x\"\nrecords = \"levels\"\n[table.columns]\nspecies = { constant = \"H I\" }\nwavelength = { column = \"w\", unit = \"nm\", medium = \"air\" }\n",
            "source.toml: table 1 (x) column `wavelength`: is no target of levels",
        ),
        (
            "[[table]]\nfile = \"x\"\nrecords = \"levels\"\n[table.columns]\nspecies = { constant = \"H I\", column = \"s\" }\n",
            "source.toml: table 1 (x) column `species`: needs exactly one of",
        ),
        (
            "[[table]]\nfile = \"x\"\nrecords = \"levels\"\n[table.columns]\nenergy = { column = \"e\", unit = \"cm-1\" }\n",
            "source.toml: table 1 (x) columns: need species, or element and stage",
        ),
        (
            "[[scope]]\nspecies = [\"*\"]\nband_nm = [5.0, 1.0]\ncompleteness = \"full\"\n",
            "source.toml: scope 1: band_nm must be two wavelengths",
        ),
        (
            "computed_species = [\"Xy I\"]\n",
            "source.toml: computed_species: ",
        ),
    ] {
        let error = SourceDescription::parse(&format!("{head}{tail}"), "source.toml").unwrap_err();
        assert!(
            error.to_string().starts_with(expected),
            "{error}\n{expected}"
        );
    }
}

#[test]
fn species_that_a_paper_took_from_theory_are_computed_and_no_others() {
    let table = "species,nm,medium,lower,jl,upper,ju,a\n\
                 Na I,588.995,air,0,1/2,16973.366,1.5,6.16e7\n\
                 H I,121.567,vacuum,0,1/2,82259.285,1.5,6.26e8\n";
    let declared = format!("computed_species = [\"H I\"]\n{LINES}");
    for (description, hydrogen) in [(LINES, false), (declared.as_str(), true)] {
        for record in read_text(description, table, 0).unwrap().1 {
            let Record::Line(line) = record else { panic!() };
            let expected = hydrogen && line.species.atomic_number == 1;
            assert_eq!(line.computed, expected, "{line:?}");
            let origin = if expected {
                RateOrigin::Computed
            } else {
                RateOrigin::Published
            };
            assert_eq!(line.rate_origin, Some(origin), "{line:?}");
        }
    }
}
