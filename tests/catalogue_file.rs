//! The catalogue as a file: built once, safe when two start at once, honest about what is wrong.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::path::Path;
use std::process::Stdio;

use common::binary;
use rusqlite::Connection;

fn window(catalogue: &Path) -> std::process::Command {
    let mut command = binary();
    command
        .args(["window", "588.9..589.1nm", "--of", "Na I", "--catalogue"])
        .arg(catalogue);
    command
}

#[test]
fn processes_that_start_at_once_all_answer_and_leave_one_sound_file() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("deep/er/catalogue.sqlite");
    let started: Vec<_> = (0..4)
        .map(|_| {
            window(&path)
                .stdout(Stdio::piped())
                .stderr(Stdio::piped())
                .spawn()
                .unwrap()
        })
        .collect();
    let outputs: Vec<_> = started
        .into_iter()
        .map(|child| child.wait_with_output().unwrap())
        .collect();
    for output in &outputs {
        assert!(
            output.status.success(),
            "{}",
            String::from_utf8_lossy(&output.stderr)
        );
        assert_eq!(output.stdout, outputs[0].stdout);
    }
    let sound: String = Connection::open(&path)
        .unwrap()
        .query_row("PRAGMA integrity_check", [], |row| row.get(0))
        .unwrap();
    assert_eq!(sound, "ok");
    let partial = std::fs::read_dir(path.parent().unwrap())
        .unwrap()
        .filter(|e| {
            e.as_ref()
                .unwrap()
                .file_name()
                .to_string_lossy()
                .contains("partial")
        })
        .count();
    assert_eq!(partial, 0, "no half-written file is left");
}

#[test]
fn a_folder_that_cannot_be_written_means_working_from_memory() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("in-the-way");
    std::fs::write(&file, "not a folder").unwrap();
    let output = window(&file.join("catalogue.sqlite")).output().unwrap();
    assert!(output.status.success());
    assert!(String::from_utf8_lossy(&output.stdout).contains("588.995"));
    assert!(String::from_utf8_lossy(&output.stderr).contains("working from memory"));
}

#[test]
fn a_catalogue_of_a_newer_version_is_left_alone() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("catalogue.sqlite");
    assert!(window(&path).output().unwrap().status.success());
    let connection = Connection::open(&path).unwrap();
    connection
        .pragma_update(None, "user_version", 9999)
        .unwrap();
    drop(connection);
    let output = window(&path).output().unwrap();
    assert_eq!(output.status.code(), Some(1));
    let said = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(
        said.contains("newer version") && said.lines().count() == 1,
        "{said}"
    );
}

#[test]
fn a_damaged_catalogue_is_named() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("catalogue.sqlite");
    std::fs::write(&path, vec![b'x'; 4096]).unwrap();
    let output = window(&path).output().unwrap();
    assert_eq!(output.status.code(), Some(1));
    let said = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(said.contains("not a lineclear catalogue"), "{said}");
}

#[test]
fn tables_of_another_version_are_brought_up_to_date() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("catalogue.sqlite");
    let first = window(&path).output().unwrap();
    let connection = Connection::open(&path).unwrap();
    connection
        .execute("UPDATE about SET value = 'older' WHERE name = 'bundle'", [])
        .unwrap();
    connection
        .execute(
            "UPDATE source SET checksum = 'older' WHERE key = 'morton2003'",
            [],
        )
        .unwrap();
    connection
        .execute("DELETE FROM line WHERE species = (11 * 128 + 1) * 512", [])
        .unwrap();
    drop(connection);
    let second = window(&path).output().unwrap();
    assert_eq!(first.stdout, second.stdout);
    assert!(String::from_utf8_lossy(&second.stderr).contains("brought up"));
}

#[test]
fn a_closed_pipe_is_no_error() {
    let mut child = window(common::catalogue())
        .stdout(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    assert!(child.wait().unwrap().success());
}

#[test]
fn hot_queries_read_ranges_of_the_clustered_tables() {
    let connection = Connection::open(common::catalogue()).unwrap();
    let plan = |sql: &str| -> String {
        let mut statement = connection
            .prepare(&format!("EXPLAIN QUERY PLAN {sql}"))
            .unwrap();
        let rows: Vec<String> = statement
            .query_map([], |row| row.get(3))
            .unwrap()
            .map(Result::unwrap)
            .collect();
        rows.join("; ")
    };
    let lines = plan(
        "SELECT * FROM line WHERE species = 1 AND wavenumber_per_cm BETWEEN 2 AND 3 \
                      ORDER BY wavenumber_per_cm, number",
    );
    assert!(
        lines.contains("USING PRIMARY KEY (species=? AND wavenumber_per_cm>?"),
        "{lines}"
    );
    assert!(!lines.contains("TEMP B-TREE"), "{lines}");
    let levels = plan("SELECT * FROM level WHERE species = 1 ORDER BY number");
    assert!(
        levels.contains("USING PRIMARY KEY (species=?)") && !levels.contains("TEMP"),
        "{levels}"
    );
}

#[test]
fn every_number_column_of_the_schema_says_its_unit() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("schema");
    let mut columns = 0;
    for entry in std::fs::read_dir(root).unwrap() {
        let text = std::fs::read_to_string(entry.unwrap().path()).unwrap();
        assert!(
            text.starts_with("-- Why:"),
            "a migration opens with why and what it gains"
        );
        for line in text.lines().filter(|l| l.contains(" REAL")) {
            columns += 1;
            assert!(line.contains("--"), "no unit: {line}");
        }
    }
    assert!(columns > 15);
}
