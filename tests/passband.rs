//! `passband` against values from outside, and the properties that hold whatever the data are.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use common::{json, run};
use proptest::prelude::*;
use serde_json::Value;

const HELIUM: &str =
    "lineclear passband --centre 667.9nm --fwhm 2nm --target \"He I 667.8nm\" --te 2eV";

/// A line whose upper level electrons reach by a dipole from the ground level, so that every model
/// rates it.
const SINGLET: &str =
    "lineclear passband --centre 501.6nm --fwhm 12nm --target \"He I 501.57nm\" --te 2eV";

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap_or(f64::NAN)
}

fn fractions(answer: &Value) -> f64 {
    let lines = answer["lines"].as_array().unwrap();
    lines
        .iter()
        .filter_map(|l| l["light_fraction"].as_f64())
        .sum()
}

#[test]
fn fractions_of_lines_and_background_sum_to_one() {
    let lines = json(&format!("{HELIUM} --among He,C,O,Fe,Cu"));
    // The JSON leaves out lines below 1e-9.
    assert!((fractions(&lines) - 1.0).abs() < 1e-6);
    let hot = json(&format!(
        "{HELIUM} --among He,Fe --hot 1200K --target-radiance 5"
    ));
    let background = number(&hot["background_fraction"]);
    assert!(background > 1e-6 && background < 1.0, "{background}");
    assert!((fractions(&hot) + background - 1.0).abs() < 1e-6);
}

#[test]
fn the_background_is_plancks_law_behind_the_filter() {
    let path = concat!(
        env!("CARGO_MANIFEST_DIR"),
        "/tests/reference/passband/background.csv"
    );
    let mut seen = 0;
    for row in csv::Reader::from_path(path).unwrap().records() {
        let row = row.unwrap();
        let (centre, fwhm, kelvin) = (&row[0], &row[1], &row[2]);
        let radiance: f64 = row[3].parse().unwrap();
        // A line that passes sets the scale, with the radiance of the table.
        let target = match (centre, fwhm) {
            ("668", _) => "He I 667.8nm",
            ("500", "10") => "He I 501.57nm",
            _ => continue,
        };
        let answer = json(&format!(
            "lineclear passband --centre {centre}nm --fwhm {fwhm}nm --shape rectangular --peak 1 \
             --among He --target \"{target}\" --hot {kelvin}K --emissivity 0.5 \
             --target-radiance {radiance}"
        ));
        seen += 1;
        let ratio = number(&answer["background_fraction"]) / number(&answer["purity"]);
        let transmission = number(&answer["transmission"]);
        // Half of the radiance of the table beside the target's own; the trapezium rule over a
        // sharp edge is good to one of 2000 steps over ten widths, 0.5 %.
        assert!(
            (ratio * transmission / 0.5 - 1.0).abs() < 8e-3,
            "{row:?}: {ratio}"
        );
    }
    assert!(seen == 9, "only {seen} rows were checked");
}

#[test]
fn a_threshold_is_where_the_photon_has_the_work_function() {
    // λ = hc/W = 1239.841984 eV nm / W (CODATA 2022): 2 eV is 619.92 nm.
    let seen = |nm: u32| {
        let command = format!(
            "lineclear passband --centre {nm}nm --fwhm 20nm --among Fe,Ne --work-function 2eV"
        );
        json(&command)["lines"]
            .as_array()
            .unwrap()
            .iter()
            .filter(|l| number(&l["light_fraction"]) > 0.0)
            .map(|l| number(&l["vacuum_wavelength_nm"]))
            .fold(0.0, f64::max)
    };
    let longest = seen(615);
    assert!(longest > 600.0 && longest <= 619.921, "{longest}");
}

#[test]
fn tilt_moves_the_passband_by_the_formula_of_the_trade() {
    // λ(θ) = λ √(1 − sin²θ/n²), common practice.
    let answer = json(&format!("{HELIUM} --among He --tilt 5 --index 1.8"));
    let expected = 667.9 * (1.0 - (5_f64.to_radians().sin() / 1.8).powi(2)).sqrt();
    assert!((number(&answer["seen_centre_nm"]) - expected).abs() < 1e-6);
}

