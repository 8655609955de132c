//! What is exported comes in again elsewhere, the same to the last bit, in every format.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;
#[path = "export/written.rs"]
mod written;

use std::path::{Path, PathBuf};
use std::process::Output;

use common::{binary, catalogue};
use lineclear::catalogue::{Catalogue, HandedOver, SourceFiles};
use rusqlite::Connection;
use rusqlite::types::Value;

/// Each format with the end of its file name.
const FORMS: [(&str, &str); 4] = [
    ("csv", "csv"),
    ("jsonl", "jsonl"),
    ("votable", "vot"),
    ("parquet", "d"),
];

fn lineclear(catalogue: &Path, arguments: &[&str]) -> Output {
    let mut command = binary();
    command.args(arguments).arg("--catalogue").arg(catalogue);
    command.output().unwrap()
}

fn said(output: &Output) -> (String, String, i32) {
    let text = |bytes: &[u8]| String::from_utf8(bytes.to_vec()).unwrap();
    (
        text(&output.stdout),
        text(&output.stderr),
        output.status.code().unwrap(),
    )
}

/// A catalogue without any source.
fn empty(folder: &Path, name: &str) -> PathBuf {
    let path = folder.join(name);
    std::fs::copy(catalogue(), &path).unwrap();
    let connection = Connection::open(&path).unwrap();
    for table in [
        "line",
        "level",
        "line_report",
        "level_report",
        "label",
        "scope",
        "source",
    ] {
        connection
            .execute(&format!("DELETE FROM {table}"), [])
            .unwrap();
    }
    path
}

/// Every row of every table, source numbers and label numbers replaced by what they stand for.
fn content(path: &Path) -> Vec<String> {
    let connection = Connection::open(path).unwrap();
    let mut rows = Vec::new();
    for (name, sql) in [
        (
            "source",
            "SELECT key, title, citation, licence, kind, notes, checksum,
                    level_scale_uncertainty_per_cm, level_scale_uncertainty_relative,
                    rows_read, rows_refused
               FROM source ORDER BY key",
        ),
        (
            "scope",
            "SELECT species, key, from_nm, to_nm, completeness
               FROM scope JOIN source ON id = source ORDER BY 1, 2, 3, 4",
        ),
        (
            "level_report",
            "SELECT r.species, s.key, r.number, place, energy_per_cm, energy_uncertainty_per_cm,
                    c.text, t.text, twice_j, g, computed, own_row
               FROM level_report r JOIN source s ON s.id = source
               LEFT JOIN label c ON c.id = configuration LEFT JOIN label t ON t.id = term
              ORDER BY 1, 2, 3",
        ),
        (
            "line_report",
            "SELECT r.species, s.key, r.number, place, wavenumber_per_cm,
                    wavenumber_uncertainty_per_cm, from_levels, lower, upper, lower_twice_j,
                    upper_twice_j, rate_per_s, rate_relative_uncertainty, rate_origin, intensity,
                    r.kind, computed
               FROM line_report r JOIN source s ON s.id = source
              ORDER BY 1, 2, 3",
        ),
        (
            "level",
            "SELECT l.species, number, energy_per_cm, energy_uncertainty_per_cm, c.text, t.text,
                    twice_j, g, computed, s.key
               FROM level l JOIN source s ON s.id = source
               LEFT JOIN label c ON c.id = configuration LEFT JOIN label t ON t.id = term
              ORDER BY 1, 2",
        ),
        (
            "line",
            "SELECT l.species, wavenumber_per_cm, number, wavenumber_uncertainty_per_cm,
                    position_origin, p.key, lower, upper, rate_per_s, rate_relative_uncertainty,
                    rate_origin, r.key, l.kind
               FROM line l JOIN source p ON p.id = position_source
               LEFT JOIN source r ON r.id = rate_source
              ORDER BY 1, 2, 3",
        ),
    ] {
        let mut select = connection.prepare(sql).unwrap();
        let columns = select.column_count();
        let mut found = select.query([]).unwrap();
        while let Some(row) = found.next().unwrap() {
            let cells: Vec<Value> = (0..columns).map(|i| row.get(i).unwrap()).collect();
            rows.push(format!("{name} {cells:?}"));
        }
    }
    rows
}

