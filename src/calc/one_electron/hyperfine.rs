//! Magnetic hyperfine structure, measured from the mean that [`super::levels`](mod@super) gives.
//!
//! First-order magnetic dipole with the Dirac factor of a point nucleus (Breit 1930, Phys. Rev. 35, 1447;
//! general n and κ: Pyykkö, Pajanne & Inokuti 1973, Int. J. Quantum Chem. 7, 785). S levels are scaled from the measured splitting of 1s,
//! which brings the nuclear and radiative corrections along; other levels are left with a relative 1 σ of
//! 2e-3 (anomalous moment, recoil). Mixing of j and nuclear quadrupole moments, a few kHz in D, are left out.

use vocabulary::atom::HalfInteger;
use vocabulary::light::constants::{FINE_STRUCTURE, RYDBERG_PER_CM, SPEED_OF_LIGHT_M_PER_S};

use super::dirac::State;
use super::error::OneElectronError;
use super::levels::checked_state;
use super::nucleus::Nucleus;

/// Proton mass over electron mass (CODATA 2022), the mass in the nuclear magneton.
const PROTON_ELECTRONS: f64 = 1_836.152_673_426;
/// cm⁻¹ per MHz.
const PER_CM_PER_MHZ: f64 = 1e6 / (SPEED_OF_LIGHT_M_PER_S * 100.0);
/// Relative 1 σ of the first-order formula.
const FIRST_ORDER: f64 = 2e-3;

/// Spin and magnetic moment of a nucleus.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct NuclearMoment {
    /// Spin I.
    pub spin: HalfInteger,
    /// Magnetic moment over the nuclear magneton.
    pub moment_magnetons: f64,
    /// Measured distance of F = I + ½ above F = I − ½ in 1s of the one-electron system, MHz, where measured.
    pub ground_splitting_mhz: Option<f64>,
}

impl NuclearMoment {
    /// Proton: moment of CODATA 2022; 1420.405 751 768 MHz (Hellwig et al. 1970; from memory).
    pub const PROTON: Self = Self::measured(1, 2.792_847_344_63, 1_420.405_751_768);
    /// Deuteron: 327.384 352 522 MHz (Wineland & Ramsey 1972; from memory).
    pub const DEUTERON: Self = Self::measured(2, 0.857_438_233_5, 327.384_352_522);
    /// Triton: 1516.701 470 773 MHz (Mathur, Crampton, Kleppner & Ramsey 1967; from memory).
    pub const TRITON: Self = Self::measured(1, 2.978_962_465, 1_516.701_470_773);
    /// Helion: −8665.649 867 MHz in ³He⁺ (Schuessler, Fortson & Dehmelt 1969; from memory).
    pub const HELION: Self = Self::measured(1, -2.127_625_35, -8_665.649_867);

    const fn measured(twice_spin: u16, moment_magnetons: f64, splitting_mhz: f64) -> Self {
        Self {
            spin: HalfInteger::from_twice(twice_spin),
            moment_magnetons,
            ground_splitting_mhz: Some(splitting_mhz),
        }
    }
}

/// One hyperfine level.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HyperfineLevel {
    /// Total angular momentum F.
    pub f: HalfInteger,
    /// Energy above the mean of the level n l j, cm⁻¹.
    pub shift_per_cm: f64,
    /// Its 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
}

/// The hyperfine levels of n l j (n ≤ 50) in order of F; a nucleus without spin leaves one, unshifted.
pub fn hyperfine_levels(
    nucleus: &Nucleus,
    moment: &NuclearMoment,
    n: u32,
    l: u32,
    j: HalfInteger,
) -> Result<Vec<HyperfineLevel>, OneElectronError> {
    let state = checked_state(n, l, j)?;
    let (spin, total) = (moment.spin.twice(), j.twice());
    let (constant, relative) = dipole_constant_per_cm(nucleus, moment, state);
    let square = |twice: u16| f64::from(twice) * f64::from(twice + 2) / 4.0;
    Ok((spin.abs_diff(total)..=spin + total)
        .step_by(2)
        .map(|twice| {
            let product = square(twice) - square(spin) - square(total);
            let shift_per_cm = 0.5 * constant * product;
            HyperfineLevel {
                f: HalfInteger::from_twice(twice),
                shift_per_cm,
                uncertainty_per_cm: shift_per_cm.abs() * relative,
            }
        })
        .collect())
}

/// The constant A of A I·J, cm⁻¹, and its relative 1 σ.
fn dipole_constant_per_cm(nucleus: &Nucleus, moment: &NuclearMoment, state: State) -> (f64, f64) {
    if moment.spin.twice() == 0 {
        return (0.0, 0.0);
    }
    let za = nucleus.charge() * FINE_STRUCTURE;
    let shape = dirac_factor(state, za);
    if let (true, Some(splitting)) = (state.is_s(), moment.ground_splitting_mhz) {
        // In 1s the interval is A (I + ½).
        let ground = splitting / (moment.spin.value() + 0.5);
        let ratio = shape / dirac_factor(State::new(1, 0, true), za);
        return (ground * PER_CM_PER_MHZ * ratio, 1e-6);
    }
    let g = moment.moment_magnetons / moment.spin.value();
    let j = f64::from(state.twice_j()) / 2.0;
    let front = FINE_STRUCTURE.powi(2) * nucleus.charge().powi(3) * RYDBERG_PER_CM * g
        / PROTON_ELECTRONS
        * nucleus.reduced_mass().powi(3);
    (
        2.0 * front * shape / (j * (j + 1.0)),
        FIRST_ORDER.hypot(za * za * 0.1),
    )
}

/// κ [2κ(γ + n_r) − N]/(N⁴ γ (4γ² − 1)), 1/(n³ (2l+1)) as Zα → 0.
fn dirac_factor(state: State, za: f64) -> f64 {
    let kappa = state.kappa_value();
    let gamma = (kappa * kappa - za * za).sqrt();
    let radial = state.n_value() - kappa.abs();
    let apparent = ((radial + gamma).powi(2) + za * za).sqrt();
    kappa * (2.0 * kappa * (gamma + radial) - apparent)
        / (apparent.powi(4) * gamma * (4.0 * gamma * gamma - 1.0))
}
