//! `import` and `forget` on a small table: what is told, and that nothing is half-loaded.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::path::Path;

use common::binary;

const DESCRIPTION: &str = r#"
key = "bench-2026"
title = "Lines seen on the bench"
citation = "Harrow Bay logbook 12 (invented)"
licence = "CC0-1.0"
kind = "paper"
[[table]]
file = "lines.csv"
records = "lines"
format = "delimited"
[table.columns]
species = { column = "species" }
wavelength = { column = "wavelength_nm", unit = "nm", medium = "air" }
lower_energy = { column = "lower", unit = "cm-1" }
lower_j = { column = "jl" }
upper_energy = { column = "upper", unit = "cm-1" }
upper_j = { column = "ju" }
rate = { column = "a", unit = "s-1" }
"#;

fn table(folder: &Path, rows: &str) {
    std::fs::write(folder.join("source.toml"), DESCRIPTION).unwrap();
    let text = format!("species,wavelength_nm,lower,jl,upper,ju,a\n{rows}");
    std::fs::write(folder.join("lines.csv"), text).unwrap();
}

fn run(folder: &Path, arguments: &[&str]) -> (String, String, i32) {
    let output = binary()
        .args(arguments)
        .arg("--catalogue")
        .arg(folder.join("catalogue.sqlite"))
        .arg("--quiet")
        .output()
        .unwrap();
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).unwrap();
    (
        text(output.stdout),
        text(output.stderr),
        output.status.code().unwrap(),
    )
}

/// A line of W I that no bundled table holds (the numbers are invented).
const GOOD: &str = "W I,500.1234,20000.0,2,39989.62,1,1e7\n";
const BAD: &str = "W I,5oo.2,20000.0,2,39985.63,2,1e7\n";

#[test]
fn a_table_comes_in_shows_up_and_goes_again() {
    let folder = tempfile::tempdir().unwrap();
    table(folder.path(), GOOD);
    let source = folder.path().to_str().unwrap();
    let ask = ["window", "500..500.2nm", "--of", "W I", "--as", "csv"];
    let before = run(folder.path(), &ask).0;
    let (said, _, exit) = run(folder.path(), &["import", source, "--dry-run"]);
    assert!(
        exit == 0 && said.contains("1 rows read, 1 kept, 0 merged") && said.contains("Dry run"),
        "{said}"
    );
    assert_eq!(
        run(folder.path(), &ask).0,
        before,
        "a dry run changes nothing"
    );
    run(folder.path(), &["import", source]);
    assert!(run(folder.path(), &ask).0.contains("bench-2026"));
    let (again, _, _) = run(folder.path(), &["import", source]);
    assert!(again.contains("held already"), "{again}");
    run(folder.path(), &["forget", "bench-2026"]);
    assert_eq!(run(folder.path(), &ask).0, before);
}

#[test]
fn a_bad_row_ends_the_import_and_nothing_is_loaded() {
    let folder = tempfile::tempdir().unwrap();
    table(folder.path(), &format!("{GOOD}{BAD}"));
    let source = folder.path().to_str().unwrap();
    let (_, said, exit) = run(folder.path(), &["import", source]);
    assert_eq!(exit, 1);
    assert!(
        said.contains("lines.csv:3") && said.contains("wavelength_nm") && said.contains("5oo.2"),
        "{said}"
    );
    assert_eq!(said.lines().count(), 1, "{said}");
    assert!(
        !run(folder.path(), &["sources", "--as", "csv"])
            .0
            .contains("bench-2026")
    );
    let (said, _, exit) = run(folder.path(), &["import", source, "--skip-bad", "1"]);
    assert!(
        exit == 0 && said.contains("2 rows read, 1 kept, 0 merged with what was held, 1 refused"),
        "{said}"
    );
    assert!(said.contains("lines.csv:3"), "{said}");
}

#[test]
fn other_content_under_a_key_that_is_held_is_refused() {
    let folder = tempfile::tempdir().unwrap();
    table(folder.path(), GOOD);
    let source = folder.path().to_str().unwrap().to_owned();
    run(folder.path(), &["import", &source]);
    table(folder.path(), &GOOD.replace("1e7", "2e7"));
    let (_, said, exit) = run(folder.path(), &["import", &source]);
    assert!(exit == 1 && said.contains("forget bench-2026"), "{said}");
}

