//! Intensities that the user gives.

use lineclear::advise::{AdviseError, EmissionModel, GivenIntensity};
use lineclear::vocabulary::atom::Species;

use super::behind::{ask, flat};
use super::invented::{conditions, one_line, spectrum};

fn given(z: u8, nm: f64, intensity: f64, relative_sigma: f64) -> GivenIntensity {
    GivenIntensity {
        species: Species::new(z, 1),
        vacuum_nm: nm,
        intensity,
        relative_sigma,
        typed: format!("{nm}"),
    }
}

fn two_lines() -> lineclear::advise::Spectrum {
    spectrum(
        Species::new(22, 1),
        &[
            (0.0, 1.0, "4s2", "1S"),
            (20_000.0, 3.0, "4s 4p", "1Po"),
            (25_000.0, 3.0, "4s 5p", "1Po"),
        ],
        &[(0, 1, Some(1e7)), (0, 2, Some(2e7))],
    )
}

#[test]
fn given_lines_have_their_intensities_and_others_follow_in_lte() {
    let kt = 8000.0;
    let mut conditions = conditions(EmissionModel::Given, kt);
    conditions.details.intensities =
        vec![given(21, 600.0, 30.0, 0.1), given(22, 500.03, 10.0, 0.1)];
    let spectra = [one_line(21, 600.0, 1e8), two_lines()];
    let answer = ask(&flat(conditions), &spectra).unwrap();
    let light = |nm: f64| {
        let line = answer
            .lines
            .iter()
            .find(|l| (l.placed.vacuum_nm - nm).abs() < 1e-6);
        line.unwrap().light_fraction.unwrap()
    };
    assert!((light(600.0) / light(500.0) / 3.0 - 1.0).abs() < 1e-12);
    // Boltzmann between levels of like weight, power A σ; the Planck–Larkin factors at 35,000 and
    // 40,000 cm⁻¹ below the limit differ from 1: 1 − e^(−b)(1 + b).
    let bound = |b: f64| 1.0 - (-b).exp() * (1.0 + b);
    let expected =
        2.0 * 25.0 / 20.0 * (-5000.0 / kt).exp() * bound(35_000.0 / kt) / bound(40_000.0 / kt);
    assert!((light(400.0) / light(500.0) / expected - 1.0).abs() < 1e-9);
}

#[test]
fn two_given_lines_that_disagree_widen_what_follows_from_them() {
    // A third line of the species, and two given ones that disagree with LTE by a factor of 4.
    let three = |given_factor: f64| {
        let titanium = spectrum(
            Species::new(22, 1),
            &[
                (0.0, 1.0, "4s2", "1S"),
                (20_000.0, 3.0, "4s 4p", "1Po"),
                (20_010.0, 3.0, "4s 5p", "1Po"),
                (21_000.0, 3.0, "4s 6p", "1Po"),
            ],
            &[(0, 1, Some(1e7)), (0, 2, Some(1e7)), (0, 3, Some(1e7))],
        );
        let mut conditions = conditions(EmissionModel::Given, 8000.0);
        conditions.details.intensities = vec![
            given(21, 1e7 / 21_003.0, 1.0, 0.0),
            given(22, 1e7 / 20_000.0, 1.0, 0.0),
            given(22, 1e7 / 20_010.0, given_factor, 0.0),
        ];
        let target = one_line(21, 1e7 / 21_003.0, 1e7);
        let answer =
            super::invented::vet(&[target, titanium], "Sc I", 1e7 / 21_003.0, 0.2, conditions);
        let i = answer.interference.unwrap();
        (i.high / i.fraction).ln()
    };
    // ln 4 apart: a scatter of ln 2 about the mean, shared by two.
    assert!(three(4.0) > 0.5, "{}", three(4.0));
    assert!(three(1.0) < 0.15, "{}", three(1.0));
}

#[test]
fn what_the_table_does_not_know_is_refused() {
    let mut conditions = conditions(EmissionModel::Given, 8000.0);
    conditions.details.intensities = vec![given(22, 500.0, 10.0, 0.0)];
    let spectra = [one_line(21, 600.0, 1e8), two_lines()];
    let error = ask(&flat(conditions.clone()), &spectra).unwrap_err();
    assert!(matches!(error, AdviseError::NothingGiven { .. }), "{error}");
    conditions.details.intensities = vec![given(21, 600.0, 1.0, 0.0), given(22, 510.0, 10.0, 0.0)];
    let error = ask(&flat(conditions), &spectra).unwrap_err();
    assert!(matches!(error, AdviseError::NoSuchLine { .. }), "{error}");
}
