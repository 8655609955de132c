//! Why a series gives no answer.

use thiserror::Error;

/// Why a fit or a prediction was refused.
#[derive(Clone, Debug, Error, PartialEq)]
#[non_exhaustive]
pub enum SeriesError {
    /// Fewer usable members than the fit needs.
    #[error(
        "the series has {held} usable member{} where a fit needs {needed}: give more levels", if *.held == 1 { "" } else { "s" }
    )]
    TooFewMembers {
        /// Members that could be used.
        held: usize,
        /// Members that the fit needs.
        needed: usize,
    },
    /// No smooth quantum defect describes the members.
    #[error(
        "the series is perturbed: its quantum defect is not smooth in n (members {members:?}, misfit {misfit:.1}); predict it from a multichannel analysis or leave the perturbed levels out"
    )]
    Perturbed {
        /// Principal quantum numbers of the members that stand out.
        members: Vec<u32>,
        /// What was found: the pull of the worst member, or the ratio of successive Ritz terms.
        misfit: f64,
    },
    /// The configuration is not one electron outside a core in its ground state.
    #[error(
        "the configuration `{configuration}` is doubly excited or changes its core: a single series limit does not apply; give the limit of its own parent"
    )]
    CoreChanging {
        /// The configuration as given.
        configuration: String,
    },
    /// The core has several limits that the label does not tell apart.
    #[error(
        "the core `{core}` has several fine-structure limits and the label does not say which one the series goes to: give levels in pair coupling, or the limit of one parent level"
    )]
    SplitCore {
        /// The core as labelled.
        core: String,
    },
    /// A prediction below the lowest member of the series.
    #[error(
        "n = {n} lies below the lowest member n = {lowest} of the series: ask for n ≥ {lowest}"
    )]
    BelowLowest {
        /// What was asked for.
        n: u32,
        /// Lowest member held.
        lowest: u32,
    },
    /// Orbital angular momentum not below n.
    #[error("l = {l} is not possible for n = {n}: l must be below n")]
    AngularMomentum {
        /// Principal quantum number.
        n: u32,
        /// Orbital angular momentum.
        l: u32,
    },
    /// A member at or above the limit.
    #[error(
        "the level at {energy_per_cm} cm⁻¹ (n = {n}) lies at or above the series limit {limit_per_cm} cm⁻¹: check the limit or the label"
    )]
    AboveLimit {
        /// Principal quantum number of the member.
        n: u32,
        /// Its energy, cm⁻¹.
        energy_per_cm: f64,
        /// The limit, cm⁻¹.
        limit_per_cm: f64,
    },
    /// The same n twice.
    #[error("the series holds n = {n} twice: keep one level of each n")]
    RepeatedMember {
        /// Principal quantum number.
        n: u32,
    },
    /// A number that is not finite, or not positive where it must be.
    #[error("{what} is {value}: give a finite value{condition}")]
    BadNumber {
        /// Which quantity.
        what: &'static str,
        /// What was given.
        value: f64,
        /// What else is asked of it, with a leading blank; may be empty.
        condition: &'static str,
    },
    /// The least-squares problem has no stable solution.
    #[error(
        "the fit did not converge for {members} members: check the energies and the limit for slips"
    )]
    NoConvergence {
        /// Members used.
        members: usize,
    },
    /// Core polarisation is asked for where it does not hold.
    #[error(
        "core polarisation is not valid for l = {l}: the orbital enters the core below l = {lowest}"
    )]
    Penetrating {
        /// Orbital angular momentum asked for.
        l: u32,
        /// Lowest l that is accepted.
        lowest: u32,
    },
}
