//! How a verdict is made, case by case, on invented spectra small enough to reckon by hand.
//!
//! The rules are those of DEVELOPERS.md, "How a verdict is made"; expected numbers are worked out
//! in the comments.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

use std::sync::Arc;

use lineclear::advise::window::{Answer, Question, WindowFeature, answer};
use lineclear::advise::{Conditions, Details, EmissionModel, Spectrum, Verdict};
use lineclear::vocabulary::atom::{HalfInteger, Species};
use lineclear::vocabulary::light::{Air, Medium, SpectralWidth, TypedRange};
use lineclear::vocabulary::spectrum::{
    Completeness, Level, Line, LineKind, PositionOrigin, RateOrigin, Scope, Strength,
};

const HELIUM: Species = Species::new(2, 1);
const IRON: Species = Species::new(26, 1);
const KT_1EV_PER_CM: f64 = 8_065.543_937;

fn level(species: Species, number: u32, energy_per_cm: f64) -> Arc<Level> {
    Arc::new(Level {
        number,
        species,
        energy_per_cm,
        energy_uncertainty_per_cm: 0.001,
        configuration: Some(Arc::from(format!("level {number}"))),
        term: Some(Arc::from(if number == 0 { "1S" } else { "1Po" })),
        j: Some(HalfInteger::from_twice(if number == 0 { 0 } else { 2 })),
        g: Some(1.0),
        parity: None,
        origin: PositionOrigin::Measured,
        source: Arc::from("invented"),
    })
}

/// A species with lines at vacuum wavelengths (nm), all from the ground level, with rates.
fn spectrum(
    species: Species,
    lines: &[(f64, Option<f64>)],
    scope: Option<Completeness>,
) -> Spectrum {
    let mut levels = vec![level(species, 0, 0.0)];
    let mut held = Vec::new();
    for (index, &(nm, rate_per_s)) in lines.iter().enumerate() {
        let upper = level(species, index as u32 + 1, 1e7 / nm);
        levels.push(upper.clone());
        held.push(Line {
            species,
            wavenumber_per_cm: 1e7 / nm,
            wavenumber_uncertainty_per_cm: 0.0001,
            position_origin: PositionOrigin::Measured,
            position_source: Arc::from("invented"),
            lower: Some(levels[0].clone()),
            upper: Some(upper),
            rate_per_s,
            rate_relative_uncertainty: Some(0.01),
            rate_origin: rate_per_s.map(|_| RateOrigin::Published),
            rate_source: rate_per_s.map(|_| Arc::from("invented")),
            kind: LineKind::Line,
        });
    }
    held.sort_by(|a, b| a.wavenumber_per_cm.total_cmp(&b.wavenumber_per_cm));
    let strengths = held
        .iter()
        .map(|l| Strength {
            wavenumber_per_cm: l.wavenumber_per_cm,
            rate_per_s: l.rate_per_s,
            computed: false,
            lower: Some(0),
            upper: l.upper.as_ref().map(|u| u.number),
        })
        .collect();
    Spectrum {
        species,
        amount: 1.0,
        named: false,
        levels,
        lines: held,
        strengths,
        limit_per_cm: Some(198_000.0),
        mass_u: 50.0,
        scopes: scope
            .map(|completeness| Scope {
                from_nm: 400.0,
                to_nm: 600.0,
                completeness,
                source: Arc::from("invented"),
            })
            .into_iter()
            .collect(),
    }
}

fn ask(spectra: &[Spectrum]) -> Answer {
    answer(&question("499..501nm"), spectra).unwrap()
}

/// What is seen in a range with 0.1 nm at 1 eV.
fn question(range: &str) -> Question {
    let typed: TypedRange = range.parse().unwrap();
    Question {
        range: typed.resolve(Medium::Vacuum, Air::standard()).unwrap(),
        medium: Medium::Vacuum,
        width: SpectralWidth::from_nm(0.1),
        conditions: Conditions {
            model: EmissionModel::Visible,
            kt_per_cm: KT_1EV_PER_CM,
            electron_density_per_m3: None,
            gas_temperature_k: 1000.0,
            details: Details::default(),
        },
        not_held: Vec::new(),
    }
}

fn feature_of(answer: &Answer, species: Species) -> &WindowFeature {
    answer
        .features
        .iter()
        .find(|f| f.species == species)
        .unwrap()
}

