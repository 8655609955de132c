//! `marks`: lines to calibrate on, and the dispersion fitted to them.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::fs;
use std::path::Path;

use common::{catalogue, json, run};

const FIT: &str = "lineclear marks --lamp Ne --span 570..750nm --fwhm 0.2nm --order 2 \
                   --fit tests/reference/published/bench/pixels-neon.csv";

fn truth() -> Vec<(f64, bool)> {
    let path = Path::new("tests/reference/published/bench/truth-pixels-neon.csv");
    let text = fs::read_to_string(path).unwrap();
    text.lines()
        .skip(1)
        .map(|line| {
            let cells: Vec<&str> = line.split(',').collect();
            (cells[0].parse().unwrap(), cells[2] == "right")
        })
        .collect()
}

#[test]
fn the_two_wrong_entries_are_rejected_and_the_dispersion_found() {
    let found = json(FIT);
    let truth = truth();
    let entries = found["entries"].as_array().unwrap();
    assert_eq!(entries.len(), truth.len());
    for (entry, (pixel, right)) in entries.iter().zip(&truth) {
        assert_eq!(entry["pixel"].as_f64().unwrap(), *pixel);
        if !right {
            assert_eq!(entry["used"], false, "{entry}");
            assert!(
                entry["residual_nm"].as_f64().unwrap().abs() > 0.3,
                "{entry}"
            );
        }
    }
    let used = entries.iter().filter(|e| e["used"] == true).count();
    // Of 22 right entries a cut at 2.5 σ takes 1.2 % each; the lamp's marks may lack some.
    assert!(used >= 17, "{used} used");
    // Put in: λ(air) = 575 + 0.08 x − 2.5e-6 x², 0.05 pixel of noise, 0.004 nm of RMS.
    let rms = found["fit"]["rms_nm"].as_f64().unwrap();
    assert!((0.002..0.006).contains(&rms), "{rms}");
    for x in [128.614_f64, 1000.0, 1993.016] {
        let curve: f64 = found["fit"]["vacuum_nm_by_power_of_pixel"]
            .as_array()
            .unwrap()
            .iter()
            .rev()
            .fold(0.0, |sum, c| sum * x + c.as_f64().unwrap());
        let air = 575.0 + 0.08 * x - 2.5e-6 * x * x;
        // n − 1 of air between 570 and 730 nm is 2.755e-4 to 2.771e-4 (common practice): 0.0005 nm.
        let vacuum = air * (1.0 + 2.763e-4);
        assert!((curve - vacuum).abs() < 0.006, "{x}: {curve} {vacuum}");
    }
    for end in found["fit"]["ends"].as_array().unwrap() {
        let sigma = end["uncertainty_nm"].as_f64().unwrap();
        assert!(sigma > 1e-4 && sigma < 0.006, "{end}");
    }
}

#[test]
fn marks_of_neon_are_in_the_printed_lamp_list() {
    // tests/reference/published/lamp_lists.csv (Kaye & Laby, CRC Handbook and others; from memory).
    let list = fs::read_to_string("tests/reference/published/lamp_lists.csv").unwrap();
    let printed: Vec<f64> = list
        .lines()
        .filter(|l| l.starts_with("Ne,"))
        .map(|l| l.split(',').nth(2).unwrap().parse().unwrap())
        .collect();
    let found =
        json("lineclear marks --lamp Ne --span 580..725nm --fwhm 0.2nm --parts 0 --weakest 0.05");
    let marks: Vec<f64> = found["lines"]
        .as_array()
        .unwrap()
        .iter()
        .map(|l| l["air_wavelength_nm"].as_f64().unwrap())
        .collect();
    assert!(marks.len() >= 12, "{marks:?}");
    for mark in &marks {
        // The catalogue states 0.001 nm for these.
        assert!(
            printed.iter().any(|p| (p - mark).abs() < 0.004),
            "{mark} is not printed"
        );
    }
}

#[test]
fn marks_have_no_neighbour_within_the_instrument_width() {
    // 616.36 lies 2.05 nm beside 614.31, which is stronger (lamp_lists.csv): at 2 nm it may not stand.
    let narrow =
        json("lineclear marks --lamp Ne --span 610..620nm --fwhm 0.1nm --parts 0 --weakest 0");
    let wide = json("lineclear marks --lamp Ne --span 610..620nm --fwhm 2nm --parts 0 --weakest 0");
    let near = |v: &serde_json::Value| {
        v["lines"]
            .as_array()
            .unwrap()
            .iter()
            .any(|l| (l["air_wavelength_nm"].as_f64().unwrap() - 616.36).abs() < 0.05)
    };
    assert!(near(&narrow));
    assert!(!near(&wide));
}

#[test]
fn csv_carries_both_media_and_parts_keep_one_each() {
    let csv = run("lineclear marks --lamp Hg --span 400..600nm --parts 4 --as csv").stdout;
    let header = csv.lines().next().unwrap();
    for key in [
        "air_wavelength_nm",
        "vacuum_wavelength_nm",
        "wavelength_uncertainty_nm",
    ] {
        assert!(header.split(',').any(|h| h == key), "{header}");
    }
    assert!((2..=4).contains(&(csv.lines().count() - 1)), "{csv}");
}

#[test]
fn bad_entries_are_named_with_line_and_column() {
    let folder = catalogue().parent().unwrap();
    for (text, status, said) in [
        (
            "pixel,wavelength_nm\n1,585.2\n1,588.2\n",
            1,
            "line 3: the position 1 stands already in line 2",
        ),
        (
            "pixel,wavelength_nm\n1,-585\n",
            1,
            "line 2, column `wavelength_nm`: `-585` is not above zero",
        ),
        ("wavelength_nm\n585\n", 1, "no column `pixel`"),
        (
            "pixel,wavelength_nm\n1,585.25\n2,588.19\n",
            1,
            "of 2 entries are marks",
        ),
    ] {
        let path = folder.join("entries.csv");
        fs::write(&path, text).unwrap();
        let run = run(&format!(
            "lineclear marks --lamp Ne --span 570..750nm --fit {}",
            path.display()
        ));
        assert_eq!(run.exit, status, "{}", run.stderr);
        assert!(run.stderr.contains(said), "{said}: {}", run.stderr);
        assert_eq!(run.stderr.trim_end().lines().count(), 1, "{}", run.stderr);
    }
}
