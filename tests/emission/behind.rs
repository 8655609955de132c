//! Filters: lines whose light is not known.

use lineclear::advise::background::Background;
use lineclear::advise::passband::{Answer, Question, answer};
use lineclear::advise::{AdviseError, Conditions, EmissionModel, Spectrum, Verdict};
use lineclear::calc::filter::{Blocking, Detector, Filter, Illumination, Shape};
use lineclear::vocabulary::atom::Species;

use super::invented::{MEDIUM, conditions, one_line, spectrum, wanted};

/// A rectangular filter.
fn filter(centre_nm: f64, fwhm_nm: f64, conditions: Conditions) -> Question {
    Question {
        filter: Filter::new(Shape::Rectangular, centre_nm, fwhm_nm, 1.0).unwrap(),
        light: Illumination {
            tilt_deg: 0.0,
            f_number: None,
            warming_k: 0.0,
        },
        detector: Detector::default(),
        medium: MEDIUM,
        conditions,
        target: None,
        background: Background::default(),
        scan_kt_per_cm: Vec::new(),
        scan_density_per_m3: Vec::new(),
        scan_tilt_deg: Vec::new(),
        not_held: Vec::new(),
    }
}

/// A filter that passes everything from 10 to 1900 nm alike.
pub fn flat(conditions: Conditions) -> Question {
    let mut question = filter(500.0, 1.0, conditions);
    let open = Blocking {
        optical_density: 0.0,
        from_nm: 10.0,
        to_nm: 1900.0,
    };
    question.filter = question.filter.with_blocking(open).unwrap();
    question
}

pub fn ask(question: &Question, spectra: &[Spectrum]) -> Result<Answer, AdviseError> {
    answer(question, spectra)
}

/// Titanium with a bright line at 450 nm and one at `nm` whose rate is not known; with a J or not.
fn rateless(nm: f64, with_j: bool, upper_term: &'static str) -> Spectrum {
    let mut out = spectrum(
        Species::new(22, 1),
        &[
            (0.0, 1.0, "4s2", "1S"),
            (1e7 / nm, 3.0, "4s 4p", upper_term),
            (1e7 / 450.0, 3.0, "4s 5p", "1Po"),
        ],
        &[(0, 1, None), (0, 2, Some(1e8))],
    );
    if !with_j {
        for line in &mut out.lines {
            let level = line.upper.as_deref().unwrap().clone();
            line.upper = Some(std::sync::Arc::new(
                lineclear::vocabulary::spectrum::Level { j: None, ..level },
            ));
        }
    }
    out
}

fn verdict(centre_nm: f64, other: Spectrum, amount: f64) -> (Verdict, Option<f64>, String) {
    let mut question = filter(centre_nm, 2.0, conditions(EmissionModel::Visible, 8065.5));
    question.target = Some(wanted("Sc I", 500.0));
    let other = Spectrum { amount, ..other };
    let spectra = [one_line(21, 500.0, 1e7), other];
    let target = ask(&question, &spectra).unwrap().target.unwrap();
    (
        target.verdict.central,
        target.prior_chance,
        target.remarks.join("; "),
    )
}

#[test]
fn a_line_inside_the_passband_that_nothing_bounds_leaves_it_unrated() {
    // Without J there is no prior. The target lies at the blue edge, the other line 1.7 nm away.
    let (central, _, said) = verdict(500.8, rateless(501.7, false, "1Po"), 1.0);
    assert_eq!(central, Verdict::Unrated);
    assert!(
        said.contains("no rate is known for Ti I 501.700 nm"),
        "{said}"
    );
}

#[test]
fn a_line_outside_the_passband_does_not_matter_however_near() {
    // 0.6 nm from the target (500.46 nm in air), but behind the edge of the filter at 500.2 nm.
    let (central, _, said) = verdict(499.2, rateless(500.6, false, "1Po"), 1.0);
    assert_eq!(central, Verdict::Clear, "{said}");
}

#[test]
fn a_prior_bounds_a_line_of_known_kind() {
    // An allowed line may well be as bright as the target: the chance decides.
    let (central, chance, said) = verdict(500.8, rateless(501.7, true, "1Po"), 1.0);
    assert_eq!(central, Verdict::Unrated);
    assert!(chance.unwrap() > 0.5, "{chance:?}");
    assert!(said.contains("prior for unknown rates"), "{said}");
    // With a thousandth of the amount it cannot reach 1 % by more than a small chance.
    let (central, chance, said) = verdict(500.8, rateless(501.7, true, "1Po"), 1e-4);
    assert_eq!(central, Verdict::Clear, "{said}");
    assert!(chance.unwrap() < 0.05, "{chance:?}");
    // A forbidden one is weak enough even in equal amounts.
    let (central, chance, said) = verdict(500.8, rateless(501.7, true, "1P"), 1.0);
    assert_eq!(central, Verdict::Clear, "{said}");
    assert!(chance.is_none_or(|c| c < 0.05), "{chance:?}");
}

#[test]
fn none_of_a_species_is_as_if_it_were_absent() {
    let (central, chance, said) = verdict(500.8, rateless(501.7, false, "1Po"), 0.0);
    assert_eq!((central, chance), (Verdict::Clear, None), "{said}");
}

#[test]
fn a_forbidden_line_makes_no_species_visible() {
    // The only line of the ion between 200 and 1000 nm is forbidden (0.3 s⁻¹); its resonance line
    // at 88 nm, 1e9 s⁻¹, sets the scale, beside which the forbidden line is as good as dark.
    let ion = spectrum(
        Species::new(22, 3),
        &[
            (0.0, 5.0, "3p4", "3P"),
            (14_000.0, 5.0, "3p4", "1D"),
            (113_000.0, 3.0, "3p3 4s", "3So"),
        ],
        &[(0, 1, Some(0.3)), (0, 2, Some(1e9))],
    );
    let ion = Spectrum {
        limit_per_cm: Some(220_000.0),
        ..ion
    };
    let kt = 8065.5;
    let question = flat(conditions(EmissionModel::Visible, kt));
    let answer = ask(&question, &[one_line(21, 500.0, 1e7), ion]).unwrap();
    let light = |nm: f64| {
        let line = answer
            .lines
            .iter()
            .find(|l| (l.placed.vacuum_nm - nm).abs() < 1e-6);
        line.unwrap().light_fraction.unwrap()
    };
    assert!((light(500.0) / light(1e7 / 113_000.0) - 1.0).abs() < 1e-9);
    // Boltzmann and A σ: 5/3 e^(99 000/8065.5) (0.3/1e9) (14/113) = 1.3e-5; the Planck–Larkin
    // factors 13 and 25 kT below the limit are 1 to 3e-5.
    let expected = 5.0 / 3.0 * (99_000.0 / kt).exp() * 0.3e-9 * 14.0 / 113.0;
    let ratio = light(1e7 / 14_000.0) / light(500.0);
    assert!((ratio / expected - 1.0).abs() < 1e-4, "{ratio} {expected}");
}
