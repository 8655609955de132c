//! One-electron radial integrals, rates and sums against exact arithmetic, published values and each other.

#![allow(clippy::unwrap_used, reason = "in a test a panic is the report")]

use std::f64::consts::PI;

use lineclear::calc::angular::multiplet_share;
use lineclear::calc::one_electron::{
    ContinuumPair, Nucleus, OneElectronError, ShellPair, component_rate, decay_rate, lifetime_s,
    lines, mean_square_radius, orbital_rate, oscillator_strength, radial_integral,
    rate_relative_uncertainty, shell_oscillator_strength, shell_rate, two_photon_rate,
};
use vocabulary::atom::HalfInteger;
use vocabulary::light::constants::{BOHR_RADIUS_M, FINE_STRUCTURE};

fn half(twice: u32) -> HalfInteger {
    HalfInteger::from_twice(u16::try_from(twice).unwrap())
}

/// Against exact rational arithmetic (`radial_integrals.py`): n up to 100, at random and at the corners. Goal 1e-10.
#[test]
fn radial_integrals_match_exact_arithmetic() {
    let table = include_str!("reference/one_electron/radial_integrals.csv");
    let (mut rows, mut worst) = (0, 0.0_f64);
    for row in table.lines().skip(1) {
        let cells: Vec<f64> = row.split(',').map(|c| c.parse().unwrap()).collect();
        let [n, l, m, k] = [0, 1, 2, 3].map(|i| cells[i] as u32);
        let error = (radial_integral(n, l, m, k).unwrap() / cells[4] - 1.0).abs();
        assert!(error < 1e-12, "{row}: {error:e}");
        worst = worst.max(error);
        rows += 1;
    }
    assert_eq!(rows, 489);
    println!("radial integrals: {rows} rows, largest relative error {worst:.1e}");
}

/// The order of the arguments does not matter; Δl other than 1 gives 0; inside a shell (3/2) n √(n² − l²).
#[test]
fn radial_integrals_are_symmetric() {
    assert_eq!(
        radial_integral(7, 3, 4, 2).unwrap(),
        radial_integral(4, 2, 7, 3).unwrap()
    );
    assert_eq!(radial_integral(7, 3, 4, 3).unwrap(), 0.0);
    assert_eq!(radial_integral(2, 0, 2, 1).unwrap(), 3.0 * 3.0_f64.sqrt());
    assert!(matches!(
        radial_integral(4, 4, 3, 3),
        Err(OneElectronError::OrbitalNumber { n: 4, l: 4 })
    ));
    assert!(matches!(
        ShellPair::new(401, 3),
        Err(OneElectronError::PrincipalNumber { n: 401, .. })
    ));
    assert!(ShellPair::new(3, 3).is_err() && ShellPair::new(3, 0).is_err());
}

/// Mean rates of hydrogen, s⁻¹ (Bethe & Salpeter 1957, table 15, and every later table; from memory), to all printed
/// digits: half a unit of the last.
#[test]
fn mean_rates_match_published_tables() {
    let published = [
        (2, 1, 4.699e8, 5e4),
        (3, 1, 5.575e7, 5e3),
        (4, 1, 1.278e7, 1e4),
        (5, 1, 4.125e6, 1e3),
        (3, 2, 4.410e7, 5e3),
        (4, 2, 8.419e6, 5e2),
        (5, 2, 2.530e6, 5e2),
        (6, 2, 9.732e5, 5e1),
        (4, 3, 8.986e6, 5e2),
        (5, 3, 2.201e6, 5e2),
        (6, 3, 7.783e5, 5e1),
        (5, 4, 2.699e6, 5e2),
        (6, 5, 1.025e6, 5e2),
    ];
    for (upper, lower, rate, digit) in published {
        let ours = shell_rate(&Nucleus::PROTON, upper, lower).unwrap();
        assert!(
            (ours - rate).abs() <= digit,
            "{upper} → {lower}: {ours:e} against {rate:e}"
        );
    }
}

