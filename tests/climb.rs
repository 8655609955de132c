//! `climb` against published routes, and bad input.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

mod common;

use common::{json, run};
use serde_json::Value;

fn routes(arguments: &str) -> Vec<Value> {
    json(&format!("lineclear climb {arguments}"))["routes"]
        .as_array()
        .unwrap()
        .clone()
}

fn number(value: &Value, key: &str) -> f64 {
    value[key].as_f64().unwrap_or(f64::NAN)
}

/// Energy of Rb nS½ above the centre of gravity of 5S½, cm⁻¹: ionisation frequency
/// 1010.029 164 6 THz from F = 1 (Mack et al. 2011, Phys. Rev. A 83, 052515) less 4.271 676 6 GHz to
/// the centre of gravity; defects 3.131 180 4 + 0.1784/(n − δ₀)² (Li et al. 2003, Phys. Rev. A 67,
/// 052502); Rydberg constant of 87Rb 109 736.605 cm⁻¹. From memory.
fn rubidium_s(n: f64) -> f64 {
    let limit = (1_010_029.164_6 - 4.271_676_6) / 29.979_245_8;
    let leading = 3.131_180_4;
    let defect = leading + 0.1784 / (n - leading).powi(2);
    limit - 109_736.605 / (n - defect).powi(2)
}

/// The usual way to Rydberg levels of rubidium, 780 + 480 nm (common practice): each computed
/// member lies within 3 σ, and 0.002 nm, of where the published defects put it. The second photon
/// starts from 5P3/2 at 12 816.549 cm⁻¹ (Ye et al. 1996).
#[test]
fn rubidium_to_rydberg_levels_by_780_and_480_nm() {
    let found = routes("--of Rb --lasers 780+-1nm,479..484nm --to series:nS");
    let best = &found[0];
    let steps = best["steps"].as_array().unwrap();
    assert_eq!(steps.len(), 2, "{best:#}");
    assert!(
        (number(&steps[0], "vacuum_wavelength_nm") - 780.241).abs() < 6e-4,
        "{:#}",
        steps[0]
    );
    let members = steps[1]["members"].as_array().unwrap();
    let mut checked = 0;
    for member in members {
        let n = number(member, "n");
        let (found, sigma) = (
            number(member, "energy_per_cm"),
            number(member, "energy_uncertainty_per_cm"),
        );
        let expected = rubidium_s(n);
        // 0.01 cm⁻¹: the scale of the catalogue's levels of the natural mixture.
        assert!(
            (found - expected).abs() <= 3.0 * sigma + 0.01,
            "{n}S: {found} ± {sigma}, {expected}"
        );
        let nm = 1e7 / (expected - 12_816.549);
        assert!(
            (number(member, "vacuum_wavelength_nm") - nm).abs() < 0.002,
            "{n}S: {nm}"
        );
        checked += 1;
    }
    assert!(checked >= 60, "{checked}");
    assert!(
        members
            .iter()
            .any(|m| number(m, "n") == 60.0 && m["computed"] == true)
    );
}

/// nD½ of both J from 5P3/2, only J = 3/2 from 5P1/2 (ΔJ ≤ 1).
#[test]
fn series_follow_the_selection_rules() {
    let j = |lasers: &str| -> Vec<String> {
        let mut all: Vec<String> = routes(&format!("--of Rb --lasers {lasers} --to series:nD"))
            .iter()
            .map(|r| r["steps"][1]["series"]["j"].as_str().unwrap().to_owned())
            .collect();
        all.sort();
        all
    };
    assert_eq!(j("780+-1nm,479..484nm"), ["3/2", "5/2"]);
    assert_eq!(j("795+-1nm,474..480nm"), ["3/2"]);
    // From 5P no nP: what is left is 5P itself, one step up.
    let p = routes("--of Rb --lasers 780+-1nm,479..484nm --to series:nP");
    assert!(
        p.iter().all(|r| r["steps"].as_array().unwrap().len() == 1),
        "{p:?}"
    );
}

/// One member, and the two-colour route 780 + 776 nm to 5D5/2 (common practice of blue light from
/// rubidium vapour).
#[test]
fn levels_and_members_as_targets() {
    let one = routes("--of Rb --lasers 780+-1nm,479..484nm --to series:60S");
    let members = one[0]["steps"][1]["members"].as_array().unwrap();
    assert_eq!(members.len(), 1);
    assert_eq!(number(&members[0], "n"), 60.0);
    for target in ["\"5d 2D 5/2\"", "25703.5cm-1"] {
        let found = routes(&format!("--of Rb --lasers 780+-1nm,776+-1nm --to {target}"));
        assert_eq!(found.len(), 1, "{target}");
        let steps = found[0]["steps"].as_array().unwrap();
        assert!((number(&steps[1], "vacuum_wavelength_nm") - 775.979).abs() < 2e-3);
        let score =
            number(&steps[0], "oscillator_strength") * number(&steps[1], "oscillator_strength");
        assert!(number(&found[0], "score") <= score && number(&found[0], "score") > 0.5 * score);
    }
    let both = routes("--of Rb --lasers 780+-1nm,776+-1nm --to 5d");
    assert_eq!(both.len(), 2);
    assert!(number(&both[0], "score") >= number(&both[1], "score"));
}

