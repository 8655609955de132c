//! The physics of the two Morton tables: positions, rates, angular momenta and parities fit together.
//!
//! Sources: D. C. Morton 2003, ApJS 149, 205, table 2; D. C. Morton 2000, ApJS 130, 403, table 2.

#![allow(clippy::unwrap_used)] // a panic here is the report

mod tables_support;

use std::collections::BTreeSet;

use tables_support::morton::{by_place, entered, mended, printed};
use tables_support::{close, number, optional, rate_from_f, rows};

/// Ciddor 1996, Appl. Opt. 35, 1566, equations 1 and 2: refractivity of standard air at 450 ppm CO₂.
fn air_index(vacuum_um: f64) -> f64 {
    let s2 = vacuum_um.powi(-2);
    1.0 + (5_792_105.0 / (238.0185 - s2) + 167_917.0 / (57.362 - s2)) * 1e-8
}

#[test]
fn impossible_weights_are_corrected() {
    let heavy = by_place("morton2000", "lines.csv");
    let silver = &heavy[&2232]; // printed g_u = 5: A/f wants 3, and J = 0 to 2 is forbidden
    assert_eq!(
        (silver["upper_g"].as_str(), silver["upper_j"].as_str()),
        ("3", "1")
    );
    let gap = number(silver, "upper_energy_per_cm");
    let rate = rate_from_f(gap, 1.0, 3.0, number(silver, "oscillator_strength"));
    assert!(close(rate, number(silver, "rate_per_s"), 0.005));
    assert!(heavy[&3573]["upper_j"].is_empty() && heavy[&3573]["upper_g"].is_empty()); // Pr IV, g = 10
}

#[test]
fn the_total_angular_momentum_fits_the_number_of_electrons() {
    // An even number of electrons has whole J, an odd one half-whole J.
    for key in ["morton2003", "morton2000"] {
        for row in rows(key, "lines.csv") {
            let (element, stage) = row["species"].split_once(' ').unwrap();
            let electrons = atomic_number(element) + 1 - stage_number(stage);
            for j in [&row["lower_j"], &row["upper_j"]] {
                assert!(
                    j.is_empty() || j.ends_with(".5") == (electrons % 2 == 1),
                    "{row:?}"
                );
            }
            if row["kind"] == "line" && !row["upper_j"].is_empty() {
                let (low, high) = (number(&row, "lower_j"), number(&row, "upper_j"));
                assert!(
                    (low - high).abs() <= 1.0 && low + high > 0.0,
                    "ΔJ of {row:?}"
                );
            }
        }
    }
}

fn stage_number(roman: &str) -> u32 {
    let order = ["I", "II", "III", "IV", "V", "VI", "VII", "VIII"];
    1 + u32::try_from(order.iter().position(|r| *r == roman).unwrap()).unwrap()
}

fn atomic_number(symbol: &str) -> u32 {
    const SYMBOLS: &str = "H He Li Be B C N O F Ne Na Mg Al Si P S Cl Ar K Ca Sc Ti V Cr Mn Fe Co Ni Cu Zn Ga Ge As Se \
        Br Kr Rb Sr Y Zr Nb Mo Tc Ru Rh Pd Ag Cd In Sn Sb Te I Xe Cs Ba La Ce Pr Nd Pm Sm Eu Gd Tb Dy Ho Er Tm Yb Lu \
        Hf Ta W Re Os Ir Pt Au Hg Tl Pb Bi Po At Rn Fr Ra Ac Th Pa U";
    let symbol = if symbol == "D" { "H" } else { symbol };
    1 + u32::try_from(
        SYMBOLS
            .split(' ')
            .position(|s| s == symbol)
            .unwrap_or_else(|| panic!("{symbol}")),
    )
    .unwrap()
}

