//! The two Morton tables against the kept originals: every row and every known trap.
//!
//! Sources: D. C. Morton 2003, ApJS 149, 205, table 2; D. C. Morton 2000, ApJS 130, 403, table 2.

#![allow(clippy::unwrap_used)] // a panic here is the report

mod tables_support;

use std::collections::BTreeSet;

use tables_support::morton::{by_place, corrected_weight, entered, mended, printed};
use tables_support::{bytes, check_manifest, close, number, optional, rows, sha256};

#[test]
fn manifests_have_the_right_checksums_and_rows() {
    check_manifest("morton2003");
    check_manifest("morton2000");
    let original = |key| sha256(key, "original.dat");
    assert_eq!(
        original("morton2003"),
        "5cac1008c2b2694a4279e31272619fe607e323a8a5e61ea4985a8a6b0d6b127c"
    );
    assert_eq!(
        original("morton2000"),
        "e15cd44f967fb3aa214f217658f7465cb08a9ae7d2f46606a4270f2f8f3a9b8a"
    );
}

#[test]
fn every_row_of_the_originals_is_entered_or_a_skipped_mean() {
    for (key, data_rows, lines, skipped, ions) in [
        ("morton2003", 5351, 4827, 453, 88),
        ("morton2000", 4898, 4889, 9, 180),
    ] {
        let printed = printed(key);
        assert_eq!(printed.len(), data_rows, "{key}");
        let all = entered(key);
        let lines_csv = rows(key, "lines.csv");
        assert_eq!(lines_csv.len(), lines, "{key}");
        let left: Vec<_> = printed
            .iter()
            .filter(|p| !all.contains_key(&p.place))
            .collect();
        assert_eq!(left.len(), skipped, "{key}");
        assert!(
            left.iter().all(|p| p.mean),
            "{key}: only means may be left out"
        );
        assert_eq!(
            lines_csv
                .iter()
                .map(|r| &r["species"])
                .collect::<BTreeSet<_>>()
                .len(),
            ions,
            "{key}"
        );
    }
}

#[test]
fn all_rows_equal_the_printed_rows() {
    for key in ["morton2003", "morton2000"] {
        let all = entered(key);
        let mut compared = 0;
        for p in printed(key) {
            let Some(row) = all.get(&p.place) else {
                continue;
            };
            compared += 1;
            assert_eq!(row["species"], p.ion, "{key} line {}", p.place);
            // One place of the decimal point between ångström and nanometre; 1e-12 is the rounding of the product.
            assert!(
                close(
                    number(row, "wavelength_nm") * 10.0,
                    mended(&p.vacuum_angstrom),
                    1e-12
                ),
                "{p:?} {row:?}"
            );
            let decimals = |t: &str| {
                t.trim_end_matches('.')
                    .split_once('.')
                    .map_or(0, |d| d.1.len())
            };
            assert_eq!(
                decimals(&row["wavelength_nm"]),
                decimals(&p.vacuum_angstrom) + 1,
                "digits of {p:?}"
            );
            assert_eq!(
                number(row, "lower_energy_per_cm"),
                mended(&p.lower),
                "{p:?}"
            );
            assert_eq!(
                number(row, "upper_energy_per_cm"),
                mended(&p.upper),
                "{p:?}"
            );
            assert_eq!(row["lower_g"], p.lower_g.to_string(), "{p:?}");
            assert_eq!(row["upper_g"], corrected_weight(key, &p), "{p:?}");
            assert_eq!(optional(row, "oscillator_strength"), p.f, "{p:?}");
            assert_eq!(row["flag"], p.flag.clone().unwrap_or_default(), "{p:?}");
            if p.rate.is_some() || p.f.is_none() {
                assert_eq!(optional(row, "rate_per_s"), p.rate, "{p:?}");
            }
            match (optional(row, "rate_relative_uncertainty"), p.error_dex) {
                (None, None) => {}
                // Three significant digits are written.
                (Some(sigma), Some(dex)) => {
                    assert!(close(sigma, 10f64.powf(dex) - 1.0, 6e-3), "{p:?}")
                }
                other => panic!("{other:?} {p:?}"),
            }
        }
        assert_eq!(compared, all.len(), "{key}");
    }
}