/// A helium line at 500 nm, alone in its species, fully listed.
fn target() -> Spectrum {
    spectrum(HELIUM, &[(500.0, Some(1e8))], Some(Completeness::Full))
}

#[test]
fn a_line_of_the_same_light_at_the_same_place_swamps() {
    // Both are the strongest line of their species: light 1 and 1, same widths: fraction 1.
    let other = spectrum(IRON, &[(500.0, Some(1e6))], Some(Completeness::Full));
    let answer = ask(&[target(), other]);
    let helium = feature_of(&answer, HELIUM);
    let fraction = helium.interference.unwrap().fraction;
    assert!(
        (fraction - 1.0).abs() < 1e-3,
        "{fraction}: only natural widths differ"
    );
    assert_eq!(helium.verdict.central, Verdict::Swamped);
    assert_eq!(helium.worst.as_ref().unwrap().species, IRON);
}

#[test]
fn half_a_width_away_a_gaussian_instrument_halves_it() {
    // Offset of half the FWHM: the Gaussian is at 1/2 there; Doppler adds 1e-3 of the width.
    let other = spectrum(IRON, &[(500.05, Some(1e6))], Some(Completeness::Full));
    let answer = ask(&[target(), other]);
    let fraction = feature_of(&answer, HELIUM).interference.unwrap().fraction;
    assert!((fraction - 0.5).abs() < 2e-3, "{fraction}");
}

#[test]
fn no_light_of_others_is_clear() {
    let other = spectrum(IRON, &[(550.0, Some(1e6))], Some(Completeness::Full));
    let answer = ask(&[target(), other]);
    assert_eq!(feature_of(&answer, HELIUM).verdict.to_string(), "clear");
}

#[test]
fn a_species_with_ground_term_scope_alone_is_never_clear() {
    for scope in [Some(Completeness::GroundTerm), None] {
        let other = spectrum(IRON, &[(550.0, Some(1e6))], scope);
        let answer = ask(&[target(), other]);
        let helium = feature_of(&answer, HELIUM);
        assert_eq!(helium.verdict.central, Verdict::Unrated, "{scope:?}");
        assert!(
            answer
                .unrated
                .iter()
                .any(|u| u.decides && u.species == "Fe I")
        );
    }
}

#[test]
fn an_element_is_judged_by_the_stages_that_are_known_unless_one_is_named() {
    let known = spectrum(IRON, &[(550.0, Some(1e6))], Some(Completeness::Full));
    let mut unknown = spectrum(Species::new(26, 2), &[(550.0, Some(1e6))], None);
    let answer = ask(&[target(), known.clone(), unknown.clone()]);
    assert_eq!(feature_of(&answer, HELIUM).verdict.central, Verdict::Clear);
    assert!(
        answer
            .unrated
            .iter()
            .any(|u| !u.decides && u.species == "Fe II")
    );
    unknown.named = true;
    let answer = ask(&[target(), known, unknown]);
    assert_eq!(
        feature_of(&answer, HELIUM).verdict.central,
        Verdict::Unrated
    );
}

#[test]
fn a_line_without_a_rate_within_a_width_leaves_the_target_unrated() {
    let near = spectrum(
        IRON,
        &[(550.0, Some(1e8)), (500.05, None)],
        Some(Completeness::Full),
    );
    let helium = ask(&[target(), near]);
    assert_eq!(
        feature_of(&helium, HELIUM).verdict.central,
        Verdict::Unrated
    );
    let far = spectrum(
        IRON,
        &[(550.0, Some(1e8)), (500.2, None)],
        Some(Completeness::Full),
    );
    let helium = ask(&[target(), far]);
    assert_eq!(feature_of(&helium, HELIUM).verdict.central, Verdict::Clear);
}

/// Iron with a strong line far away, which scales it, and a line without a rate beside the target.
fn iron_without_a_rate(term: &str, scale_per_s: f64) -> Spectrum {
    let lines = [(450.0, Some(scale_per_s)), (500.0, None)];
    let mut iron = spectrum(IRON, &lines, Some(Completeness::Full));
    for line in iron.lines.iter_mut().filter(|l| l.rate_per_s.is_none()) {
        let mut upper = (**line.upper.as_ref().unwrap()).clone();
        upper.term = Some(Arc::from(term));
        line.upper = Some(Arc::new(upper));
    }
    iron
}

