//! Rates, corona model, escape and continuum: against published values, reference tables, limits.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

#[path = "reference/table.rs"]
mod table;

use lineclear::calc::plasma::{
    CoreTransition, CoronalLevel, CoronalLine, DEFAULT_LOTZ, HYDROGEN_LOTZ, Subshell, Target,
    absorption_f, coronal_balance, coronal_emission, dielectronic_recombination,
    escape_probability, excitation_rate, free_free_gaunt, free_free_w_per_m3_sr_nm,
    kt_per_cm_from_ev, kt_per_cm_from_kelvin, line_centre_optical_depth, mean_gaunt,
    radiative_recombination, recombination_into_shell, self_absorption_factor,
};
use lineclear::calc::shape::{LineWidths, OuterElectron, doppler_sigma_relative};
use lineclear::vocabulary::atom::{HalfInteger, Species};
use lineclear::vocabulary::light::constants::{PER_CM_PER_EV, RYDBERG_PER_CM};
use lineclear::vocabulary::spectrum::{Level, Line, LineKind, PositionOrigin};
use std::sync::Arc;
use table::{assert_close, rows};

fn kelvin(t: f64) -> f64 {
    kt_per_cm_from_kelvin(t).unwrap()
}

fn ev(t: f64) -> f64 {
    kt_per_cm_from_ev(t).unwrap()
}

/// van Regemorter 1962, equation 24: de-excitation 20.60 λ³ A T^(−1/2) P cm³/s (λ in cm, T in K),
/// carried over to excitation by detailed balance: the same rate as from f.
#[test]
fn excitation_agrees_with_the_form_of_the_paper() {
    let (rate_per_s, energy) = (6.265e8, 82_259.0);
    let f = absorption_f(rate_per_s, 6.0, 2.0, energy);
    // Lyman alpha: f = 0.4162 (common practice).
    assert_close(f, 0.4162, 1e-3, "oscillator strength of Lyman alpha");
    for target in [Target::Neutral, Target::Ion] {
        for temperature_k in [1e4, 1e5, 1e6] {
            let kt = kelvin(temperature_k);
            let got = excitation_rate(energy, f, kt, target).unwrap();
            let down_cm3 = 20.60 * energy.powi(-3) * rate_per_s / temperature_k.sqrt()
                * mean_gaunt(energy / kt, target);
            let want = down_cm3 * 1e-6 * 3.0 * (-energy / kt).exp();
            // The paper's constant has four digits; f and A add rounding.
            assert_close(got, want, 3e-3, "rate");
        }
    }
}

/// Osterbrock & Ferland 2006, table 3.16 (from memory): Υ(1s–2p) = 0.51 at 1e4 K. The formula
/// claims a factor 3.
#[test]
fn lyman_alpha_excitation_is_within_its_uncertainty() {
    let kt = kelvin(1e4);
    let got = excitation_rate(82_259.0, 0.4162, kt, Target::Neutral).unwrap();
    let want = 8.629e-12 / 1e2 / 2.0 * 0.51 * (-82_259.0 / kt).exp();
    assert!((got / want).ln().abs() < 3_f64.ln(), "{got:e} {want:e}");
}

/// ḡ → 0.2 for ions at threshold (van Regemorter, Mewe give 0.15–0.2), 0.276 ln(1/y) when hot.
#[test]
fn mean_gaunt_factors_have_their_limits() {
    assert!((0.14..0.21).contains(&mean_gaunt(30.0, Target::Ion)));
    assert!(mean_gaunt(30.0, Target::Neutral) < 0.03);
    for target in [Target::Ion, Target::Neutral] {
        let slope = (mean_gaunt(1e-6, target) - mean_gaunt(1e-4, target)) / 100_f64.ln();
        assert_close(
            slope,
            3_f64.sqrt() / std::f64::consts::TAU,
            0.03,
            "Bethe slope",
        );
    }
    for edge in [0.01, 0.1, 1.0, 10.0] {
        let (a, b) = (edge * (1.0 - 1e-9), edge * (1.0 + 1e-9));
        let step = mean_gaunt(a, Target::Neutral) / mean_gaunt(b, Target::Neutral);
        assert_close(step, 1.0, 1e-7, "no step");
    }
}

const HYDROGEN: Subshell = Subshell {
    binding_ev: 13.6,
    electrons: 1,
    lotz: HYDROGEN_LOTZ,
};

