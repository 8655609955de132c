//! Wavelengths of one-electron lines, series, labels and what their uncertainties share.

#![allow(clippy::unwrap_used, reason = "in a test a panic is the report")]

use lineclear::calc::one_electron::{
    Nucleus, OneElectronLevel, OneElectronLine, level_index, levels, lines,
    rate_relative_uncertainty, series_name,
};

/// Mean vacuum wavelength of all lines between two shells, weighted as in a gas whose upper levels are filled by weight, nm.
fn mean_nm(nucleus: &Nucleus, upper: u32, lower: u32) -> f64 {
    let all = levels(nucleus, upper).unwrap();
    let (mut sum, mut weight) = (0.0, 0.0);
    for line in lines(nucleus, upper).unwrap() {
        let (u, l) = (&all[line.upper], &all[line.lower]);
        if (u.n, l.n) == (upper, lower) {
            let strength = u.weight() * line.rate_per_s;
            sum += strength * 1e7 / line.wavenumber_per_cm;
            weight += strength;
        }
    }
    sum / weight
}

/// Vacuum wavelengths of the hydrogen series, nm (handbooks; from memory), to half of the last digit.
#[test]
fn hydrogen_series_match_the_handbooks() {
    let published = [
        (2, 1, 121.567, 5e-4),
        (3, 1, 102.572, 5e-4),
        (4, 1, 97.254, 5e-4),
        (3, 2, 656.461, 1e-3),
        (4, 2, 486.268, 1e-3),
        (5, 2, 434.168, 1e-3),
        (6, 2, 410.289, 1e-3),
        (4, 3, 1_875.61, 0.02),
        (5, 3, 1_282.16, 0.02),
        (6, 3, 1_094.11, 0.02),
        (5, 4, 4_052.27, 0.03),
        (7, 4, 2_166.12, 0.02),
        (6, 5, 7_459.9, 0.1),
        (7, 6, 12_371.9, 0.2),
    ];
    for (upper, lower, wavelength, digit) in published {
        let ours = mean_nm(&Nucleus::PROTON, upper, lower);
        assert!(
            (ours - wavelength).abs() <= digit,
            "{upper}–{lower}: {ours}"
        );
    }
}

/// D lies to the blue of H by 0.179 nm at Balmer-α and 0.033 nm at Lyman-α (common practice), T by 0.238 nm.
#[test]
fn isotopes_lie_to_the_blue() {
    let shift = |nucleus: &Nucleus, n, m| mean_nm(&Nucleus::PROTON, n, m) - mean_nm(nucleus, n, m);
    assert!((shift(&Nucleus::DEUTERON, 3, 2) - 0.179).abs() < 1e-3);
    assert!((shift(&Nucleus::DEUTERON, 2, 1) - 0.033).abs() < 5e-4);
    assert!((shift(&Nucleus::TRITON, 3, 2) - 0.238).abs() < 1e-3);
}

/// He II: 164.042, 320.40, 468.70 nm in vacuum (common practice), and inside 468.6 nm the strong components 3d5/2–4f7/2 and
/// 3d3/2–4f5/2 0.0100 nm apart (468.5804 and 468.5704 nm in air, Garcia & Mack 1965; from memory), the multiplet from 468.538 to 468.592.
#[test]
fn helium_ion_lines() {
    let he = Nucleus::ALPHA;
    for (upper, lower, wavelength, digit) in [
        (3, 2, 164.042, 1e-3),
        (5, 3, 320.40, 0.005),
        (4, 3, 468.70, 0.005),
    ] {
        let ours = mean_nm(&he, upper, lower);
        assert!(
            (ours - wavelength).abs() <= digit,
            "{upper}–{lower}: {ours}"
        );
    }
    let all = levels(&he, 4).unwrap();
    let components: Vec<_> = lines(&he, 4)
        .unwrap()
        .into_iter()
        .filter(|line| (all[line.upper].n, all[line.lower].n) == (4, 3))
        .collect();
    assert_eq!(components.len(), 13);
    let nm = |l: u32, up: bool, m: u32, low: bool| {
        let (upper, lower) = (level_index(4, l, up), level_index(3, m, low));
        let line = components
            .iter()
            .find(|c| (c.upper, c.lower) == (upper, lower))
            .unwrap();
        1e7 / line.wavenumber_per_cm
    };
    let apart = nm(3, true, 2, true) - nm(3, false, 2, false);
    assert!((apart - 0.010_0).abs() < 1e-4, "{apart}");
    let all_nm: Vec<f64> = components
        .iter()
        .map(|c| 1e7 / c.wavenumber_per_cm)
        .collect();
    let width = all_nm.iter().fold(0.0, |a: f64, b| a.max(*b))
        - all_nm.iter().fold(1e9, |a: f64, b| a.min(*b));
    assert!((width - 0.054).abs() < 0.003, "{width}");
}

