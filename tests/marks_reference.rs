//! Dispersions against numpy (`tests/reference/marks/fits.py`), and where marks are chosen.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::collections::HashMap;

use common::json;
use lineclear::advise::marks::weighted;
use serde_json::Value;

const FOLDER: &str = "tests/reference/marks";

type Row = HashMap<String, String>;

fn table(name: &str) -> Vec<Row> {
    let mut reader = csv::Reader::from_path(format!("{FOLDER}/{name}")).unwrap();
    reader.deserialize().map(Result::unwrap).collect()
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap()
}

#[test]
fn weighted_polynomials_are_those_of_numpy() {
    let rows = table("polynomials.csv");
    assert_eq!(rows.len(), 24);
    for row in &rows {
        let numbers: Vec<f64> = row["x_y_weight"]
            .split(' ')
            .map(|n| n.parse().unwrap())
            .collect();
        let points: Vec<(f64, f64, f64)> = numbers.chunks(3).map(|p| (p[0], p[1], p[2])).collect();
        let wanted = |key: &str| row[key].parse::<f64>().unwrap();
        let curve = weighted(&points, row["order"].parse().unwrap()).unwrap();
        let at = wanted("at");
        // Normal equations of a well-conditioned basis keep ten digits and more of some 400 nm.
        assert!(
            (curve.at(at) - wanted("value")).abs() < 1e-7,
            "{}: {at}",
            row["fit"]
        );
        assert!(
            (curve.variance_at(at) / wanted("variance") - 1.0).abs() < 1e-7,
            "{}",
            row["fit"]
        );
        let powers = curve
            .powers()
            .into_iter()
            .rev()
            .fold(0.0, |sum, c| sum * at + c);
        // Powers of a pixel of four digits cancel: five digits of the fit's 0.01 nm of noise are left.
        assert!(
            (powers - wanted("value")).abs() < 1e-6,
            "{}: {powers}",
            row["fit"]
        );
    }
}

#[test]
fn robust_dispersions_reject_what_numpy_rejects_and_give_its_curve() {
    let rows = table("fits.csv");
    assert_eq!(rows.len(), 5);
    for row in &rows {
        let lamp = match row["lamp"].as_str() {
            "neon" => "Ne I",
            "argon" => "Ar I",
            _ => "Hg I",
        };
        let found = json(&format!(
            "lineclear marks --lamp \"{lamp}\" --span {}..{}nm --medium air --fwhm 0.1nm --parts 0 --order {} \
             --pixels 0..2047 --fit {FOLDER}/pixels-{}.csv",
            row["from_nm"], row["to_nm"], row["order"], row["fit"]
        ));
        let name = &row["fit"];
        let wrong: Vec<usize> = row["wrong"]
            .split(' ')
            .map(|i| i.parse().unwrap())
            .collect();
        assert_eq!(row["wrong"], row["rejected"], "numpy found them");
        let entries = found["entries"].as_array().unwrap();
        let (mut used, mut cut) = (0, 0);
        for (index, entry) in entries.iter().enumerate() {
            let is_outlier = entry["reason"].as_str().unwrap().contains("off the curve");
            if entry["used"] == true {
                used += 1;
                assert!(!wrong.contains(&index), "{name}: {entry}");
            }
            if is_outlier && !wrong.contains(&index) {
                cut += 1;
                // A right entry is off by noise alone: five σ of 0.05 pixel. Wrong ones are off by 4 pixels and more.
                assert!(
                    number(&entry["residual_pixels"]).abs() < 0.25,
                    "{name}: {entry}"
                );
            }
        }
        // A cut at 2.5 σ takes 1.2 % of right entries: of some 30, more than two by a chance below 1 %.
        assert!(cut <= 2, "{name}: {cut}");
        // Blends, lines without a known rate and what lies beside one are no marks, a quarter of these lists; most are.
        assert!(
            used * 10 >= entries.len() * 6,
            "{name}: {used} of {}",
            entries.len()
        );
        let wanted = |key: &str| row[key].parse::<f64>().unwrap();
        let powers: Vec<f64> = found["fit"]["vacuum_nm_by_power_of_pixel"]
            .as_array()
            .unwrap()
            .iter()
            .map(number)
            .collect();
        let curve = |x: f64| powers.iter().rev().fold(0.0, |sum, c| sum * x + c);
        let ends = found["fit"]["ends"].as_array().unwrap();
        for (end, at) in ends.iter().zip(["0", "2047"]) {
            let (own, other) = (
                number(&end["uncertainty_nm"]),
                wanted(&format!("uncertainty_nm_at_{at}")),
            );
            let place = number(&end["pixel"]);
            let off = (curve(place) - wanted(&format!("vacuum_nm_at_{at}"))).abs();
            // Most entries are the same: the curves agree within two σ of the less certain one.
            assert!(
                off < 2.0 * own.max(other),
                "{name}: {place}: {off} {own} {other}"
            );
        }
        let middle = (curve(1000.0) - wanted("vacuum_nm_at_1000")).abs();
        // In the middle the curve of a dozen entries and more is known to a third of one entry's σ; twice over, as above.
        assert!(
            middle < 0.67 * wanted("standard_deviation_nm"),
            "{name}: {middle}"
        );
        // 0.05 pixel of noise on both sides; a σ of 12 or more entries is known to 20 %, and marks differ.
        let ratio =
            number(&found["fit"]["standard_deviation_nm"]) / wanted("standard_deviation_nm");
        assert!((0.6..1.5).contains(&ratio), "{name}: {ratio}");
        for (end, key) in ends
            .iter()
            .zip(["uncertainty_nm_at_0", "uncertainty_nm_at_2047"])
        {
            let ratio = number(&end["uncertainty_nm"]) / wanted(key);
            assert!((0.5..2.0).contains(&ratio), "{name}: {ratio}");
        }
    }
}

#[test]
fn the_strongest_mark_of_each_part_of_equal_width_is_chosen() {
    let ask = |parts: usize| {
        let answer = json(&format!(
            "lineclear marks --lamp \"Ar I\" --span 690..860nm --fwhm 0.1nm --parts {parts}"
        ));
        let range = answer["conditions"]["range_vacuum_nm"].clone();
        let marks: Vec<(f64, f64)> = answer["lines"]
            .as_array()
            .unwrap()
            .iter()
            .map(|l| {
                (
                    number(&l["vacuum_wavelength_nm"]),
                    number(&l["relative_light"]),
                )
            })
            .collect();
        (number(&range[0]), number(&range[1]), marks)
    };
    let (low, high, all) = ask(0);
    let (_, _, chosen) = ask(8);
    let part = |nm: f64| ((nm - low) / (high - low) * 8.0) as usize;
    let mut expected: Vec<(f64, f64)> = Vec::new();
    for k in 0..8 {
        let inside = all.iter().filter(|m| part(m.0) == k);
        expected.extend(inside.max_by(|a, b| a.1.total_cmp(&b.1)).copied());
    }
    assert_eq!(chosen, expected);
    assert!(chosen.len() >= 6 && chosen.len() < all.len(), "{chosen:?}");
}
