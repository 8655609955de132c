//! Boltzmann, Saha, partition functions: against textbooks, mpmath (`tests/reference/plasma`),
//! limits.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

#[path = "reference/table.rs"]
mod table;

use lineclear::calc::plasma::{
    Plasma, PlasmaError, Stage, boltzmann_ratio, debye_length_m, ionisation_balance,
    kt_per_cm_from_ev, kt_per_cm_from_kelvin, ln_saha_ratio, lowering_per_cm, partition_function,
    planck_larkin, saha_ratio,
};
use lineclear::vocabulary::light::constants::{BOLTZMANN_J_PER_K, PER_CM_PER_EV, RYDBERG_PER_CM};
use table::{assert_close, rows};

const HYDROGEN_EV: f64 = 13.6;

fn kelvin(t: f64) -> f64 {
    kt_per_cm_from_kelvin(t).unwrap()
}

fn stage(partition: f64, limit_ev: f64) -> Stage {
    Stage {
        partition,
        limit_per_cm: Some(limit_ev * PER_CM_PER_EV),
    }
}

/// n(H⁺)/n(H) with the textbook's Z = 2 and 1 at an electron pressure in N/m².
fn hydrogen_ratio(temperature_k: f64, electron_pressure_pa: f64) -> f64 {
    let density = electron_pressure_pa / (BOLTZMANN_J_PER_K * temperature_k);
    saha_ratio(stage(2.0, HYDROGEN_EV), 1.0, kelvin(temperature_k)).unwrap() / density
}

/// Carroll & Ostlie, *An Introduction to Modern Astrophysics*, 2nd ed. 2007, examples 8.1.3–8.1.5,
/// from memory; tolerances are their printed digits.
#[test]
fn textbook_boltzmann_factors_of_hydrogen() {
    let second = |t: f64| boltzmann_ratio(8.0, 2.0, 10.2 * PER_CM_PER_EV, kelvin(t));
    assert_close(second(85_400.0), 1.0, 2e-3, "equal populations at 8.54e4 K");
    assert_close(second(5777.0), 5.06e-9, 1e-2, "the Sun");
    // 4 e^(−10.2 eV/kT) worked by hand with k = 8.617e-5 eV/K.
    assert_close(second(10_000.0), 2.89e-5, 1e-2, "10 000 K");
    assert_close(second(5800.0), 5.49e-9, 1e-2, "5800 K");
}

/// The same, examples 8.1.4 and 8.1.5.
#[test]
fn textbook_saha_fractions() {
    let ionised = |t: f64| {
        let ratio = hydrogen_ratio(t, 20.0);
        ratio / (1.0 + ratio)
    };
    // Read off the worked figure: temperatures given to 100 K change the fraction by up to 0.02.
    assert!((ionised(9600.0) - 0.50).abs() < 0.03, "{}", ionised(9600.0));
    assert!((ionised(8300.0) - 0.05).abs() < 0.01, "{}", ionised(8300.0));
    assert!(
        (ionised(11_300.0) - 0.95).abs() < 0.01,
        "{}",
        ionised(11_300.0)
    );
    assert_close(
        hydrogen_ratio(5777.0, 1.5),
        7.70e-5,
        1e-2,
        "hydrogen in the Sun",
    );
    let density = 1.5 / (BOLTZMANN_J_PER_K * 5777.0);
    let calcium = saha_ratio(stage(1.32, 6.11), 2.30, kelvin(5777.0)).unwrap() / density;
    assert_close(calcium, 918.0, 1e-2, "Ca II over Ca I in the Sun");
}

#[test]
fn saha_agrees_with_forty_digits() {
    let table = rows("plasma/saha.csv");
    assert_eq!(table.len(), 24);
    for row in table {
        let got = ln_saha_ratio(stage(1.0, row[1]), row[2], kelvin(row[0])).unwrap();
        // Twelve digits of a number up to 15 000.
        assert_close(got, row[3], 1e-12, "ln of the Saha ratio");
    }
}

