//! Everything that follows from one spectral quantity.

use super::constants::{ELEMENTARY_CHARGE_C, PER_CM_PER_EV, PLANCK_J_S, SPEED_OF_LIGHT_M_PER_S};
use super::{Air, Medium, PositionMedium, QuantityError, SpectralQuantity};

/// One position in every form.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Conversion {
    /// Vacuum wavelength, nm.
    pub vacuum_wavelength_nm: f64,
    /// Wavelength in air, nm; `None` outside the bounds of the index of air (185–2500 nm).
    pub air_wavelength_nm: Option<f64>,
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// Frequency, THz.
    pub frequency_thz: f64,
    /// Photon energy, eV.
    pub energy_ev: f64,
    /// Photon momentum h/λ in vacuum, kg m/s.
    pub momentum_kg_m_per_s: f64,
    /// Medium in which a wavelength was read; `None` for another kind of quantity.
    pub read_in: Option<PositionMedium>,
    /// The index of air was extrapolated (outside 300–1690 nm).
    pub air_extrapolated: bool,
    /// No unit was typed: nm was assumed.
    pub unit_assumed: bool,
}

impl Conversion {
    /// Converts a typed quantity.
    ///
    /// # Errors
    /// A wavelength in air outside the bounds of the index of air.
    pub fn of(
        quantity: SpectralQuantity,
        medium: Medium,
        air: &Air,
    ) -> Result<Self, QuantityError> {
        let wavenumber_per_cm = quantity.wavenumber_per_cm(medium, air)?;
        let vacuum_wavelength_nm = 1e7 / wavenumber_per_cm;
        let in_air = air.to_air_nm(vacuum_wavelength_nm).ok();
        Ok(Self {
            vacuum_wavelength_nm,
            air_wavelength_nm: in_air.map(|found| found.nm),
            wavenumber_per_cm,
            frequency_thz: wavenumber_per_cm * SPEED_OF_LIGHT_M_PER_S * 1e-10,
            energy_ev: wavenumber_per_cm / PER_CM_PER_EV,
            momentum_kg_m_per_s: PLANCK_J_S * wavenumber_per_cm * 100.0,
            read_in: quantity.read_in(medium),
            air_extrapolated: in_air.is_some_and(|found| found.extrapolated),
            unit_assumed: quantity.unit_assumed,
        })
    }
}

/// Longest vacuum wavelength (nm) whose photons free electrons from a surface with a work function
/// (eV, above zero): λ = h c / W (Einstein 1905, Ann. Phys. 322, 132).
pub fn photoelectric_threshold_nm(work_function_ev: f64) -> f64 {
    1e9 * PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S / (work_function_ev * ELEMENTARY_CHARGE_C)
}