/// Peak of hydrogen's ionisation cross section near 55 eV: 0.7 π a₀² = 6.2e-21 m² (M. B. Shah et
/// al. 1987, J. Phys. B 20, 3501, from memory; 10 % theirs and Lotz's).
#[test]
fn lotz_cross_section_of_hydrogen() {
    assert_close(HYDROGEN.cross_section_m2(55.0), 6.2e-21, 0.15, "peak");
    assert_eq!(HYDROGEN.cross_section_m2(13.0), 0.0);
}

#[test]
fn ionisation_rate_is_the_cross_section_averaged() {
    let plain = Subshell {
        lotz: DEFAULT_LOTZ,
        electrons: 2,
        binding_ev: 24.6,
    };
    for shell in [HYDROGEN, plain] {
        for kt_ev in [1.0, 5.0, 100.0] {
            // ⟨σ v⟩ = √(8/(π m)) (kT)^(−3/2) ∫ σ E e^(−E/kT) dE, substituting E = P + kT s²/(1 −
            // s).
            let steps = 200_000;
            let mut sum = 0.0;
            for k in 0..steps {
                let s = (f64::from(k) + 0.5) / f64::from(steps);
                let t = s * s / (1.0 - s);
                let slope = (2.0 * s - s * s) / ((1.0 - s) * (1.0 - s));
                let energy = shell.binding_ev + kt_ev * t;
                sum += shell.cross_section_m2(energy)
                    * energy
                    * (-energy / kt_ev).exp()
                    * kt_ev
                    * slope;
            }
            let mean = 6.692_6e5 / kt_ev.powf(1.5) * sum / f64::from(steps);
            let got = shell.ionisation_rate(ev(kt_ev)).unwrap();
            assert_close(got, mean, 1e-5, "two ways");
        }
    }
}

/// Hydrogen at 10 eV: 5.2e-15 m³/s (R. K. Janev et al. 1987, *Elementary Processes in
/// Hydrogen–Helium Plasmas*, reaction 2.1.5, from memory).
#[test]
fn ionisation_rate_of_hydrogen() {
    assert_close(
        HYDROGEN.ionisation_rate(ev(10.0)).unwrap(),
        5.2e-15,
        0.15,
        "10 eV",
    );
}

/// Osterbrock & Ferland 2006, table 2.1: at 1e4 K α_A = 4.18e-13, α_B = 2.59e-13, α(1s) = 1.58e-13
/// cm³/s.
#[test]
fn recombination_of_hydrogen() {
    let kt = kelvin(1e4);
    let all = radiative_recombination(1, RYDBERG_PER_CM, kt).unwrap();
    let ground = recombination_into_shell(1, 1, kt).unwrap();
    // The formulas claim 3 %.
    assert_close(all, 4.18e-19, 0.03, "case A");
    assert_close(ground, 1.58e-19, 0.03, "into 1s");
    assert_close(all - ground, 2.59e-19, 0.03, "case B");
    let shells: f64 = (1..=400)
        .map(|n| recombination_into_shell(1, n, kt).unwrap())
        .sum();
    assert_close(shells, all, 0.03, "sum over shells");
    let ion = radiative_recombination(2, 4.0 * RYDBERG_PER_CM, 4.0 * kt).unwrap();
    assert_close(ion, 2.0 * all, 1e-12, "α(z, z² T) = z α(1, T)");
}

/// Dielectronic recombination of He⁺, S. M. V. Aldrovandi & D. Péquignot 1973, Astron. Astrophys.
/// 25, 137:
/// 1.9e-3 T^(−3/2) e^(−4.7e5/T) (1 + 0.3 e^(−9.4e4/T)) cm³/s; their fit follows the same theory with more care.
#[test]
fn dielectronic_recombination_of_helium() {
    // The Lyman series of He II: f and energies of hydrogen, times 4.
    let series: Vec<_> = [(2.0, 0.4162), (3.0, 0.0791), (4.0, 0.0290)]
        .map(|(n, absorption_f): (f64, f64)| CoreTransition {
            energy_ev: 54.4 * (1.0 - 1.0 / (n * n)),
            absorption_f,
        })
        .to_vec();
    for t in [1e5, 3e5, 1e6_f64] {
        let got = dielectronic_recombination(1, &series, kelvin(t)).unwrap();
        let want = 1.9e-9 * t.powf(-1.5) * (-4.7e5 / t).exp() * (1.0 + 0.3 * (-9.4e4 / t).exp());
        assert_close(got, want, 0.3, "He⁺");
    }
    assert_eq!(
        dielectronic_recombination(1, &[], kelvin(1e5)).unwrap(),
        0.0
    );
}