#[test]
fn a_prior_lets_a_verdict_stand_where_the_line_is_too_weak_to_change_it() {
    // A line between levels of one parity: the prior's median is g A = 10^-14.35 σ³ = 0.04 s⁻¹ at
    // 20 000 cm⁻¹; against a scale of 1e9 s⁻¹ it needs a factor 1e8 to tinge: 3 σ.
    let answer = ask(&[target(), iron_without_a_rate("1D", 1e9)]);
    let helium = feature_of(&answer, HELIUM);
    assert_eq!(helium.verdict.central, Verdict::Clear);
    assert!(helium.prior_chance.unwrap() < 0.01);
    let iron = answer.lines.iter().find(|l| l.line.rate_per_s.is_none());
    let iron = iron.unwrap();
    assert!(iron.line.rate_origin.is_none(), "a prior is no rate");
    assert!(iron.prior.is_some());
    assert_eq!(
        feature_of(&answer, IRON).verdict.central,
        Verdict::Unrated,
        "a target without a rate stays unrated"
    );
}

#[test]
fn a_prior_that_may_change_the_verdict_leaves_it_unrated_and_says_the_chance() {
    let answer = ask(&[target(), iron_without_a_rate("1Po", 1e9)]);
    let helium = feature_of(&answer, HELIUM);
    assert_eq!(helium.verdict.central, Verdict::Unrated);
    assert!(helium.prior_chance.unwrap() > 0.05);
    let said = helium.remarks.join("; ");
    assert!(
        said.contains("% chance (prior for unknown rates)"),
        "{said}"
    );
    assert!(said.contains("Fe I 500.000 nm"), "{said}");
}

#[test]
fn a_species_without_any_rate_has_no_scale_and_no_prior() {
    let iron = spectrum(IRON, &[(500.0, None)], Some(Completeness::Full));
    let answer = ask(&[target(), iron]);
    let helium = feature_of(&answer, HELIUM);
    assert_eq!(helium.verdict.central, Verdict::Unrated);
    assert_eq!(helium.prior_chance, None);
}

#[test]
fn a_target_without_a_rate_is_unrated_and_still_listed() {
    let answer = ask(&[spectrum(HELIUM, &[(500.0, None)], Some(Completeness::Full))]);
    let helium = feature_of(&answer, HELIUM);
    assert_eq!(helium.verdict.central, Verdict::Unrated);
    assert_eq!(helium.light_fraction, None);
}

#[test]
fn a_strong_scope_counts_the_chance_of_unlisted_lines() {
    // 10 listed lines within 10 % of 500 nm: 0.1 per nm; expected 3 × 0.1 × 0.1 = 0.03, chance
    // 2.96 %: clear. Lines farther off do not count.
    let listed = |n: usize| -> Vec<(f64, Option<f64>)> {
        (0..n)
            .map(|i| (510.0 + 39.0 * i as f64 / n as f64, Some(1e6)))
            .chain((0..n).map(|i| (560.0 + 39.0 * i as f64 / n as f64, Some(1e6))))
            .collect()
    };
    let few = ask(&[
        target(),
        spectrum(IRON, &listed(10), Some(Completeness::Strong)),
    ]);
    let helium = feature_of(&few, HELIUM);
    assert!((helium.unlisted_chance - (1.0 - (-0.03f64).exp())).abs() < 1e-12);
    assert!(
        helium.remarks.is_empty(),
        "below 5 % nothing is said: {:?}",
        helium.remarks
    );
    assert_eq!(helium.verdict.central, Verdict::Clear);
    // 50 lines: expected 0.15, chance 13.9 %: clear, and said.
    let some = ask(&[
        target(),
        spectrum(IRON, &listed(50), Some(Completeness::Strong)),
    ]);
    let helium = feature_of(&some, HELIUM);
    assert_eq!(helium.verdict.central, Verdict::Clear);
    assert!(
        helium.remarks[0].contains("14 % chance"),
        "{:?}",
        helium.remarks
    );
    // 200 lines: expected 0.6, chance 45 %: unrated.
    let many = ask(&[
        target(),
        spectrum(IRON, &listed(200), Some(Completeness::Strong)),
    ]);
    assert_eq!(feature_of(&many, HELIUM).verdict.central, Verdict::Unrated);
    // Sodium has no open d or f shell: as many unlisted lines as listed ones, 0.2, chance 18 %.
    let simple = ask(&[
        target(),
        spectrum(
            Species::new(11, 1),
            &listed(200),
            Some(Completeness::Strong),
        ),
    ]);
    let helium = feature_of(&simple, HELIUM);
    assert!((helium.unlisted_chance - (1.0 - (-0.2f64).exp())).abs() < 1e-12);
    assert_eq!(helium.verdict.central, Verdict::Clear);
}