#[test]
fn the_order_of_the_species_does_not_matter() {
    let one = json(&format!("{HELIUM} --among He,C,O,Fe"));
    let other = json(&format!("{HELIUM} --among Fe,O,He,C"));
    for key in [
        "purity",
        "interference_fraction",
        "transmission",
        "drift_to_blue_nm",
    ] {
        // Sums in another order differ by rounding.
        let (a, b) = (number(&one[key]), number(&other[key]));
        assert!((a - b).abs() <= 1e-12 * a.abs(), "{key}: {a} {b}");
    }
}

#[test]
fn an_amount_of_zero_is_as_if_it_were_absent() {
    let none = json(&format!("{HELIUM} --among He,Fe --mix Fe=0,He=1"));
    let absent = json(&format!("{HELIUM} --among He --mix He=1"));
    assert_eq!(none["purity"], absent["purity"]);
    assert_eq!(
        none["interference_fraction"],
        absent["interference_fraction"]
    );
    assert_eq!(none["verdict"], absent["verdict"]);
}

#[test]
fn a_scan_states_each_temperature_and_agrees_with_a_question_of_its_own() {
    let scan = json(&format!(
        "{} --among He,C,O,Fe",
        HELIUM.replace("2eV", "1..4eV:3")
    ));
    let points = scan["scan"].as_array().unwrap();
    assert_eq!(points.len(), 3);
    for (point, te) in points.iter().zip(["1eV", "2eV", "4eV"]) {
        let alone = json(&format!("{} --among He,C,O,Fe", HELIUM.replace("2eV", te)));
        let (a, b) = (number(&point["purity"]), number(&alone["purity"]));
        assert!((a - b).abs() < 1e-9, "{te}: {a} {b}");
    }
}

#[test]
fn a_scan_over_density_agrees_with_questions_of_their_own() {
    let hydrogen = |ne: &str| {
        json(&format!(
            "lineclear passband --centre 656.2nm --fwhm 1nm --target \"H I 656.28nm\" \
             --among H,C,He --model lte --te 1.2eV --ne {ne}"
        ))
    };
    let scan = hydrogen("1e19..1e21m-3:3");
    let points = scan["density_scan"].as_array().unwrap();
    assert_eq!(points.len(), 3);
    for (point, ne) in points.iter().zip(["1e19m-3", "1e20m-3", "1e21m-3"]) {
        let (a, b) = (number(&point["purity"]), number(&hydrogen(ne)["purity"]));
        // Stark widths are those of the middle density in a scan: 0.05 nm behind 1 nm.
        assert!((a - b).abs() < 5e-3, "{ne}: {a} {b}");
    }
    // Where the mix is ionised more the purity of a neutral line is less.
    assert!(number(&points[0]["purity"]) < number(&points[2]["purity"]));
}

#[test]
fn a_file_of_the_mix_says_what_options_say() {
    let file = json(&format!(
        "{} --among He,C,O --mix tests/reference/emission/harrow_bay_mix.toml",
        SINGLET.replace(" --te 2eV", "")
    ));
    let typed = json(&format!(
        "{} --among He,C,O --model coronal --ne 1e18m-3 --gas-temperature 800K \
         --mix He=1,C=0.01+-30%,O=0.005±0.002 --ion-fractions \"C I=0.1,C II=0.7±10%,C III=0.2\" \
         --metastable \"He I 2s 3S=1e-5±50%\"",
        SINGLET.replace("2eV", "5eV")
    ));
    assert!(number(&file["purity"]) > 0.5);
    for key in [
        "purity",
        "interference_fraction",
        "interference_high",
        "verdict_range",
        "lines",
    ] {
        assert_eq!(file[key], typed[key], "{key}");
    }
    // What is typed wins over the file.
    let hotter = json(&format!(
        "{} --among He,C,O --mix tests/reference/emission/harrow_bay_mix.toml",
        SINGLET.replace("2eV", "10eV")
    ));
    assert_eq!(hotter["conditions"]["electron_temperature_ev"], 10.0);
    assert_ne!(file["purity"], hotter["purity"]);
}

