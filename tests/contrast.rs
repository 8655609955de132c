//! `contrast` on the bundled catalogue, and its words on invented offsets.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

mod common;

use std::sync::Arc;

use common::{json, run};
use lineclear::advise::contrast::{Trend, contrast};
use lineclear::vocabulary::atom::Species;
use lineclear::vocabulary::report::{ConcludedLine, ReportedLine, ReportedSource, Reports};
use lineclear::vocabulary::spectrum::{LineKind, PositionOrigin};

#[test]
fn two_bundled_tables_side_by_side() {
    let answer = json("lineclear contrast morton2003 verner1996");
    let total = &answer["total"];
    let count = |key: &str| total[key].as_u64().unwrap();
    // 4827 lines and 71 rows of isotopes in the one, 5971 in the other (their source.toml).
    assert_eq!(count("both") + count("only_first"), 4827 + 71);
    assert_eq!(count("both") + count("only_second"), 5971);
    assert!(count("rates_beyond_quarter") <= count("rated"));
    assert_eq!(answer["trend"]["kind"], "none");
    let worst = &answer["worst_rates"][0];
    assert_eq!(worst["species"], "Fe II");
    // An independent comparison of the tables gives a factor 8580 for Fe II 93.8 nm, from
    // two-digit oscillator strengths.
    let ratio = worst["rate_ratio"].as_f64().unwrap();
    assert!((ratio / 8580.0 - 1.0).abs() < 0.01, "{ratio}");
    assert_eq!(answer["worst_positions"].as_array().unwrap().len(), 10);
    let by_species: u64 = answer["species"]
        .as_array()
        .unwrap()
        .iter()
        .map(|s| s["both"].as_u64().unwrap())
        .sum();
    assert_eq!(by_species, count("both"));
}

#[test]
fn turning_the_two_around_inverts_ratios() {
    let there = json("lineclear contrast morton2003 curated-fe-i");
    let back = json("lineclear contrast curated-fe-i morton2003");
    let of = |a: &serde_json::Value, key: &str| a["total"][key].as_f64().unwrap();
    assert_eq!(of(&there, "both"), of(&back, "both"));
    assert_eq!(of(&there, "only_first"), of(&back, "only_second"));
    // Exact up to the rounding of logarithms.
    assert!((of(&there, "rate_ratio") * of(&back, "rate_ratio") - 1.0).abs() < 1e-9);
}

#[test]
fn wrong_questions_are_refused() {
    let same = run("lineclear contrast morton2003 morton2003");
    assert_eq!(same.exit, 2, "{}", same.stderr);
    let unknown = run("lineclear contrast morton2003 no-such-table");
    assert_eq!(unknown.exit, 1);
    assert!(
        unknown.stderr.contains("no-such-table"),
        "{}",
        unknown.stderr
    );
}

/// Two invented sources with twelve lines from 300 to 960 nm; the second one's vacuum wavelengths
/// (nm) are a function of the first one's, and so are its rates.
fn invented(wavelength: impl Fn(f64) -> f64, factor: impl Fn(f64) -> f64) -> Reports {
    let nm: Vec<f64> = (0..12).map(|i| 300.0 + 60.0 * f64::from(i)).collect();
    let source = |key: &str, nm: &dyn Fn(f64) -> f64, rate: &dyn Fn(f64) -> f64, list: &[f64]| {
        let lines = list.iter().enumerate().map(|(i, &at)| ReportedLine {
            wavenumber_per_cm: Some(1e7 / nm(at)),
            uncertainty_per_cm: Some(0.01),
            from_levels: false,
            lower: None,
            upper: None,
            rate_per_s: Some(rate(at)),
            rate_relative_uncertainty: None,
            rate_origin: None,
            kind: LineKind::Line,
            computed: false,
            row: i as u64 + 2,
            joined: Some(i),
        });
        ReportedSource {
            key: Arc::from(key),
            computed: false,
            scale_per_cm: 0.0,
            scale_relative: 0.0,
            levels: Vec::new(),
            lines: lines.collect(),
        }
    };
    // Rates from 1e8 down by a factor two per line.
    let first_rate = |at: f64| 1e8 * 0.5f64.powf((at - 300.0) / 60.0);
    let lines = nm.iter().enumerate().map(|(i, at)| ConcludedLine {
        wavenumber_per_cm: 1e7 / at,
        uncertainty_per_cm: 0.01,
        position_origin: PositionOrigin::Measured,
        position_source: 0,
        lower: None,
        upper: None,
        kind: LineKind::Line,
        reports: vec![(0, i), (1, i)],
    });
    Reports {
        species: Species::new(26, 1),
        sources: vec![
            source("first", &|at| at, &first_rate, &nm),
            source(
                "second",
                &wavelength,
                &|at| factor(at) * first_rate(at),
                &nm,
            ),
        ],
        levels: Vec::new(),
        lines: lines.collect(),
    }
}

fn trend(wavelength: impl Fn(f64) -> f64) -> Trend {
    contrast(&[invented(wavelength, |_| 1.0)], "first", "second").trend
}

#[test]
fn offsets_are_named_by_their_shape() {
    assert_eq!(trend(|nm| nm), Trend::None);
    let Trend::Relative(fraction) = trend(|nm| nm * (1.0 + 5e-6)) else {
        panic!("no calibration")
    };
    assert!((fraction - 5e-6).abs() < 1e-9, "{fraction}");
    let Trend::Constant(nm) = trend(|nm| nm + 0.01) else {
        panic!("no zero point")
    };
    assert!((nm - 0.01).abs() < 1e-5, "{nm}");
    let Trend::ConstantPerCm(per_cm) = trend(|nm| 1e7 / (1e7 / nm + 0.2)) else {
        panic!("no scale")
    };
    assert!((per_cm - 0.2).abs() < 1e-6, "{per_cm}");
    // Scattered to both sides: nothing in common.
    assert_eq!(
        trend(|nm| nm
            + if (nm as u32 / 60).is_multiple_of(2) {
                0.01
            } else {
                -0.01
            }),
        Trend::None
    );
}

#[test]
fn rate_ratios_are_split_by_strength() {
    let reports = invented(|nm| nm, |nm| if nm < 500.0 { 1.0 } else { 4.0 });
    let answer = contrast(&[reports], "first", "second");
    assert_eq!(answer.total.rated, 12);
    assert_eq!(answer.total.beyond_quarter, 8);
    let ratio = |exponent: i32| {
        answer
            .decades
            .iter()
            .find(|d| d.exponent == exponent)
            .unwrap()
            .rate_ratio
    };
    // Lines at 300 to 480 nm have rates from 1e8 to 1.25e7 s⁻¹, those beyond 4e6 and less.
    assert!(
        (ratio(7) - 1.0).abs() < 1e-9 && (ratio(5) - 4.0).abs() < 1e-9,
        "{:?}",
        answer.decades
    );
    assert!((answer.worst_rates[0].rate_factor().unwrap() - 4.0).abs() < 1e-9);
}
