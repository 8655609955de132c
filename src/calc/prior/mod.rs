//! What is known of a rate before anybody measured it: a log-normal, learned from rated lines of
//! like kind.
//!
//! Model. For electric dipole lines log₁₀(g f) of a line is a linear function of what its levels
//! tell ([`Features`]): the share of its component in the LS multiplet (allowed lines), the
//! effective quantum numbers of both ends, which stand for the level energies, and the nuclear
//! charge (intercombination lines, whose strength grows with spin–orbit coupling). For lines
//! between levels of one parity log₁₀(g A / σ³) is a constant, as it is for a magnetic dipole of
//! given strength. The coefficients of each [`Group`] are fitted to the rated lines of one half of
//! the ions; each ion weighs the square root of its number of lines. Its σ comes from ions left
//! out one by one: the larger of the 68 % bound of |residual| and half its 95 % bound, so that
//! heavy tails are covered to 2 σ. On the other half of the ions 68 % of published rates lie
//! within 1 σ (`tests/prior.rs` learns the table anew, compares, and checks the other half).
//!
//! Validity: bound levels of ions with a known limit. Rated lines are on the whole the strong
//! ones, so that the prior is rather too bright than too faint for lines that nobody rated.

mod chance;
mod features;
mod table;

use vocabulary::light::constants::{
    ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, SPEED_OF_LIGHT_M_PER_S, VACUUM_PERMITTIVITY_F_PER_M,
};
use vocabulary::spectrum::Line;

pub use chance::chance_above;
pub use features::{AtomClass, Features, TransitionKind};
pub use table::{GROUPS, Group};

/// g f for g A = 1 s⁻¹ at σ = 1 cm⁻¹: ε₀ mₑ c / (2π e²), σ in m⁻¹; g f = this · g A / σ² (Condon &
/// Shortley 1935, The Theory of Atomic Spectra, ch. 4).
pub const GF_PER_RATE: f64 =
    VACUUM_PERMITTIVITY_F_PER_M * ELECTRON_MASS_KG * SPEED_OF_LIGHT_M_PER_S
        / (2.0 * std::f64::consts::PI * ELEMENTARY_CHARGE_C * ELEMENTARY_CHARGE_C * 1e4);

/// A log-normal for a rate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Prior {
    /// log₁₀ of the median rate in s⁻¹.
    pub log10_rate: f64,
    /// 1 σ in decades.
    pub sigma_dex: f64,
}

impl Prior {
    /// The median rate, s⁻¹.
    pub fn median_rate_per_s(&self) -> f64 {
        10_f64.powf(self.log10_rate)
    }
}

/// The prior for the rate of a line of an ion with this limit (cm⁻¹); `None` where a level, its J
/// or its weight is not known, or where a level is not bound.
pub fn prior(line: &Line, limit_per_cm: f64) -> Option<Prior> {
    let features = Features::of(line, limit_per_cm)?;
    let group = group(features.kind, features.class)?;
    let strength = group.strength(&features);
    Some(Prior {
        log10_rate: strength - log10_strength_per_rate(line, features.kind)?,
        sigma_dex: group.sigma_dex,
    })
}

/// The group that a line of a kind and class belongs to.
pub fn group(kind: TransitionKind, class: AtomClass) -> Option<&'static Group> {
    GROUPS
        .iter()
        .find(|g| g.kind == kind && g.class.is_none_or(|c| c == class))
}

/// log₁₀ of what the strength of a line (g f, or g A / σ³ between levels of one parity, in s⁻¹
/// and cm⁻¹) is for a rate of 1 s⁻¹; `None` without an upper weight.
pub fn log10_strength_per_rate(line: &Line, kind: TransitionKind) -> Option<f64> {
    let g = line.upper.as_ref()?.g?;
    let wavenumber = line.wavenumber_per_cm.log10();
    Some(match kind {
        TransitionKind::OneParity => g.log10() - 3.0 * wavenumber,
        _ => (GF_PER_RATE * g).log10() - 2.0 * wavenumber,
    })
}