/// Compares without printing a hundred thousand rows.
fn same(first: &[String], second: &[String], what: &str) {
    assert_eq!(first.len(), second.len(), "{what}");
    for (a, b) in first.iter().zip(second) {
        assert_eq!(a, b, "{what}");
    }
}

fn take_in(catalogue: &Path, file: &Path) -> lineclear::catalogue::ImportSummary {
    let files = HandedOver::find(file, &importers::Limits::default())
        .unwrap()
        .unwrap();
    let mut catalogue = Catalogue::open(catalogue).unwrap();
    catalogue.take_in(&files, false).unwrap()
}

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

#[test]
fn a_source_comes_back_the_same_in_every_format() {
    let folder = tempfile::tempdir().unwrap();
    for source in ["data/morton2003", "tests/reference/handover/bench"] {
        let first = empty(folder.path(), "first.sqlite");
        let files = SourceFiles::find(&root().join(source)).unwrap();
        let key = files.key().to_owned();
        let mut opened = Catalogue::open(&first).unwrap();
        let was = files.import(&mut opened, 0, false).unwrap();
        drop(opened);
        let before = content(&first);
        assert!(before.iter().any(|row| row.starts_with("line [")));
        // The binary would add its own tables to a catalogue that lacks them: it reads a copy.
        let shown = folder.path().join("shown.sqlite");
        std::fs::copy(catalogue(), &shown).unwrap();
        if key != "morton2003" {
            let path = root().join(source);
            let (_, error, exit) =
                self::said(&lineclear(&shown, &["import", path.to_str().unwrap()]));
            assert_eq!(exit, 0, "{error}");
        }
        for (form, end) in FORMS {
            let file = folder.path().join(format!("{key}.{end}"));
            let to = file.to_str().unwrap();
            let (_, error, exit) = said(&lineclear(
                &shown,
                &["export", "--source", &key, "--as", form, "--to", to],
            ));
            assert_eq!(exit, 0, "{error}");
            let second = empty(folder.path(), "second.sqlite");
            let summary = take_in(&second, &file);
            same(&content(&second), &before, &format!("{key} as {form}"));
            // Levels that only lines name are rows of the export and no rows of the table.
            assert!(summary.read >= was.kept + was.merged, "{summary:?}");
            assert_eq!(summary.read, summary.kept + summary.merged, "{summary:?}");
        }
    }
}

#[test]
fn the_whole_catalogue_comes_back_the_same() {
    let folder = tempfile::tempdir().unwrap();
    let to = folder.path().join("all.d");
    let arguments = ["export", "--content", "reports", "--as", "parquet", "--to"];
    let mut arguments = arguments.to_vec();
    arguments.push(to.to_str().unwrap());
    let (_, error, exit) = said(&lineclear(catalogue(), &arguments));
    assert_eq!(exit, 0, "{error}");
    let second = empty(folder.path(), "second.sqlite");
    take_in(&second, &to);
    same(&content(&second), &content(catalogue()), "all sources");
    // Opened by the program it needs no refreshing.
    let connection = Connection::open(&second).unwrap();
    let bundled: i64 = connection
        .query_row("SELECT count(*) FROM source WHERE NOT bundled", [], |row| {
            row.get(0)
        })
        .unwrap();
    assert_eq!(bundled, 0);
}

/// A copy of the catalogue with the invented table in it.
fn with_bench(folder: &Path) -> PathBuf {
    let path = folder.join("bench.sqlite");
    std::fs::copy(catalogue(), &path).unwrap();
    let (_, error, exit) = said(&lineclear(
        &path,
        &["import", "tests/reference/handover/bench"],
    ));
    assert_eq!(exit, 0, "{error}");
    path
}

/// Exports the invented table in one form.
fn hand_on_bench(bench: &Path, form: &str, to: &str) {
    let source = ["export", "--source", "harrow-bay-xenon"];
    let arguments = [&source[..], &["--as", form, "--to", to]].concat();
    let (_, error, exit) = said(&lineclear(bench, &arguments));
    assert_eq!(exit, 0, "{form}: {error}");
}

