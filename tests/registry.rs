//! What must hold for every command: help with an example, a golden run, documented JSON keys.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::collections::BTreeSet;
use std::path::Path;

use common::run;

fn commands() -> Vec<String> {
    let help = run("lineclear --help").stdout;
    let list = help
        .split("Commands:")
        .nth(1)
        .unwrap()
        .split("Options:")
        .next()
        .unwrap();
    list.lines()
        .filter(|line| line.starts_with("  ") && !line.starts_with("   "))
        .filter_map(|line| line.split_whitespace().next())
        .filter(|name| *name != "help")
        .map(str::to_owned)
        .collect()
}

#[test]
fn every_command_has_help_an_example_and_a_golden_run_or_test() {
    let commands = commands();
    assert!(commands.len() >= 4, "{commands:?}");
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests");
    for command in commands {
        let help = run(&format!("lineclear {command} --help"));
        assert_eq!(help.exit, 0);
        assert!(
            help.stdout.contains("Example"),
            "{command}: no example in its help"
        );
        let shown = root.join("golden").join(&command).is_dir()
            || root.join(format!("{command}.rs")).is_file();
        assert!(
            shown,
            "{command}: neither tests/golden/{command}/ nor tests/{command}.rs"
        );
    }
}

fn keys(value: &serde_json::Value, into: &mut BTreeSet<String>) {
    match value {
        serde_json::Value::Object(object) => {
            for (key, inner) in object {
                // Maps from names (species, sources) to values have keys that are data.
                if ["sources", "mix"].contains(&key.as_str()) {
                    into.insert(key.clone());
                    continue;
                }
                into.insert(key.clone());
                keys(inner, into);
            }
        }
        serde_json::Value::Array(list) => list.iter().for_each(|inner| keys(inner, into)),
        _ => {}
    }
}

#[test]
fn every_json_key_is_documented() {
    let text = std::fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("DEVELOPERS.md"))
        .unwrap();
    let mut found = BTreeSet::new();
    for command in [
        "lineclear window 588..589.7nm --of Na,He",
        "lineclear vet \"Al I 308.215nm\" --among V --fwhm 0.02nm",
        "lineclear passband --centre 667.9nm --fwhm 2nm --among He,Fe",
        "lineclear passband --centre 667.9nm --fwhm 1nm --target \"He I 667.8nm\" --among He,C,O \
         --mix tests/reference/emission/harrow_bay_mix.toml",
        "lineclear passband --centre 656.2nm --fwhm 1nm --among H --model lte --ne 1e19..1e21m-3:2",
        "lineclear vet \"He I 667.8nm\" --among C,Fe --te 1..2eV:2 --gas Ar=1bar --model given \
         --given tests/reference/emission/harrow_bay_intensities.csv",
        "lineclear passband choose --target \"He I 667.8nm\" --among Fe",
        "lineclear predict \"Rb I\" --series nS1/2 --n 5..8 --to \"5p 3/2\"",
        "lineclear predict \"H I\" --series Balmer --n 3..5",
        "lineclear tune 780.0..780.1nm --of Rb --hyperfine --density 1e10cm-3",
        "lineclear tune 778.0..778.2nm --of Rb --photons 2",
        "lineclear climb --of Rb --lasers 780+-1nm,479..484nm --to series:nS",
        "lineclear climb --of Cs --lasers 852+-1nm,505..508nm --to limit",
        "lineclear marks --lamp Ne --span 580..590nm",
        "lineclear sources",
        "lineclear convert 656.28nm",
        "lineclear import data/morton2003 --dry-run",
    ] {
        keys(&common::json(command), &mut found);
    }
    let missing: Vec<&String> = found
        .iter()
        .filter(|k| !text.contains(&format!("`{k}`")))
        .collect();
    assert!(
        missing.is_empty(),
        "keys that DEVELOPERS.md does not name: {missing:?}"
    );
}
