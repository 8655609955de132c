//! The Coulomb approximation against independent mathematics: Whittaker functions, hydrogenic
//! integrals, sum rules, and what it refuses.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

use lineclear::calc::coulomb::{
    Active, CorePolarisation, CoulombError, LsState, Orbital, RateClass, RateModel, Species,
    effective_quantum_number, line_between, line_strength_factor, photon_number, radial_integral,
    rate, rate_per_s, strength_e2_a0_2,
};
use lineclear::calc::series::LabelledLevel;

fn table(text: &str) -> Vec<Vec<f64>> {
    text.lines()
        .skip(1)
        .map(|line| line.split(',').map(|cell| cell.parse().unwrap()).collect())
        .collect()
}

#[test]
fn orbitals_are_whittaker_functions() {
    // mpmath, by tests/reference/coulomb/whittaker.py.
    for row in table(include_str!("reference/coulomb/whittaker.csv")) {
        let (nu, l, rho, wanted) = (row[0], row[1] as u32, row[2], row[3]);
        let orbital = Orbital::new(nu, l).unwrap();
        let (at, p) = orbital.nearest(rho);
        assert!((at - rho).abs() < 1e-9, "{at} {rho}");
        let found = p * orbital.analytic_norm.sqrt();
        // Numerov's error: (kh)⁴/240 ≤ 3e-9 per radian, and more near the nucleus, where the barrier
        // term of the grid in √ρ grows as 1/x². The largest value of P is near 1/√ν.
        assert!(
            (found - wanted).abs() < 5e-6 / nu.sqrt(),
            "ν = {nu}, l = {l}, ρ = {rho}: {found} {wanted}"
        );
    }
}

fn integral(n: f64, l: u32, m: f64, k: u32) -> f64 {
    let (a, b) = (Orbital::new(n, l).unwrap(), Orbital::new(m, k).unwrap());
    radial_integral(1, &a, &b, None).value_a0
}

#[test]
fn whole_numbers_give_hydrogen() {
    // Quadrature of Laguerre polynomials with mpmath, by the same script.
    for row in table(include_str!("reference/coulomb/hydrogen.csv")) {
        let found = integral(row[0], row[1] as u32, row[2], row[3] as u32).abs();
        // Numerov's 1e-6 again.
        assert!(
            (found - row[4]).abs() < 1e-6 * row[4].max(1.0),
            "{row:?}: {found}"
        );
    }
    // 1s–2p is 2¹⁵ᐟ² 3⁻⁹ᐟ² ... : ⟨2p|r|1s⟩² = 2¹⁵/3⁹ (Bethe & Salpeter 1957, table 13).
    assert!((integral(2.0, 1, 1.0, 0).powi(2) - 32_768.0 / 19_683.0).abs() < 3e-6);
    // ⟨n l|r|n l−1⟩ = (3/2) n √(n² − l²) (Bethe & Salpeter 1957, equation 63.5).
    for (n, l) in [(5.0_f64, 2_u32), (20.0, 1), (40.0, 3), (80.0, 10)] {
        let exact = 1.5 * n * (n * n - f64::from(l * l)).sqrt();
        let found = integral(n, l, n, l - 1).abs();
        assert!(
            (found - exact).abs() < 2e-6 * exact,
            "{n} {l}: {found} {exact}"
        );
    }
}

#[test]
fn equal_energies_follow_the_closed_form_of_1949() {
    // Bates & Damgaard 1949: at equal ν the integral is (3/2) ν √(ν² − l²), their F with I = 1.
    for (nu, l) in [
        (2.4_f64, 1_u32),
        (3.3, 1),
        (3.7, 2),
        (6.45, 2),
        (9.8, 3),
        (25.25, 1),
    ] {
        let closed = 1.5 * nu * (nu * nu - f64::from(l * l)).sqrt();
        let found = integral(nu, l, nu, l - 1).abs();
        // The cut-off and the normalisation outside it: largest for the most penetrating orbital.
        let allowed = if nu - f64::from(l) < 2.0 { 0.03 } else { 0.01 };
        assert!(
            (found / closed - 1.0).abs() < allowed,
            "{nu} {l}: {found} {closed}"
        );
    }
}

