//! Excitation of optically allowed transitions by electrons.

use std::f64::consts::PI;

use vocabulary::atom::{Configuration, DipoleClass, Term, dipole_class};
use vocabulary::light::constants::PER_CM_PER_EV;
use vocabulary::spectrum::{Level, Line};

use super::error::{PlasmaError, positive};
use super::expint::scaled_e1;

/// What the mean Gaunt factor near threshold depends on.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Target {
    /// A neutral atom: the cross section starts from zero at threshold.
    Neutral,
    /// An ion, transition into another shell.
    Ion,
    /// An ion, transition inside the shell (Δn = 0): a larger factor.
    IonWithinShell,
}

impl Target {
    /// What excites a line's upper from its lower level; `None` where the formula has nothing to
    /// say: a line whose spin, parity or J changes as no electric dipole allows, or whose levels
    /// are not known well enough to tell. (Exchange excites intercombination lines, and their f
    /// does not show it.)
    pub fn of_line(line: &Line) -> Option<Self> {
        Self::of_levels(line.lower.as_ref()?, line.upper.as_ref()?)
    }

    /// As [`Target::of_line`], from the two levels.
    pub fn of_levels(lower: &Level, upper: &Level) -> Option<Self> {
        let terms = (term_of(lower)?, term_of(upper)?);
        match dipole_class((&terms.0, lower.j), (&terms.1, upper.j)) {
            // `None`: not LS terms; parity was checked below for those as well.
            Some(DipoleClass::Allowed | DipoleClass::OrbitalForbidden) | None => {}
            Some(_) => return None,
        }
        if terms.0.parity()? == terms.1.parity()? {
            return None;
        }
        if lower.species.charge() == 0 {
            return Some(Self::Neutral);
        }
        let shell = |level: &Level| {
            let configuration = Configuration::parse(level.configuration.as_deref()?)?;
            Some(configuration.outer_electron()?.n)
        };
        let within = shell(lower).is_some_and(|n| Some(n) == shell(upper));
        Some(if within {
            Self::IonWithinShell
        } else {
            Self::Ion
        })
    }
}

/// Collision strength that stands for a transition which no electric dipole allows, where none is
/// known: published ones of low levels lie between 0.01 and 10, those of neutral atoms at the
/// lower end (D. E. Osterbrock & G. J. Ferland 2006, *Astrophysics of Gaseous Nebulae*, 2nd ed.,
/// chapter 3; from memory). An order of magnitude: σ is [`UNKNOWN_STRENGTH_SIGMA_DEX`].
pub const fn unknown_collision_strength(charge: u8) -> f64 {
    if charge == 0 { 0.1 } else { 0.5 }
}

/// 1 σ of [`unknown_collision_strength`], decades.
pub const UNKNOWN_STRENGTH_SIGMA_DEX: f64 = 1.0;

/// Rate coefficient (m³/s) of excitation of a collision strength from a level or term of this
/// weight: 8.629e-12 Ω e^(−ΔE/kT)/(g √T), T in K (Osterbrock & Ferland 2006, equation 3.20).
///
/// # Errors
/// Weight or k T (cm⁻¹) not positive.
pub fn excitation_by_strength(
    energy_per_cm: f64,
    collision_strength: f64,
    lower_weight: f64,
    kt_per_cm: f64,
) -> Result<f64, PlasmaError> {
    let kt = positive("k T in per cm", kt_per_cm)?;
    let weight = positive("the weight of the lower level", lower_weight)?;
    let kelvin = kt / vocabulary::light::constants::PER_CM_PER_KELVIN;
    Ok(8.629e-12 * collision_strength * (-energy_per_cm / kt).exp() / (weight * kelvin.sqrt()))
}

fn term_of(level: &Level) -> Option<Term> {
    level.term.as_deref().map(Term::parse)
}

/// Factor within which a rate coefficient of [`excitation_rate`] lies for an allowed line, 1 σ: 2
/// for ions, 3 for neutral atoms near threshold (van Regemorter 1962; D. H. Sampson & H. L. Zhang
/// 1992, Phys. Rev. A 45, 1556, found the formula poor for other transitions).
pub const fn excitation_uncertainty_factor(target: Target) -> f64 {
    match target {
        Target::Neutral => 3.0,
        Target::Ion | Target::IonWithinShell => 2.0,
    }
}

