//! Filters: a passband, what blocks the rest, and how both move.

use std::f64::consts::LN_2;
use std::sync::Arc;

use super::cone::{Illumination, Rays};
use super::curve::SpectralCurve;
use super::error::{FilterError, inside};
use crate::calc::shape::{LineWidths, ShapeError, Voigt, integrate};

/// The form of a passband.
#[derive(Clone, Debug, PartialEq)]
pub enum Shape {
    /// Interference filter of N equal cavities: T = T₀/(1 + (2Δ/FWHM)^(2N)). For N = 1 it is the
    /// Lorentzian of a narrow Fabry–Pérot. Maximally flat form; H. A. Macleod, *Thin-Film Optical
    /// Filters*, chapter on band-pass filters (from memory). Ripple on top and the skirts'
    /// asymmetry are not modelled.
    Cavities(u8),
    /// A Gaussian.
    Gaussian,
    /// Full transmission over the FWHM, none outside.
    Rectangular,
    /// A measured curve of transmission.
    Measured(SpectralCurve),
}

/// What a filter lets through outside its passband, as its maker promises.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Blocking {
    /// Optical density: transmission is at most 10^(−OD).
    pub optical_density: f64,
    /// From here …
    pub from_nm: f64,
    /// … to here, nm; nothing is known outside.
    pub to_nm: f64,
}

/// A filter at normal incidence and at the temperature that it is specified for.
#[derive(Clone, Debug, PartialEq)]
pub struct Filter {
    shape: Shape,
    centre_nm: f64,
    fwhm_nm: f64,
    peak: f64,
    blocking: Option<Blocking>,
    effective_index: f64,
    drift_nm_per_k: f64,
}

/// Effective index assumed where none is given: common practice gives 1.45 to 2.1 by the spacer's
/// material.
const USUAL_INDEX: f64 = 2.0;

impl Filter {
    /// A filter of given centre, full width at half maximum (nm) and peak transmission (0–1), with
    /// effective index 2.0, no drift, and its wings as the shape has them.
    ///
    /// # Errors
    /// A centre, width or peak out of range; no cavities; a measured shape ([`Filter::measured`]
    /// takes those).
    pub fn new(shape: Shape, centre_nm: f64, fwhm_nm: f64, peak: f64) -> Result<Self, FilterError> {
        let positive = (f64::MIN_POSITIVE, f64::MAX);
        let centre_nm = inside("the centre in nm", centre_nm, positive, "above 0")?;
        let fwhm_nm = inside(
            "the width (FWHM) in nm",
            fwhm_nm,
            (f64::MIN_POSITIVE, centre_nm),
            "above 0 and below the centre",
        )?;
        let peak = inside(
            "the peak transmission",
            peak,
            (f64::MIN_POSITIVE, 1.0),
            "above 0 and at most at 1 (100 %)",
        )?;
        if let Shape::Cavities(n) = shape {
            inside(
                "the number of cavities",
                f64::from(n),
                (1.0, 20.0),
                "between 1 and 20",
            )?;
        }
        if let Shape::Measured(curve) = shape {
            return Ok(Self::measured(curve));
        }
        Ok(Self {
            shape,
            centre_nm,
            fwhm_nm,
            peak,
            blocking: None,
            effective_index: USUAL_INDEX,
            drift_nm_per_k: 0.0,
        })
    }

    /// A filter from its measured transmission. Centre and width follow from its half points.
    pub fn measured(curve: SpectralCurve) -> Self {
        let (low, high) = curve.half_points_nm();
        Self {
            centre_nm: f64::midpoint(low, high),
            fwhm_nm: high - low,
            peak: curve.peak().1,
            shape: Shape::Measured(curve),
            blocking: None,
            effective_index: USUAL_INDEX,
            drift_nm_per_k: 0.0,
        }
    }

    /// With out-of-band blocking.
    ///
    /// # Errors
    /// An optical density outside 0–20, or limits that do not enclose the centre.
    pub fn with_blocking(mut self, blocking: Blocking) -> Result<Self, FilterError> {
        inside(
            "the optical density",
            blocking.optical_density,
            (0.0, 20.0),
            "between 0 and 20",
        )?;
        inside(
            "the start of the blocking in nm",
            blocking.from_nm,
            (0.0, self.centre_nm),
            "between 0 and the centre",
        )?;
        inside(
            "the end of the blocking in nm",
            blocking.to_nm,
            (self.centre_nm, f64::MAX),
            "above the centre",
        )?;
        self.blocking = Some(blocking);
        Ok(self)
    }

    /// With an effective index for tilt.
    ///
    /// # Errors
    /// An index outside 0.5–10.
    pub fn with_effective_index(mut self, index: f64) -> Result<Self, FilterError> {
        self.effective_index = inside(
            "the effective index",
            index,
            (0.5, 10.0),
            "between 0.5 and 10",
        )?;
        Ok(self)
    }

    /// With a drift of the centre per kelvin (common practice: +0.01 to +0.03 nm/K).
    ///
    /// # Errors
    /// A drift beyond ±1 nm/K.
    pub fn with_drift(mut self, nm_per_k: f64) -> Result<Self, FilterError> {
        self.drift_nm_per_k = inside(
            "the drift in nm per K",
            nm_per_k,
            (-1.0, 1.0),
            "between -1 and 1",
        )?;
        Ok(self)
    }

    /// The form of the passband.
    pub fn shape(&self) -> &Shape {
        &self.shape
    }

    /// Centre at normal incidence, nm.
    pub fn centre_nm(&self) -> f64 {
        self.centre_nm
    }

