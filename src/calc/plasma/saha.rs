//! Ionisation in thermal equilibrium.

use std::f64::consts::PI;

use vocabulary::light::constants::{
    BOLTZMANN_J_PER_K, ELECTRON_MASS_KG, PER_CM_PER_KELVIN, PLANCK_J_S,
};

use super::error::{PlasmaError, positive};

/// One stage of ionisation as the balance needs it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Stage {
    /// Partition function U.
    pub partition: f64,
    /// Ionisation energy into the next stage, cm⁻¹, lowered where the plasma lowers it
    /// ([`super::Partition::limit_per_cm`]). `None` only for the last stage of the list.
    pub limit_per_cm: Option<f64>,
}

/// ln of n₊ n_e/n (m⁻³): 2 (2π m kT/h²)^(3/2) (U₊/U) e^(−χ/kT)
/// (M. N. Saha 1921, Proc. R. Soc. A 99, 135; form of Mihalas, *Stellar Atmospheres*, 2nd ed.
/// 1978, equation 5-14).
///
/// Equilibrium at one temperature; non-relativistic, non-degenerate electrons: k T well below
/// 511 keV and n_e below the factor 2 (2π m kT/h²)^(3/2), 3e27 m⁻³ at 1 eV.
///
/// # Errors
/// A partition function or k T that is not positive; an ionisation energy that is not.
pub fn ln_saha_ratio(
    lower: Stage,
    upper_partition: f64,
    kt_per_cm: f64,
) -> Result<f64, PlasmaError> {
    let kt_per_cm = positive("k T in per cm", kt_per_cm)?;
    let u = positive("a partition function", lower.partition)?;
    let u_next = positive("a partition function", upper_partition)?;
    let limit = lower
        .limit_per_cm
        .ok_or(PlasmaError::NoLimit { stage: 1 })?;
    if !limit.is_finite() {
        return Err(PlasmaError::NotPositive {
            quantity: "the ionisation energy in per cm",
            value: limit,
        });
    }
    let kt_j = kt_per_cm / PER_CM_PER_KELVIN * BOLTZMANN_J_PER_K;
    let inverse_cube = 2.0 * PI * ELECTRON_MASS_KG * kt_j / (PLANCK_J_S * PLANCK_J_S);
    Ok((2.0 * u_next / u).ln() + 1.5 * inverse_cube.ln() - limit / kt_per_cm)
}

/// n₊ n_e/n in m⁻³, see [`ln_saha_ratio`].
///
/// # Errors
/// As [`ln_saha_ratio`].
pub fn saha_ratio(lower: Stage, upper_partition: f64, kt_per_cm: f64) -> Result<f64, PlasmaError> {
    ln_saha_ratio(lower, upper_partition, kt_per_cm).map(f64::exp)
}

/// Fractions of an element in each stage, summing to 1, in a plasma of this electron density (m⁻³).
/// Computed with logarithms, so that nothing overflows however cold, hot or thin the plasma is.
///
/// # Errors
/// As [`ln_saha_ratio`]; a stage other than the last without an ionisation energy.
pub fn ionisation_balance(
    stages: &[Stage],
    kt_per_cm: f64,
    electron_density_per_m3: f64,
) -> Result<Vec<f64>, PlasmaError> {
    let density = positive("the electron density per m³", electron_density_per_m3)?;
    let mut logs = Vec::with_capacity(stages.len());
    let mut log = 0.0;
    for (index, stage) in stages.iter().enumerate() {
        logs.push(log);
        if let Some(next) = stages.get(index + 1) {
            if stage.limit_per_cm.is_none() {
                return Err(PlasmaError::NoLimit { stage: index + 1 });
            }
            log += ln_saha_ratio(*stage, next.partition, kt_per_cm)? - density.ln();
        }
    }
    Ok(fractions(&logs))
}

/// Fractions that sum to 1 from logarithms of relative amounts.
pub(super) fn fractions(logs: &[f64]) -> Vec<f64> {
    let top = logs.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let total: f64 = logs.iter().map(|l| (l - top).exp()).sum();
    logs.iter().map(|l| (l - top).exp() / total).collect()
}
