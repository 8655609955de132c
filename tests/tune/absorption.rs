// What a cell absorbs, with the laser's linewidth and with hyperfine structure.

use lineclear::advise::tune::strength::{Dipole, strongest_point};
use proptest::prelude::*;

use super::common::{json, run};
use super::{close, number, transitions};

fn dipole(vacuum_nm: f64) -> Dipole {
    Dipole { vacuum_nm, rate_per_s: 3.8e7, lower_weight: 2.0, upper_weight: 4.0 }
}

/// Half width at half maximum of a Lorentzian, density at a distance.
fn lorentzian(distance: f64, half_width: f64) -> f64 {
    half_width / (std::f64::consts::PI * (distance.powi(2) + half_width.powi(2)))
}

proptest! {
    /// One component is the line itself; two that lie far apart do not help each other; two at one
    /// place add up.
    #[test]
    fn components_stand_apart_or_add_up(nm in 300.0..1100.0, t in 100.0..1000.0, m in 5.0..200.0, share in 0.5..0.95) {
        let line = dipole(nm);
        let whole = line.doppler_cross_section_cm2(t, m, 6e6).unwrap();
        let at = |components: &[(f64, f64)]| strongest_point(&line, components, t, m, 6e6).unwrap().unwrap();
        prop_assert!((at(&[(1.0, 0.0)]).0 / whole - 1.0).abs() < 1e-12);
        prop_assert!((at(&[(share, 12.0), (1.0 - share, 12.0)]).0 / whole - 1.0).abs() < 1e-12);
        // 1 THz apart the wing of the other is below 1e-5.
        let apart = at(&[(share, -5e5), (1.0 - share, 5e5)]);
        prop_assert!((apart.0 / (share * whole) - 1.0).abs() < 1e-4, "{apart:?}");
        prop_assert_eq!(apart.1, -5e5);
        prop_assert!(strongest_point(&line, &[], t, m, 6e6).unwrap().is_none());
    }
}

/// A linewidth that adds to the natural width is the same as the line folded with the laser's own
/// Lorentzian, point by point.
#[test]
fn widths_that_add_are_a_line_folded_with_the_laser() {
    for width_mhz in [5.0, 50.0, 300.0_f64] {
        let line = dipole(780.241);
        let added = line.doppler_cross_section_cm2(300.0, 87.0, 6e6 + width_mhz * 1e6).unwrap();
        // The substitution u = arctan(Δ/half width) takes the Lorentzian out of the integral.
        let steps = 200;
        let folded: f64 = (0..steps)
            .map(|k| {
                let u = std::f64::consts::PI * ((f64::from(k) + 0.5) / f64::from(steps) - 0.5);
                shifted(&line, width_mhz / 2.0 * u.tan())
            })
            .sum::<f64>() / f64::from(steps);
        // The sums below resolve the Lorentzian to 1e-4.
        assert!((folded / added - 1.0).abs() < 1e-3, "{width_mhz}: {folded} {added}");
    }
}

/// Cross-section of the gas at a distance (MHz) from line centre, from Gaussian and Lorentzian by a
/// plain sum.
fn shifted(line: &Dipole, shift_mhz: f64) -> f64 {
    let sigma_mhz = lineclear::advise::tune::strength::doppler_width_mhz(780.241, 300.0, 87.0)
        .unwrap() / (8.0 * 2.0_f64.ln()).sqrt();
    let (steps, reach) = (6000, 6.0);
    let sum: f64 = (0..=steps)
        .map(|k| {
            let z = reach * (2.0 * f64::from(k) / f64::from(steps) - 1.0);
            let gauss = (-0.5 * z * z).exp() / (2.0 * std::f64::consts::PI).sqrt();
            gauss * lorentzian(shift_mhz - z * sigma_mhz, 3.0)
        })
        .sum();
    let per_mhz = sum * 2.0 * reach / f64::from(steps);
    line.integrated_m2_hz() * per_mhz * 1e-6 * 1e4
}