/// Coronal hydrogen is half ionised near 1.3 eV (1.5e4 K, common practice).
#[test]
fn coronal_hydrogen_is_half_ionised_near_15_000_kelvin() {
    let ionised = |kt_ev: f64| {
        let up = HYDROGEN.ionisation_rate(ev(kt_ev)).unwrap();
        let down = radiative_recombination(1, 13.6 * PER_CM_PER_EV, ev(kt_ev)).unwrap();
        coronal_balance(&[(up, down)]).unwrap()[1]
    };
    assert!(ionised(1.15) < 0.5 && ionised(1.5) > 0.5);
    assert!(ionised(0.05) < 1e-30 && ionised(1000.0) > 0.999_99);
    assert_eq!(coronal_balance(&[]).unwrap(), [1.0]);
    assert!(coronal_balance(&[(1.0, 0.0)]).is_err());
    assert_eq!(coronal_balance(&[(0.0, 1.0)]).unwrap(), [1.0, 0.0]);
}

fn level(energy_per_cm: f64, weight: f64) -> CoronalLevel {
    CoronalLevel {
        energy_per_cm,
        weight,
    }
}

fn line(upper: usize, lower: usize, rate_per_s: f64, allowed: bool) -> CoronalLine {
    CoronalLine {
        lower,
        upper,
        rate_per_s,
        excitation: allowed.then_some(Target::Ion),
    }
}

/// Ground 0, metastable 1, resonance 2, high 3.
fn small_ion() -> (Vec<CoronalLevel>, Vec<CoronalLine>) {
    let levels = vec![
        level(0.0, 1.0),
        level(2e4, 3.0),
        level(4e4, 3.0),
        level(6e4, 5.0),
    ];
    let lines = vec![
        line(2, 0, 1e8, true),
        line(2, 1, 3e7, true),
        line(3, 2, 2e7, true),
        line(3, 0, 1e6, true),
        line(1, 0, 1.0, false),
    ];
    (levels, lines)
}

#[test]
fn coronal_emission_conserves_energy_and_branches_by_rates() {
    let (levels, lines) = small_ion();
    let kt = ev(2.0);
    let out = coronal_emission(&levels, &lines, &[(0, 1.0)], kt).unwrap();
    let photons = &out.photons_m3_per_s;
    let energy = |l: &CoronalLine| levels[l.upper].energy_per_cm - levels[l.lower].energy_per_cm;
    let emitted: f64 = lines.iter().zip(photons).map(|(l, p)| energy(l) * p).sum();
    let absorbed: f64 = lines
        .iter()
        .filter(|l| l.lower == 0 && l.excitation.is_some())
        .map(|l| {
            let f = absorption_f(l.rate_per_s, levels[l.upper].weight, 1.0, energy(l));
            energy(l) * excitation_rate(energy(l), f, kt, Target::Ion).unwrap()
        })
        .sum();
    assert_close(emitted, absorbed, 1e-12, "what goes in comes out");
    assert_close(photons[0] / photons[1], 1e8 / 3e7, 1e-12, "branching");
    assert!(out.unfed.is_empty());
}

#[test]
fn a_metastable_level_is_a_second_ground_level() {
    let (levels, lines) = small_ion();
    let with =
        |fraction| coronal_emission(&levels, &lines, &[(0, 1.0), (1, fraction)], ev(2.0)).unwrap();
    let (none, some) = (with(0.0), with(0.1));
    assert!(some.photons_m3_per_s[0] > none.photons_m3_per_s[0]);
    // With a held population its own decay is not the corona model's to tell.
    assert_eq!(some.photons_m3_per_s[4], 0.0);
    assert!(none.photons_m3_per_s[4] > 0.0);
}

