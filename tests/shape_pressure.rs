//! Pressure widths against published widths and formulas, each named beside its check.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

#[path = "reference/table.rs"]
mod table;

use lineclear::calc::shape::{
    OuterElectron, Perturbers, ResonanceLine, ShapeError, WidthMethod, hydrogen_stark,
    polarisability_a0_cubed, quadratic_stark, resonance_width, van_der_waals,
};
use table::assert_close;

fn within_factor(got: f64, want: f64, factor: f64, what: &str) {
    let ratio = got / want;
    assert!(
        ratio > 1.0 / factor && ratio < factor,
        "{what}: got {got:.4}, want {want:.4} within a factor {factor}"
    );
}

fn stark_nm(lower: u32, upper: u32, density: f64) -> f64 {
    hydrogen_stark(1, (lower, upper), density, 1.0)
        .unwrap()
        .fwhm_nm
}

/// Gigosos et al. 2003 as quoted throughout the trade: H-beta 4.8 nm at 1e23 m⁻³ and, by their
/// exponent, 1.00 nm at 1e22 m⁻³; n_e = 1e23 (FWHA/1.098 nm)^1.47135 for H-alpha (from memory).
#[test]
fn balmer_widths_of_the_published_fit() {
    assert_close(stark_nm(2, 4, 1e23), 4.80, 1e-3, "H-beta at 1e23");
    assert_close(stark_nm(2, 4, 1e22), 1.00, 5e-3, "H-beta at 1e22");
    let density = 1e23 * (stark_nm(2, 3, 3e22) / 1.098).powf(1.471_35);
    assert_close(density, 3e22, 1e-4, "H-alpha, inverted");
}

/// Griem 1974: n_e = C(T) Δλ^(3/2), C = 3.58e14 cm⁻³ Å^(−3/2) for H-beta near 1e4 K, 1e17 cm⁻³
/// (from memory). The two theories differ by about 10 % (motion of the ions).
#[test]
fn h_beta_agrees_with_the_older_theory() {
    for density in [1e22, 1e23] {
        let griem_nm = (density * 1e-6 / 3.58e14_f64).powf(2.0 / 3.0) / 10.0;
        assert_close(stark_nm(2, 4, density), griem_nm, 0.15, "H-beta");
    }
}

/// Half widths α½ of Kepple & Griem 1968, Phys. Rev. 173, 317 (from memory, 1e4 K, 1e16–1e17 cm⁻³):
/// FWHM = 2 α½ · 1.25e-9 n_e^(2/3) Å; H-alpha 0.017, H-gamma 0.088, H-delta 0.149. Twenty per cent:
/// α½ moves by as much between the tabulated densities.
#[test]
fn other_balmer_lines_agree_with_the_older_theory() {
    let kepple_nm =
        |alpha: f64, density: f64| 2.0 * alpha * 1.25e-10 * (density * 1e-6).powf(2.0 / 3.0);
    assert_close(
        stark_nm(2, 3, 1e23),
        kepple_nm(0.0175, 1e23),
        0.2,
        "H-alpha",
    );
    assert_close(stark_nm(2, 5, 1e22), kepple_nm(0.088, 1e22), 0.2, "H-gamma");
    assert_close(stark_nm(2, 6, 1e21), kepple_nm(0.149, 1e21), 0.2, "H-delta");
}

#[test]
fn every_stark_width_grows_with_density_and_names_its_source() {
    for (lower, upper) in [(1, 2), (1, 4), (2, 3), (2, 5), (2, 12), (3, 4), (4, 6)] {
        let mut last = 0.0;
        for exponent in 18..25 {
            let width = hydrogen_stark(1, (lower, upper), 10_f64.powi(exponent), 2.0).unwrap();
            assert!(width.fwhm_nm > last && width.uncertainty_factor > 1.0);
            assert!(!width.method.citation().is_empty());
            last = width.fwhm_nm;
        }
    }
    let beyond = hydrogen_stark(1, (2, 5), 1e24, 1.0).unwrap();
    assert!(!beyond.inside_validity);
    let lyman = hydrogen_stark(1, (1, 3), 1e22, 1.0).unwrap();
    assert!(lyman.method == WidthMethod::QuasiStatic && lyman.method.is_estimate());
}

/// He II 468.6 nm: n_e = 3.31e17 cm⁻³ (FWHM/nm)^1.21 (A. Pittman & C. Fleurier 1986, Phys. Rev. A
/// 33, 1291; from memory). The estimate states a factor 2 for lines with n_u = n_l + 1.
#[test]
fn ionised_helium_is_estimated() {
    for density in [3e22, 1e23, 3e23] {
        let width = hydrogen_stark(2, (3, 4), density, 4.0).unwrap();
        let measured_nm = (density * 1e-6 / 3.31e17_f64).powf(1.0 / 1.21);
        let factor = width.uncertainty_factor;
        within_factor(width.fwhm_nm, measured_nm, factor, "He II 468.6 nm");
    }
}

fn electron(binding_per_cm: f64, l: u32, core_charge: u8) -> OuterElectron {
    OuterElectron {
        binding_per_cm,
        l,
        core_charge,
    }
}