/// Lasers of the Harrow Bay bench (invented): at rest the cross-section falls as Γ/(Γ + width), the
/// saturation rises by the inverse, and a narrow laser sees what the table says.
#[test]
fn linewidths_of_lasers_are_folded_in() {
    let path = "tests/reference/tune/harrow_bay_lasers.csv";
    let found = transitions(&format!(
        "lineclear tune --laser {path} --of 87Rb --density 1e10cm-3 --cell-length 7.5cm"
    ));
    let t = &found[0];
    let seen = t["seen_by"].as_array().unwrap();
    assert_eq!(seen.len(), 2, "{t:#}");
    let natural = number(t, "natural_width_mhz");
    for seen in seen {
        let width = number(seen, "linewidth_mhz");
        let ratio = natural / (natural + width);
        let rest = "natural_cross_section_cm2";
        close("at rest", number(seen, rest) / number(t, rest), ratio, 1e-9);
        let saturation = "saturation_intensity_mw_per_cm2";
        close("saturation", number(t, saturation) / number(seen, saturation), ratio, 1e-9);
        assert!(number(seen, "absorbed_fraction") < number(t, "absorbed_fraction"));
    }
    assert!(number(&seen[0], "absorbed_fraction") > number(&seen[1], "absorbed_fraction"));
}

/// With hyperfine structure a cell absorbs less, and at a component: of 87Rb D2 the strongest group
/// starts from F = 2, 5/8 of the atoms, some 2.4 GHz below the centre of gravity (common practice).
#[test]
fn hyperfine_structure_spreads_the_absorption() {
    let cell = "--density 1e8cm-3 --cell-length 7.5cm";
    let of = |options: &str| {
        let command = format!("lineclear tune 780.0..780.1nm --of 87Rb {cell} {options}");
        transitions(&command).remove(0)
    };
    let (plain, resolved) = (of(""), of("--hyperfine"));
    assert!(plain["absorbed_at_offset_mhz"].is_null());
    let at = number(&resolved, "absorbed_at_offset_mhz");
    assert!((-2500.0..-2350.0).contains(&at), "{at}");
    let ratio = number(&resolved, "absorbed_fraction") / number(&plain, "absorbed_fraction");
    // F = 2 → 1, 2, 3 spread over 420 MHz, less than a Doppler width of 511 MHz: between the share
    // of the strongest component and that of the group.
    assert!((0.4375..0.625).contains(&ratio), "{ratio}");
}

/// Caesium 6S–8S by two photons of 822 nm: 2 × 364 503 080 MHz to the centre of gravity (Fendel, Bergeson,
/// Udem & Hänsch 2007, Opt. Lett. 32, 701, from memory, to its GHz); 6P3/2 lies 12.8 THz below half
/// way.
#[test]
fn caesium_by_two_photons() {
    let found = transitions("lineclear tune 822..823nm --of Cs --photons 2 --medium vacuum");
    assert_eq!(found.len(), 1, "{found:?}");
    let t = &found[0];
    assert_eq!(t["upper"]["configuration"].as_str().unwrap().split(' ').next_back(), Some("8s"));
    close("822 nm", number(t, "frequency_thz"), 364.503, 0.002);
    close("detuning", number(t, "detuning_ghz"), 12_779.0, 5.0);
    assert!(t["intermediate"]["configuration"].as_str().unwrap().ends_with("6p"));
}

/// A range in which nothing lies says where to look: 689.449 nm of Sr and 778.1 nm of Rb are vacuum
/// wavelengths (common practice), and a bare range is read in air.
#[test]
fn an_empty_range_says_where_to_look() {
    for (arguments, words) in [
        ("689.4..689.5nm --of Sr", "ask with --medium vacuum"),
        ("778.05..778.15nm --of Rb --photons 2", "ask with --medium vacuum"),
        ("588.99..589.0nm --of Na --medium vacuum", "ask with --medium air"),
        ("600..601nm --of Rb", "The nearest is 87Rb I 780.027 nm (air)."),
    ] {
        let found = run(&format!("lineclear tune {arguments}"));
        assert_eq!(found.exit, 0, "{arguments}: {}", found.stderr);
        assert!(found.stdout.replace('\n', " ").contains(words), "{arguments}: {}", found.stdout);
    }
    // What it points to is there.
    let there = json("lineclear tune 689.4..689.5nm --of Sr --medium vacuum");
    assert!(!there["transitions"].as_array().unwrap().is_empty());
}