#[test]
fn the_balance_is_complete_and_never_overflows() {
    let stages = [
        stage(2.0, 24.6),
        stage(2.0, 54.4),
        Stage {
            partition: 1.0,
            limit_per_cm: None,
        },
    ];
    for t in [1.0, 300.0, 1e4, 1e7] {
        for density in [1.0, 1e20, 1e29] {
            let fractions = ionisation_balance(&stages, kelvin(t), density).unwrap();
            assert_close(fractions.iter().sum(), 1.0, 1e-14, "sum of fractions");
        }
    }
    let cold = ionisation_balance(&stages, kelvin(1.0), 1e20).unwrap();
    assert_eq!(cold, [1.0, 0.0, 0.0]);
    let hot = ionisation_balance(&stages, kelvin(1e7), 1e10).unwrap();
    assert!(hot[2] > 0.999_999);
    // Ratio of neighbours = the Saha ratio.
    let some = ionisation_balance(&stages, kelvin(2e4), 1e22).unwrap();
    let ratio = saha_ratio(stages[0], 2.0, kelvin(2e4)).unwrap() / 1e22;
    assert_close(some[1] / some[0], ratio, 1e-12, "neighbours");
}

#[test]
fn a_balance_without_a_limit_names_the_stage() {
    let open = Stage {
        partition: 2.0,
        limit_per_cm: None,
    };
    assert_eq!(
        ionisation_balance(&[stage(1.0, 5.0), open, open], kelvin(1e4), 1e20),
        Err(PlasmaError::NoLimit { stage: 2 })
    );
}

#[test]
fn planck_larkin_factor_keeps_its_digits() {
    for row in rows("plasma/planck_larkin.csv") {
        // The closed form loses log10(2/b) + … digits above b = 0.03: 1e-12 remains.
        assert_close(planck_larkin(row[0]), row[1], 1e-12, "weight");
    }
    assert_eq!(planck_larkin(0.0), 0.0);
    assert_eq!(planck_larkin(-1.0), 0.0);
    assert!(planck_larkin(f64::NAN).is_nan());
}

fn hydrogen(shells: u32) -> impl Iterator<Item = (f64, f64)> {
    (1..=shells).map(|n| {
        let n2 = f64::from(n).powi(2);
        (RYDBERG_PER_CM * (1.0 - 1.0 / n2), 2.0 * n2)
    })
}

fn isolated(kt_ev: f64) -> Plasma {
    Plasma {
        kt_per_cm: kt_per_cm_from_ev(kt_ev).unwrap(),
        electron_density_per_m3: None,
    }
}

#[test]
fn hydrogen_keeps_its_partition_function_however_many_levels_are_held() {
    for row in rows("plasma/hydrogen_partition.csv") {
        let [kt_ev, infinite] = row[..] else {
            panic!("two columns")
        };
        let of = |shells| {
            partition_function(hydrogen(shells), Some(RYDBERG_PER_CM), 0, isolated(kt_ev)).unwrap()
        };
        // 2000 shells leave out (R/kT)² e^(−R/kT)/2000.
        assert_close(of(2000).value, infinite, 3e-3, "2000 shells");
        for shells in [5, 20, 100] {
            let held = of(shells);
            let whole = held.value * (1.0 + held.missing_fraction.unwrap());
            assert_close(whole, infinite, 1e-3, "held and missing shells");
        }
    }
    let at = |kt_ev, shells| {
        partition_function(hydrogen(shells), Some(RYDBERG_PER_CM), 0, isolated(kt_ev))
            .unwrap()
            .value
    };
    for shells in [2, 10, 500] {
        // The stated figures: 2.00 at 1 eV, about 2.0 at 3 eV.
        assert!((at(1.0, shells) - 2.0).abs() < 0.005);
        assert!((at(3.0, shells) - 2.0).abs() < 0.1);
    }
}

