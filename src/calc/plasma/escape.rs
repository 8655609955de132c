//! Self-absorption: what a plasma takes back of its own line light.
//!
//! The models elsewhere are optically thin; these factors say how wrong that is. Emission and
//! absorption have the same profile (complete redistribution), and the plasma is uniform along the
//! column.

use std::f64::consts::{FRAC_PI_2, PI};

use vocabulary::light::constants::{BOHR_RADIUS_M, FINE_STRUCTURE};

use crate::calc::shape::{LineWidths, ShapeError, Voigt, integrate};

/// Classical electron radius α² a₀, m.
const ELECTRON_RADIUS_M: f64 = FINE_STRUCTURE * FINE_STRUCTURE * BOHR_RADIUS_M;

/// Optical depth at the centre of a line: N π r_e f λ² φ(0), for `lower_column_per_m2` atoms per m²
/// in the lower level, absorption oscillator strength f, vacuum wavelength in nm (A. C. G. Mitchell
/// & M. W. Zemansky 1934, *Resonance Radiation and Excited Atoms*, eq. 35). Stimulated emission is
/// left out: an upper bound.
///
/// # Errors
/// Widths that are negative, not finite or both zero.
pub fn line_centre_optical_depth(
    lower_column_per_m2: f64,
    absorption_f: f64,
    wavelength_nm: f64,
    widths: LineWidths,
) -> Result<f64, ShapeError> {
    let peak_per_m = Voigt::new(widths)?.peak() * 1e9;
    let wavelength_m = wavelength_nm * 1e-9;
    let cross_section_m2 =
        PI * ELECTRON_RADIUS_M * absorption_f * wavelength_m.powi(2) * peak_per_m;
    Ok(lower_column_per_m2 * cross_section_m2)
}

/// What is left of a line's light that comes out of a uniform column of optical depth τ₀ (line
/// centre) along the line of sight, over what a thin column would give: ∫(1 − e^(−τ₀ h)) dλ/(τ₀ ∫ h
/// dλ), h the profile with h(0) = 1. 1 at τ₀ = 0, 1 − τ₀/(2√2) for a weak Doppler line.
///
/// It is the curve of growth over its linear part (R. Ladenburg & F. Reiche 1913, Ann. Phys. 347,
/// 181). Relative error 1e-6.
///
/// # Errors
/// An optical depth that is negative or not finite; widths as for [`line_centre_optical_depth`].
pub fn self_absorption_factor(optical_depth: f64, widths: LineWidths) -> Result<f64, ShapeError> {
    let depth = checked(optical_depth)?;
    if depth == 0.0 {
        return Voigt::new(widths).map(|_| 1.0);
    }
    weighted(depth, widths, |h| -(-depth * h).exp_m1() / depth)
}

/// Chance that a photon emitted at one place leaves along a path of optical depth τ₀ (line centre):
/// ∫ h e^(−τ₀ h) dλ/∫ h dλ (T. Holstein 1947, Phys. Rev. 72, 1212; F. E. Irons 1979, J. Quant.
/// Spectrosc. Radiat. Transfer 22, 1, equation for Λ = 0). 1 − τ₀/√2 for a weak Doppler line.
/// Relative error 1e-6.
///
/// # Errors
/// As [`self_absorption_factor`].
pub fn escape_probability(optical_depth: f64, widths: LineWidths) -> Result<f64, ShapeError> {
    let depth = checked(optical_depth)?;
    weighted(depth, widths, |h| h * (-depth * h).exp())
}

fn checked(optical_depth: f64) -> Result<f64, ShapeError> {
    if optical_depth.is_finite() && optical_depth >= 0.0 {
        return Ok(optical_depth);
    }
    Err(ShapeError::Negative {
        quantity: "the optical depth",
        value: optical_depth,
    })
}

/// ∫ f(h(λ)) dλ/∫ h dλ over the whole line, with λ = s tan θ.
fn weighted(depth: f64, widths: LineWidths, f: impl Fn(f64) -> f64) -> Result<f64, ShapeError> {
    let line = Voigt::new(widths)?;
    let peak = line.peak();
    // Where the column becomes thin, in the wing of a Lorentzian; 3 σ and more of a Gaussian.
    let lorentz_nm = widths.hwhm_nm * depth.sqrt();
    let scale = (2.0 * widths.sigma_nm).max(widths.hwhm_nm).max(lorentz_nm);
    let at = |theta: f64| {
        let tangent = theta.tan();
        f(line.density(scale * tangent) / peak) * peak * scale * (1.0 + tangent * tangent)
    };
    // The far end of the tangent holds less than 1e-9 of the line.
    let edge = FRAC_PI_2 - 1e-9;
    let panels = 32;
    let border = |k: u32| edge * f64::from(k) / f64::from(panels);
    let tolerance = 1e-9 / (1.0 + depth);
    let half: f64 = (0..panels)
        .map(|k| integrate(&at, border(k), border(k + 1), tolerance))
        .sum();
    Ok(2.0 * half)
}
