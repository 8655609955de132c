//! Why a rate is not computed.

use thiserror::Error;

/// Why the Coulomb approximation gives no rate.
#[derive(Clone, Debug, Error, PartialEq)]
#[non_exhaustive]
pub enum CoulombError {
    /// The effective quantum number does not suit l.
    #[error(
        "an effective quantum number of {effective:.3} is not possible for l = {l}: it must exceed l and stay below 200; check the limit and the label"
    )]
    EffectiveNumber {
        /// Effective principal quantum number.
        effective: f64,
        /// Orbital angular momentum.
        l: u32,
    },
    /// The level lies at or above the limit, or a number is not finite.
    #[error("the level at {energy_per_cm} cm⁻¹ is not bound below the limit {limit_per_cm} cm⁻¹")]
    NotBound {
        /// Energy of the level, cm⁻¹.
        energy_per_cm: f64,
        /// Series limit, cm⁻¹.
        limit_per_cm: f64,
    },
    /// A selection rule forbids the transition.
    #[error("the transition is no electric dipole line in LS coupling: {rule}")]
    Forbidden {
        /// The rule that is broken.
        rule: &'static str,
    },
    /// The cores differ.
    #[error(
        "the cores `{upper}` and `{lower}` differ: the Coulomb approximation holds for one electron outside one core"
    )]
    CoreChanges {
        /// Core of the upper level.
        upper: String,
        /// Core of the lower level.
        lower: String,
    },
    /// Several equivalent electrons share the shell.
    #[error(
        "the shell of `{configuration}` holds {occupancy} equivalent electrons: its coefficients of parentage are not known here"
    )]
    Equivalent {
        /// Configuration.
        configuration: String,
        /// Electrons in the shell.
        occupancy: u32,
    },
    /// The core has an open d or f shell.
    #[error(
        "the core `{core}` has an open d or f shell: its configurations mix too strongly for the Coulomb approximation"
    )]
    OpenCore {
        /// Core as labelled.
        core: String,
    },
    /// An orbital that lies inside the core.
    #[error(
        "the effective quantum number lies {depth:.2} below l + 1: the orbital is inside the core, where the Coulomb approximation does not hold (limit 0.4)"
    )]
    InsideCore {
        /// How far ν lies below l + 1.
        depth: f64,
    },
    /// The label does not tell the electron or its coupling.
    #[error("the label `{label}` does not show one outer electron in LS coupling")]
    Label {
        /// The label as given.
        label: String,
    },
    /// A temperature that is not positive.
    #[error("the temperature is {kelvin} K: give a finite one above zero")]
    Temperature {
        /// What was given.
        kelvin: f64,
    },
}
