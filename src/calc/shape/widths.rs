//! What broadens a line before any instrument sees it.

use std::f64::consts::{LN_2, PI};

use vocabulary::light::constants::{
    ATOMIC_MASS_UNIT_KG, BOLTZMANN_J_PER_K, SPEED_OF_LIGHT_M_PER_S,
};

use super::error::{ShapeError, not_negative, positive};

/// FWHM of a Gaussian over its standard deviation: 2 √(2 ln 2).
pub const FWHM_PER_SIGMA: f64 = 2.354_820_045_030_949_3;
const _: () = assert!((FWHM_PER_SIGMA * FWHM_PER_SIGMA - 8.0 * LN_2).abs() < 1e-14);

/// The Gaussian and the Lorentzian width of a line, in nm (or any one unit). Either may be zero.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct LineWidths {
    /// Standard deviation of the Gaussian part, nm.
    pub sigma_nm: f64,
    /// Half width at half maximum of the Lorentzian part, nm.
    pub hwhm_nm: f64,
}

impl LineWidths {
    /// Widths of a line at a vacuum wavelength (nm): Doppler broadening by atoms of `mass_u` (u)
    /// at `temperature_k`, and natural broadening of `natural_fwhm_hz`.
    ///
    /// # Errors
    /// Wavelength, temperature or mass not positive; natural width negative.
    pub fn new(
        wavelength_nm: f64,
        temperature_k: f64,
        mass_u: f64,
        natural_fwhm_hz: f64,
    ) -> Result<Self, ShapeError> {
        let wavelength_nm = positive("the wavelength in nm", wavelength_nm)?;
        let natural = not_negative("the natural width in Hz", natural_fwhm_hz)?;
        Ok(Self {
            sigma_nm: wavelength_nm * doppler_sigma_relative(temperature_k, mass_u)?,
            hwhm_nm: wavelength_width_nm(wavelength_nm, natural) / 2.0,
        })
    }

    /// With a further Lorentzian width (pressure broadening): half widths add.
    pub fn with_lorentz(self, fwhm_nm: f64) -> Self {
        Self {
            hwhm_nm: self.hwhm_nm + fwhm_nm / 2.0,
            ..self
        }
    }

    /// With a further Gaussian: variances add.
    pub fn with_gaussian(self, sigma_nm: f64) -> Self {
        Self {
            sigma_nm: self.sigma_nm.hypot(sigma_nm),
            ..self
        }
    }

    /// Where a line is spread further than this, the profile of the line matters: the larger width.
    pub fn largest(self) -> f64 {
        self.sigma_nm.max(self.hwhm_nm)
    }
}

/// Standard deviation of the Doppler profile over the line's wavelength: √(k T/(m c²)).
///
/// Model: Maxwellian velocities, no mass motion, first order in v/c (Mihalas, *Stellar
/// Atmospheres*, 2nd ed. 1978, section 9-2; Doppler width b = √2 σ). The FWHM is 7.16e-7 λ √(T/M).
///
/// # Errors
/// A temperature (K) or mass (u) that is not positive and finite.
pub fn doppler_sigma_relative(temperature_k: f64, mass_u: f64) -> Result<f64, ShapeError> {
    let thermal_j = BOLTZMANN_J_PER_K * positive("the gas temperature in K", temperature_k)?;
    let mass_kg = ATOMIC_MASS_UNIT_KG * positive("the atomic mass in u", mass_u)?;
    Ok((thermal_j / mass_kg).sqrt() / SPEED_OF_LIGHT_M_PER_S)
}

/// Natural FWHM of a line in Hz from the total decay rates of its levels (s⁻¹):
/// (Σ A_upper + Σ A_lower)/2π (V. Weisskopf & E. Wigner 1930, Z. Phys. 63, 54).
///
/// A total that misses decays gives a width that is a lower bound.
///
/// # Errors
/// A rate that is negative or not finite.
pub fn natural_fwhm_hz(upper_per_s: f64, lower_per_s: f64) -> Result<f64, ShapeError> {
    let upper = not_negative("the decay rate of the upper level per s", upper_per_s)?;
    let lower = not_negative("the decay rate of the lower level per s", lower_per_s)?;
    Ok((upper + lower) / (2.0 * PI))
}

/// A small width in frequency (Hz) as a width in wavelength (nm), at a vacuum wavelength in nm:
/// Δλ = λ² Δν/c.
pub fn wavelength_width_nm(wavelength_nm: f64, width_hz: f64) -> f64 {
    wavelength_nm * wavelength_nm * width_hz / (SPEED_OF_LIGHT_M_PER_S * 1e9)
}
