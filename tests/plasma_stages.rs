//! Outermost subshells and rates between stages; properties of balances.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

use lineclear::calc::plasma::{
    CoreTransition, Plasma, Stage, coronal_balance, ionisation_balance, kt_per_cm_from_ev,
    outer_subshell, partition_function, stage_rates,
};
use lineclear::vocabulary::atom::Species;
use lineclear::vocabulary::light::constants::PER_CM_PER_EV;
use proptest::prelude::*;

/// Ground configurations (common practice: periodic table of ground states).
#[test]
fn outermost_subshells() {
    for (z, stage, n, l, electrons) in [
        (1, 1, 1, 0, 1),
        (2, 1, 1, 0, 2),
        (6, 1, 2, 1, 2),
        (6, 3, 2, 0, 2),
        (11, 1, 3, 0, 1),
        (11, 2, 2, 1, 6),
        (18, 1, 3, 1, 6),
        (20, 2, 4, 0, 1),
        (24, 1, 4, 0, 1),
        (24, 2, 3, 2, 5),
        (26, 1, 4, 0, 2),
        (26, 2, 4, 0, 1),
        (26, 3, 3, 2, 6),
        (29, 1, 4, 0, 1),
        (29, 2, 3, 2, 10),
        (42, 1, 5, 0, 1),
        (46, 1, 4, 2, 10),
        (74, 1, 6, 0, 2),
        (74, 3, 5, 2, 4),
        (80, 1, 6, 0, 2),
        (92, 92, 1, 0, 1),
    ] {
        let got = outer_subshell(Species::new(z, stage)).unwrap();
        assert_eq!(
            (got.n, got.l, got.electrons),
            (n, l, electrons),
            "Z {z} stage {stage}"
        );
    }
}

/// Carbon in corona equilibrium: most abundant are C II near 3e4 K, C III near 7e4 K, helium-like C
/// V from 2e5 to 8e5 K, bare nuclei above 2e6 K (C. Jordan 1969, MNRAS 142, 501, from memory).
#[test]
fn coronal_carbon_passes_through_its_stages() {
    // Ionisation energies and strongest resonance transitions (eV, f), common practice.
    let limits_ev = [11.26, 24.38, 47.89, 64.49, 392.1, 490.0];
    let core = |energy_ev, absorption_f| CoreTransition {
        energy_ev,
        absorption_f,
    };
    let cores = [
        vec![core(9.29, 0.13), core(13.7, 0.12)],
        vec![core(12.69, 0.76)],
        vec![core(8.0, 0.286), core(39.7, 0.20)],
        vec![core(307.9, 0.65)],
        vec![core(367.5, 0.416)],
        vec![],
    ];
    let dominant = |kelvin: f64| {
        let kt = kelvin / 11_604.518 * PER_CM_PER_EV;
        let rates: Vec<_> = (0..6)
            .map(|k| {
                let species = Species::new(6, k as u8 + 1);
                let limit = limits_ev[k] * PER_CM_PER_EV;
                let r = stage_rates(species, limit, &cores[k], kt).unwrap();
                assert!(!r.lacks_dielectronic && r.ratio_uncertainty_factor > 1.0);
                (r.ionisation_m3_per_s, r.recombination_m3_per_s)
            })
            .collect();
        let balance = coronal_balance(&rates).unwrap();
        let top = balance.iter().copied().fold(0.0, f64::max);
        1 + balance.iter().position(|&f| f == top).unwrap()
    };
    assert_eq!(dominant(5e3), 1);
    assert_eq!(dominant(3e4), 2);
    assert_eq!(dominant(7e4), 3);
    assert_eq!(dominant(4e5), 5);
    assert_eq!(dominant(3e6), 7);
}

proptest! {
    /// Fractions sum to 1 for any element, temperature and density.
    #[test]
    fn saha_fractions_sum_to_one(
        limits in prop::collection::vec(0.1..1e4_f64, 0..30),
        kt_ev in 1e-3..1e5_f64,
        log_density in 0.0..30.0_f64,
    ) {
        let mut stages: Vec<_> = limits
            .iter()
            .map(|ev| Stage { partition: 2.0, limit_per_cm: Some(ev * PER_CM_PER_EV) })
            .collect();
        stages.push(Stage { partition: 1.0, limit_per_cm: None });
        let kt = kt_per_cm_from_ev(kt_ev).unwrap();
        let fractions = ionisation_balance(&stages, kt, 10_f64.powf(log_density)).unwrap();
        prop_assert!((fractions.iter().sum::<f64>() - 1.0).abs() < 1e-12);
        prop_assert!(fractions.iter().all(|f| (0.0..=1.0).contains(f)));
    }

    /// A level more never lowers U, and a denser plasma never raises it.
    #[test]
    fn partition_functions_grow_with_levels_and_fall_with_density(
        levels in prop::collection::vec((0.0..9e4_f64, 1.0..20.0_f64), 1..40),
        kt in 1e3..1e5_f64,
        log_density in 18.0..24.0_f64,
    ) {
        let of = |count: usize, density| {
            let plasma = Plasma { kt_per_cm: kt, electron_density_per_m3: density };
            partition_function(levels[..count].iter().copied(), Some(1e5), 0, plasma).map(|u| u.value)
        };
        let all = of(levels.len(), None).unwrap();
        if levels.len() > 1 {
            prop_assert!(of(levels.len() - 1, None).unwrap() <= all);
        }
        if let Ok(dense) = of(levels.len(), Some(10_f64.powf(log_density))) {
            prop_assert!(dense <= all);
        }
    }
}
