//! Golden runs: the real binary, everything it prints, and its exit status.
//!
//! Each `tests/golden/**/*.golden` file holds a command and what it must print. Run with
//! `UPDATE_GOLDEN=1` to write what it prints now, then read the difference as a user would.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::fs;
use std::path::{Path, PathBuf};

use common::{Run, catalogue, run};
use similar::TextDiff;

fn golden_files(folder: &Path, into: &mut Vec<PathBuf>) {
    let mut entries: Vec<PathBuf> = fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .collect();
    entries.sort();
    for path in entries {
        if path.is_dir() {
            golden_files(&path, into);
        } else if path.extension().is_some_and(|e| e == "golden") {
            into.push(path);
        }
    }
}

fn written(command: &str, run: &Run) -> String {
    let mut text = format!("$ {command}\n--- standard output\n{}", run.stdout);
    text.push_str(&format!(
        "--- standard error\n{}--- exit {}\n",
        run.stderr, run.exit
    ));
    text.replace(&catalogue().display().to_string(), "CATALOGUE")
}

#[test]
fn every_golden_run_prints_what_it_printed() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/golden");
    let mut files = Vec::new();
    golden_files(&root, &mut files);
    assert!(
        files.len() >= 20,
        "golden files are missing: {}",
        files.len()
    );
    let mut wrong = Vec::new();
    for file in &files {
        let expected = fs::read_to_string(file).unwrap();
        let command = expected
            .lines()
            .next()
            .and_then(|l| l.strip_prefix("$ "))
            .unwrap_or_else(|| panic!("{}: the first line is `$ lineclear …`", file.display()));
        let found = written(command, &run(command));
        if std::env::var_os("UPDATE_GOLDEN").is_some() {
            fs::write(file, &found).unwrap();
        } else if found != expected {
            let diff = TextDiff::from_lines(expected.as_str(), found.as_str());
            let shown = diff.unified_diff().header("expected", "found").to_string();
            wrong.push(format!("{}\n{shown}", file.display()));
        }
    }
    assert!(
        wrong.is_empty(),
        "{} of {} golden runs differ:\n{}",
        wrong.len(),
        files.len(),
        wrong.join("\n")
    );
}

#[test]
fn no_line_of_an_answer_is_wider_than_a_page() {
    for command in [
        "lineclear window 585..590nm --of Na,Ne,He",
        "lineclear window 200..230nm --of Fe,Ni,Cu --components --strongest 40",
        "lineclear passband choose --target \"He I 667.8nm\" --among C,O,Fe,Cu --te 3eV",
        "lineclear sources",
        "lineclear vet \"Cs I@852.1nm\" --among Ar,Fe --fwhm 0.1nm --orders 3",
    ] {
        let out = run(command).stdout;
        for line in out.lines() {
            assert!(
                line.chars().count() <= 100,
                "{command}: {} columns: {line}",
                line.chars().count()
            );
        }
    }
}