#[test]
fn levels_are_exactly_the_levels_of_the_entered_lines() {
    for (key, count) in [("morton2003", 2668), ("morton2000", 3456)] {
        let lines = by_place(key, "lines.csv");
        let mut wanted = BTreeSet::new();
        for p in printed(key).iter().filter(|p| lines.contains_key(&p.place)) {
            let name = p.ion.clone();
            wanted.insert((
                name.clone(),
                mended(&p.lower).to_bits(),
                p.lower_g.to_string(),
            ));
            wanted.insert((name, mended(&p.upper).to_bits(), corrected_weight(key, p)));
        }
        let levels = rows(key, "levels.csv");
        let held: BTreeSet<_> = levels
            .iter()
            .map(|r| {
                (
                    r["species"].clone(),
                    number(r, "energy_per_cm").to_bits(),
                    r["g"].clone(),
                )
            })
            .collect();
        assert_eq!(levels.len(), count, "{key}");
        let odd: Vec<_> = held.symmetric_difference(&wanted).collect();
        assert!(odd.is_empty(), "{key}: {odd:?}");
    }
}

#[test]
fn a_level_is_no_better_than_its_last_printed_digit() {
    for key in ["morton2003", "morton2000"] {
        let doubtful: BTreeSet<_> = printed(key)
            .into_iter()
            .filter(|p| matches!(p.flag.as_deref(), Some(":" | "?")))
            .map(|p| (p.ion.clone(), mended(&p.upper).to_bits()))
            .collect();
        let mut widened = 0;
        for row in rows(key, "levels.csv") {
            let energy = number(&row, "energy_per_cm");
            let decimals = row["energy_per_cm"]
                .split_once('.')
                .map_or(0, |d| d.1.len());
            let unit = 10f64.powi(-i32::try_from(decimals).unwrap());
            // A colon or a question mark beside a level marks doubt (common practice): ten units.
            let doubt = doubtful.contains(&(row["species"].clone(), energy.to_bits()));
            widened += usize::from(doubt);
            let wanted = if energy == 0.0 {
                0.0
            } else {
                unit * if doubt { 10.0 } else { 1.0 }
            };
            assert!(
                close(number(&row, "uncertainty_per_cm"), wanted, 1e-9),
                "{row:?}"
            );
        }
        assert!(widened > 8, "{key}: {widened}");
    }
}

#[test]
fn isotope_rows_are_reports_of_the_isotope() {
    let isotopes = rows("morton2003", "isotopes.csv");
    assert_eq!(isotopes.len(), 71);
    assert!(isotopes.iter().all(|r| r["kind"] == "isotope"));
    let names: BTreeSet<_> = isotopes.iter().map(|r| r["species"].as_str()).collect();
    let wanted = [
        "6Li I", "7Li I", "10B I", "11B I", "10B II", "11B II", "10B III", "11B III", "13C I",
        "13C II", "24Mg I", "25Mg I", "26Mg I", "24Mg II", "25Mg II", "26Mg II", "40Ar I",
    ];
    assert_eq!(names, wanted.into_iter().collect());
    for row in &isotopes {
        assert_eq!(
            row["species"].trim_start_matches(|c: char| c.is_ascii_digit()),
            row["doubles"]
        );
    }
    assert!(
        rows("morton2003", "lines.csv")
            .iter()
            .all(|r| !r["species"].starts_with(|c: char| c.is_ascii_digit()))
    );
    // With the 23 means of isotopes, 94 printed rows belong to an isotope.
    assert_eq!(
        printed("morton2003").iter().filter(|p| p.isotope).count(),
        94
    );
}

#[test]
fn means_that_stand_alone_are_kept_as_means_without_j() {
    let lines = rows("morton2003", "lines.csv");
    let count = |name: &str| {
        lines
            .iter()
            .filter(|r| r["kind"] == "mean" && r["species"] == name)
            .count()
    };
    assert_eq!((count("H I"), count("D I"), count("Li I")), (21, 10, 3));
    assert_eq!(lines.iter().filter(|r| r["kind"] == "mean").count(), 34);
    assert!(
        lines
            .iter()
            .filter(|r| r["kind"] == "mean")
            .all(|r| r["upper_j"].is_empty() && r["upper_g"] == "6")
    );
    assert!(
        rows("morton2000", "lines.csv")
            .iter()
            .all(|r| r["kind"] == "line")
    );
    assert_eq!(lines.iter().filter(|r| r["species"] == "D I").count(), 28);
}

#[test]
fn latin_1_degree_marks_odd_parity_and_nothing_else() {
    let original = bytes("morton2000", "original.dat");
    assert!(std::str::from_utf8(&original).is_err());
    assert_eq!(original.iter().filter(|&&b| b == 0xB0).count(), 1562);
    let lines = by_place("morton2000", "lines.csv");
    // `HOLMIUM = H° I` (line 5619) is a damaged element heading: its lines belong to Ho I.
    let holmium = lines.values().filter(|r| r["species"] == "Ho I").count();
    assert!(holmium > 0);
    assert!(
        printed("morton2000")
            .iter()
            .filter(|p| (5620..5752).contains(&p.place))
            .all(|p| lines[&p.place]["species"].starts_with("Ho "))
    );
    // `MOLYBDENUM = Mb` (line 1366).
    assert_eq!(lines[&1375]["species"], "Mo I");
    assert!(
        lines
            .values()
            .all(|r| !r["species"].starts_with("Mb") && !r["species"].starts_with("H "))
    );
    // `4s4p 1P°` of Ge III (line 125).
    assert_eq!(
        (
            lines[&126]["upper_configuration"].as_str(),
            lines[&126]["upper_term"].as_str()
        ),
        ("4s 4p", "1Po")
    );
}

