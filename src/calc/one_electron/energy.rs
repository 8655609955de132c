//! The energy of one level with its uncertainty, split by what levels have in common.
//! Formulas: Mohr & Taylor 2000, Rev. Mod. Phys. 72, 351, appendix A; Tiesinga et al. 2021, Rev. Mod.
//! Phys. 93, 025010; nuclear size: Shabaev 1993, J. Phys. B 26, 1103.

use std::f64::consts::{LN_2, PI};

use vocabulary::light::constants::{FINE_STRUCTURE, RYDBERG_PER_CM, SPEED_OF_LIGHT_M_PER_S};

use super::bethe::bethe_logarithm;
use super::dirac::{State, origin_density, with_recoil};
use super::nucleus::Nucleus;
use super::qed::{Setting, harmonic, radiative};

/// Reduced Compton wavelength of the electron, fm: α a₀.
const COMPTON_FM: f64 = 386.159_267_44;
/// Relative 1 σ of the Rydberg constant (CODATA 2022).
const RYDBERG_RELATIVE: f64 = 1.1e-12;
/// cm⁻¹ per kHz.
const PER_CM_PER_KHZ: f64 = 1e3 / (SPEED_OF_LIGHT_M_PER_S * 100.0);

/// The energy of a bound level.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Energy {
    /// Energy needed to take the electron away, cm⁻¹, positive; mean over hyperfine structure.
    pub binding_per_cm: f64,
    /// Its 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
}

/// 1 σ of a level energy by origin, cm⁻¹. The first four move all levels together, by these (signed)
/// amounts per σ; so a difference of levels knows what cancels.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Budget {
    /// Rydberg constant and nuclear mass.
    scale: f64,
    /// Charge radius.
    radius: f64,
    /// Radiative theory, common to one κ.
    radiative: f64,
    /// Recoil and nuclear theory.
    recoil: f64,
    kappa: i32,
    /// This level alone.
    own: f64,
}

impl Budget {
    pub fn total(&self) -> f64 {
        [
            self.scale,
            self.radius,
            self.radiative,
            self.recoil,
            self.own,
        ]
        .iter()
        .map(|part| part * part)
        .sum::<f64>()
        .sqrt()
    }

    /// 1 σ of the difference of two levels of one nucleus.
    pub fn of_difference(&self, other: &Self) -> f64 {
        let radiative = if self.kappa == other.kappa {
            self.radiative - other.radiative
        } else {
            self.radiative.hypot(other.radiative)
        };
        let parts = [
            self.scale - other.scale,
            self.radius - other.radius,
            radiative,
            self.recoil - other.recoil,
            self.own,
            other.own,
        ];
        parts.iter().map(|part| part * part).sum::<f64>().sqrt()
    }
}

/// Binding energy, cm⁻¹, and where its uncertainty comes from.
pub(super) fn binding(nucleus: &Nucleus, state: State) -> (f64, Budget) {
    let charge = nucleus.charge();
    let za = charge * FINE_STRUCTURE;
    let setting = Setting {
        state,
        charge,
        za,
        reduced: nucleus.reduced_mass(),
    };
    let rest = 2.0 * RYDBERG_PER_CM / FINE_STRUCTURE.powi(2);
    let main = rest * with_recoil(state, za, nucleus.mass_electrons);
    let unit = rest * za.powi(4) / state.n_value().powi(3);
    let loops = radiative(&setting);
    let loop_unit = unit * FINE_STRUCTURE / PI;
    let recoil = unit * recoil(nucleus, &setting);
    let (size, size_relative) = nuclear_size(nucleus, &setting);
    let small = unit * small_recoil(nucleus, &setting);
    let polarisation = polarisation(nucleus, state);
    let energy = main + loop_unit * loops.value + recoil + rest * size + small + polarisation.0;
    let mass_share = nucleus.mass_relative_uncertainty / (1.0 + nucleus.mass_electrons);
    let recoil_doubt = unit * recoil_doubt(nucleus, &setting);
    let budget = Budget {
        scale: main * RYDBERG_RELATIVE.hypot(mass_share),
        radius: rest * size * size_relative,
        radiative: loop_unit * loops.shared,
        recoil: recoil_doubt.hypot(polarisation.1),
        kappa: state.kappa,
        own: (loop_unit * loops.own).hypot(0.1 * recoil_doubt),
    };
    (-energy, budget)
}