/// Balmer-α of H has seven components within 0.0200 nm; the two strongest (3d5/2–2p3/2 and 3d3/2–2p1/2) are 0.0141 nm apart, 0.328 cm⁻¹
/// (common practice).
#[test]
fn balmer_alpha_components() {
    let all = levels(&Nucleus::PROTON, 3).unwrap();
    let mut components: Vec<OneElectronLine> = lines(&Nucleus::PROTON, 3)
        .unwrap()
        .into_iter()
        .filter(|line| (all[line.upper].n, all[line.lower].n) == (3, 2))
        .collect();
    assert_eq!(components.len(), 7);
    let strength = |c: &OneElectronLine| c.rate_per_s * all[c.upper].weight();
    components.sort_by(|a, b| strength(b).total_cmp(&strength(a)));
    let apart = components[1].wavenumber_per_cm - components[0].wavenumber_per_cm;
    assert!((apart - 0.328).abs() < 2e-3, "{apart}");
}

/// A line's 1 σ knows what its levels share: far below the quadrature sum for components of one line; never zero, never more
/// than the sum.
#[test]
fn line_uncertainty_knows_what_levels_share() {
    let all = levels(&Nucleus::PROTON, 6).unwrap();
    for line in lines(&Nucleus::PROTON, 6).unwrap() {
        let (u, l) = (&all[line.upper], &all[line.lower]);
        let sum = u.binding_uncertainty_per_cm + l.binding_uncertainty_per_cm;
        assert!(line.uncertainty_per_cm > 0.0 && line.uncertainty_per_cm <= sum);
        assert_eq!(
            line.rate_relative_uncertainty,
            rate_relative_uncertainty(&Nucleus::PROTON)
        );
        let ritz = u.energy_per_cm - l.energy_per_cm;
        // Two differences of numbers near 1e5 cm⁻¹: 3e-11 cm⁻¹ of rounding.
        assert!((line.wavenumber_per_cm - ritz).abs() < 1e-10);
    }
}

#[test]
fn levels_stand_in_order_and_carry_labels() {
    let all = levels(&Nucleus::PROTON, 30).unwrap();
    assert_eq!(all.len(), 900);
    for (place, level) in all.iter().enumerate() {
        let stretched = u32::from(level.j.twice()) == 2 * level.l + 1;
        assert_eq!(level_index(level.n, level.l, stretched), place);
    }
    let label = |level: &OneElectronLevel| {
        format!("{} {} {}", level.configuration(), level.term(), level.j)
    };
    assert_eq!(label(&all[0]), "1s 2S 1/2");
    assert_eq!(label(&all[2]), "2p 2Po 1/2");
    assert_eq!(label(&all[level_index(8, 7, true)]), "8k 2Ko 15/2");
    assert_eq!(all[0].energy_per_cm, 0.0);
    // Fine structure: higher j lies higher; l does not matter but for the Lamb shift.
    assert!(all[3].energy_per_cm > all[2].energy_per_cm);
}

#[test]
fn series_have_their_names_and_limits() {
    let names: Vec<_> = (0..8).map(series_name).collect();
    let expected = [
        "Lyman",
        "Balmer",
        "Paschen",
        "Brackett",
        "Pfund",
        "Humphreys",
    ];
    assert_eq!(names[0], None);
    assert_eq!(names[7], None);
    for (name, published) in names[1..7].iter().zip(expected) {
        assert_eq!(*name, Some(published));
    }
    // Balmer limit 364.6 nm in air, 364.7 in vacuum; Lyman limit 91.18 nm (common practice).
    let all = levels(&Nucleus::PROTON, 2).unwrap();
    assert!((1e7 / all[3].binding_per_cm - 364.7).abs() < 0.05);
    assert!((1e7 / all[0].binding_per_cm - 91.18).abs() < 0.005);
}
