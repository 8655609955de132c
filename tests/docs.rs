//! The examples of the documents are what the program prints.
//!
//! A fenced block ```` ```console ```` holds commands (`$ lineclear …`) and their standard output.
//! `UPDATE_GOLDEN=1` writes what is printed now.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::fs;
use std::path::Path;

use common::run;
use similar::TextDiff;

/// The document with every console block's output made anew, and the number of commands.
fn refreshed(text: &str) -> (String, usize) {
    let mut out = String::new();
    let (mut console, mut commands) = (false, 0);
    for line in text.lines() {
        if let Some(command) = line.strip_prefix("$ ").filter(|_| console) {
            commands += 1;
            let run = run(command);
            assert_eq!(run.exit, 0, "{command}: {}", run.stderr);
            out.push_str(&format!("{line}\n{}", run.stdout));
        } else if line.starts_with("```") {
            console = line == "```console";
            out.push_str(&format!("{line}\n"));
        } else if !console {
            out.push_str(&format!("{line}\n"));
        }
    }
    (out, commands)
}

#[test]
fn console_blocks_of_the_readme_are_true() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("README.md");
    let text = fs::read_to_string(&path).unwrap();
    let (found, commands) = refreshed(&text);
    assert!(commands >= 2, "the README has no examples");
    if std::env::var_os("UPDATE_GOLDEN").is_some() {
        fs::write(&path, &found).unwrap();
    } else if found != text {
        let diff = TextDiff::from_lines(text.as_str(), found.as_str());
        panic!("README.md is not what is printed:\n{}", diff.unified_diff());
    }
}

#[test]
fn the_two_commands_of_the_readme_are_there() {
    let text = fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("README.md")).unwrap();
    for command in [
        "cargo run --release -- window 585..590nm --of Na,Ne,He",
        "cargo test",
    ] {
        assert!(text.contains(command), "{command}");
    }
}

#[test]
fn the_mix_of_the_readme_can_be_read() {
    let text = fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("README.md")).unwrap();
    let block = text.split("```toml").nth(1).unwrap();
    let block: String = block.split("```").next().unwrap().to_owned();
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("mix.toml");
    fs::write(&file, block).unwrap();
    let command = format!(
        "lineclear passband --centre 501.6nm --fwhm 1nm --target \"He I 501.57nm\" --among He,C \
         --mix {}",
        file.display()
    );
    let answer = common::json(&command);
    assert_eq!(answer["conditions"]["model"], "coronal");
    assert_eq!(answer["conditions"]["electron_density_per_m3"], 1e18);
    assert_eq!(answer["conditions"]["gas_temperature_k"], 800.0);
    for list in ["amounts", "ion_fractions", "metastable", "gas"] {
        assert!(
            !answer["conditions"][list].as_array().unwrap().is_empty(),
            "{list}"
        );
    }
}
