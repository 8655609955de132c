//! `passband` over the bundled catalogue: a scan of 200 temperatures with twelve elements behind a
//! filter of 10 nm, and a choice among 10,000 filters.
//!
//! `cargo bench --bench passband`. The command line runs, start and reading included, so that what
//! a user waits for is measured; `one_temperature` is the part that the scan does not add. Records:
//! `passband.md`.

use std::path::PathBuf;
use std::process::{Command, Stdio};

use divan::Bencher;

fn main() {
    divan::main();
}

/// The catalogue of bundled tables, built on the first run.
fn catalogue() -> PathBuf {
    std::env::temp_dir().join(format!("lineclear-bench-{}.sqlite", std::process::id()))
}

fn run(arguments: &str) {
    let status = Command::new(env!("CARGO_BIN_EXE_lineclear"))
        .args(arguments.split(' '))
        .arg("--quiet")
        .arg("--catalogue")
        .arg(catalogue())
        .stdout(Stdio::null())
        .status();
    assert!(
        status.is_ok_and(|s| s.success()),
        "lineclear {arguments} failed"
    );
}

const TWELVE: &str = "passband --centre 667.8nm --fwhm 10nm --shape rectangular \
    --target He@667.8nm --among He,C,O,Fe,Cu,Ar,Ne,Ti,Ni,Cr,N,Si --te";

#[divan::bench]
fn one_temperature(bencher: Bencher) {
    run("sources");
    bencher.bench(|| run(&format!("{TWELVE} 1eV")));
}

#[divan::bench]
fn scan_of_200_temperatures(bencher: Bencher) {
    run("sources");
    bencher.bench(|| run(&format!("{TWELVE} 0.5..5eV:200")));
}

#[divan::bench]
fn choice_among_10080_filters(bencher: Bencher) {
    run("sources");
    bencher.bench(|| run("passband choose --target He@667.8nm --among C,O,Fe,Cu --te 3eV"));
}