#[test]
fn integrals_scale_with_the_charge_and_change_sign_smoothly() {
    let (a, b) = (Orbital::new(4.3, 1).unwrap(), Orbital::new(2.2, 0).unwrap());
    let one = radial_integral(1, &a, &b, None);
    let three = radial_integral(3, &a, &b, None);
    // r = ρ/Z exactly.
    assert!((one.value_a0 - 3.0 * three.value_a0).abs() < 1e-12 * one.magnitude_a0);
    assert!(one.cancellation() > 1.0 && one.core_part_a0 == 0.0);
    // An integral that passes zero between two ν has a large cancellation near there.
    let most = (0..100)
        .map(|step| {
            let p = Orbital::new(2.5 + 0.02 * f64::from(step), 1).unwrap();
            radial_integral(1, &p, &b, None).cancellation()
        })
        .fold(0.0, f64::max);
    assert!(most > 20.0, "{most}");
}

#[test]
fn polarisation_of_the_core_takes_from_the_integral() {
    let (a, b) = (
        Orbital::new(2.33, 1).unwrap(),
        Orbital::new(1.87, 0).unwrap(),
    );
    let plain = radial_integral(1, &a, &b, None);
    let screened = radial_integral(1, &a, &b, Some(CorePolarisation::new(15.8)));
    let taken = plain.value_a0.abs() - screened.value_a0.abs();
    assert!(taken > 0.0 && taken < 0.2 * plain.value_a0.abs(), "{taken}");
    assert!((screened.value_a0 + screened.core_part_a0 - plain.value_a0).abs() < 1e-12);
}

fn state(core: &str, l: u32, term: &str, twice_j: u16) -> LsState {
    LsState::from_labels(core, l, term, twice_j).unwrap()
}

#[test]
fn line_strengths_sum_to_the_orbital_strength() {
    // Σ over J, J′ and L′ of the factor is (2S+1)(2L+1) l_> / (2l+1): Cowan 1981, section 14-9.
    for (core, l, term, letters) in [
        ("2s2 2p (2Po)", 1_u32, "3D", ["3Po", "3Do", "3Fo"]),
        ("3p4 (3P)", 1, "4D", ["4Po", "4Do", "4Fo"]),
    ] {
        let spin: u16 = if term.starts_with('3') { 2 } else { 3 };
        let mut sum = 0.0;
        for j in [4_i32 - i32::from(spin), 4 + i32::from(spin)]
            .windows(2)
            .flat_map(|p| (p[0]..=p[1]).step_by(2))
        {
            let one = state(core, l, term, j as u16);
            for upper in letters {
                for twice_j in 0..12 {
                    if let Ok(two) = LsState::from_labels(core, l + 1, upper, twice_j) {
                        sum += line_strength_factor(&one, &two).unwrap_or(0.0);
                    }
                }
            }
        }
        let wanted = (f64::from(spin) + 1.0) * 5.0 * f64::from(l + 1) / f64::from(2 * l + 1);
        // Sums of exact 6j symbols in double precision.
        assert!(
            (sum - wanted).abs() < 1e-12 * wanted,
            "{core}: {sum} {wanted}"
        );
    }
}