#[test]
fn levels_that_nothing_feeds_are_named() {
    let (mut levels, mut lines) = small_ion();
    levels.push(level(5e4, 7.0));
    lines.push(line(4, 1, 1e7, true));
    let out = coronal_emission(&levels, &lines, &[(0, 1.0)], ev(2.0)).unwrap();
    assert_eq!(out.unfed, [4]);
    assert_eq!(out.photons_m3_per_s[5], 0.0);
    let wrong = [line(0, 2, 1.0, true)];
    assert!(coronal_emission(&levels, &wrong, &[(0, 1.0)], ev(2.0)).is_err());
    let missing = [line(9, 2, 1.0, true)];
    assert!(coronal_emission(&levels, &missing, &[(0, 1.0)], ev(2.0)).is_err());
}

#[test]
fn self_absorption_agrees_with_quadrature_of_the_reference_library() {
    let table = rows("shape/escape.csv");
    assert_eq!(table.len(), 28);
    for row in table {
        let widths = LineWidths {
            sigma_nm: row[0],
            hwhm_nm: row[1],
        };
        // The claimed relative error.
        let thin = self_absorption_factor(row[2], widths).unwrap();
        assert_close(thin, row[3], 1e-6, "self-absorption");
        let escape = escape_probability(row[2], widths).unwrap();
        assert_close(escape, row[4], 1e-6, "escape");
        // A column also takes back light from its near side: never less than the far photon's
        // chance.
        assert!(thin >= escape * (1.0 - 2e-6), "{row:?}");
    }
}

/// Lyman alpha at 1e4 K: σ₀ = 5.90e-18 m² (common practice: 5.9e-14 cm² T₄^(−1/2)). Weak Doppler
/// line: 1 − τ/(2√2) and 1 − τ/√2.
#[test]
fn optical_depth_and_weak_limits() {
    let widths = LineWidths {
        sigma_nm: 121.567 * doppler_sigma_relative(1e4, 1.008).unwrap(),
        hwhm_nm: 0.0,
    };
    let depth = line_centre_optical_depth(1e18, 0.4162, 121.567, widths).unwrap();
    assert_close(depth, 5.90, 5e-3, "Lyman alpha");
    let weak = self_absorption_factor(1e-3, widths).unwrap();
    assert!((weak - (1.0 - 1e-3 / 8_f64.sqrt())).abs() < 1e-6);
    let escape = escape_probability(1e-3, widths).unwrap();
    assert!((escape - (1.0 - 1e-3 / 2_f64.sqrt())).abs() < 1e-6);
    assert!(self_absorption_factor(-1.0, widths).is_err());
    assert!(escape_probability(f64::NAN, widths).is_err());
}

#[test]
fn gaunt_factors_agree_with_the_exact_matrix_elements() {
    for row in rows("plasma/gaunt.csv") {
        let got = free_free_gaunt(10_f64.powf(row[0]), 10_f64.powf(row[1]));
        // Five printed digits of ln g.
        assert_close(got, row[2], 2e-5, "on the net");
    }
    let table = rows("plasma/gaunt_between.csv");
    assert_eq!(table.len(), 40);
    for row in table {
        let got = free_free_gaunt(10_f64.powf(row[0]), 10_f64.powf(row[1]));
        assert_close(got, row[2], 3e-3, "between");
    }
}

/// Karzas & Latter 1961: the frequency average ∫ g e^(−u) du has its highest value, 1.44 (from
/// memory), near γ² = 0.2; it tends to 1.10 (Born, 2√3/π) when hot. And Born's g = (√3/π) e^(u/2)
/// K₀(u/2) at small γ²: here u ≪ 1, (√3/π) ln(2.2459/u).
#[test]
fn gaunt_factors_have_their_published_limits() {
    let average = |gamma2: f64| {
        let steps = 4000;
        let border = |k: i32| 1e-4 * (2e5_f64).powf(f64::from(k) / f64::from(steps));
        (0..steps)
            .map(|k| {
                let (a, b) = (border(k), border(k + 1));
                let u = (a * b).sqrt();
                free_free_gaunt(gamma2, u) * (-u).exp() * (b - a)
            })
            .sum::<f64>()
    };
    let highest = [0.05, 0.1, 0.2, 0.4, 1.0]
        .map(average)
        .into_iter()
        .fold(0.0, f64::max);
    assert_close(highest, 1.44, 0.01, "highest average");
    // The next term is of order √γ² = 0.03, falling with γ².
    let born_average = 2.0 * 3_f64.sqrt() / std::f64::consts::PI;
    assert_close(average(1e-3), born_average, 0.04, "Born");
    assert!(average(1e-3) < average(1e-2) && average(1e-3) > born_average);
    let born = 3_f64.sqrt() / std::f64::consts::PI * (2.2459 / 1e-4_f64).ln();
    assert_close(free_free_gaunt(1e-3, 1e-4), born, 0.01, "Born at small u");
    assert_close(
        free_free_gaunt(1e-3, 1e-7),
        born + 0.5513 * 1e3_f64.ln(),
        0.01,
        "beyond",
    );
}

