//! Line shapes: what broadens a line, its profile, and what an instrument makes of it.
//!
//! A line is a Voigt profile (Gaussian ⊗ Lorentzian) of unit area. The Gaussian part is Doppler
//! broadening; the Lorentzian part sums natural and pressure broadening. An [`Instrument`] of unit
//! area and zero mean offset blurs it further. All widths and offsets of one profile share one
//! unit; the names say nm.

mod error;
mod faddeeva;
mod instrument;
mod neutral;
mod pressure;
mod profile;
mod quadrature;
mod stark;
mod voigt;
mod widths;

pub use error::ShapeError;
pub use faddeeva::{faddeeva, voigt_function};
pub use instrument::{Instrument, ResponseCurve};
pub use neutral::{
    Perturbers, ResonanceLine, polarisability_a0_cubed, resonance_width, van_der_waals,
};
pub use pressure::{OuterElectron, PressureWidth, WidthMethod};
pub use profile::{Profile, overlap};
pub(crate) use quadrature::integrate;
pub use stark::{hydrogen_stark, quadratic_stark};
pub use voigt::Voigt;
pub use widths::{
    FWHM_PER_SIGMA, LineWidths, doppler_sigma_relative, natural_fwhm_hz, wavelength_width_nm,
};