/// Mean oscillator strengths (Menzel & Pekeris 1935; from memory).
#[test]
fn mean_oscillator_strengths_match_published_tables() {
    let published = [
        (1, 2, 0.4162),
        (1, 3, 0.0791),
        (1, 4, 0.0290),
        (2, 3, 0.6407),
        (2, 4, 0.1193),
        (2, 5, 0.0447),
        (3, 4, 0.8421),
        (3, 5, 0.1506),
        (4, 5, 1.038),
    ];
    for (lower, upper, f) in published {
        let ours = shell_oscillator_strength(lower, upper).unwrap();
        let digit = if f > 1.0 { 5e-4 } else { 5.1e-5 };
        assert!((ours - f).abs() <= digit, "{lower} → {upper}: {ours}");
    }
}

/// Lifetimes, ns: 2p 1.596, 3s 158.3 (158.4), 3p 5.27, 3d 15.47, 4s 226.5, 4p 12.3, 4d 36.2 (from 2.06e7 + 7.04e6 s⁻¹), 4f 72.5 (Bethe & Salpeter 1957, section 67;
/// from memory: their 2p 1.6, 3s 160, 3p 5.4, 3d 15.6; better values common practice).
#[test]
fn lifetimes_match_published_values() {
    let published = [
        (2, 1, 1.596, 5e-4),
        (3, 0, 158.3, 0.15),
        (3, 1, 5.27, 0.01),
        (3, 2, 15.47, 0.01),
        (4, 0, 226.5, 0.5),
        (4, 1, 12.3, 0.05),
        (4, 2, 36.2, 0.1),
        (4, 3, 72.5, 0.1),
    ];
    for (n, l, lifetime, digit) in published {
        let ours = lifetime_s(&Nucleus::PROTON, n, l).unwrap().unwrap() * 1e9;
        assert!((ours - lifetime).abs() <= digit, "{n} {l}: {ours} ns");
    }
    assert_eq!(lifetime_s(&Nucleus::PROTON, 1, 0).unwrap(), None);
    assert!(lifetime_s(&Nucleus::PROTON, 2, 2).is_err());
}

/// 2s: 8.229 s⁻¹ · Z⁶ by two photons; lifetime of H 2s 0.1215 s (common practice), of He⁺ 2s 1.922(82) ms measured (Prior 1972; from memory), of
/// Ar¹⁷⁺ 2s 3.54(25) ns (Marrus & Schmieder 1972; from memory), where the magnetic dipole takes 3 %.
#[test]
fn lifetime_of_the_metastable_level() {
    let lifetime = |nucleus: &Nucleus| lifetime_s(nucleus, 2, 0).unwrap().unwrap();
    assert!((two_photon_rate(&Nucleus::PROTON) - 8.229).abs() < 0.006);
    assert!((lifetime(&Nucleus::PROTON) - 0.1215).abs() < 2e-4);
    assert!((lifetime(&Nucleus::ALPHA) - 1.922e-3).abs() < 0.082e-3);
    let argon = Nucleus::from_atomic_mass(18, 39.962_383_1, 1e-6).unwrap();
    assert!((lifetime(&argon) - 3.54e-9).abs() < 0.25e-9);
    let magnetic = 1.0 - two_photon_rate(&argon) * lifetime(&argon);
    assert!((0.02..0.05).contains(&magnetic), "{magnetic}");
}

/// Rates of one ion scale as Z⁴ with the reduced mass and the dipole charge.
#[test]
fn rates_scale_with_charge_and_mass() {
    let (h, he) = (Nucleus::PROTON, Nucleus::ALPHA);
    let ratio = shell_rate(&he, 4, 3).unwrap() / shell_rate(&h, 4, 3).unwrap();
    let expected = 16.0 * he.reduced_mass() / h.reduced_mass() * he.dipole_charge().powi(2);
    assert!((ratio / expected - 1.0).abs() < 1e-14);
    assert_eq!(h.dipole_charge(), 1.0);
}