    /// Full width at half maximum, nm.
    pub fn fwhm_nm(&self) -> f64 {
        self.fwhm_nm
    }

    /// Highest transmission, 0–1.
    pub fn peak(&self) -> f64 {
        self.peak
    }

    /// The filter as it acts in this light.
    ///
    /// # Errors
    /// An angle beyond total reflection, an f-number of 0.5 or less, a temperature that is no
    /// number.
    pub fn seen(&self, light: Illumination) -> Result<SeenFilter<'_>, FilterError> {
        self.behind(&Rays::new(light, self.effective_index)?, light.warming_k)
    }

    /// The filter behind rays that were made for its effective index, warmed by so many kelvin.
    ///
    /// # Errors
    /// A temperature difference beyond ±1000 K.
    pub fn behind(&self, rays: &Rays, warming_k: f64) -> Result<SeenFilter<'_>, FilterError> {
        let warming_k = inside(
            "the warming in K",
            warming_k,
            (-1000.0, 1000.0),
            "between -1000 and 1000",
        )?;
        // Rays that differ by 1/1000 of the width are one ray.
        let ratios = rays.merged(1e-3 * self.fwhm_nm / self.centre_nm);
        Ok(SeenFilter {
            filter: self,
            ratios,
            drift_nm: self.drift_nm_per_k * warming_k,
        })
    }

    /// Effective index for tilt.
    pub fn effective_index(&self) -> f64 {
        self.effective_index
    }

    /// Transmission of one ray, at the wavelength that it would have at normal incidence.
    fn head_on(&self, wavelength_nm: f64) -> Option<f64> {
        let offset = 2.0 * (wavelength_nm - self.centre_nm) / self.fwhm_nm;
        match &self.shape {
            Shape::Cavities(n) => Some(self.peak / (1.0 + offset.powi(2 * i32::from(*n)))),
            Shape::Gaussian => Some(self.peak * (-LN_2 * offset * offset).exp()),
            Shape::Rectangular => Some(if offset.abs() <= 1.0 { self.peak } else { 0.0 }),
            Shape::Measured(curve) => curve.at(wavelength_nm),
        }
    }
}

/// A filter in a given light.
#[derive(Clone, Debug)]
pub struct SeenFilter<'a> {
    filter: &'a Filter,
    ratios: Arc<[f64]>,
    drift_nm: f64,
}

impl SeenFilter<'_> {
    /// Transmission at a wavelength (nm), 0–1, the mean over all rays.
    ///
    /// Inside the blocking's limits it is never taken below 10^(−OD): an upper bound of what leaks.
    /// `None` where nothing is known: outside those limits, or outside a measured curve that no
    /// blocking extends.
    pub fn transmission(&self, wavelength_nm: f64) -> Option<f64> {
        let floor = match self.filter.blocking {
            Some(b) if (b.from_nm..=b.to_nm).contains(&wavelength_nm) => {
                Some(10_f64.powf(-b.optical_density))
            }
            Some(_) => return None,
            None => None,
        };
        let mut sum = 0.0;
        for ratio in self.ratios.iter() {
            let there = self.filter.head_on((wavelength_nm - self.drift_nm) / ratio);
            sum += there.or(floor)?;
        }
        Some((sum / self.ratios.len() as f64).max(floor.unwrap_or(0.0)))
    }

    /// Mean transmission over a line of these widths at a wavelength (nm), to 1e-6: the part of the
    /// line's light that passes. Light of its wings where the filter is not known counts as
    /// blocked.
    ///
    /// # Errors
    /// Widths that are negative or not finite.
    pub fn line_transmission(
        &self,
        wavelength_nm: f64,
        widths: LineWidths,
    ) -> Result<Option<f64>, ShapeError> {
        let Some(centre) = self.transmission(wavelength_nm) else {
            return Ok(None);
        };
        if widths == LineWidths::default() {
            return Ok(Some(centre));
        }
        let line = Voigt::new(widths)?;
        // A Gaussian sees a filter 1000 times wider as flat, to 1e-6 of curvature; the wings of a
        // Lorentzian must be narrower still, as they fall off with its width over the filter's.
        let narrow = |width_nm: f64, times: f64| width_nm * times < self.filter.fwhm_nm;
        if narrow(widths.sigma_nm, 1e3) && narrow(widths.hwhm_nm, 1e6) {
            return Ok(Some(centre));
        }
        let scale = widths.largest();
        // Offset = scale · tan θ reaches all of a Lorentzian's wings.
        let f = |theta: f64| {
            let tangent = theta.tan();
            let there = self.transmission(wavelength_nm + scale * tangent);
            let weight = line.density(scale * tangent) * scale * (1.0 + tangent * tangent);
            there.unwrap_or(0.0) * weight
        };
        // Not to ±90°, where the tangent ends: what is left out is below 1e-7 of the line.
        let edge = std::f64::consts::FRAC_PI_2 - 1e-7;
        let steps = 16;
        let border = |k: u32| -edge + 2.0 * edge * f64::from(k) / f64::from(steps);
        let sum = (0..steps).map(|k| integrate(&f, border(k), border(k + 1), 1e-8));
        Ok(Some(sum.sum()))
    }

    /// The same passband moved by so many nm, as drift or a maker's tolerance moves it.
    pub fn shifted(mut self, by_nm: f64) -> Self {
        self.drift_nm += by_nm;
        self
    }

    /// Where the centre of the passband lies in this light, nm.
    pub fn centre_nm(&self) -> f64 {
        let mean = self.ratios.iter().sum::<f64>() / self.ratios.len() as f64;
        self.filter.centre_nm * mean + self.drift_nm
    }
}
