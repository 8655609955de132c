//! `attribute`: peak lists of the invented bench (positions of printed tables), a spectrum, bad input.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::collections::BTreeSet;
use std::fs;

use common::{catalogue, json, run};
use serde_json::Value;

const BENCH: &str = "tests/reference/published/bench";

struct Truth {
    position_nm: f64,
    species: String,
    wavelength_nm: f64,
    order: u64,
}

fn truth(name: &str) -> Vec<Truth> {
    let text = fs::read_to_string(format!("{BENCH}/truth-{name}.csv")).unwrap();
    let mut rows: Vec<Truth> = text
        .lines()
        .skip(1)
        .map(|line| {
            let cells: Vec<&str> = line.split(',').collect();
            Truth {
                position_nm: cells[0].parse().unwrap(),
                species: cells[1].to_owned(),
                wavelength_nm: cells[2].parse().unwrap(),
                order: cells[3].parse().unwrap(),
            }
        })
        .collect();
    rows.sort_by(|a, b| a.position_nm.total_cmp(&b.position_nm));
    rows
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap()
}

fn is_right(candidate: &Value, truth: &Truth) -> bool {
    // Printed and held wavelengths of one line agree to 0.02 nm; multiplets are seen as one.
    candidate["species"] == truth.species.as_str()
        && candidate["order"] == truth.order
        && (number(&candidate["wavelength_nm"]) - truth.wavelength_nm).abs() < 0.03
}

fn present(answer: &Value) -> BTreeSet<String> {
    let species = answer["species"].as_array().unwrap();
    species
        .iter()
        .filter(|s| s["status"] == "present")
        .map(|s| s["species"].as_str().unwrap().to_owned())
        .collect()
}

/// The species may be any of all held; those not held yet are named here.
fn recognised(name: &str, not_held: &[&str], may_be_missed: &[&str]) {
    let answer = json(&format!("lineclear attribute {BENCH}/peaks-{name}.csv"));
    let truth = truth(name);
    let peaks = answer["peaks"].as_array().unwrap();
    assert_eq!(peaks.len(), truth.len(), "{name}");
    let judged: Vec<(&Value, &Truth)> = peaks
        .iter()
        .zip(&truth)
        .filter(|(_, t)| !not_held.contains(&t.species.as_str()))
        .collect();
    let right = judged
        .iter()
        .filter(|(p, t)| is_right(&p["candidates"][0], t))
        .count();
    assert!(
        right * 10 >= judged.len() * 9,
        "{name}: {right} of {} right",
        judged.len()
    );
    let expected: BTreeSet<String> = truth.iter().map(|t| t.species.clone()).collect();
    let found = present(&answer);
    assert!(
        found.is_subset(&expected),
        "{name}: {found:?} claimed, {expected:?} there"
    );
    for species in &expected {
        let excused =
            not_held.contains(&species.as_str()) || may_be_missed.contains(&species.as_str());
        assert!(
            excused || found.contains(species),
            "{name}: {species} not found"
        );
    }
    assert!(number(&answer["false_discovery_rate"]) < 0.05, "{name}");
}

#[test]
fn lamps_of_printed_lists_are_recognised_among_all_elements() {
    for name in [
        "mercury-argon",
        "neon",
        "argon",
        "krypton-neon",
        "xenon",
        "sodium-street-lamp",
    ] {
        recognised(name, &[], &[]);
    }
}

#[test]
fn arcs_and_the_plasma_are_recognised_among_all_elements() {
    recognised("cadmium-zinc", &[], &[]);
    recognised("steel-arc", &[], &[]);
    // Three lines each of O II and D I among 85 peaks may stay below 95 %.
    recognised("harrow-bay", &[], &["O II", "D I"]);
}

#[test]
fn an_isotope_that_is_asked_for_is_found_by_few_lines() {
    let answer = json(&format!(
        "lineclear attribute {BENCH}/peaks-harrow-bay.csv --among H,D,He,Ar,C,O,Fe,Cu,W"
    ));
    let found = present(&answer);
    let expected: BTreeSet<String> = truth("harrow-bay").into_iter().map(|t| t.species).collect();
    assert_eq!(found, expected);
}

#[test]
fn second_orders_are_marked() {
    let answer = json(&format!(
        "lineclear attribute {BENCH}/peaks-mercury-argon.csv"
    ));
    let mut marked = 0;
    for (peak, truth) in answer["peaks"]
        .as_array()
        .unwrap()
        .iter()
        .zip(truth("mercury-argon"))
    {
        if peak["mark"] == "second order" {
            assert_eq!(truth.order, 2, "{peak}");
            marked += 1;
        }
    }
    assert!(marked >= 6, "{marked}");
}