/// ⟨r²⟩ of hydrogen: 3 a₀² in 1s, 42 in 2s, 30 in 2p, 126 in 3d (Bethe & Salpeter 1957).
#[test]
fn hydrogen_radii() {
    let rydberg = 109_737.315_68;
    for (n, l, want) in [
        (1.0, 0, 3.0),
        (2.0, 0, 42.0),
        (2.0, 1, 30.0),
        (3.0, 2, 126.0),
    ] {
        let got = electron(rydberg / (n * n), l, 1)
            .mean_square_radius()
            .unwrap();
        assert_close(got, want, 1e-9, "hydrogen");
    }
    let helium_like = electron(4.0 * rydberg / 9.0, 2, 2)
        .mean_square_radius()
        .unwrap();
    assert_close(helium_like, 126.0 / 4.0, 1e-9, "z = 2");
    assert!(electron(-1.0, 0, 1).effective_n().is_err());
}

/// Estimates against widths in use, all from memory: Griem 1974 (He I, HWHM 0.170 Å and 0.386 Å at
/// 1e16 cm⁻³, 1e4 K) and the critical reviews of N. Konjević & co-workers (Ar I 696.5 nm 0.08 nm at
/// 1e23 m⁻³, 13 000 K; Ar II 480.6 nm 0.035 nm at 1e23 m⁻³, 1.1e4 K). Two σ of the stated factors.
#[test]
fn quadratic_stark_estimates() {
    let helium = |nm, upper, lower| {
        let width = quadratic_stark(nm, upper, lower, 1e22, 0.862).unwrap();
        assert_eq!(width.method, WidthMethod::ElectronImpact);
        width.fwhm_nm
    };
    let d3 = helium(587.7, electron(12_209.1, 2, 1), electron(29_223.8, 1, 1));
    within_factor(d3, 0.034, 4.0, "He I 587.6 nm");
    let singlet = helium(668.0, electron(12_205.7, 2, 1), electron(27_175.8, 1, 1));
    within_factor(singlet, 0.077, 4.0, "He I 667.8 nm");
    let argon = quadratic_stark(
        696.7,
        electron(19_613.0, 1, 1),
        electron(33_966.0, 0, 1),
        1e23,
        1.12,
    );
    within_factor(argon.unwrap().fwhm_nm, 0.08, 4.0, "Ar I 696.5 nm");
    let ion = quadratic_stark(
        480.7,
        electron(67_805.0, 1, 2),
        electron(88_606.0, 0, 2),
        1e23,
        0.95,
    );
    within_factor(ion.unwrap().fwhm_nm, 0.035, 2.5, "Ar II 480.6 nm");
}

/// H-beta in air at 1 atm: FWHM 3.6 nm/T^0.7 (C. O. Laux et al. 2003, Plasma Sources Sci. Technol.
/// 12, 125).
#[test]
fn van_der_waals_width_of_h_beta_in_air() {
    let rydberg = 109_677.6;
    let (upper, lower) = (
        electron(rydberg / 16.0, 2, 1),
        electron(rydberg / 4.0, 1, 1),
    );
    for temperature_k in [500.0, 2000.0] {
        let gas = Perturbers {
            density_per_m3: 101_325.0 / (1.380_649e-23 * temperature_k),
            temperature_k,
            mass_u: 28.0,
            // N₂: 1.74e-30 m³ (common practice).
            polarisability_a0_cubed: 1.74 / 0.148_185,
        };
        let width = van_der_waals(486.3, upper, lower, 1.008, gas).unwrap();
        let laux_nm = 3.6 / temperature_k.powf(0.7);
        within_factor(width.fwhm_nm, laux_nm, width.uncertainty_factor, "H-beta");
    }
}

/// FWHM (nm) = 8.61e-28 √(g_l/g_u) λ² λ_R f N (nm, cm⁻³), Laux et al. 2003: H-alpha broadened
/// through its lower level by Lyman α.
#[test]
fn resonance_width_agrees_with_the_form_in_use() {
    let lyman = ResonanceLine {
        wavelength_nm: 121.567,
        absorption_f: 0.4162,
        ground_weight: 2.0,
        shared_weight: 6.0,
    };
    let got = resonance_width(656.5, lyman, 1e24).unwrap().fwhm_nm;
    let want = 8.61e-28 * (2.0_f64 / 6.0).sqrt() * 656.5 * 656.5 * 121.567 * 0.4162 * 1e18;
    // Their constant carries three digits.
    assert_close(got, want, 5e-3, "H-alpha");
}

#[test]
fn nonsense_is_refused() {
    assert_eq!(
        hydrogen_stark(1, (3, 2), 1e22, 1.0),
        Err(ShapeError::NoTransition {
            n_lower: 3,
            n_upper: 2
        })
    );
    assert!(hydrogen_stark(1, (2, 3), f64::NAN, 1.0).is_err());
    assert!(hydrogen_stark(1, (2, 3), 1e22, 0.0).is_err());
    assert_eq!(polarisability_a0_cubed(18), Some(11.08));
    assert_eq!(polarisability_a0_cubed(90), None);
}
