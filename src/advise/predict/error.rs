//! Why nothing is predicted.

use vocabulary::atom::Species;

use crate::calc::coulomb::CoulombError;
use crate::calc::one_electron::OneElectronError;
use crate::calc::series::SeriesError;

/// Errors of `predict`.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum PredictError {
    /// No such series is held and none can be made.
    #[error(
        "{species}: no series `{typed}` outside its ground core{}", offer(.held)
    )]
    NoSuchSeries {
        /// Of which species.
        species: Species,
        /// As it was typed.
        typed: String,
        /// The series that are there.
        held: Vec<String>,
    },
    /// Several series could be meant.
    #[error("{species}: `{typed}` could mean {}; name the multiplicity and J", .held.join(" or "))]
    Ambiguous {
        /// Of which species.
        species: Species,
        /// As it was typed.
        typed: String,
        /// The series that could be meant.
        held: Vec<String>,
    },
    /// A named series of a species with several electrons.
    #[error(
        "{species}: {typed} is a series of one electron and a nucleus; ask for a series of levels, such as `nS1/2`"
    )]
    Named {
        /// Of which species.
        species: Species,
        /// As it was typed.
        typed: String,
    },
    /// Lines between shells begin above the lower one.
    #[error("{typed} ends on n = {lower_n}: ask for n ≥ {}", lower_n + 1)]
    BelowShell {
        /// As it was typed.
        typed: String,
        /// The lower shell.
        lower_n: u32,
    },
    /// The ionisation energy is not known.
    #[error("{species}: its ionisation energy is not held, so there is no series limit to fit to")]
    NoLimit {
        /// Of which species.
        species: Species,
    },
    /// A level of the user's own table below the series.
    #[error(
        "{species}, {series}: the table gives n = {n}, but the series begins at n = {lowest}; n is the principal quantum number"
    )]
    GivenBelow {
        /// Of which species.
        species: Species,
        /// Which series.
        series: String,
        /// Lowest n given.
        n: u32,
        /// Lowest n of the series.
        lowest: u32,
    },
    /// The lower level is not there.
    #[error("{species}: no level {wanted} that a line of this series could end on")]
    NoLowerLevel {
        /// Of which species.
        species: Species,
        /// As it reads.
        wanted: String,
    },
    /// The series cannot be fitted.
    #[error("{species}, {series}: {cause}")]
    Series {
        /// Of which species.
        species: Species,
        /// Which series.
        series: String,
        /// Why.
        #[source]
        cause: SeriesError,
    },
    /// The one-electron system cannot be computed.
    #[error("{species}: {cause}")]
    OneElectron {
        /// Of which species.
        species: Species,
        /// Why.
        #[source]
        cause: OneElectronError,
    },
    /// Black-body radiation of an impossible temperature.
    #[error(transparent)]
    Coulomb(#[from] CoulombError),
}

impl PredictError {
    /// Whether something typed was wrong, rather than the data too poor.
    pub const fn is_usage(&self) -> bool {
        match self {
            Self::NoSuchSeries { .. }
            | Self::Ambiguous { .. }
            | Self::Named { .. }
            | Self::BelowShell { .. }
            | Self::NoLowerLevel { .. }
            | Self::OneElectron { .. }
            | Self::Coulomb(_) => true,
            Self::Series { cause, .. } => matches!(
                cause,
                SeriesError::BelowLowest { .. } | SeriesError::AngularMomentum { .. }
            ),
            Self::NoLimit { .. } | Self::GivenBelow { .. } => false,
        }
    }
}

fn offer(held: &[String]) -> String {
    match held {
        [] => " can be made from the levels that are held; give some with --levels".into(),
        several => format!("; there are {}", several.join(", ")),
    }
}