#[test]
fn headings_with_two_blanks_none_or_repeated_keep_their_ion() {
    let heavy = rows("morton2000", "lines.csv");
    assert!(
        heavy
            .iter()
            .any(|r| r["species"] == "I I" && r["wavelength_nm"].starts_with("183.0"))
    );
    // C I runs over seven pages, its heading stands on each (lines 420 to 874).
    let light = by_place("morton2003", "lines.csv");
    let carbon: Vec<_> = light.range(421..931).collect();
    assert!(
        carbon
            .iter()
            .all(|(_, r)| r["species"] == "C I" && r["lower_term"] == "3P")
    );
    assert!(carbon.len() > 300);
    // Pt I has a heading for each of its low terms (lines 7633, 7693, 7727).
    let low: BTreeSet<_> = heavy
        .iter()
        .filter(|r| r["species"] == "Pt I")
        .map(|r| r["lower_term"].as_str())
        .collect();
    assert_eq!(low, ["1D", "3D", "3F"].into_iter().collect());
}

#[test]
fn damaged_numbers_are_mended_and_named() {
    let light = by_place("morton2003", "lines.csv");
    assert_eq!(light[&2351]["upper_energy_per_cm"], "72807.203"); // printed `72807.203.`
    assert!(close(
        number(&light[&2959], "rate_relative_uncertainty"),
        0.0351,
        5e-3
    )); // printed `0,015` dex
    assert!(close(
        number(&light[&4975], "rate_relative_uncertainty"),
        0.0965,
        5e-3
    )); // printed `0,04`
    for (key, place) in [
        ("morton2003", 2351),
        ("morton2003", 2959),
        ("morton2003", 4975),
        ("morton2000", 1120),
    ] {
        let notes = tables_support::manifest(key)["notes"].to_string();
        assert!(
            notes.contains(&format!("line {place}: damaged")),
            "{key} {place}"
        );
    }
}

#[test]
fn missing_rates_are_missing_not_zero() {
    for (key, missing) in [("morton2003", 1824), ("morton2000", 2193)] {
        let lines = rows(key, "lines.csv");
        assert_eq!(
            lines
                .iter()
                .filter(|r| r["oscillator_strength"].is_empty())
                .count(),
            missing,
            "{key}"
        );
        assert_eq!(
            lines.iter().filter(|r| r["rate_per_s"].is_empty()).count(),
            missing,
            "{key}"
        );
        for row in &lines {
            assert!(
                optional(row, "rate_per_s").is_none_or(|a| a > 0.0),
                "{row:?}"
            );
            assert_eq!(row["rate_origin"].is_empty(), row["rate_per_s"].is_empty());
            assert!(row["rate_relative_uncertainty"].is_empty() || !row["rate_per_s"].is_empty());
        }
    }
}

#[test]
fn flags_before_the_weights_do_not_shift_them() {
    let light = by_place("morton2003", "lines.csv");
    let carbon = &light[&764]; // `89525.5   F  3  3`
    assert_eq!(
        (
            carbon["flag"].as_str(),
            carbon["lower_g"].as_str(),
            carbon["upper_j"].as_str()
        ),
        ("F", "3", "1")
    );
    let heavy = by_place("morton2000", "lines.csv");
    let flags: BTreeSet<_> = heavy
        .values()
        .map(|r| r["flag"].as_str())
        .filter(|f| !f.is_empty())
        .collect();
    assert_eq!(
        flags,
        ["*", ":", "?", "M", "a", "d", "f", "g", "j", "k", "l", "s"]
            .into_iter()
            .collect()
    );
    assert_eq!(heavy[&5674]["lower_g"], "17"); // ` * 17 15`: two digits directly after the mark
}

#[test]
fn errors_in_dex_become_relative_sigma() {
    let light = by_place("morton2003", "lines.csv");
    // 22E-6 dex of Li I 670.8 nm: 10^22e-6 − 1 = 5.07e-5.
    assert!(close(
        number(&light[&177], "rate_relative_uncertainty"),
        5.07e-5,
        2e-3
    ));
    // 0.02 dex of B I: 10^0.02 − 1 = 4.7 %.
    assert!(close(
        number(&light[&315], "rate_relative_uncertainty"),
        0.0471,
        2e-3
    ));
}