#[test]
fn what_others_read_in_the_files_is_what_they_hold() {
    // readings.json holds what pyarrow, duckdb, astropy and Python's json read in the four files;
    // check.py made it and found them to agree.
    let folder = tempfile::tempdir().unwrap();
    let bench = with_bench(folder.path());
    let kept = std::fs::read_to_string(root().join("tests/reference/handover/readings.json"));
    let kept: serde_json::Value = serde_json::from_str(&kept.unwrap()).unwrap();
    let expected = kept["rows"].as_array().unwrap();
    assert!(expected.len() > 10);
    for (form, end) in FORMS {
        let file = folder.path().join(format!("x.{end}"));
        let to = file.to_str().unwrap();
        hand_on_bench(&bench, form, to);
        assert_eq!(&rows(&file, form), expected, "{form}");
    }
}

/// All rows of an export as JSON objects, read with this project's readers.
fn rows(file: &Path, form: &str) -> Vec<serde_json::Value> {
    use importers::handover::{Kind, REPORTS};
    use importers::source::Format;
    let (format, file) = match form {
        "csv" => (Format::Ecsv, file.to_owned()),
        "jsonl" => (Format::Jsonl, file.to_owned()),
        "votable" => (Format::Votable, file.to_owned()),
        _ => (Format::Parquet, file.join("element=Xe/part-0.parquet")),
    };
    let input = Box::new(std::fs::File::open(file).unwrap());
    let limits = importers::Limits::default();
    let mut reader = importers::open_file("x", format, input, &limits).unwrap();
    let mut row = importers::row::Row::default();
    let mut all = Vec::new();
    while reader.read_row(&mut row).unwrap() {
        let cells = REPORTS.iter().enumerate().map(|(i, column)| {
            let text = row.cell(i);
            let value = match column.kind {
                _ if text.is_empty() => serde_json::Value::Null,
                Kind::Text => text.into(),
                Kind::Truth => text.parse::<bool>().unwrap().into(),
                Kind::Integer => text.parse::<i64>().unwrap().into(),
                Kind::Number => text.parse::<f64>().unwrap().into(),
            };
            (column.name.to_owned(), value)
        });
        all.push(serde_json::Value::Object(cells.collect()));
    }
    all
}

#[test]
fn an_export_carries_citation_and_licence_and_is_imported_once() {
    let folder = tempfile::tempdir().unwrap();
    let bench = with_bench(folder.path());
    for (form, end) in FORMS {
        let file = folder.path().join(format!("bench.{end}"));
        let to = file.to_str().unwrap();
        hand_on_bench(&bench, form, to);
        let second = folder.path().join(format!("second-{form}.sqlite"));
        std::fs::copy(catalogue(), &second).unwrap();
        let (answer, error, exit) = said(&lineclear(&second, &["import", to, "--dry-run"]));
        assert!(
            exit == 0 && answer.contains("Dry run"),
            "{form}: {answer}{error}"
        );
        let (answer, error, exit) = said(&lineclear(&second, &["import", to]));
        assert!(
            exit == 0 && answer.starts_with("harrow-bay-xenon: 12 rows read"),
            "{form}: {answer}{error}"
        );
        let list = |path: &Path| said(&lineclear(path, &["sources", "--as", "csv"])).0;
        assert_eq!(list(&second), list(&bench), "{form}");
        let ask = ["window", "823..824nm", "--of", "Xe I", "--as", "json"];
        let answer = |path: &Path| said(&lineclear(path, &ask)).0;
        assert!(answer(&bench).contains("harrow-bay-xenon"));
        assert_eq!(answer(&second), answer(&bench), "{form}");
        let (again, _, _) = said(&lineclear(&second, &["import", to]));
        assert!(again.contains("held already"), "{again}");
        let (_, error, exit) = said(&lineclear(&second, &["import", to, "--licence", "MIT"]));
        assert!(
            exit == 2 && error.contains("names its sources itself"),
            "{error}"
        );
    }
}