#[test]
fn lumped_weights_of_oxygen_are_blends() {
    let lines = rows("morton2003", "lines.csv");
    let blends: Vec<_> = lines.iter().filter(|r| r["kind"] == "blend").collect();
    assert_eq!(blends.len(), 36);
    for row in &blends {
        assert_eq!(row["species"], "O I");
        assert!(matches!(row["upper_g"].as_str(), "8" | "15") && row["upper_j"].is_empty());
    }
    // Sum rule: the three rows of one unresolved 3D term share f: f(1→3), f(3→8), f(5→15) agree within printing.
    let of = |g: &str| {
        blends
            .iter()
            .find(|r| r["upper_g"] == g)
            .map(|r| number(r, "oscillator_strength"))
            .unwrap()
    };
    assert!(close(of("8"), of("15"), 0.01));
}

#[test]
fn the_air_column_is_not_used_because_it_is_wrong_in_many_means() {
    let lines = by_place("morton2003", "lines.csv");
    assert!(lines.values().all(|r| r["medium"] == "vacuum"));
    let mut wrong = Vec::new();
    let printed = printed("morton2003");
    for p in &printed {
        let Some(air) = p.air_angstrom else { continue };
        let vacuum = mended(&p.vacuum_angstrom);
        // 0.002 Å is two units of the last digit that nearly all rows print (0.001 Å).
        let difference = (air - vacuum / air_index(vacuum * 1e-4)).abs();
        if difference > 0.002
            && p.vacuum_angstrom
                .split_once('.')
                .is_some_and(|d| d.1.len() >= 3)
        {
            // Every one of them is a multiplet mean with components, so no entered line carries the error.
            assert!(p.mean && !lines.contains_key(&p.place), "{p:?}");
            wrong.push((p.ion.as_str(), difference));
        }
    }
    let species: BTreeSet<_> = wrong.iter().map(|w| w.0).collect();
    let worst = wrong.iter().map(|w| w.1).fold(0.0, f64::max);
    assert!(
        (40..100).contains(&wrong.len()),
        "{} rows, worst {worst}: {species:?}",
        wrong.len()
    );
    assert!((0.008..0.011).contains(&worst), "{worst}");
    for name in ["Ni I", "Fe I", "Ga I", "Co I"] {
        assert!(species.contains(name), "{name} in {species:?}");
    }
}

#[test]
fn positions_are_the_differences_of_the_levels() {
    for key in ["morton2003", "morton2000"] {
        for row in entered(key).values() {
            let gap = number(row, "upper_energy_per_cm") - number(row, "lower_energy_per_cm");
            let computed = 1e7 / gap;
            let sigma = number(row, "wavelength_uncertainty_nm");
            // σ is at least one unit of the last printed digit and covers the printed digits of both levels.
            assert!(
                (computed - number(row, "wavelength_nm")).abs() <= sigma,
                "{row:?}: {computed}"
            );
        }
    }
}

#[test]
fn rates_and_oscillator_strengths_agree() {
    let mut both = 0;
    for key in ["morton2003", "morton2000"] {
        for row in entered(key).values() {
            let (Some(f), Some(rate)) = (
                optional(row, "oscillator_strength"),
                optional(row, "rate_per_s"),
            ) else {
                continue;
            };
            let gap = number(row, "upper_energy_per_cm") - number(row, "lower_energy_per_cm");
            let from_f = rate_from_f(gap, number(row, "lower_g"), number(row, "upper_g"), f);
            // Three printed digits each: 0.5 % and 0.5 % at worst, and the rounding of log gf between them.
            assert!(close(rate, from_f, 0.015), "{row:?}: {from_f}");
            both += 1;
        }
    }
    assert_eq!(both, 4827 - 1824 + 4889 - 2193 + isotopes_with_rates());
}

fn isotopes_with_rates() -> usize {
    rows("morton2003", "isotopes.csv")
        .iter()
        .filter(|r| !r["rate_per_s"].is_empty())
        .count()
}

#[test]
fn every_labelled_line_changes_parity() {
    for key in ["morton2003", "morton2000"] {
        let lines = rows(key, "lines.csv");
        let labelled = lines
            .iter()
            .filter(|r| !r["lower_term"].is_empty() && !r["upper_term"].is_empty());
        for row in labelled {
            assert_ne!(
                row["lower_term"].ends_with('o'),
                row["upper_term"].ends_with('o'),
                "{row:?}"
            );
        }
    }
}