/// Relativistic recoil of order (Zα)⁵, (Zα)⁶ and (Zα)⁷ ln², per (Zα)⁴/n³ m_e c² (Salpeter 1952; Erickson
/// 1977; Golosov, Elkhovskii, Milstein & Khriplovich 1995; Pachucki & Karshenboim 1999).
fn recoil(nucleus: &Nucleus, setting: &Setting) -> f64 {
    let Setting {
        state, za, reduced, ..
    } = *setting;
    let mass = nucleus.mass_electrons;
    let l = state.l_value();
    let n = state.n_value();
    let log = -(za * za).ln();
    let bethe = 8.0 / 3.0 * bethe_logarithm(state.n, state.l);
    let (inner, d60, d72) = if state.is_s() {
        let a_n = -2.0 * ((2.0 / n).ln() + harmonic(state.n) + 1.0 - 0.5 / n);
        let mass_logs =
            2.0 / (mass * mass - 1.0) * (-mass * mass * reduced.ln() - (mass / reduced).ln());
        let inner = log / 3.0 - bethe - 1.0 / 9.0 - 7.0 / 3.0 * a_n - mass_logs;
        (inner, 4.0 * LN_2 - 3.5, -11.0 / (60.0 * PI))
    } else {
        let a_n = 1.0 / (l * (l + 1.0) * (2.0 * l + 1.0));
        let d60 = (3.0 - l * (l + 1.0) / (n * n)) * 2.0 / ((4.0 * l * l - 1.0) * (2.0 * l + 3.0));
        (-bethe - 7.0 / 3.0 * a_n, d60, 0.0)
    };
    let fifth = reduced.powi(3) / (PI * mass) * za * inner;
    fifth + za * za / mass * (d60 + d72 * za * log * log)
}

/// 1 σ of the recoil terms: 6 (Zα)³ m/M for S, a hundredth of it and less beyond; covers the all-order
/// result for hydrogen-like uranium (Artemyev, Shabaev & Yerokhin 1995, Phys. Rev. A 52, 1884).
fn recoil_doubt(nucleus: &Nucleus, setting: &Setting) -> f64 {
    let share = match setting.state.l {
        0 => 1.0,
        1 => 0.1,
        l => 0.05 / f64::from(l * l),
    };
    let radiative = if setting.state.is_s() {
        0.1 * FINE_STRUCTURE * setting.za
    } else {
        0.0
    };
    (6.0 * setting.za.powi(3) * share).hypot(radiative) / nucleus.mass_electrons
}

/// The corrections of second order in the nuclear mass and of α (Zα)⁵ m/M, per (Zα)⁴/n³ m_e c².
fn small_recoil(nucleus: &Nucleus, setting: &Setting) -> f64 {
    nuclear_self_energy(nucleus, setting)
        + radiative_recoil(nucleus, setting)
        + no_darwin_foldy(nucleus, setting)
}

/// Takes the Darwin–Foldy term off the S states of nuclei with whole spin (even mass number), per
/// (Zα)⁴/n³ m_e c²: the formula for the Dirac energy holds for spin ½ (Pachucki & Karshenboim 1995, J. Phys.
/// B 28, L221). 13 kHz in deuterium.
fn no_darwin_foldy(nucleus: &Nucleus, setting: &Setting) -> f64 {
    if !setting.state.is_s() || !nucleus.mass_number().is_multiple_of(2) {
        return 0.0;
    }
    -setting.reduced.powi(3) / (2.0 * nucleus.mass_electrons * nucleus.mass_electrons)
}

/// Radiation from the nucleus, per (Zα)⁴/n³ m_e c² (Pachucki 1995).
fn nuclear_self_energy(nucleus: &Nucleus, setting: &Setting) -> f64 {
    let Setting {
        state,
        za,
        reduced,
        charge,
    } = *setting;
    let mass = nucleus.mass_electrons;
    let log = if state.is_s() {
        (mass / (reduced * za * za)).ln()
    } else {
        0.0
    };
    4.0 * charge * za * reduced.powi(3) / (3.0 * PI * mass * mass)
        * (log - bethe_logarithm(state.n, state.l))
}