#[test]
fn hydrogen_lyman_alpha_has_its_rate() {
    // A(2p–1s) = 6.2649e8 s⁻¹ (Bethe & Salpeter 1957, table 15; the digits from memory).
    let one = state("", 1, "2Po", 3);
    let two = state("", 0, "2S", 1);
    let active = |energy_per_cm, state, n: f64, l| Active {
        energy_per_cm,
        state,
        orbital: Orbital::new(n, l).unwrap(),
        occupancy: 1,
    };
    let upper = active(82_259.3, one, 2.0, 1);
    let lower = active(0.0, two, 1.0, 0);
    let found = rate(
        1,
        &upper,
        &lower,
        None,
        RateModel::of_class(RateClass::Rigid),
    )
    .unwrap();
    // Reduced mass left out of the orbitals: 5e-4 twice over.
    assert!((found.per_s / 6.2649e8 - 1.0).abs() < 1.5e-3, "{found:?}");
    assert!(!found.cancels && found.relative_uncertainty < 0.03);
    let strength = strength_e2_a0_2(82_259.3, found.per_s, 4.0);
    assert!((rate_per_s(82_259.3, strength, 4.0) / found.per_s - 1.0).abs() < 1e-14);
    assert!(
        rate(
            1,
            &lower,
            &upper,
            None,
            RateModel::of_class(RateClass::Rigid)
        )
        .is_err()
    );
}

fn level<'a>(
    energy_per_cm: f64,
    configuration: &'a str,
    term: &'a str,
    twice_j: u16,
) -> LabelledLevel<'a> {
    LabelledLevel {
        energy_per_cm,
        uncertainty_per_cm: 0.01,
        configuration,
        term,
        twice_j,
    }
}

#[test]
fn what_the_approximation_refuses() {
    let magnesium = Species {
        element: "Mg",
        core_charge: 1,
        rydberg_per_cm: 109_734.8,
        limit_per_cm: 61_671.05,
        limit_sigma_per_cm: 0.1,
    };
    let ground = level(0.0, "3s2", "1S", 0);
    let singlet = level(35_051.264, "3s 3p", "1Po", 2);
    let triplet = level(21_870.464, "3s 3p", "3Po", 2);
    let refused = |upper: &LabelledLevel<'_>, lower: &LabelledLevel<'_>| {
        line_between(upper, lower, &magnesium).unwrap_err()
    };
    assert!(line_between(&singlet, &ground, &magnesium).is_ok());
    assert!(
        matches!(refused(&triplet, &ground), CoulombError::Forbidden { rule } if rule.contains("spin"))
    );
    assert!(matches!(
        refused(&singlet, &singlet),
        CoulombError::Forbidden { .. }
    ));
    let double = level(57_833.4, "3p2", "3P", 2);
    assert!(matches!(
        refused(&double, &triplet),
        CoulombError::Equivalent { occupancy: 2, .. }
    ));
    let other = level(50_000.0, "3p 3d", "1Po", 2);
    assert!(matches!(
        refused(&other, &singlet),
        CoulombError::Forbidden { .. }
            | CoulombError::CoreChanges { .. }
            | CoulombError::Label { .. }
    ));
    let above = level(70_000.0, "3s 9d", "1D", 4);
    assert!(matches!(
        refused(&above, &singlet),
        CoulombError::NotBound { .. }
    ));
    let pair = level(46_000.0, "3s 3d", "2[3/2]", 4);
    assert!(matches!(
        refused(&pair, &singlet),
        CoulombError::Label { .. }
    ));
    let deep = level(30_000.0, "3s 3d", "1D", 4);
    let lower = level(21_870.464, "3s 3p", "1Po", 2);
    assert!(matches!(
        refused(&deep, &lower),
        CoulombError::InsideCore { .. } | CoulombError::EffectiveNumber { .. }
    ));
    assert!(matches!(
        RateClass::of_jump("3d6 (5D)", 1, 0),
        Err(CoulombError::OpenCore { .. })
    ));
    for nu in [f64::NAN, -1.0, 1.0, 500.0] {
        assert!(Orbital::new(nu, 1).is_err(), "{nu}");
    }
    assert!(effective_quantum_number(1, 109_734.8, 100.0, f64::NAN).is_err());
    assert_eq!(
        photon_number(100.0, 0.0),
        Err(CoulombError::Temperature { kelvin: 0.0 })
    );
    assert!(photon_number(100.0, f64::NAN).is_err());
}
