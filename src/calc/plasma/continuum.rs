//! The free–free continuum of a plasma.

use std::f64::consts::{LN_10, PI};

use vocabulary::light::constants::{
    BOLTZMANN_J_PER_K, ELECTRON_MASS_KG, FINE_STRUCTURE, PER_CM_PER_KELVIN, PLANCK_J_S,
    RYDBERG_PER_CM, SPEED_OF_LIGHT_M_PER_S,
};

use super::error::{PlasmaError, positive};
use super::gaunt_table::LN_GAUNT;

/// Free–free emission coefficient, W m⁻³ sr⁻¹ nm⁻¹, at a vacuum wavelength (nm) of electrons of
/// density n_e and k T (cm⁻¹) on ions of charge z and density n_i (m⁻³): (c/λ²)(1/4π)(32π/3) (α
/// ħ)³/m² √(2π m/(3 kT)) z² n_e n_i g e^(−hν/kT) (H. A. Kramers 1923, Phil. Mag. 46, 836; G. B.
/// Rybicki & A. P. Lightman 1979, eq. 5.14).
///
/// Maxwellian, non-relativistic (k T below some 10 keV), optically thin; Gaunt factor of
/// [`free_free_gaunt`]. Recombination into bound levels and collisions with neutral atoms add to it
/// and are *not* in it: below k T of about z² 5 eV the continuum is stronger than this.
///
/// # Errors
/// A wavelength, temperature or density that is not positive.
pub fn free_free_w_per_m3_sr_nm(
    vacuum_nm: f64,
    kt_per_cm: f64,
    ion_charge: u8,
    electron_density_per_m3: f64,
    ion_density_per_m3: f64,
) -> Result<f64, PlasmaError> {
    let nm = positive("the wavelength in nm", vacuum_nm)?;
    let kt = positive("k T in per cm", kt_per_cm)?;
    let electrons = positive("the electron density per m³", electron_density_per_m3)?;
    let ions = positive("the ion density per m³", ion_density_per_m3)?;
    let z = f64::from(ion_charge);
    if ion_charge == 0 {
        return Ok(0.0);
    }
    let u = 1e7 / nm / kt;
    let gaunt = free_free_gaunt(z * z * RYDBERG_PER_CM / kt, u);
    let kt_j = kt / PER_CM_PER_KELVIN * BOLTZMANN_J_PER_K;
    let action = FINE_STRUCTURE * PLANCK_J_S / (2.0 * PI) / ELECTRON_MASS_KG;
    let per_hz = 8.0 / 3.0
        * (action * action * FINE_STRUCTURE * PLANCK_J_S / (2.0 * PI))
        * (2.0 * PI * ELECTRON_MASS_KG / (3.0 * kt_j)).sqrt()
        * (-u).exp();
    let hz_per_nm = SPEED_OF_LIGHT_M_PER_S * 1e9 / (nm * nm);
    Ok(per_hz * hz_per_nm * z * z * electrons * ions * gaunt)
}

const FIRST: (f64, f64) = (-3.0, -4.0);
const STEP: f64 = 0.5;

/// Free–free Gaunt factor, the mean over Maxwellian electrons, for γ² = z² R/kT and u = hν/kT.
///
/// A. Sommerfeld 1931, Ann. Phys. 403, 257, averaged as W. J. Karzas & R. Latter 1961, Astrophys.
/// J. Suppl. 6, 167 (the averages of P. A. M. van Hoof et al. 2014, MNRAS 444, 420 are the same
/// quantity). Tabulated for γ² 1e-3–1e3 and u 1e-4–32, cubic between, 0.3 %; hotter plasmas take
/// the value at 1e-3 (up to 4 % more), colder ones that at 1e3 (10 %), lower u continues as −(√3/π)
/// ln u, higher u takes that at 32.
pub fn free_free_gaunt(gamma2: f64, u: f64) -> f64 {
    let row = (gamma2.log10() - FIRST.0) / STEP;
    let column = (u.log10() - FIRST.1) / STEP;
    let row = row.clamp(0.0, (LN_GAUNT.len() - 1) as f64);
    let inside = column.clamp(0.0, (LN_GAUNT[0].len() - 1) as f64);
    let across = LN_GAUNT.map(|values| cubic(&values, inside));
    let value = cubic(&across, row).exp();
    if column < 0.0 {
        return value - 3_f64.sqrt() / PI * LN_10 * STEP * column;
    }
    value
}

/// Lagrange's cubic through the four points around `position` (in steps).
fn cubic(values: &[f64], position: f64) -> f64 {
    let start = (position.floor() as usize)
        .saturating_sub(1)
        .min(values.len() - 4);
    let t = position - start as f64;
    let weights = [
        -(t - 1.0) * (t - 2.0) * (t - 3.0) / 6.0,
        t * (t - 2.0) * (t - 3.0) / 2.0,
        -t * (t - 1.0) * (t - 3.0) / 2.0,
        t * (t - 1.0) * (t - 2.0) / 6.0,
    ];
    weights
        .iter()
        .zip(&values[start..])
        .map(|(w, v)| w * v)
        .sum()
}
