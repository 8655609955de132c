//! Optical filters and detectors: how much of the light of a wavelength is counted.
//!
//! Wavelengths here are those that the filter maker gives: air wavelengths in nm, at normal
//! incidence and room temperature. Callers keep to one medium.

mod cone;
mod curve;
mod detector;
mod error;
mod passband;

pub use cone::{Illumination, Rays, tilt_ratio};
pub use curve::{CurveUnit, SpectralCurve};
pub use detector::Detector;
pub use error::FilterError;
pub use passband::{Blocking, Filter, SeenFilter, Shape};