#[test]
fn a_first_ion_of_which_nothing_is_claimed_counts_as_dense_as_the_neutral_atom() {
    let listed: Vec<(f64, Option<f64>)> = (0..50)
        .map(|i| (510.0 + 0.78 * f64::from(i), Some(1e6)))
        .collect();
    let neutral = spectrum(IRON, &listed, Some(Completeness::Strong));
    let stage = |stage| {
        spectrum(
            Species::new(26, stage),
            &[(540.0, Some(1e6))],
            Some(Completeness::GroundTerm),
        )
    };
    let chance = |others: &[Spectrum]| {
        let mut spectra = vec![target()];
        spectra.extend_from_slice(others);
        feature_of(&ask(&spectra), HELIUM).unlisted_chance
    };
    // 50 lines in 100 nm: expected 3 × 0.5 × 0.1 = 0.15 of the neutral atom, and as many of the ion.
    let alone = chance(std::slice::from_ref(&neutral));
    assert!((alone - (1.0 - (-0.15f64).exp())).abs() < 1e-12, "{alone}");
    let both = chance(&[neutral.clone(), stage(2)]);
    assert!((both - (1.0 - (-0.30f64).exp())).abs() < 1e-12, "{both}");
    // A source that shows the neutral atom need not show the third spectrum.
    let third = chance(&[neutral, stage(3)]);
    assert!((third - alone).abs() < 1e-12, "{third}");
}

#[test]
fn a_feature_far_from_the_middle_is_judged_by_what_is_known_where_it_lies() {
    // Iron is claimed from 400 to 600 nm only: helium at 390 nm cannot be judged, at 500 nm it can.
    let helium = spectrum(HELIUM, &[(390.0, Some(1e8)), (500.0, Some(1e8))], None);
    let iron = spectrum(IRON, &[(550.0, Some(1e6))], Some(Completeness::Full));
    let answer = answer(&question("380..620nm"), &[helium, iron]).unwrap();
    let words: Vec<Verdict> = (answer.features.iter())
        .filter(|f| f.species == HELIUM)
        .map(|f| f.verdict.central)
        .collect();
    assert_eq!(words, [Verdict::Unrated, Verdict::Clear]);
}

#[test]
fn unlisted_lines_too_weak_to_matter_do_not_count() {
    // Full scope: unlisted lines lie below 1e-3 of the strongest, 1e-3 of the target: below 1 %.
    let listed: Vec<(f64, Option<f64>)> = (0..400)
        .map(|i| (510.0 + 0.2 * f64::from(i), Some(1e6)))
        .collect();
    let answer = ask(&[target(), spectrum(IRON, &listed, Some(Completeness::Full))]);
    let helium = feature_of(&answer, HELIUM);
    assert_eq!(helium.unlisted_chance, 0.0);
    assert_eq!(helium.verdict.central, Verdict::Clear);
}

#[test]
fn a_species_of_zero_amount_is_as_if_absent() {
    let mut other = spectrum(IRON, &[(500.0, Some(1e6))], None);
    other.amount = 0.0;
    let answer = ask(&[target(), other]);
    let helium = feature_of(&answer, HELIUM);
    assert_eq!(helium.verdict.central, Verdict::Clear);
    assert_eq!(helium.interference.unwrap().fraction, 0.0);
}

#[test]
fn other_lines_of_the_own_species_blend_but_do_not_falsify() {
    let own = spectrum(
        HELIUM,
        &[(500.0, Some(1e8)), (500.02, Some(1e8))],
        Some(Completeness::Full),
    );
    let answer = ask(&[own]);
    for feature in &answer.features {
        assert_eq!(feature.verdict.central, Verdict::Clear);
        assert!(feature.own_species_fraction.unwrap() > 0.5);
    }
}

#[test]
fn light_fractions_sum_to_one() {
    let other = spectrum(
        IRON,
        &[(500.3, Some(1e6)), (499.7, Some(2e6))],
        Some(Completeness::Full),
    );
    let answer = ask(&[target(), other]);
    let sum: f64 = answer.lines.iter().filter_map(|l| l.light_fraction).sum();
    assert!((sum - 1.0).abs() < 1e-12, "{sum}: rounding alone");
}