#[test]
fn a_spectrum_is_searched_for_its_peaks() {
    let answer = json(&format!(
        "lineclear attribute {BENCH}/spectrum-mercury-helium.csv --fwhm 0.15nm"
    ));
    let text = fs::read_to_string(format!("{BENCH}/truth-spectrum-mercury-helium.csv")).unwrap();
    let peaks = answer["peaks"].as_array().unwrap();
    assert_eq!(
        present(&answer),
        BTreeSet::from(["He I".to_owned(), "Hg I".to_owned()])
    );
    let mut found = 0;
    for line in text.lines().skip(1) {
        let cells: Vec<&str> = line.split(',').collect();
        let (at, counts): (f64, f64) = (cells[0].parse().unwrap(), cells[3].parse().unwrap());
        let near = peaks
            .iter()
            .find(|p| (number(&p["position_nm"]) - at).abs() < 0.05);
        // Noise is √80 + 3 = 12 counts: a line of 72 counts is 6 σ of one sample.
        assert!(
            near.is_some() || counts < 100.0,
            "{at} with {counts} counts"
        );
        if let Some(peak) = near {
            found += 1;
            let off = (number(&peak["position_nm"]) - at).abs();
            assert!(off < 4.0 * number(&peak["uncertainty_nm"]), "{at}: {off}");
            assert_eq!(peak["candidates"][0]["species"], cells[1], "{at}");
        }
    }
    assert_eq!(found, peaks.len(), "a peak of noise was found");
}

#[test]
fn unsorted_lists_are_sorted_and_wavenumbers_read() {
    let text = fs::read_to_string(format!("{BENCH}/peaks-neon.csv")).unwrap();
    let mut lines: Vec<&str> = text.lines().collect();
    lines[1..].reverse();
    let a = json(&format!("lineclear attribute {BENCH}/peaks-neon.csv"));
    let b = json(&format!(
        "lineclear attribute {}",
        written("reversed.csv", &lines.join("\n"))
    ));
    assert_eq!(a["peaks"], b["peaks"]);
    let waves: String = a["peaks"]
        .as_array()
        .unwrap()
        .iter()
        .map(|p| {
            // n of air between 540 and 744 nm is 1.000276 to 1.000278 (common practice): 0.0006 nm.
            let vacuum = number(&p["position_nm"]) * 1.000_277;
            format!("{:.4},{:.4}\n", 1e7 / vacuum, 0.02 * 1e7 / vacuum / vacuum)
        })
        .collect();
    let text = format!("wavenumber_per_cm,uncertainty_per_cm\n{waves}");
    let c = json(&format!(
        "lineclear attribute {}",
        written("waves.csv", &text)
    ));
    assert_eq!(present(&c), BTreeSet::from(["Ne I".to_owned()]));
}

#[test]
fn a_common_shift_is_fitted() {
    let text = fs::read_to_string(format!("{BENCH}/peaks-neon.csv")).unwrap();
    let moved: String = text
        .lines()
        .skip(1)
        .map(|l| {
            let at: f64 = l.split(',').next().unwrap().parse().unwrap();
            format!("{:.4},0.02\n", at + 0.3)
        })
        .collect();
    let file = written("moved.csv", &format!("position_nm,uncertainty_nm\n{moved}"));
    let answer = json(&format!(
        "lineclear attribute {file} --shift 0.5nm --among Ne,Ar,Hg,Kr"
    ));
    // 26 peaks of 0.02 nm: 0.004 nm; the list's own mean error comes on top.
    let shift = number(&answer["scale"]["shift_nm"]);
    assert!((shift + 0.3).abs() < 0.02, "{shift}");
    assert_eq!(present(&answer), BTreeSet::from(["Ne I".to_owned()]));
}

fn written(name: &str, text: &str) -> String {
    let path = catalogue().parent().unwrap().join(name);
    fs::write(&path, text).unwrap();
    path.display().to_string()
}

#[test]
fn bad_lists_are_refused_in_one_sentence_each() {
    for (text, said) in [
        (
            "position_nm\n500\n500\n",
            "line 3: the position 500 stands already in line 2",
        ),
        (
            "position_nm\n-500\n",
            "line 2, column `position_nm`: `-500` is not above zero",
        ),
        ("position_nm\n", "holds no row"),
        (
            "position_nm\n1e9\n2e9\n",
            "no line of these species is held",
        ),
        ("position_nm,uncertainty_A\n500,0.1\n", "units are mixed"),
        ("position_nm,wavelength_A\n500,5000\n", "units are mixed"),
        (
            "position_nm\n500 A\n",
            "the unit stands in the name of the column",
        ),
        ("position\n500\n", "no column of positions with its unit"),
        (
            "position_nm;intensity\n500,1;3\n",
            "cells are separated by semicolons here",
        ),
        (
            "position_nm,intensity\n500,0\n",
            "line 2, column `intensity`: `0` is not above zero",
        ),
    ] {
        let run = run(&format!(
            "lineclear attribute {}",
            written("bad-list.csv", text)
        ));
        assert_eq!(run.exit, 1, "{text}: {}", run.stdout);
        assert!(run.stderr.contains(said), "{said}: {}", run.stderr);
        assert_eq!(run.stderr.trim_end().lines().count(), 1, "{}", run.stderr);
    }
}