#[test]
fn a_table_without_a_licence_needs_one_stated() {
    let folder = tempfile::tempdir().unwrap();
    table(folder.path(), GOOD);
    let text = DESCRIPTION.replace("licence = \"CC0-1.0\"\n", "");
    std::fs::write(folder.path().join("source.toml"), text).unwrap();
    let source = folder.path().to_str().unwrap().to_owned();
    let (_, said, exit) = run(folder.path(), &["import", &source]);
    assert!(exit == 1 && said.contains("--licence"), "{said}");
    let (_, _, exit) = run(
        folder.path(),
        &["import", &source, "--licence", "by permission"],
    );
    assert_eq!(exit, 0);
    assert!(
        run(folder.path(), &["sources", "--as", "csv"])
            .0
            .contains("by permission")
    );
}

#[test]
fn a_file_that_describes_itself_comes_in_with_a_citation_and_a_licence() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("bench.ecsv");
    let text = "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: species, datatype: string}\n\
                # - {name: wavelength, unit: nm, datatype: float64}\n\
                # - {name: rate, unit: 1 / s, datatype: float64}\n\
                species wavelength rate\n\"W I\" 500.1234 1e7\n";
    std::fs::write(&file, text).unwrap();
    let path = file.to_str().unwrap();
    let (_, said, exit) = run(folder.path(), &["import", path, "--medium", "air"]);
    assert!(exit != 0 && said.contains("--citation"), "{said}");
    let stated = [
        "--citation",
        "Harrow Bay logbook 13 (invented)",
        "--licence",
        "CC0-1.0",
    ];
    let mut command = vec!["import", path];
    command.extend(stated);
    let (_, said, exit) = run(folder.path(), &command);
    assert!(
        exit == 1 && said.contains("medium"),
        "never guessed: {said}"
    );
    command.extend(["--medium", "air"]);
    let (said, error, exit) = run(folder.path(), &command);
    assert!(
        exit == 0 && said.contains("bench: 1 rows read, 1 kept"),
        "{said}{error}"
    );
    let (lines, _, _) = run(
        folder.path(),
        &["window", "500.1..500.2nm", "--of", "W I", "--as", "csv"],
    );
    assert!(
        lines.contains("500.1234") && lines.contains("bench"),
        "{lines}"
    );
}

#[test]
fn a_plain_table_is_explained_with_a_mapping_to_edit() {
    let folder = tempfile::tempdir().unwrap();
    table(folder.path(), GOOD);
    let file = folder.path().join("lines.csv");
    let path = file.to_str().unwrap();
    let (said, _, exit) = run(folder.path(), &["import", "--explain", path]);
    assert!(
        exit == 0 && said.contains("wavelength_nm") && said.contains("[table.columns]"),
        "{said}"
    );
    let (_, said, exit) = run(folder.path(), &["import", path]);
    assert!(exit == 1 && said.contains("--explain"), "{said}");
}

/// The bad files of `tests/reference/bad_files`: each golden run is one sentence that names the file,
/// and where a row is at fault its line; nothing of them is loaded.
#[test]
fn each_bad_file_has_its_sentence() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/golden/bad_files");
    let mut count = 0;
    for entry in std::fs::read_dir(root).unwrap() {
        let path = entry.unwrap().path();
        let text = std::fs::read_to_string(&path).unwrap();
        let name = path.file_stem().unwrap().to_str().unwrap().to_owned();
        let (head, rest) = text.split_once("--- standard error\n").unwrap();
        let (said, exit) = rest.split_once("--- exit ").unwrap();
        assert!(
            head.ends_with("--- standard output\n"),
            "{name} prints an answer"
        );
        assert_eq!(said.lines().count(), 1, "{name}: {said}");
        assert_eq!(exit.trim(), "1", "{name}");
        assert!(
            said.contains(&name) || said.contains("harrow-bay"),
            "{name}: {said}"
        );
        assert!(
            !said.contains('\u{1b}') && !said.contains('\u{202e}'),
            "{name}"
        );
        count += 1;
    }
    assert!(count >= 40, "{count} bad files");
}