/// Radiative recoil of S states, per (Zα)⁴/n³ m_e c² (Czarnecki & Melnikov 2001; Eides, Grotch & Shelyuto
/// 2001).
fn radiative_recoil(nucleus: &Nucleus, setting: &Setting) -> f64 {
    if !setting.state.is_s() {
        return 0.0;
    }
    let Setting { za, reduced, .. } = *setting;
    let zeta_3 = 1.202_056_903_159_594_2;
    let log = -(za * za).ln();
    let bracket = 6.0 * zeta_3 - 2.0 * PI * PI * LN_2 + 35.0 * PI * PI / 36.0 - 448.0 / 27.0
        + 2.0 / 3.0 * PI * za * log * log;
    reduced.powi(3) * FINE_STRUCTURE * za / (PI * PI * nucleus.mass_electrons) * bracket
}

/// Shift by the finite nucleus in m_e c², and its relative 1 σ. s1/2 and p1/2 of n ≤ 2 after Shabaev 1993
/// (0.2 % at most from him), other n by the Dirac density at the nucleus; 0 for the others. Includes the
/// radiative corrections of the size effect (Eides & Grotch 1997; Milstein, Sushkov & Terekhov 2002).
fn nuclear_size(nucleus: &Nucleus, setting: &Setting) -> (f64, f64) {
    let Setting {
        state, za, reduced, ..
    } = *setting;
    if nucleus.radius_fm <= 0.0 || !matches!(state.kappa, -1 | 1) {
        return (0.0, 0.0);
    }
    let base = if state.is_s() { state.n.min(2) } else { 2 };
    let density = origin_density(state.n, state.kappa, za) / origin_density(base, state.kappa, za);
    let n = f64::from(base);
    let gamma = (1.0 - za * za).sqrt();
    let sphere = (5.0_f64 / 3.0).sqrt() * nucleus.radius_fm / COMPTON_FM;
    let inside = (2.0 * za / n * sphere).powf(2.0 * gamma);
    let (front, shape) = match (state.kappa, base) {
        (-1, 1) => (za * za / 10.0, 1.380 - 0.162 * za + 1.612 * za * za),
        (-1, _) => (za * za / (10.0 * n), 1.508 + 0.215 * za + 1.332 * za * za),
        _ => (
            za.powi(4) * (n * n - 1.0) / (40.0 * n.powi(3)),
            1.615 + 4.319 * za - 9.152 * za * za + 11.87 * za.powi(3),
        ),
    };
    let loops = if state.is_s() {
        FINE_STRUCTURE * za * (4.0 * LN_2 - 5.0)
    } else {
        0.0
    };
    let size = reduced.powi(3) * front * (1.0 + za * za * shape) * inside * density * (1.0 + loops);
    let radius = 2.0 * nucleus.radius_uncertainty_fm / nucleus.radius_fm;
    let model = (2e-3 + loops.abs()).min(0.02) * (za / 0.1).min(1.0) + 1e-4;
    (size, radius.hypot(model))
}

/// Polarisability of the nucleus, cm⁻¹, and 1 σ: the 1S value over n³.
fn polarisation(nucleus: &Nucleus, state: State) -> (f64, f64) {
    if !state.is_s() {
        return (0.0, 0.0);
    }
    let factor = PER_CM_PER_KHZ / state.n_value().powi(3);
    (
        nucleus.polarisation_khz * factor,
        nucleus.polarisation_uncertainty_khz * factor,
    )
}

/// Mean binding energy of all levels of one n beyond the fine-structure model, cm⁻¹: the Rydberg energy with
/// the (Zα)² mean, −R Z²/n² [1 + (Zα)²/n² (5/4 − 1/n)]; 1 σ is half the spread of the fine structure.
pub(super) fn gross(nucleus: &Nucleus, n: u32) -> Energy {
    let n = f64::from(n);
    let za2 = (nucleus.charge() * FINE_STRUCTURE).powi(2);
    let rydberg = RYDBERG_PER_CM * nucleus.reduced_mass() * (nucleus.charge() / n).powi(2);
    let spread = rydberg * za2 / (n * n) * (n - 1.0);
    Energy {
        binding_per_cm: rydberg * (1.0 + za2 / (n * n) * (1.25 - 1.0 / n)),
        uncertainty_per_cm: 0.5 * spread,
    }
}
