//! `pairs`: lines for thermometry, and Boltzmann plots of measured ones.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::fs;

use common::{catalogue, json, run};
use serde_json::Value;

const BENCH: &str = "tests/reference/published/bench";

fn plot(file: &str) -> Value {
    json(&format!("lineclear pairs --measured {file}"))
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap()
}

/// (name, temperature put in, electrons put in, lines of the first stage, fit in closed form: T, σ, χ²).
fn made() -> Vec<Vec<String>> {
    let text = fs::read_to_string(format!("{BENCH}/plots.csv")).unwrap();
    text.lines()
        .skip(1)
        .map(|l| l.split(',').map(str::to_owned).collect())
        .collect()
}

#[test]
fn plots_give_the_temperature_of_the_closed_form_and_that_put_in() {
    // Lines, gA and energies of Bielski 1975, Wiese et al. 1989 and Kelleher & Podobedova 2008;
    // temperatures and noise invented; the closed form is that of make.py (Bevington 1969).
    let made = made();
    assert_eq!(made.len(), 3);
    for row in &made {
        let found = plot(&format!("{BENCH}/plot-{}.csv", row[0]));
        let value = |i: usize| row[i].parse::<f64>().unwrap();
        let (put_in, fitted, sigma, chi) = (value(1), value(4), value(5), value(6));
        let temperature = number(&found["plot"]["temperature_k"]);
        assert!(
            (temperature - put_in).abs() < 2.5 * sigma,
            "{}: {temperature}",
            row[0]
        );
        if row[0] == "magnesium-plasma" {
            // Two more lines of the second stage, 12 meV apart: the slope moves by far below σ.
            assert!(
                (temperature - fitted).abs() < 0.05 * sigma,
                "{temperature} {fitted}"
            );
        } else {
            // Six digits printed; the script's k has ten.
            assert!(
                (temperature / fitted - 1.0).abs() < 2e-5,
                "{}: {temperature} {fitted}",
                row[0]
            );
            let uncertainty = number(&found["plot"]["temperature_uncertainty_k"]);
            assert!(
                (uncertainty / sigma - 1.0).abs() < 1e-4,
                "{}: {uncertainty}",
                row[0]
            );
            let chi_squared = number(&found["plot"]["chi_squared"]);
            assert!(
                (chi_squared / chi - 1.0).abs() < 1e-3,
                "{}: {chi_squared}",
                row[0]
            );
        }
        let outliers = found["points"]
            .as_array()
            .unwrap()
            .iter()
            .filter(|p| p["used"] == false);
        assert_eq!(outliers.count(), 0, "{}", row[0]);
    }
}

#[test]
fn two_stages_give_the_electron_density() {
    let found = plot(&format!("{BENCH}/plot-magnesium-plasma.csv"));
    let density = &found["plot"]["electron_densities"][0];
    let put_in = 3.0e16 * 1e6;
    let ratio: f64 = number(&density["electron_density_per_m3"]) / put_in;
    let sigma = number(&density["log_uncertainty"]);
    assert!(ratio.ln().abs() < 2.0 * sigma, "{ratio} {sigma}");
    // 300 K of 8887 K at 7.65 eV: (1.5 + χ/kT) σ_T/T is about 0.39.
    assert!((0.25..0.5).contains(&sigma), "{sigma}");
}

/// Lines of neutral iron, exact at 5000 K: gA and energies invented, response 0.5 in the blue.
fn exact(change: impl Fn(usize, f64) -> f64) -> String {
    let kt = 8.617_333e-5 * 5000.0;
    let mut text = String::from(
        "species,position_nm,intensity,response,relative_uncertainty,weighted_rate_per_s,upper_energy_ev\n",
    );
    for i in 0..8 {
        let (nm, energy) = (400.0 + 10.0 * f64::from(i), 3.0 + 0.5 * f64::from(i));
        let response = if i < 4 { 0.5 } else { 1.0 };
        // Vacuum and air wavelengths differ by a common 2.8e-4, which moves only the intercept.
        let intensity = 1e8 / nm * (-energy / kt).exp() * response;
        let intensity = change(i as usize, intensity);
        text.push_str(&format!(
            "Fe I,{nm},{intensity:e},{response},0.05,1e8,{energy}\n"
        ));
    }
    text
}

fn written(name: &str, text: &str) -> String {
    let path = catalogue().parent().unwrap().join(name);
    fs::write(&path, text).unwrap();
    path.display().to_string()
}

#[test]
fn a_response_is_corrected_and_an_outlier_named() {
    let clean = plot(&written("exact.csv", &exact(|_, v| v)));
    // The change of n between 400 and 470 nm is 1e-6; digits of k: 1e-7.
    let temperature = number(&clean["plot"]["temperature_k"]);
    assert!((temperature - 5000.0).abs() < 0.5, "{temperature}");
    let wrong = plot(&written(
        "wrong.csv",
        &exact(|i, v| {
            if i == 5 {
                3.0 * v
            } else {
                v * [1.01, 0.98, 1.03][i % 3]
            }
        }),
    ));
    let points = wrong["points"].as_array().unwrap();
    let out: Vec<usize> = (0..8).filter(|&i| points[i]["used"] == false).collect();
    assert_eq!(out, [5]);
    // 3 % of noise over 3.5 eV: 1 σ of T is about 0.8 %.
    let temperature = number(&wrong["plot"]["temperature_k"]);
    assert!((temperature - 5000.0).abs() < 120.0, "{temperature}");
}