#[test]
fn properties_hold_in_every_model() {
    let given = "--given tests/reference/emission/harrow_bay_fractions.csv";
    for model in [
        "visible".to_owned(),
        "lte --ne 1e20m-3".to_owned(),
        "coronal".to_owned(),
        format!("given {given}"),
    ] {
        let ask = |among: &str, mix: &str| {
            json(&format!(
                "{SINGLET} --model {model} --among {among} --mix {mix}"
            ))
        };
        let one = ask("He,C", "C=0.3,He=1");
        let other = ask("C,He", "He=1,C=0.3");
        for key in ["purity", "interference_fraction", "interference_high"] {
            // Sums in another order differ by rounding.
            let (a, b) = (number(&one[key]), number(&other[key]));
            assert!((a - b).abs() <= 1e-12 * a.abs(), "{model} {key}: {a} {b}");
        }
        assert_eq!(one["verdict_range"], other["verdict_range"], "{model}");
        assert!((fractions(&one) - 1.0).abs() < 1e-6, "{model}");
        let (none, absent) = (ask("He,C", "C=0,He=1"), ask("He", "He=1"));
        for key in [
            "purity",
            "interference_fraction",
            "verdict_range",
            "unrated",
        ] {
            assert_eq!(none[key], absent[key], "{model} {key}");
        }
        let purity = |amount: f64| number(&ask("He,C", &format!("C={amount},He=1"))["purity"]);
        assert!(
            purity(0.1) >= purity(1.0) && purity(1.0) >= purity(30.0),
            "{model}"
        );
    }
}

#[test]
fn the_best_filter_is_on_the_list_and_none_listed_beats_it() {
    let answer = json(
        "lineclear passband choose --target \"He I 667.8nm\" --among C,O,Fe --te 3eV \
         --stock tests/reference/passband/harrow_bay_stock.csv --wander 0nm",
    );
    let candidates = answer["candidates"].as_array().unwrap();
    let score = |c: &Value| number(&c["purity"]) * number(&c["transmission"]);
    let best = candidates.iter().find(|c| c["is_best"] == true).unwrap();
    for candidate in candidates {
        // Scores within 0.5 % count as equal.
        assert!(score(candidate) <= score(best) * 1.0051, "{candidate}");
        let beaten = candidates.iter().any(|c| {
            number(&c["purity"]) > number(&candidate["purity"])
                && number(&c["transmission"]) > number(&candidate["transmission"])
        });
        assert!(!beaten || candidate["on_front"] == false, "{candidate}");
    }
    // What the search says of the best is what `passband` says of that filter.
    let (centre, fwhm, tilt) = (&best["centre_nm"], &best["fwhm_nm"], &best["tilt_deg"]);
    let row = "HB-670";
    assert_eq!(best["name"], row);
    let alone = json(&format!(
        "lineclear passband --centre {centre}nm --fwhm {fwhm}nm --tilt {tilt} --cavities 3 \
         --peak 0.8 --target \"He I 667.8nm\" --among C,O,Fe --te 3eV"
    ));
    // The search takes lines at their centres and within six widths: 1e-3 of the light.
    let (a, b) = (number(&alone["purity"]), number(&best["purity"]));
    assert!((a - b).abs() < 2e-3, "{a} {b}");
}

#[test]
fn require_ends_with_status_3_where_the_target_is_not_that_clear() {
    assert_eq!(run(&format!("{HELIUM} --among W --require clear")).exit, 3);
    assert_eq!(run(&format!("{HELIUM} --among He --require clear")).exit, 0);
}

proptest! {
    // Each case runs the binary twice.
    #![proptest_config(ProptestConfig::with_cases(6))]

    #[test]
    fn purity_falls_when_there_is_more_of_an_interferer(low in 0.01f64..10.0, factor in 1.0f64..20.0) {
        let purity = |amount: f64| {
            number(&json(&format!("{HELIUM} --among He,C,O,Fe --mix Fe={amount},O={amount}"))["purity"])
        };
        prop_assert!(purity(low * factor) <= purity(low));
    }

    #[test]
    fn a_wider_passband_never_lets_less_of_the_target_through(fwhm in 0.2f64..3.0, factor in 1.0f64..5.0, shape in 0usize..4) {
        let form = ["--cavities 1", "--cavities 3", "--shape gaussian", "--shape rectangular"][shape];
        let transmission = |fwhm: f64| {
            let command = format!("lineclear passband --centre 667.8nm --fwhm {fwhm}nm {form} --among He --target \"He I 667.8nm\"");
            number(&json(&command)["transmission"])
        };
        // Each is integrated over the line to 1e-6.
        prop_assert!(transmission(fwhm * factor) >= transmission(fwhm) - 2e-6);
    }
}