#[test]
fn a_partition_function_says_when_it_is_a_lower_bound() {
    let of = |levels: &[(f64, f64)], limit| {
        partition_function(levels.iter().copied(), limit, 0, isolated(3.0)).unwrap()
    };
    let ground = [(0.0, 2.0)];
    assert!(of(&ground, Some(40_000.0)).is_lower_bound());
    assert!(of(&ground, None).is_lower_bound());
    let cold = partition_function(ground, Some(RYDBERG_PER_CM), 0, isolated(0.3)).unwrap();
    assert!(!cold.is_lower_bound());
    // A heavy atom of which eight levels are held: none above them matters, but those between may.
    let heavy: Vec<_> = (0..8).map(|k| (6000.0 * f64::from(k), 7.0)).collect();
    let thin = partition_function(heavy, Some(63_428.0), 0, isolated(0.6)).unwrap();
    assert!(thin.missing_fraction.unwrap() < 0.01 && thin.is_lower_bound());
}

#[test]
fn fractions_of_all_levels_sum_to_one() {
    let plasma = Plasma {
        kt_per_cm: 16_000.0,
        electron_density_per_m3: Some(1e23),
    };
    let u = partition_function(hydrogen(50), Some(RYDBERG_PER_CM), 0, plasma).unwrap();
    let sum: f64 = hydrogen(50).map(|(e, g)| u.fraction(e, g)).sum();
    assert_close(sum, 1.0, 1e-13, "all of the atoms");
    assert!(u.levels_beyond > 0, "a lowered limit cuts the series");
    assert_eq!(u.levels_used + u.levels_beyond, 50);
}

/// The two limits that Stewart & Pyatt 1966 state for their formula.
#[test]
fn lowering_meets_debye_hueckel_and_the_ion_sphere() {
    let kt = kt_per_cm_from_ev(1.0).unwrap();
    // e²/(4π ε₀) = 1.439 964 5e-9 eV m (common practice).
    let coulomb_per_cm_m = 1.439_964_5e-9 * PER_CM_PER_EV;
    let thin = lowering_per_cm(kt, 1e12, 1);
    let debye = 2.0 * coulomb_per_cm_m / debye_length_m(kt, 1e12);
    assert_close(thin, debye, 1e-3, "thin: z e²/λ_D");
    let density = 1e36;
    let radius_m = (3.0 * 2.0 / (4.0 * std::f64::consts::PI * density)).cbrt();
    let sphere = 1.5 * 2.0 * coulomb_per_cm_m / radius_m;
    // The next term falls off as K^(−2/3).
    assert_close(
        lowering_per_cm(kt, density, 1),
        sphere,
        0.02,
        "dense: 3/2 z e²/a",
    );
    // λ_D = 7434 m √(kT/n_e) in eV and m⁻³ counts the electrons alone; ions add a factor 1/√2
    // (common practice).
    assert_close(
        debye_length_m(kt, 1e20),
        7434.0 * 1e-10 / 2_f64.sqrt(),
        1e-3,
        "λ_D",
    );
}

#[test]
fn nonsense_is_refused() {
    let plasma = isolated(1.0);
    let bad = |levels: &[(f64, f64)]| {
        partition_function(levels.iter().copied(), Some(1e5), 0, plasma).unwrap_err()
    };
    assert!(matches!(bad(&[(-1.0, 2.0)]), PlasmaError::BadLevel { .. }));
    assert!(matches!(
        bad(&[(0.0, f64::NAN)]),
        PlasmaError::BadLevel { .. }
    ));
    assert!(matches!(bad(&[(2e5, 1.0)]), PlasmaError::NoLevels { .. }));
    assert!(kt_per_cm_from_kelvin(0.0).is_err());
    assert!(kt_per_cm_from_ev(f64::NAN).is_err());
    let thin = Plasma {
        electron_density_per_m3: Some(-1.0),
        ..plasma
    };
    assert!(partition_function([(0.0, 1.0)], Some(1e5), 0, thin).is_err());
    assert_eq!(
        kt_per_cm_from_kelvin(-3.0).unwrap_err().to_string(),
        "the temperature in K is -3: it must be a positive number"
    );
}
