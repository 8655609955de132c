//! What the rates of a level add up to: lifetimes, the black body, the polarisability.

use vocabulary::light::constants::{PER_CM_PER_KELVIN, RYDBERG_PER_CM};

use super::CoulombError;

/// A decay of the level, with its rate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Transition {
    /// Wavenumber, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// Spontaneous rate from the upper of the two levels, s⁻¹.
    pub rate_per_s: f64,
    /// 1 σ of the rate as a fraction.
    pub relative_uncertainty: f64,
    /// Weight of the other level over that of this one.
    pub weight_ratio: f64,
}

/// A lifetime with its uncertainty.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lifetime {
    /// Lifetime, s; infinite for a level that does not decay.
    pub seconds: f64,
    /// 1 σ as a fraction, the errors of the rates taken as independent.
    pub relative_uncertainty: f64,
}

fn of_rates(rates: impl Iterator<Item = (f64, f64)>) -> Lifetime {
    let (total, variance) = rates.fold((0.0, 0.0), |(total, variance), (rate, relative)| {
        (total + rate, variance + (rate * relative).powi(2))
    });
    Lifetime {
        seconds: 1.0 / total,
        relative_uncertainty: if total > 0.0 {
            f64::sqrt(variance) / total
        } else {
            0.0
        },
    }
}

/// Radiative lifetime without radiation around: one over the sum of all decays.
pub fn lifetime(decays: &[Transition]) -> Lifetime {
    of_rates(
        decays
            .iter()
            .map(|decay| (decay.rate_per_s, decay.relative_uncertainty)),
    )
}

/// Photons per mode of black-body radiation, `1/(e^(hcσ/kT) − 1)` (Planck).
///
/// # Errors
/// [`CoulombError::Temperature`] unless the temperature (K) is finite and positive.
pub fn photon_number(wavenumber_per_cm: f64, kelvin: f64) -> Result<f64, CoulombError> {
    if !kelvin.is_finite() || kelvin <= 0.0 {
        return Err(CoulombError::Temperature { kelvin });
    }
    Ok(1.0 / (wavenumber_per_cm / (kelvin * PER_CM_PER_KELVIN)).exp_m1())
}

/// Lifetime in black-body radiation of temperature T (K): each decay is stimulated by n̄, and the
/// level is lifted to each higher one at `A n̄ g′/g` (Gallagher & Cooke 1979, Phys. Rev. Lett. 42, 835).
/// Ionisation by the radiation is not counted; it is a small part of the black body's
/// (Farley & Wing 1981, Phys. Rev. A 23, 2397).
///
/// # Errors
/// [`CoulombError::Temperature`] unless the temperature is finite and positive.
pub fn black_body_lifetime(
    decays: &[Transition],
    excitations: &[Transition],
    kelvin: f64,
) -> Result<Lifetime, CoulombError> {
    photon_number(1.0, kelvin)?;
    let photons =
        |t: &Transition| 1.0 / (t.wavenumber_per_cm / (kelvin * PER_CM_PER_KELVIN)).exp_m1();
    let down = decays
        .iter()
        .map(|t| (t.rate_per_s * (1.0 + photons(t)), t.relative_uncertainty));
    let up = excitations.iter().map(|t| {
        (
            t.rate_per_s * t.weight_ratio * photons(t),
            t.relative_uncertainty,
        )
    });
    Ok(of_rates(down.chain(up)))
}

/// Dipole coupling of a level to another.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Coupling {
    /// Line strength, e² a₀².
    pub strength_e2_a0_2: f64,
    /// Energy of the other level less that of this one, cm⁻¹: negative for a lower one.
    pub above_per_cm: f64,
}

/// Scalar static polarisability, a₀³, of a level of weight g: `(2/3g) Σ S/(E′ − E)` with energies in
/// hartree (second-order perturbation theory; Bonin & Kresin 1997, *Electric-Dipole Polarizabilities*).
/// Sum over the bound levels given; the continuum and the core are left out.
pub fn scalar_polarisability_a0_3(weight: f64, couplings: &[Coupling]) -> f64 {
    let sum: f64 = couplings
        .iter()
        .map(|c| c.strength_e2_a0_2 * 2.0 * RYDBERG_PER_CM / c.above_per_cm)
        .sum();
    2.0 / (3.0 * weight) * sum
}

/// Scale of the polarisability of a Rydberg level: `ν⁷ a₀³ / Z_c⁴`, the product of the squared orbit (ν⁴) and
/// the inverse spacing of neighbours (ν³). It says how the polarisability grows along a series; its factor depends on
/// the series and on its fine structure (scaling laws: Gallagher 1994, *Rydberg Atoms*).
pub fn polarisability_scale_a0_3(effective: f64, core_charge: u32) -> f64 {
    effective.powi(7) / f64::from(core_charge).powi(4)
}
