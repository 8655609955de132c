//! How the charges of a plasma lower its ionisation energies.

use std::f64::consts::PI;

use vocabulary::light::constants::{
    ELEMENTARY_CHARGE_C, PER_CM_PER_EV, VACUUM_PERMITTIVITY_F_PER_M as PERMITTIVITY,
};

/// Debye length (m) of electrons and singly charged ions of the same temperature:
/// √(ε₀ kT/(2 n_e e²)). `kt_per_cm` in cm⁻¹, density in m⁻³.
pub fn debye_length_m(kt_per_cm: f64, electron_density_per_m3: f64) -> f64 {
    // k T in joules over e² is (k T in eV)/e.
    let volts = kt_per_cm / PER_CM_PER_EV;
    (PERMITTIVITY * volts / (2.0 * electron_density_per_m3 * ELEMENTARY_CHARGE_C)).sqrt()
}

/// Lowering of the ionisation energy (cm⁻¹) of an ion of net charge `charge` in a plasma.
///
/// J. C. Stewart & K. D. Pyatt 1966, Astrophys. J. 144, 1203, equation 22:
/// ΔI/kT = ([3 (z* + 1) K + 1]^(2/3) − 1)/(2 (z* + 1)), K = z e²/(4π ε₀ λ_D kT), z = charge + 1,
/// with perturbers of mean charge z* = 1. It goes over into the Debye–Hückel value z e²/(4π ε₀ λ_D)
/// when thin and into the ion-sphere value when dense. Other models differ by up to
/// a factor 2 where it is dense; where thin the lowering is small against kT.
pub fn lowering_per_cm(kt_per_cm: f64, electron_density_per_m3: f64, charge: u8) -> f64 {
    let core = f64::from(charge) + 1.0;
    let debye_m = debye_length_m(kt_per_cm, electron_density_per_m3);
    let coulomb_ev = ELEMENTARY_CHARGE_C / (4.0 * PI * PERMITTIVITY * debye_m);
    let coupling = core * coulomb_ev * PER_CM_PER_EV / kt_per_cm;
    // ((6 K + 1)^(2/3) − 1)/4, without cancellation when K is small.
    kt_per_cm * ((6.0 * coupling).ln_1p() * 2.0 / 3.0).exp_m1() / 4.0
}