/// Caesium 6P3/2 is ionised by less than 508.3 nm in vacuum: limit 31 406.467 73 cm⁻¹ (Deiglmayr et al.
/// 2016, Phys. Rev. A 93, 013424, from memory) less 11 732.307 cm⁻¹ (Gerginov et al. 2004); what is
/// left goes to the electron.
#[test]
fn above_the_limit_the_electron_keeps_the_rest() {
    let found = routes("--of Cs --lasers 852+-1nm,500..515nm --to limit --medium vacuum");
    let last = &found[0]["steps"][1];
    let threshold = number(last, "threshold_wavenumber_per_cm");
    assert!(
        (threshold - (31_406.467_73 - 11_732.307)).abs() < 0.01,
        "{threshold}"
    );
    let excess = last["excess_energy_ev"].as_array().unwrap();
    assert_eq!(excess[0].as_f64(), Some(0.0));
    let expected = (1e7 / 500.0 - threshold) / 8_065.543_937;
    assert!(
        (excess[1].as_f64().unwrap() - expected).abs() < 1e-6,
        "{excess:?}"
    );
}

/// A laser drives one step: with one range there is no two-step route; given twice there is.
#[test]
fn each_range_is_one_laser() {
    assert!(routes("--of Rb --lasers 770..785nm --to 5d").is_empty());
    assert!(!routes("--of Rb --lasers 770..785nm,770..785nm --to 5d").is_empty());
}

/// A line of another species in the cell that is close to a step is named: both isotopes of
/// rubidium absorb at 780 nm, 78 MHz apart (common practice).
#[test]
fn near_coincidences_are_flagged() {
    let found = routes("--of Rb --lasers 780+-1nm,776+-1nm --to 5d --among 87Rb,He");
    let first = &found[0]["steps"][0]["coincidences"];
    assert_eq!(first[0]["species"], "87Rb I", "{first}");
    assert!(number(&first[0], "offset_per_cm").abs() < 0.01);
    assert!(
        found[0]["steps"][1]["coincidences"]
            .as_array()
            .unwrap()
            .is_empty()
    );
}

/// f of a step into one member of a series, with its 1 σ.
fn strength(arguments: &str) -> (f64, f64) {
    let found = routes(arguments);
    let last = found[0]["steps"].as_array().unwrap().last().unwrap();
    assert_eq!(last["strength_is_scaled"], false, "{last}");
    let of = |key: &str| number(last, key);
    (
        of("oscillator_strength"),
        of("strength_relative_uncertainty"),
    )
}

/// Two ways to the strength of a high member: the Coulomb approximation, and scaling as n*⁻³ from a
/// lower one (Gallagher 1994, *Rydberg Atoms*, table 2.2). The energy-normalised orbital changes
/// with 1/n*²: up to 25 times that in f, 2 % from n = 32 on.
#[test]
fn coulomb_strengths_fall_as_the_cube_of_the_effective_quantum_number() {
    for (of, lasers, letter, defect) in [
        ("Li", "670.7..671nm,349..352nm", 'S', 0.40),
        ("Na", "588.9..589.1nm,400..420nm", 'D', 0.01),
        ("K", "766..767nm,450..470nm", 'S', 2.18),
        ("Rb", "780+-1nm,470..490nm", 'S', 3.13),
        ("Rb", "780+-1nm,470..490nm", 'D', 1.35),
        ("Cs", "852+-1nm,500..515nm", 'D', 2.47),
    ] {
        let at = |n: u32| {
            strength(&format!(
                "--of {of} --lasers {lasers} --to series:{n}{letter}"
            ))
        };
        let (low, high) = (at(32), at(64));
        let ratio = ((64.0_f64 - defect) / (32.0 - defect)).powi(3);
        let off = low.0 / high.0 / ratio - 1.0;
        assert!(off.abs() < 0.02, "{of} n{letter}: {off}");
        assert!(low.1 > 0.0 && low.1 < 0.2, "{of} n{letter}: σ {}", low.1);
    }
}