#[test]
fn rates_and_levels_come_from_the_catalogue_where_not_given() {
    let given = plot(&format!("{BENCH}/plot-argon-arc.csv"));
    let text = fs::read_to_string(format!("{BENCH}/plot-argon-arc.csv")).unwrap();
    let short: String = text
        .lines()
        .map(|l| l.split(',').take(4).collect::<Vec<_>>().join(",") + "\n")
        .collect();
    let held = plot(&written("short.csv", &short));
    let (a, b) = (
        number(&given["plot"]["temperature_k"]),
        number(&held["plot"]["temperature_k"]),
    );
    // The same paper's rates on both sides (Wiese et al. 1989), rounded in one: below 1 σ of 350 K.
    assert!((a - b).abs() < 350.0, "{a} {b}");
}

#[test]
fn the_error_of_a_pair_is_kt_over_the_difference_times_that_of_the_ratio() {
    let found =
        json("lineclear pairs \"Cu I\" --span 450..600nm --te 0.6eV --intensity-error 0.04");
    let pairs = found["pairs"].as_array().unwrap();
    assert!(pairs.len() > 5);
    let mut before = 0.0;
    for pair in pairs {
        let difference = number(&pair["energy_difference_ev"]);
        let up =
            number(&pair["second"]["upper_energy_ev"]) - number(&pair["first"]["upper_energy_ev"]);
        assert!(difference > 0.0 && (up - difference).abs() < 1e-9);
        let error = number(&pair["temperature_relative_error"]);
        let rates = [&pair["first"], &pair["second"]]
            .map(|l| l["rate_relative_uncertainty"].as_f64().unwrap_or(0.5));
        let expected =
            0.6 / difference * (2.0 * 0.0016 + rates[0].powi(2) + rates[1].powi(2)).sqrt();
        // k T in eV is exact to rounding.
        assert!((error / expected - 1.0).abs() < 1e-6, "{pair}");
        assert!(error >= before);
        before = error;
        for line in [&pair["first"], &pair["second"]] {
            assert_eq!(line["verdict"], "clear");
            assert_eq!(line["species"], "Cu I");
        }
    }
    let near = json("lineclear pairs \"Cu I\" --span 450..600nm --te 0.6eV --within 10nm");
    for pair in near["pairs"].as_array().unwrap() {
        assert!(number(&pair["distance_nm"]) <= 10.0);
    }
}

#[test]
fn a_line_under_another_species_makes_no_pair() {
    // He I 667.815 and Fe I 667.799 nm lie 0.016 nm apart (lines.csv).
    let alone = json("lineclear pairs \"He I\" --span 660..710nm");
    let with =
        json("lineclear pairs \"He I\" --span 660..710nm --among \"Fe I\" --mix \"Fe I=10000\"");
    let has = |v: &Value| {
        v["lines"]
            .as_array()
            .unwrap()
            .iter()
            .any(|l| (number(&l["wavelength_nm"]) - 667.81).abs() < 0.05)
    };
    assert!(has(&alone));
    assert!(!has(&with));
}

#[test]
fn what_makes_no_plot_is_said_in_one_sentence() {
    for (text, status, said) in [
        (
            "species,position_nm,intensity,weighted_rate_per_s,upper_energy_ev\nFe I,400,1,1e8,3\n",
            1,
            "at least two lines",
        ),
        (
            "species,position_nm,intensity,weighted_rate_per_s,upper_energy_ev\nFe I,400,1,1e8,3\nFe I,410,9,1e8,4\n",
            1,
            "do not fall with energy",
        ),
        (
            "species,position_nm,intensity,weighted_rate_per_s,upper_energy_ev\nFe I,400,9,1e8,3\nNi I,410,1,1e8,4\n",
            1,
            "do not belong into one plot",
        ),
        (
            "species,position_nm,intensity\nFe I,400,-9\n",
            1,
            "line 2, column `intensity`: `-9` is not above zero",
        ),
        (
            "species,position_nm,intensity\nFe,400,9\n",
            1,
            "is not one stage",
        ),
        (
            "species,position_nm,intensity\nHe I,455,9\n",
            1,
            "is no rated line of He I",
        ),
    ] {
        let run = run(&format!(
            "lineclear pairs --measured {}",
            written("bad.csv", text)
        ));
        assert_eq!(run.exit, status, "{}", run.stderr);
        assert!(run.stderr.contains(said), "{said}: {}", run.stderr);
        assert_eq!(run.stderr.trim_end().lines().count(), 1, "{}", run.stderr);
    }
    let run = run("lineclear pairs Fe --span 400..500nm");
    assert_eq!(run.exit, 2);
}
