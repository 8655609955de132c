//! Lines against their levels and the selection rules.

use super::support::{Ion, Line, air_nm, ion, ions, odd};
use std::collections::HashSet;

/// Electric dipole: parity changes, |ΔJ| ≤ 1, not 0-0; magnetic quadrupole (0-2) in two-electron spectra; same parity (magnetic dipole,
/// electric quadrupole): |ΔJ| ≤ 2, J + J' ≥ 1. Condon & Shortley 1935, chapter 4.
#[test]
fn selection_rules_hold() {
    let (mut checked, mut open, mut forbidden) = (0, 0, 0);
    for ion in ions() {
        for line in &ion.lines {
            let (lower, upper) = (
                ion.level(&line.lower).unwrap(),
                ion.level(&line.upper).unwrap(),
            );
            assert!(
                upper.energy_per_cm > lower.energy_per_cm,
                "{} {line:?}",
                ion.species
            );
            let (Some(jl), Some(ju), Some(ol), Some(ou)) =
                (lower.j, upper.j, odd(lower), odd(upper))
            else {
                open += 1;
                continue;
            };
            checked += 1;
            let dipole = ol != ou && (jl - ju).abs() <= 1.0 && jl + ju >= 1.0;
            let quadrupole = ol != ou && (jl, ju) == (0.0, 2.0);
            let same_parity = ol == ou && (jl - ju).abs() <= 2.0 && jl + ju >= 1.0;
            forbidden += usize::from(!dipole);
            assert!(
                dipole || quadrupole || same_parity,
                "{} {line:?}",
                ion.species
            );
        }
    }
    println!(
        "{checked} lines checked, {forbidden} of them forbidden for electric dipole, {open} with an unknown J or parity"
    );
    assert!(checked > 4600 && open < 110, "{checked} {open}");
}

/// A dipole-allowed line that ends on the same parity would be a slip: those lines are known forbidden ones, slow.
#[test]
fn lines_that_keep_parity_are_slow() {
    for ion in ions() {
        for line in ion.lines.iter().filter(|line| line.rate_per_s.is_some()) {
            let (lower, upper) = (
                ion.level(&line.lower).unwrap(),
                ion.level(&line.upper).unwrap(),
            );
            if let (Some(a), Some(b)) = (odd(lower), odd(upper)) {
                // Magnetic dipole and electric quadrupole rates stay below 100 per second in the optical range (common practice).
                assert!(
                    a != b || line.rate_per_s.unwrap() < 100.0,
                    "{} {line:?}",
                    ion.species
                );
            }
        }
    }
}

/// How far a line's wavelength lies from its levels, in units of the combined 1 sigma.
fn misfit(ion: &Ion, line: &Line) -> f64 {
    let vacuum_nm = 1e7 / ion.ritz_per_cm(line);
    let ritz_nm = if line.medium == "air" {
        air_nm(vacuum_nm)
    } else {
        vacuum_nm
    };
    let sigma_nm = f64::hypot(
        line.uncertainty_nm,
        ion.ritz_uncertainty_per_cm(line) * ritz_nm * ritz_nm / 1e7,
    );
    (line.wavelength_nm - ritz_nm) / sigma_nm
}

/// Remembered wavelengths meet their levels: 3 combined sigma everywhere, and 95 % inside 2.
#[test]
fn ritz_meets_the_remembered_wavelength() {
    let mut inside = 0;
    let mut total = 0;
    for ion in ions() {
        for line in &ion.lines {
            let x = misfit(ion, line).abs();
            assert!(x <= 3.0, "{} {line:?}: {x:.1} sigma", ion.species);
            total += 1;
            inside += usize::from(x <= 2.0);
        }
    }
    println!("{inside} of {total} lines within 2 sigma of their levels");
    assert!(inside * 100 >= total * 95);
}

/// One row per level pair; a blend is the only second row.
#[test]
fn no_line_twice() {
    for ion in ions() {
        let mut seen = HashSet::new();
        for line in &ion.lines {
            assert!(
                seen.insert((&line.kind, &line.lower, &line.upper)),
                "{} {line:?}",
                ion.species
            );
            assert!(["line", "blend"].contains(&line.kind.as_str()));
        }
        for blend in ion.lines.iter().filter(|line| line.kind == "blend") {
            let component = ion
                .lines
                .iter()
                .find(|l| l.kind == "line" && (&l.lower, &l.upper) == (&blend.lower, &blend.upper));
            assert!(
                component.is_some() && blend.rate_per_s.is_none(),
                "{} {blend:?}",
                ion.species
            );
            // The position of a component comes from its levels, never from the blend: 1.9 leaves room for rounding of the factor 2.
            let levels_nm = ion.ritz_uncertainty_per_cm(blend) * blend.wavelength_nm.powi(2) / 1e7;
            assert!(
                blend.uncertainty_nm > 1.9 * levels_nm,
                "{} {blend:?}",
                ion.species
            );
        }
    }
}

/// The yellow helium line: six components of 2p 3Po - 3d 3D, all rated. Their gA are in the ratio of the LS fractions
/// (Condon & Shortley 1935, chapter 9): 1 : 15 : 84 from J = 2, 15 : 45 from J = 1, 20 from J = 0, in units that sum to 180.
#[test]
fn helium_587_nm_has_six_rated_components() {
    let helium = ion("He I");
    let components: Vec<&Line> = helium
        .lines
        .iter()
        .filter(|l| l.kind == "line" && (587.5..587.7).contains(&l.wavelength_nm))
        .collect();
    assert_eq!(components.len(), 6);
    let strength =
        |line: &&Line| line.rate_per_s.unwrap() * helium.level(&line.upper).unwrap().g.unwrap();
    let total: f64 = components.iter().map(strength).sum();
    for (lower_j, upper_j, part) in [
        ("2", "1", 1.0),
        ("2", "2", 15.0),
        ("2", "3", 84.0),
        ("1", "1", 15.0),
        ("1", "2", 45.0),
        ("0", "1", 20.0),
    ] {
        let line = components
            .iter()
            .find(|l| l.lower.1 == lower_j && l.upper.1 == upper_j)
            .unwrap();
        let share = strength(line) / total;
        // 1 %: helium keeps to LS coupling; the entered rates have four digits.
        assert!(
            (share / (part / 180.0) - 1.0).abs() < 0.01,
            "{lower_j}-{upper_j}: {share}"
        );
    }
    // Total rate of 3d 3D -> 2p 3Po: 7.071e7 per second (Drake & Morton 2007, from memory), 1 %.
    assert!((total / 15.0 / 7.071e7 - 1.0).abs() < 0.01, "{total}");
}