/// Components add up to the orbital rate whatever j, and share it by the 6j symbol (the general one, computed
/// another way).
#[test]
fn components_follow_the_six_j_symbol() {
    let spin = half(1);
    for (upper_l, lower_l) in [(1, 0), (0, 1), (2, 1), (1, 2), (7, 6), (6, 7)] {
        let (n, m) = (12, 9);
        let whole = orbital_rate(&Nucleus::PROTON, (n, upper_l), (m, lower_l)).unwrap();
        for j in [2 * upper_l + 1, (2 * upper_l).wrapping_sub(1)] {
            if j > 100 {
                continue;
            }
            let mut sum = 0.0;
            for k in [2 * lower_l + 1, (2 * lower_l).wrapping_sub(1)] {
                if k > 100 {
                    continue;
                }
                let rate = component_rate(
                    &Nucleus::PROTON,
                    (n, upper_l, half(j)),
                    (m, lower_l, half(k)),
                )
                .unwrap();
                let share = multiplet_share(
                    spin,
                    (half(2 * lower_l), half(k)),
                    (half(2 * upper_l), half(j)),
                );
                // S(j, k)/S over the upper level's weight, against an even spread over the upper multiplet.
                let expected = whole * share * 2.0 * f64::from(2 * upper_l + 1) / f64::from(j + 1);
                assert!(
                    (rate - expected).abs() <= 1e-13 * whole,
                    "{upper_l} {j} → {lower_l} {k}"
                );
                sum += rate;
            }
            assert!(
                (sum / whole - 1.0).abs() < 1e-14,
                "{upper_l} {j} → {lower_l}: {sum} {whole}"
            );
        }
    }
}

/// Every line's rate is that of the single-component function, and the decay of each level adds up.
#[test]
fn lines_hold_the_same_rates_as_single_questions() {
    let n_max = 8;
    let nucleus = Nucleus::ALPHA;
    let levels = lineclear::calc::one_electron::levels(&nucleus, n_max).unwrap();
    let lines = lines(&nucleus, n_max).unwrap();
    let mut decay = vec![0.0; levels.len()];
    for line in &lines {
        let (upper, lower) = (&levels[line.upper], &levels[line.lower]);
        let single = component_rate(
            &nucleus,
            (upper.n, upper.l, upper.j),
            (lower.n, lower.l, lower.j),
        )
        .unwrap();
        assert!(single > 0.0 && (line.rate_per_s / single - 1.0).abs() < 1e-14);
        assert!(line.wavenumber_per_cm > 0.0);
        decay[line.upper] += line.rate_per_s;
    }
    for (level, sum) in levels.iter().zip(decay) {
        if (level.n, level.l) == (1, 0) || (level.n, level.l) == (2, 0) {
            continue;
        }
        let whole = decay_rate(&nucleus, level.n, level.l).unwrap();
        assert!(
            (sum / whole - 1.0).abs() < 1e-13,
            "{} {}",
            level.configuration(),
            level.j
        );
    }
}

/// The number of dipole components between two shells: counted by hand from Δl, Δj. To n = 20: about 7000.
#[test]
fn no_component_is_missing() {
    let levels = lineclear::calc::one_electron::levels(&Nucleus::PROTON, 20).unwrap();
    let mut allowed = 0;
    for upper in &levels {
        for lower in &levels {
            let dipole =
                upper.l.abs_diff(lower.l) == 1 && upper.j.twice().abs_diff(lower.j.twice()) <= 2;
            allowed += usize::from(upper.n > lower.n && dipole);
        }
    }
    let lines = lines(&Nucleus::PROTON, 20).unwrap();
    assert_eq!(lines.len(), allowed);
    let mut pairs: Vec<_> = lines.iter().map(|l| (l.upper, l.lower)).collect();
    pairs.sort_unstable();
    pairs.dedup();
    assert_eq!(pairs.len(), allowed, "each once");
}

/// ∫ over the continuum of `value(k)` per hartree, with k = t/(1 − t): Gauss–Legendre of 8 points in 400 panels.
fn over_continuum(value: impl Fn(f64) -> f64) -> f64 {
    const NODES: [(f64, f64); 4] = [
        (0.183_434_642_495_649_8, 0.362_683_783_378_362),
        (0.525_532_409_916_329, 0.313_706_645_877_887_3),
        (0.796_666_477_413_626_7, 0.222_381_034_453_374_5),
        (0.960_289_856_497_536_3, 0.101_228_536_290_376_3),
    ];
    let panels = 400;
    let width = 1.0 / f64::from(panels);
    let mut sum = 0.0;
    for panel in 0..panels {
        let middle = (f64::from(panel) + 0.5) * width;
        for (node, weight) in NODES {
            for t in [middle - 0.5 * width * node, middle + 0.5 * width * node] {
                let k = t / (1.0 - t);
                sum += 0.5 * width * weight * value(k) * k / (1.0 - t).powi(2);
            }
        }
    }
    sum
}