/// Of one electron the strengths are exact: f(2p → nd) of both J, summed, is that of the orbitals, and of
/// 2p 3/2 nine tenths go to nd 5/2 (Condon & Shortley 1935, section 9.9).
#[test]
fn series_of_hydrogen_are_exact() {
    let found = routes("--of H --lasers 121.5..121.6nm,364.8..367nm --to series:30D");
    let f = |j: &str| {
        let of_j = |r: &&Value| {
            let steps = r["steps"].as_array().unwrap();
            let p = steps[0]["upper"]["j"] == "3/2";
            p && steps[1]["series"]["j"] == j
        };
        let route = found.iter().find(of_j).unwrap();
        number(&route["steps"][1], "oscillator_strength")
    };
    let exact = lineclear::calc::one_electron::oscillator_strength((2, 1), (30, 2)).unwrap();
    // The reduced mass changes f by 1/1836, the fine structure by (Zα)² = 5e-5.
    assert!((f("5/2") / (0.9 * exact) - 1.0).abs() < 6.5e-4);
    assert!((f("3/2") / (0.1 * exact) - 1.0).abs() < 6.5e-4);
}

/// `climb` and `predict` fit the same levels and give the same members.
#[test]
fn members_are_those_of_predict() {
    let predicted = json("lineclear predict \"Rb I\" --series nS1/2 --n 40..60");
    let found = routes("--of Rb --lasers 780+-1nm,479..484nm --to series:nS");
    let members = found[0]["steps"][1]["members"].as_array().unwrap();
    let mut compared = 0;
    for level in predicted["levels"].as_array().unwrap() {
        let member = members.iter().find(|m| m["n"] == level["n"]).unwrap();
        for (one, other) in [
            ("energy_per_cm", "energy_per_cm"),
            ("energy_uncertainty_per_cm", "uncertainty_per_cm"),
        ] {
            // The same numbers by the same functions: rounding only.
            assert!((number(member, one) - number(level, other)).abs() < 1e-9);
        }
        compared += 1;
    }
    assert_eq!(compared, 21);
}

/// Where no route ends at the target, the answer tells how far the lasers lead: of strontium 5s 5p ³P1
/// is reached, and 5s 6s ³S1 lies 688.0 nm (vacuum, common practice) above it.
#[test]
fn without_a_route_the_missing_step_is_named() {
    let command = "lineclear climb --of Sr --lasers 689..690nm,679..680nm --to \"5s 6s 3S 1\"";
    let found = run(&format!("{command} --medium vacuum"));
    assert_eq!(found.exit, 0, "{}", found.stderr);
    let words: Vec<&str> = found.stdout.split_whitespace().collect();
    let said = words.join(" ");
    assert!(said.contains("Reached: 5s (2S) 5p 3Po 1;"), "{said}");
    assert!(said.contains("and takes 688.02"), "{said}");
    let reached = json(command)["reached"].as_array().unwrap().len();
    assert_eq!(reached, 1);
    assert!(json("lineclear climb --of Rb --lasers 780+-1nm --to 5p")["reached"].is_null());
}

#[test]
fn each_bad_question_gets_one_sentence() {
    for (arguments, exit, words) in [
        ("--of Rb --lasers 600+-1nm --to 5d", 2, "the nearest is"),
        ("--of Rb --lasers 780+-1nm --to 55d", 2, "nearest: 4p6 5d"),
        (
            "--of Rb --lasers 780+-1nm --to 25603cm-1",
            2,
            "nearest: 4p6 5d",
        ),
        (
            "--of Rb --lasers 780+-1nm --to series:nJ",
            2,
            "is no series",
        ),
        (
            "--of Rb --lasers 780+-1nm --to series:500S",
            2,
            "is no series",
        ),
        (
            "--of Rb --lasers 780+-1nm --to series:nK",
            1,
            "cannot be computed",
        ),
        (
            "--of Sr --lasers 460+-2nm,410..415nm --to series:nD",
            1,
            "nd 1D 2, nd 3D 1, nd 3D 2, nd 3D 3: the series has 2 usable members where a fit needs 4",
        ),
        (
            "--of 87Rb --lasers 780+-1nm,479..484nm --to series:nS",
            1,
            "ask for Rb I",
        ),
        ("--of Rb --lasers 780nm --to limit", 2, "not a range"),
        (
            "--of Rb --lasers 780+-1nm --to limit --gas-temperature 0K",
            2,
            "above zero",
        ),
        (
            "--of At --lasers 780+-1nm --to limit",
            1,
            "no levels are held",
        ),
        ("--of U --lasers 590..600nm --to limit", 2, "actinides"),
        ("--of 235U --lasers 590..600nm --to limit", 2, "actinides"),
    ] {
        let found = run(&format!("lineclear climb {arguments}"));
        assert_eq!(found.exit, exit, "{arguments}: {}", found.stderr);
        assert!(
            found.stderr.contains(words),
            "{arguments}: {}",
            found.stderr
        );
        assert_eq!(
            found.stderr.trim().lines().count(),
            1,
            "{arguments}: {}",
            found.stderr
        );
    }
}
