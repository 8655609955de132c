//! Thermal radiation, photon conversions and the photoelectric threshold.

use vocabulary::light::constants::{
    BOLTZMANN_J_PER_K, ELEMENTARY_CHARGE_C, PLANCK_J_S, SPEED_OF_LIGHT_M_PER_S,
};
use vocabulary::light::thermal::{
    peak_frequency_thz, peak_wavelength_nm, photon_radiance_per_s_m2_sr_nm,
    radiance_w_per_m2_sr_hz, radiance_w_per_m2_sr_nm,
};
use vocabulary::light::{Air, Conversion, Medium, PositionMedium, photoelectric_threshold_nm};

use crate::support::{assert_relative, number, rows};

#[test]
fn radiance_is_that_of_an_independent_reckoning() {
    let table = rows("tests/reference/thermal/radiance.csv");
    assert_eq!(table.len(), 54, "6 temperatures at 9 wavelengths");
    for row in &table {
        let field = |at: usize| number(&row[at]);
        // e^x with x up to 5000 loses x units in the last place; below 1e-308 nothing is left.
        let expected = field(2);
        let found = radiance_w_per_m2_sr_nm(field(1), field(0));
        let lost = 1e-12;
        if expected > 1e-300 {
            assert_relative(found, expected, lost, "per wavelength");
            let found = radiance_w_per_m2_sr_hz(field(3), field(0));
            assert_relative(found, field(4), lost, "per frequency");
        } else {
            assert!(found < 1e-290, "{row:?}: {found}");
        }
    }
}

#[test]
fn peaks_are_where_the_root_finder_has_them() {
    for row in rows("tests/reference/thermal/peaks.csv") {
        let kelvin = number(&row[0]);
        assert_relative(
            peak_wavelength_nm(kelvin),
            number(&row[1]),
            1e-14,
            "wavelength",
        );
        assert_relative(
            peak_frequency_thz(kelvin),
            number(&row[2]),
            1e-14,
            "frequency",
        );
        // A peak is higher than its neighbours.
        let at = |factor: f64| radiance_w_per_m2_sr_nm(peak_wavelength_nm(kelvin) * factor, kelvin);
        assert!(at(1.0) > at(0.999) && at(1.0) > at(1.001));
    }
}

#[test]
fn planck_meets_rayleigh_jeans_and_wien() {
    let (nm, kelvin) = (1e9, 1e4);
    let metres: f64 = nm * 1e-9;
    let rayleigh_jeans =
        2.0 * SPEED_OF_LIGHT_M_PER_S * BOLTZMANN_J_PER_K * kelvin / metres.powi(4) * 1e-9;
    // The next term of the series is x/2 with x = hc/(λkT) = 1.4e-6.
    assert_relative(
        radiance_w_per_m2_sr_nm(nm, kelvin),
        rayleigh_jeans,
        1e-6,
        "Rayleigh-Jeans",
    );
    let (nm, kelvin) = (100.0, 3000.0);
    let metres: f64 = nm * 1e-9;
    let x = PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S / (metres * BOLTZMANN_J_PER_K * kelvin);
    let wien =
        2.0 * PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S.powi(2) / metres.powi(5) * (-x).exp() * 1e-9;
    assert_relative(radiance_w_per_m2_sr_nm(nm, kelvin), wien, 1e-12, "Wien");
    assert!(
        radiance_w_per_m2_sr_nm(0.0, 1e4).is_nan() && radiance_w_per_m2_sr_hz(1.0, -1.0).is_nan()
    );
}

#[test]
fn the_radiance_sums_to_stefan_and_boltzmann() {
    // ∫ L dλ = σ T⁴ / π with σ = 2 π⁵ k⁴ / (15 h³ c²), exact in the SI (5.670 374 419e-8).
    let kelvin = 5772.0;
    let steps = 20_000;
    let (low, high): (f64, f64) = (50.0_f64.ln(), 1e7_f64.ln());
    let step = (high - low) / f64::from(steps);
    let sum: f64 = (0..=steps)
        .map(|i| {
            let nm = (low + step * f64::from(i)).exp();
            radiance_w_per_m2_sr_nm(nm, kelvin) * nm * step
        })
        .sum();
    let expected = 5.670_374_419e-8 * kelvin.powi(4) / std::f64::consts::PI;
    // The cut at 10 mm leaves out 1e-10, the printed constant 1e-10.
    assert_relative(sum, expected, 1e-8, "Stefan-Boltzmann");
}

#[test]
fn photons_are_counted() {
    let photon_j = 6.626_070_15e-34 * 299_792_458.0 / 500e-9;
    let watts = radiance_w_per_m2_sr_nm(500.0, 3000.0);
    assert_relative(
        photon_radiance_per_s_m2_sr_nm(500.0, 3000.0),
        watts / photon_j,
        1e-14,
        "photons",
    );
}

fn convert(text: &str, medium: Medium) -> Conversion {
    Conversion::of(text.parse().unwrap(), medium, Air::standard()).unwrap()
}

#[test]
fn everything_follows_from_one_quantity() {
    let found = convert("500nm", Medium::Vacuum);
    assert_relative(found.wavenumber_per_cm, 20_000.0, 1e-15, "cm-1");
    // c / 500 nm, exact in the SI.
    assert_relative(found.frequency_thz, 599.584_916, 1e-14, "THz");
    // hc = 1239.841 984 eV nm and h (CODATA 2022, exact in the SI, printed digits).
    assert_relative(found.energy_ev, 1_239.841_984 / 500.0, 5e-10, "eV");
    assert_relative(
        found.momentum_kg_m_per_s,
        6.626_070_15e-34 / 500e-9,
        1e-14,
        "momentum",
    );
    assert_eq!(found.read_in, Some(PositionMedium::Vacuum));
    for text in ["20000cm-1", "599.584916THz", "5000A"] {
        let other = convert(text, Medium::Vacuum);
        assert_relative(other.vacuum_wavelength_nm, 500.0, 1e-14, text);
    }
    assert!(!found.air_extrapolated && !found.unit_assumed);
}

#[test]
fn a_typed_wavelength_is_read_in_its_medium() {
    let air = convert("588.995nm", Medium::Auto);
    assert_eq!(air.read_in, Some(PositionMedium::Air));
    assert_relative(air.air_wavelength_nm.unwrap(), 588.995, 1e-14, "air");
    let lyman = convert("121.567", Medium::Auto);
    assert_eq!(lyman.read_in, Some(PositionMedium::Vacuum));
    assert_eq!(lyman.air_wavelength_nm, None);
    assert!(lyman.unit_assumed);
    assert!(Conversion::of("121.567nm".parse().unwrap(), Medium::Air, Air::standard()).is_err());
    assert_eq!(convert("1eV", Medium::Auto).read_in, None);
    assert!(convert("250nm", Medium::Auto).air_extrapolated);
    assert!(Conversion::of("1e-320nm".parse().unwrap(), Medium::Vacuum, Air::standard()).is_err());
}

#[test]
fn a_photon_at_the_threshold_has_the_work_function() {
    // hc = 1239.841 984 eV nm (CODATA 2022): 4.5 eV (tungsten, common practice) is 275.52 nm.
    assert_relative(
        photoelectric_threshold_nm(4.5),
        1_239.841_984 / 4.5,
        5e-10,
        "4.5 eV",
    );
    let photon_j = PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S / (photoelectric_threshold_nm(2.1) * 1e-9);
    assert_relative(photon_j / ELEMENTARY_CHARGE_C, 2.1, 1e-14, "and back");
}