/// Σ over n > `lower` … ∞ of `value(n)`: term by term to 400, then the tail of c/n³ + d/n⁵ + e/n⁷ through n = 100, 200, 400.
fn over_series(lower: u32, value: impl Fn(u32) -> f64) -> f64 {
    let sum: f64 = (lower + 1..=400).map(&value).sum();
    let [a, b, c] = [100.0_f64, 200.0, 400.0].map(|n| value(n as u32) * n.powi(3));
    // Richardson in 1/n²: unknowns at n = 400.
    let (x, y, z) = (1e-4, 2.5e-5, 6.25e-6);
    let second = ((a - b) / (x - y) - (b - c) / (y - z)) / (x - z);
    let first = (b - c) / (y - z) - second * (y + z);
    let zero = c - first * z - second * z * z;
    // Σ_{n>N} n^-s = N^(1-s)/(s-1) − N^-s/2 + s N^(-s-1)/12 (Euler–Maclaurin).
    let tail = |s: f64| {
        let n = 400.0_f64;
        n.powf(1.0 - s) / (s - 1.0) - n.powf(-s) / 2.0 + s * n.powf(-s - 1.0) / 12.0
    };
    sum + zero * tail(3.0) + first * tail(5.0) + second * tail(7.0)
}

/// Sum over all final states of |⟨f|r|n l⟩|² ΔE^power for one channel l → l′: below, inside, above, continuum.
fn channel_sum(n: u32, l: u32, to: u32, power: i32) -> f64 {
    let energy = |m: u32| 0.5 / f64::from(n * n) - 0.5 / f64::from(m * m);
    let term = |m: u32| {
        if to >= m {
            return 0.0;
        }
        radial_integral(m, to, n, l).unwrap().powi(2) * energy(m).powi(power)
    };
    let below: f64 = (1..=n).map(term).sum();
    let above = over_series(n, term);
    let free = over_continuum(|k| {
        let threshold = 0.5 / f64::from(n * n);
        let pair = ContinuumPair::new(n, k).unwrap();
        pair.integral(to, l).powi(2) * (threshold + 0.5 * k * k).powi(power)
    });
    below + above + free
}

const SUM_STATES: [(u32, u32); 9] = [
    (1, 0),
    (2, 0),
    (2, 1),
    (3, 0),
    (3, 1),
    (3, 2),
    (5, 2),
    (8, 7),
    (10, 1),
];

/// Σ |⟨r⟩|² over everything = ⟨r²⟩ in each channel, to 1e-8.
#[test]
fn dipole_lengths_sum_to_the_mean_square_radius() {
    for (n, l) in SUM_STATES {
        for to in [l.wrapping_sub(1), l + 1]
            .into_iter()
            .filter(|to| *to < 100)
        {
            let ratio = channel_sum(n, l, to, 0) / mean_square_radius(n, l);
            assert!((ratio - 1.0).abs() < 1e-8, "{n} {l} → {to}: {ratio}");
        }
    }
}

/// Thomas–Reiche–Kuhn: Σ f = 1, and the partial sums (l+1)(2l+3)/(3(2l+1)) and −l(2l−1)/(3(2l+1)) (Wigner 1931; Kirkwood 1932;
/// Bethe & Salpeter 1957, section 61), to 1e-8.
#[test]
fn oscillator_strengths_obey_the_sum_rules() {
    for (n, l) in SUM_STATES {
        let lf = f64::from(l);
        let weight = 2.0 * lf + 1.0;
        let f = |to: u32| 2.0 / 3.0 * f64::from(l.max(to)) / weight * channel_sum(n, l, to, 1);
        let up = f(l + 1);
        let expected = (lf + 1.0) * (2.0 * lf + 3.0) / (3.0 * weight);
        assert!((up - expected).abs() < 1e-8, "{n} {l} up: {up} {expected}");
        let down = if l == 0 { 0.0 } else { f(l - 1) };
        let expected = -lf * (2.0 * lf - 1.0) / (3.0 * weight);
        assert!(
            (down - expected).abs() < 1e-8,
            "{n} {l} down: {down} {expected}"
        );
        assert!((up + down - 1.0).abs() < 1e-8, "{n} {l}: {}", up + down);
    }
}