/// Rybicki & Lightman 1979, eq. 5.14: 6.8e-38 z² n_e n_i T^(−1/2) e^(−u) g erg s⁻¹ cm⁻³ Hz⁻¹ over
/// 4π.
#[test]
fn free_free_emission_agrees_with_the_textbook_constant() {
    let (nm, t) = (500.0, 3e4);
    let kt = kelvin(t);
    let got = free_free_w_per_m3_sr_nm(nm, kt, 2, 1e20, 2e20).unwrap();
    let u = 1e7 / nm / kt;
    let per_hz = 6.8e-51 * 4.0 / t.sqrt() * 1e20 * 2e20 * (-u).exp() / (4.0 * std::f64::consts::PI);
    let per_nm = per_hz * 2.997_924_58e8 / (nm * 1e-9).powi(2) * 1e-9;
    let gaunt = free_free_gaunt(4.0 * RYDBERG_PER_CM / kt, u);
    // Two printed digits: 6.84e-38 exactly.
    assert_close(got, per_nm * gaunt, 0.01, "emission");
    assert_eq!(
        free_free_w_per_m3_sr_nm(nm, kt, 0, 1e20, 1e20).unwrap(),
        0.0
    );
    assert!(free_free_w_per_m3_sr_nm(0.0, kt, 1, 1e20, 1e20).is_err());
}

fn known_level(energy_per_cm: f64, configuration: &str, term: &str, twice_j: u16) -> Arc<Level> {
    Arc::new(Level {
        number: 0,
        species: Species::new(6, 3),
        energy_per_cm,
        energy_uncertainty_per_cm: 0.1,
        configuration: Some(configuration.into()),
        term: Some(term.into()),
        j: Some(HalfInteger::from_twice(twice_j)),
        g: Some(f64::from(twice_j) + 1.0),
        parity: None,
        origin: PositionOrigin::Measured,
        source: "test".into(),
    })
}

/// C III (energies common practice): 2s² ¹S–2s2p ¹P is allowed inside the shell, –2s3p ¹P into the
/// next; –2s2p ³P is an intercombination line, 2s2p ³P–2p² ³P allowed again.
#[test]
fn the_levels_of_a_line_tell_how_it_is_excited() {
    let ground = known_level(0.0, "2s2", "1S", 0);
    let triplet = known_level(52_390.8, "2s 2p", "3Po", 2);
    let resonance = known_level(102_352.0, "2s 2p", "1Po", 2);
    let doubly = known_level(137_454.4, "2p2", "3P", 4);
    let next = known_level(258_931.3, "2s 3p", "1Po", 2);
    let target = |lower: &Arc<Level>, upper: &Arc<Level>| {
        Target::of_line(&Line {
            species: lower.species,
            wavenumber_per_cm: upper.energy_per_cm - lower.energy_per_cm,
            wavenumber_uncertainty_per_cm: 0.1,
            position_origin: PositionOrigin::Ritz,
            position_source: "test".into(),
            lower: Some(Arc::clone(lower)),
            upper: Some(Arc::clone(upper)),
            rate_per_s: None,
            rate_relative_uncertainty: None,
            rate_origin: None,
            rate_source: None,
            kind: LineKind::Line,
        })
    };
    assert_eq!(target(&ground, &resonance), Some(Target::IonWithinShell));
    assert_eq!(target(&ground, &next), Some(Target::Ion));
    assert_eq!(target(&triplet, &doubly), Some(Target::IonWithinShell));
    assert_eq!(target(&ground, &triplet), None);
    assert_eq!(target(&ground, &doubly), None);
    let electron = OuterElectron::of_level(&resonance, 386_241.0).unwrap();
    assert_eq!((electron.l, electron.core_charge), (1, 3));
    assert!(OuterElectron::of_level(&resonance, 1e5).is_none());
}