/// Rate coefficient (m³/s) of excitation by Maxwellian electrons of an electric-dipole transition
/// of absorption oscillator strength f across `energy_per_cm`, at k T in cm⁻¹: X = 1.58e-11 f ḡ
/// e^(−y)/(ΔE √T), ΔE and T in eV, y = ΔE/kT.
///
/// H. van Regemorter 1962, Astrophys. J. 136, 906 (his equation 24 in the form of the trade); the
/// constant is (8π²/√3) a₀² R² √(8/π m). Only allowed transitions: spin-forbidden ones and ΔJ = 0–0
/// have rates of their own that no formula gives, and f = 0 gives 0.
///
/// # Errors
/// Energy or k T not positive; f negative.
pub fn excitation_rate(
    energy_per_cm: f64,
    absorption_f: f64,
    kt_per_cm: f64,
    target: Target,
) -> Result<f64, PlasmaError> {
    let energy = positive("the excitation energy in per cm", energy_per_cm)?;
    let kt = positive("k T in per cm", kt_per_cm)?;
    if !absorption_f.is_finite() || absorption_f < 0.0 {
        return Err(PlasmaError::NotPositive {
            quantity: "the oscillator strength",
            value: absorption_f,
        });
    }
    let y = energy / kt;
    let (energy_ev, kt_ev) = (energy / PER_CM_PER_EV, kt / PER_CM_PER_EV);
    let shape = absorption_f * mean_gaunt(y, target) * (-y).exp();
    Ok(EXCITATION * shape / (energy_ev * kt_ev.sqrt()))
}

/// (8π²/√3) a₀² R² √(8/(π m_e)) with R in eV: m³/s eV^(3/2).
const EXCITATION: f64 = 1.581_4e-11;

/// Mean Gaunt factor of van Regemorter 1962 for y = ΔE/kT.
///
/// Ions: 0.15 + 0.28 e^y E₁(y) (R. Mewe 1972, Astron. Astrophys. 20, 215; within a shell 0.6 for
/// 0.15). Neutral atoms: van Regemorter's table 2 (from memory), straight in logarithms; below y =
/// 0.01 Bethe's limit √3/(2π) E₁(y), above 10 as 1/√y.
pub fn mean_gaunt(y: f64, target: Target) -> f64 {
    match target {
        Target::Ion => 0.15 + 0.28 * scaled_e1(y),
        Target::IonWithinShell => 0.6 + 0.28 * scaled_e1(y),
        Target::Neutral => neutral_gaunt(y),
    }
}

const NEUTRAL: [(f64, f64); 9] = [
    (0.01, 1.160),
    (0.02, 0.956),
    (0.1, 0.493),
    (0.2, 0.331),
    (0.4, 0.209),
    (1.0, 0.100),
    (2.0, 0.063),
    (4.0, 0.040),
    (10.0, 0.023),
];

fn neutral_gaunt(y: f64) -> f64 {
    let (first, last) = (NEUTRAL[0], NEUTRAL[NEUTRAL.len() - 1]);
    if y.is_nan() || y <= 0.0 {
        return f64::NAN;
    }
    if y < first.0 {
        // Shifted so that it joins the table.
        let bethe = |y: f64| 3_f64.sqrt() / (2.0 * PI) * scaled_e1(y);
        return first.1 + bethe(y) - bethe(first.0);
    }
    if y >= last.0 {
        return last.1 * (last.0 / y).sqrt();
    }
    let above = NEUTRAL.partition_point(|p| p.0 <= y);
    let ((x0, g0), (x1, g1)) = (NEUTRAL[above - 1], NEUTRAL[above]);
    g0 * (g1 / g0).powf((y / x0).ln() / (x1 / x0).ln())
}

/// Absorption oscillator strength from an emission rate (s⁻¹), weights and vacuum wavenumber
/// (cm⁻¹): f = (g_u/g_l) A/(0.667 025 cm² s⁻¹ σ²).
pub fn absorption_f(
    rate_per_s: f64,
    upper_weight: f64,
    lower_weight: f64,
    wavenumber_per_cm: f64,
) -> f64 {
    rate_per_s * upper_weight / lower_weight / (0.667_025_2 * wavenumber_per_cm * wavenumber_per_cm)
}
