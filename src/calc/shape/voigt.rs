//! The Voigt profile of unit area.

use std::f64::consts::{FRAC_1_SQRT_2, PI};

use super::error::{ShapeError, not_negative};
use super::faddeeva::voigt_function;
use super::widths::{FWHM_PER_SIGMA, LineWidths};

/// 1/√(2π).
const INVERSE_SQRT_TWO_PI: f64 = 0.398_942_280_401_432_7;

/// A Gaussian of standard deviation σ convolved with a Lorentzian of half width γ (HWHM), of unit
/// area; a pure Gaussian or Lorentzian where one of them is zero. At least one is positive.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Voigt {
    sigma: f64,
    hwhm: f64,
    /// 1/(√2 σ), or 0 for a pure Lorentzian.
    inverse_width: f64,
    /// γ/(√2 σ).
    damping: f64,
}

impl Voigt {
    /// # Errors
    /// A width that is negative or not finite, or both zero.
    pub fn new(widths: LineWidths) -> Result<Self, ShapeError> {
        let sigma = not_negative("the Gaussian width", widths.sigma_nm)?;
        let hwhm = not_negative("the Lorentzian width", widths.hwhm_nm)?;
        if sigma == 0.0 && hwhm == 0.0 {
            return Err(ShapeError::NoWidth);
        }
        // Below 1e-12 of the Lorentzian the Gaussian changes nothing that f64 could show.
        let sigma = if sigma < 1e-12 * hwhm { 0.0 } else { sigma };
        let inverse_width = if sigma > 0.0 {
            FRAC_1_SQRT_2 / sigma
        } else {
            0.0
        };
        Ok(Self {
            sigma,
            hwhm,
            inverse_width,
            damping: hwhm * inverse_width,
        })
    }

    /// Density per nm at an offset (nm) from the centre. Relative error 1e-9 wings included.
    pub fn density(&self, offset_nm: f64) -> f64 {
        if self.sigma == 0.0 {
            return self.hwhm / PI / (offset_nm * offset_nm + self.hwhm * self.hwhm);
        }
        INVERSE_SQRT_TWO_PI / self.sigma
            * voigt_function(offset_nm * self.inverse_width, self.damping)
    }

    /// Density at the centre, per nm.
    pub fn peak(&self) -> f64 {
        self.density(0.0)
    }

    /// The widths that it was made of.
    pub fn widths(&self) -> LineWidths {
        LineWidths {
            sigma_nm: self.sigma,
            hwhm_nm: self.hwhm,
        }
    }

    /// Full width at half maximum, nm, to 1e-9 of itself: Newton steps on the profile from
    /// [`Voigt::fwhm_estimate`].
    pub fn fwhm(&self) -> f64 {
        let half = self.peak() / 2.0;
        let mut offset = self.fwhm_estimate() / 2.0;
        let step = 1e-5 * offset;
        for _ in 0..4 {
            let slope = (self.density(offset + step) - self.density(offset - step)) / (2.0 * step);
            offset -= (self.density(offset) - half) / slope;
        }
        2.0 * offset
    }

    /// FWHM by the closed form of J. J. Olivero & R. L. Longbothum 1977, J. Quant. Spectrosc.
    /// Radiat. Transfer 17, 233: 0.5346 f_L + √(0.2166 f_L² + f_G²), good to 0.02 %.
    pub fn fwhm_estimate(&self) -> f64 {
        let lorentz = 2.0 * self.hwhm;
        let gauss = FWHM_PER_SIGMA * self.sigma;
        0.5346 * lorentz + (0.2166 * lorentz * lorentz + gauss * gauss).sqrt()
    }
}
