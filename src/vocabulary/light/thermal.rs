//! Thermal radiation of a black body: Planck's law and Wien's peaks (common practice; constants
//! follow from CODATA 2022).

use super::constants::{BOLTZMANN_J_PER_K, PLANCK_J_S, SPEED_OF_LIGHT_M_PER_S};

/// Solution x of x = 5 (1 − e⁻ˣ): the peak of the radiance per wavelength lies at hc / (λ k T) = x.
const WAVELENGTH_PEAK: f64 = 4.965_114_231_744_276;
/// Solution x of x = 3 (1 − e⁻ˣ): the peak of the radiance per frequency lies at hν / (k T) = x.
const FREQUENCY_PEAK: f64 = 2.821_439_372_122_079;

/// Spectral radiance per wavelength, W m⁻² sr⁻¹ nm⁻¹, of a black body at a vacuum wavelength (nm)
/// and temperature (K): 2 h c² λ⁻⁵ / (e^(hc/λkT) − 1). Both must be above zero; else NaN.
pub fn radiance_w_per_m2_sr_nm(vacuum_nm: f64, kelvin: f64) -> f64 {
    if !(vacuum_nm > 0.0 && kelvin > 0.0) {
        return f64::NAN;
    }
    let metres = vacuum_nm * 1e-9;
    let x = PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S / (metres * BOLTZMANN_J_PER_K * kelvin);
    let front = 2.0 * PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S.powi(2) / metres.powi(5);
    front / x.exp_m1() * 1e-9
}

/// Spectral radiance per frequency, W m⁻² sr⁻¹ Hz⁻¹, of a black body at a frequency (Hz) and
/// temperature (K): 2 h ν³ c⁻² / (e^(hν/kT) − 1). Both must be above zero; else NaN.
pub fn radiance_w_per_m2_sr_hz(hertz: f64, kelvin: f64) -> f64 {
    if !(hertz > 0.0 && kelvin > 0.0) {
        return f64::NAN;
    }
    let x = PLANCK_J_S * hertz / (BOLTZMANN_J_PER_K * kelvin);
    2.0 * PLANCK_J_S * hertz.powi(3) / SPEED_OF_LIGHT_M_PER_S.powi(2) / x.exp_m1()
}

/// Photons instead of watts, per wavelength: photons s⁻¹ m⁻² sr⁻¹ nm⁻¹ (radiance over hc/λ).
pub fn photon_radiance_per_s_m2_sr_nm(vacuum_nm: f64, kelvin: f64) -> f64 {
    let photon_j = PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S / (vacuum_nm * 1e-9);
    radiance_w_per_m2_sr_nm(vacuum_nm, kelvin) / photon_j
}

/// Vacuum wavelength (nm) at which the radiance per wavelength peaks at a temperature (K).
pub fn peak_wavelength_nm(kelvin: f64) -> f64 {
    1e9 * PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S / (WAVELENGTH_PEAK * BOLTZMANN_J_PER_K * kelvin)
}

/// Frequency (THz) at which the radiance per frequency peaks at a temperature (K).
pub fn peak_frequency_thz(kelvin: f64) -> f64 {
    1e-12 * FREQUENCY_PEAK * BOLTZMANN_J_PER_K * kelvin / PLANCK_J_S
}
