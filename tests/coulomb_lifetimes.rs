//! Lifetimes, black-body lifetimes and polarisabilities of the alkalis against the literature.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

mod series_support;

use lineclear::calc::coulomb::{
    ComputedLine, Coupling, Species, Transition, black_body_lifetime, lifetime, photon_number,
    polarisability_scale_a0_3, predict_lines, predict_series, scalar_polarisability_a0_3,
    strength_e2_a0_2,
};
use lineclear::calc::series::LabelledLevel;
use lineclear::vocabulary::light::constants::{ELECTRON_MASS_U, FINE_STRUCTURE, RYDBERG_PER_CM};
use series_support::{Row, data, labelled, limits, masses, rows};

fn species(element: &'static str) -> Species<'static> {
    let (limit_per_cm, sigma) = limits()[&(element.to_owned(), 1)];
    Species {
        element,
        core_charge: 1,
        rydberg_per_cm: RYDBERG_PER_CM / (1.0 + ELECTRON_MASS_U / masses()[element]),
        limit_per_cm,
        limit_sigma_per_cm: sigma.hypot(0.05),
    }
}

fn held(element: &str) -> Vec<Row> {
    let folder = format!("curated-{}-i", element.to_lowercase());
    rows(&data().join(folder).join("levels.csv"))
}

/// Lines of a level downwards and upwards.
fn transitions(
    levels: &[LabelledLevel<'_>],
    lines: &[ComputedLine],
    at: usize,
) -> (Vec<Transition>, Vec<Transition>) {
    let weight = |index: usize| f64::from(levels[index].twice_j) + 1.0;
    let of = |line: &ComputedLine, other: usize| Transition {
        wavenumber_per_cm: line.rate.wavenumber_per_cm,
        rate_per_s: line.rate.per_s,
        relative_uncertainty: line.rate.relative_uncertainty,
        weight_ratio: weight(other) / weight(at),
    };
    let down = lines
        .iter()
        .filter(|l| l.upper == at)
        .map(|l| of(l, l.lower))
        .collect();
    let up = lines
        .iter()
        .filter(|l| l.lower == at)
        .map(|l| of(l, l.upper))
        .collect();
    (down, up)
}

fn find(levels: &[LabelledLevel<'_>], shell: &str, twice_j: u16) -> usize {
    levels
        .iter()
        .position(|l| l.configuration.ends_with(shell) && l.twice_j == twice_j)
        .unwrap_or_else(|| panic!("{shell} {twice_j}/2"))
}

/// Measured lifetimes, ns, from memory: Li: McAlexander, Abraham & Hulet 1996, Phys. Rev. A 54, R5. Na: Volz, Majerus,
/// Liebel, Schmitt & Schmoranzer 1996, Phys. Rev. Lett. 76, 2862. K: Wang et al. 1997, Phys. Rev. A 55, R1569. Rb: Volz & Schmoranzer 1996, Phys. Scr. T65, 48. Cs: Young et
/// al. 1994, Phys. Rev. A 50, 2174 and Rafac, Tanner, Livingston & Berry 1999, Phys. Rev. A 60, 3648.
const LIFETIMES: [(&str, &str, u16, f64); 10] = [
    ("Li", " 2p", 1, 27.10),
    ("Li", " 2p", 3, 27.10),
    ("Na", " 3p", 1, 16.30),
    ("Na", " 3p", 3, 16.25),
    ("K", " 4p", 1, 26.69),
    ("K", " 4p", 3, 26.34),
    ("Rb", " 5p", 1, 27.70),
    ("Rb", " 5p", 3, 26.24),
    ("Cs", " 6p", 1, 34.88),
    ("Cs", " 6p", 3, 30.46),
];

#[test]
fn resonance_lifetimes_agree_within_their_uncertainty() {
    let mut inside = 0;
    for (element, shell, twice_j, nanoseconds) in LIFETIMES {
        let rows = held(element);
        let levels = labelled(&rows);
        let lines = predict_lines(&levels, &species(element));
        let (down, _) = transitions(&levels, &lines, find(&levels, shell, twice_j));
        let found = lifetime(&down);
        let ratio = found.seconds * 1e9 / nanoseconds;
        let pull = ratio.ln() / found.relative_uncertainty;
        println!(
            "{element}{shell} {twice_j}/2: {:.2} ns ± {:.1} %, published {nanoseconds} ({pull:+.1} σ)",
            found.seconds * 1e9,
            100.0 * found.relative_uncertainty
        );
        assert!(pull.abs() < 2.0, "{element}{shell}: {pull}");
        // The worst, caesium, is computed to a ninth.
        assert!(found.relative_uncertainty < 0.12, "{element}{shell}");
        inside += usize::from(pull.abs() < 1.0);
    }
    println!("{inside} of 10 within 1 σ");
}

/// Static polarisabilities of the ground levels, a₀³, from memory: Li, Na, K, Rb, Cs as recommended by Schwerdtfeger &
/// Nagle 2019, Mol. Phys. 117, 1200; what the core adds: Johnson, Kolb & Huang 1983 (see `series::polarisation`).
const POLARISABILITIES: [(&str, &str, f64, f64); 5] = [
    ("Li", " 2s", 164.1, 0.19),
    ("Na", " 3s", 162.7, 0.95),
    ("K", " 4s", 289.7, 5.46),
    ("Rb", " 5s", 319.8, 9.08),
    ("Cs", " 6s", 400.9, 15.81),
];

#[test]
fn ground_level_polarisabilities_follow_from_the_lines() {
    for (element, shell, published, core) in POLARISABILITIES {
        let rows = held(element);
        let levels = labelled(&rows);
        let lines = predict_lines(&levels, &species(element));
        let at = find(&levels, shell, 1);
        let couplings: Vec<Coupling> = lines
            .iter()
            .filter(|line| line.lower == at)
            .map(|line| Coupling {
                strength_e2_a0_2: strength_e2_a0_2(
                    line.rate.wavenumber_per_cm,
                    line.rate.per_s,
                    f64::from(levels[line.upper].twice_j) + 1.0,
                ),
                above_per_cm: line.rate.wavenumber_per_cm,
            })
            .collect();
        let found = scalar_polarisability_a0_3(2.0, &couplings) + core;
        println!("{element}: {found:.1} a₀³, published {published}");
        // 97 % and more of it is the resonance doublet, whose rates miss by up to 13 % (caesium).
        assert!(
            (found / published - 1.0).abs() < 0.13,
            "{element}: {found} {published}"
        );
    }
}

#[test]
fn rydberg_levels_of_rubidium_live_as_long_as_published() {
    let element = species("Rb");
    let rows = held("Rb");
    let held = labelled(&rows);
    let made: Vec<_> = predict_series(&held, &element, 40)
        .into_iter()
        .flat_map(|s| s.levels)
        .collect();
    let mut levels = held.clone();
    levels.extend(made.iter().filter(|m| m.l < 4).map(|m| m.labelled()));
    let lines = predict_lines(&levels, &element);
    // Beterov, Ryabtsev, Tretyakov & Entin 2009, Phys. Rev. A 79, 052504, table II, from memory:
    // τ(0 K) = τ′ ν^γ with τ′ = 1.368 ns, γ = 3.0008 (S½), 2.5341 ns, 3.0019 (P3/2), 1.0687 ns, 2.9897 (D5/2).
    for (shell, twice_j, defect, scale, power) in [
        (" 30s", 1, 3.1313, 1.368, 3.0008),
        (" 30p", 3, 2.6419, 2.5341, 3.0019),
        (" 30d", 5, 1.3456, 1.0687, 2.9897),
    ] {
        let at = find(&levels, shell, twice_j);
        let (down, up) = transitions(&levels, &lines, at);
        let nu: f64 = 30.0 - defect;
        let cold = lifetime(&down);
        let published = scale * nu.powf(power);
        let warm = black_body_lifetime(&down, &up, 300.0).unwrap();
        // The black body's part at high n: (4/3) α³ kT/ν² in atomic units
        // (Gallagher & Cooke 1979, Phys. Rev. Lett. 42, 835).
        let thermal = 300.0 * 0.695_035 / (2.0 * RYDBERG_PER_CM);
        let black_body = 4.0 / 3.0 * FINE_STRUCTURE.powi(3) * thermal / (nu * nu) / 2.418_884e-17;
        let found = 1.0 / warm.seconds - 1.0 / cold.seconds;
        println!(
            "{shell}: {:.0} ns ± {:.0} % cold (published {published:.0}), {:.0} ns at 300 K, black body {found:.0} against {black_body:.0} /s",
            cold.seconds * 1e9,
            100.0 * cold.relative_uncertainty,
            warm.seconds * 1e9
        );
        // A published fit to calculations that themselves differ by 5 to 10 %; P decays through integrals that cancel.
        let allowed = if shell.ends_with('p') { 0.5 } else { 0.12 };
        assert!(
            (cold.seconds * 1e9 / published).ln().abs() < allowed,
            "{shell}: {cold:?} {published}"
        );
        // The closed form takes hcσ ≪ kT for all that counts and every level: at n = 30, with
        // neighbours up to n = 40, the sum stays below it.
        assert!(
            (0.65..1.05).contains(&(found / black_body)),
            "{shell}: {found} {black_body}"
        );
        assert!(warm.seconds < cold.seconds);
    }
}

#[test]
fn the_black_body_has_its_limits() {
    // Rayleigh–Jeans: n̄ → kT/hcσ − ½; Wien: e^(−hcσ/kT) (Planck's law; kT = 208.51 cm⁻¹ at 300 K).
    let kt: f64 = 300.0 * 0.695_034_8;
    assert!((photon_number(0.01, 300.0).unwrap() - (kt / 0.01 - 0.5)).abs() < 0.1);
    let wien = photon_number(20.0 * kt, 300.0).unwrap();
    assert!((wien / (-20.0_f64).exp() - 1.0).abs() < 1e-4, "{wien}");
    let still = lifetime(&[]);
    assert!(still.seconds.is_infinite() && still.relative_uncertainty == 0.0);
    assert!(
        (polarisability_scale_a0_3(20.0, 1) / polarisability_scale_a0_3(10.0, 1) - 128.0).abs()
            < 1e-9
    );
}

#[test]
fn predicted_levels_and_lines_do_not_depend_on_the_order_of_the_levels() {
    let element = species("Na");
    let rows = held("Na");
    let levels = labelled(&rows);
    let mut turned = levels.clone();
    turned.reverse();
    assert_eq!(
        predict_series(&levels, &element, 20),
        predict_series(&turned, &element, 20)
    );
    let sum = |levels: &[LabelledLevel<'_>]| -> (usize, f64) {
        let lines = predict_lines(levels, &element);
        (lines.len(), lines.iter().map(|line| line.rate.per_s).sum())
    };
    let ((count, total), (count_turned, total_turned)) = (sum(&levels), sum(&turned));
    assert_eq!(count, count_turned);
    // Sums in another order: rounding only.
    assert!((total / total_turned - 1.0).abs() < 1e-12);
    for series in predict_series(&levels, &element, 20) {
        for made in &series.levels {
            assert!(made.prediction.uncertainty_per_cm > 0.0, "{made:?}");
            let shell = made.configuration.split(' ').next_back().unwrap();
            let held = levels.iter().any(|l| {
                l.configuration.ends_with(&format!(" {shell}"))
                    && l.twice_j == made.twice_j
                    && l.term == made.term
            });
            assert!(!held, "{made:?} is held");
        }
    }
}