#[test]
fn conclusions_do_not_come_in_as_measurements() {
    let folder = tempfile::tempdir().unwrap();
    let own = folder.path().join("own.sqlite");
    std::fs::copy(catalogue(), &own).unwrap();
    for (form, end) in FORMS {
        let file = folder.path().join(format!("na.{end}"));
        let to = file.to_str().unwrap();
        let arguments = [
            "export",
            "500..600nm",
            "--of",
            "Na I",
            "--as",
            form,
            "--to",
            to,
        ];
        assert_eq!(said(&lineclear(&own, &arguments)).2, 0);
        let (_, error, exit) = said(&lineclear(&own, &["import", to]));
        assert!(
            exit == 1 && error.contains("count twice") && error.contains("--content reports"),
            "{form}: {error}"
        );
        assert_eq!(error.lines().count(), 1, "{error}");
    }
}

#[test]
fn a_part_of_a_source_is_not_the_source_and_claims_no_more_than_it_holds() {
    let folder = tempfile::tempdir().unwrap();
    let bench = with_bench(folder.path());
    let file = folder.path().join("part.jsonl");
    let to = file.to_str().unwrap();
    let arguments = [
        "export",
        "800..850nm",
        "--of",
        "Xe I",
        "--source",
        "harrow-bay-xenon",
        "--as",
        "jsonl",
        "--to",
        to,
    ];
    assert_eq!(said(&lineclear(&bench, &arguments)).2, 0);
    let text = std::fs::read_to_string(&file).unwrap();
    let head: serde_json::Value = serde_json::from_str(text.lines().next().unwrap()).unwrap();
    let source = &head["lineclear"]["sources"][0];
    assert_eq!(source["whole"], false);
    let scope = &source["scope"][0];
    let (from, to_nm) = (
        scope["from_nm"].as_f64().unwrap(),
        scope["to_nm"].as_f64().unwrap(),
    );
    // 800 to 850 nm in air: the index of air adds 0.22 and 0.23 nm (n − 1 = 2.75e-4, common practice).
    assert!(
        (from - 800.22).abs() < 0.01 && (to_nm - 850.23).abs() < 0.01,
        "{scope}"
    );
    assert_eq!(
        text.lines()
            .filter(|l| l.contains("\"record\":\"line\""))
            .count(),
        1
    );
    let (_, error, exit) = said(&lineclear(&bench, &["import", to]));
    assert!(
        exit == 1 && error.contains("forget harrow-bay-xenon"),
        "{error}"
    );
}

#[test]
fn nothing_is_replaced_or_left_behind_by_accident() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("out.csv");
    std::fs::write(&file, "mine").unwrap();
    let to = file.to_str().unwrap();
    let mut arguments = vec!["export", "588..590nm", "--of", "Na I", "--to", to];
    let (_, error, exit) = said(&lineclear(catalogue(), &arguments));
    assert!(exit == 1 && error.contains("--replace"), "{error}");
    assert_eq!(std::fs::read_to_string(&file).unwrap(), "mine");
    arguments.push("--replace");
    assert_eq!(said(&lineclear(catalogue(), &arguments)).2, 0);
    assert!(
        std::fs::read_to_string(&file)
            .unwrap()
            .starts_with("# %ECSV 1.0")
    );
    // A folder of other things is not replaced by an export.
    let (_, error, exit) = said(&lineclear(
        catalogue(),
        &[
            "export",
            "--of",
            "Na I",
            "--as",
            "parquet",
            "--replace",
            "--to",
            folder.path().to_str().unwrap(),
        ],
    ));
    assert!(exit == 1 && error.contains("other things"), "{error}");
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1);
    // An export of nothing leaves nothing.
    let none = folder.path().join("none.csv");
    let (_, error, exit) = said(&lineclear(
        catalogue(),
        &[
            "export",
            "588..588.1nm",
            "--of",
            "He I",
            "--to",
            none.to_str().unwrap(),
        ],
    ));
    assert!(exit == 1 && error.contains("nothing is held"), "{error}");
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1);
    let (_, error, exit) = said(&lineclear(
        catalogue(),
        &["export", "--of", "Na I", "--to", "/nowhere/at/all.csv"],
    ));
    assert!(exit == 1 && error.contains("cannot be written"), "{error}");
}
