//! Thermal energies and Boltzmann factors.

use vocabulary::light::constants::{PER_CM_PER_EV, PER_CM_PER_KELVIN};

use super::error::{PlasmaError, positive};

/// k T in cm⁻¹ of a temperature in kelvin.
///
/// # Errors
/// A temperature that is not positive and finite.
pub fn kt_per_cm_from_kelvin(temperature_k: f64) -> Result<f64, PlasmaError> {
    Ok(positive("the temperature in K", temperature_k)? * PER_CM_PER_KELVIN)
}

/// k T in cm⁻¹ of a temperature in eV.
///
/// # Errors
/// A temperature that is not positive and finite.
pub fn kt_per_cm_from_ev(temperature_ev: f64) -> Result<f64, PlasmaError> {
    Ok(positive("the temperature in eV", temperature_ev)? * PER_CM_PER_EV)
}

/// Population of an upper over that of a lower level in equilibrium:
/// (g_u/g_l) e^(−ΔE/kT) (Boltzmann). Energies in cm⁻¹.
pub fn boltzmann_ratio(
    upper_weight: f64,
    lower_weight: f64,
    difference_per_cm: f64,
    kt_per_cm: f64,
) -> f64 {
    upper_weight / lower_weight * (-difference_per_cm / kt_per_cm).exp()
}
