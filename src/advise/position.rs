//! Where a line is shown: in air or in vacuum.

use vocabulary::light::{Air, Medium, PositionMedium, QuantityError};

/// A position in the medium that it is shown in.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Placed {
    /// Wavelength in that medium, nm.
    pub wavelength_nm: f64,
    /// 1 σ, nm.
    pub uncertainty_nm: f64,
    /// The medium.
    pub medium: PositionMedium,
    /// Vacuum wavelength, nm.
    pub vacuum_nm: f64,
    /// The index of air had to be extrapolated.
    pub extrapolated: bool,
}

/// Places a vacuum wavenumber (cm⁻¹) with its 1 σ in the medium asked for.
///
/// # Errors
/// Air beyond the bounds of its index.
pub fn placed(
    wavenumber_per_cm: f64,
    uncertainty_per_cm: f64,
    medium: Medium,
    air: &Air,
) -> Result<Placed, QuantityError> {
    let vacuum_nm = 1e7 / wavenumber_per_cm;
    let uncertainty_nm = vacuum_nm * uncertainty_per_cm / wavenumber_per_cm;
    let medium = medium.of_vacuum_nm(vacuum_nm);
    let (wavelength_nm, extrapolated) = match medium {
        PositionMedium::Vacuum => (vacuum_nm, false),
        PositionMedium::Air => {
            let index = air.index(vacuum_nm)?;
            (vacuum_nm / index.index, index.extrapolated)
        }
    };
    Ok(Placed {
        wavelength_nm,
        uncertainty_nm,
        medium,
        vacuum_nm,
        extrapolated,
    })
}

/// As [`placed`], in vacuum where the index of air is not known.
///
/// # Errors
/// None that [`placed`] has for vacuum.
pub(super) fn placed_or_vacuum(
    wavenumber_per_cm: f64,
    uncertainty_per_cm: f64,
    medium: Medium,
    air: &Air,
) -> Result<Placed, QuantityError> {
    placed(wavenumber_per_cm, uncertainty_per_cm, medium, air).or_else(|_| {
        let vacuum = Medium::Vacuum;
        placed(wavenumber_per_cm, uncertainty_per_cm, vacuum, air)
    })
}