/// From 1s, the discrete lines hold 0.5650 and the continuum 0.4350 of the strength; from 2s 0.6489 and 0.3511 (Bethe & Salpeter 1957, table 14;
/// from memory). Photoionisation of 1s at threshold: 6.304e-18 cm² (common practice).
#[test]
fn strength_is_divided_between_lines_and_continuum_as_published() {
    for (n, lines) in [(1, 0.5650), (2, 0.6489)] {
        let sum = over_series(n, |m| oscillator_strength((n, 0), (m, 1)).unwrap());
        assert!((sum - lines).abs() < 6e-5, "{n}s: {sum}");
    }
    let integral = ContinuumPair::new(1, 1e-6).unwrap().integral(1, 0);
    let per_hartree = 2.0 / 3.0 * 0.5 * integral * integral;
    let area_cm2 = 2.0 * PI * PI * FINE_STRUCTURE * (BOHR_RADIUS_M * 100.0).powi(2) * per_hartree;
    assert!((area_cm2 / 6.304e-18 - 1.0).abs() < 1e-4, "{area_cm2:e}");
}

/// f and A of one line agree: A = 2 α³ ΔE² f g′/g in atomic units, so f(1s–2p) = 0.4162 and A(2p–1s) = 6.2649e8 s⁻¹ with fixed nucleus.
#[test]
fn oscillator_strength_and_rate_agree() {
    let heavy = Nucleus::new(1, 1e12, 0.0).unwrap();
    let f = oscillator_strength((1, 0), (2, 1)).unwrap();
    assert!((f - 2_f64.powi(13) / 3_f64.powi(9)).abs() < 1e-15, "2¹³/3⁹");
    let back = oscillator_strength((2, 1), (1, 0)).unwrap();
    assert!((back + f / 3.0).abs() < 1e-15);
    let atomic_per_s = 4.134_137_333_518e16;
    let rate = 2.0 * FINE_STRUCTURE.powi(3) * 0.375_f64.powi(2) * f / 3.0 * atomic_per_s;
    let ours = orbital_rate(&heavy, (2, 1), (1, 0)).unwrap();
    assert!((ours / rate - 1.0).abs() < 1e-11, "{ours:e} {rate:e}");
    assert!((ours - 6.268e8).abs() < 5e5, "{ours:e}");
}

/// The stated 1 σ against rates of Dirac wave functions with retardation (`relativistic_rates.py`) for Z = 1 … 26: at least 68 % of the
/// components within 1 σ, 95 % within 2 σ (normal expectation), none beyond 3 σ.
#[test]
fn stated_uncertainty_covers_the_relativistic_rates() {
    let table = include_str!("reference/one_electron/relativistic_rates.csv");
    let mut pulls = Vec::new();
    for row in table.lines().skip(1) {
        let cells: Vec<f64> = row.split(',').map(|c| c.parse().unwrap()).collect();
        let charge = cells[0] as u8;
        let nucleus = Nucleus::new(charge, 4000.0 * cells[0], 0.0).unwrap();
        pulls.push((cells[5] - 1.0).abs() / rate_relative_uncertainty(&nucleus));
    }
    assert_eq!(pulls.len(), 165);
    let within =
        |limit: f64| pulls.iter().filter(|p| **p <= limit).count() as f64 / pulls.len() as f64;
    println!(
        "rates within 1 σ: {:.3}, 2 σ: {:.3}, 3 σ: {:.3}",
        within(1.0),
        within(2.0),
        within(3.0)
    );
    assert!(within(1.0) >= 0.68 && within(2.0) >= 0.95 && within(3.0) >= 1.0);
}
