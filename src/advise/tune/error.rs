//! Why a question about a laser cannot be answered.

use vocabulary::atom::Species;

/// Errors of `tune` and `climb`; each is one sentence.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum LaserError {
    /// Isotopes of actinides are not answered.
    #[error(
        "{species}: transitions and routes of single isotopes of actinides (Z from 89) are not \
         answered; ask for the natural element with `window`"
    )]
    ActinideIsotope {
        /// What was asked.
        species: String,
    },
    /// Routes of actinides are not answered.
    #[error("{species}: stepwise excitation of actinides (Z from 89) is not answered")]
    ActinideRoute {
        /// What was asked.
        species: String,
    },
    /// Nothing is held of a species.
    #[error(
        "{species}: no levels are held; `lineclear sources` lists what is, and `lineclear import` adds a table"
    )]
    NoLevels {
        /// What was asked.
        species: String,
    },
    /// No line of the species lies in any laser range.
    #[error("{species}: no line from a populated level lies in any of the laser ranges{nearest}")]
    NoOverlap {
        /// Whose lines.
        species: Species,
        /// `; the nearest is …`, or nothing.
        nearest: String,
    },
    /// A target level that is not there.
    #[error("{species}: no level `{target}` is held; nearest: {nearest}")]
    NoSuchLevel {
        /// Whose level.
        species: Species,
        /// As typed.
        target: String,
        /// The nearest levels that are.
        nearest: String,
    },
    /// A series that cannot be computed.
    #[error("{species}: the series {target} cannot be computed: {reason}")]
    NoSeries {
        /// Whose series.
        species: Species,
        /// As typed.
        target: String,
        /// Why.
        reason: String,
    },
    /// No ionisation energy.
    #[error("{species}: no ionisation energy is held, so the limit cannot be a target")]
    NoLimit {
        /// Whose.
        species: Species,
    },
    /// Something typed that cannot be read.
    #[error("{option}: `{text}` {advice}")]
    Unreadable {
        /// The option.
        option: &'static str,
        /// What was typed.
        text: String,
        /// What it should be.
        advice: &'static str,
    },
    /// Populations or profiles.
    #[error(transparent)]
    Advise(#[from] crate::advise::AdviseError),
}

impl LaserError {
    /// Whether what was typed is at fault.
    pub fn is_usage(&self) -> bool {
        !matches!(
            self,
            Self::NoLevels { .. } | Self::NoSeries { .. } | Self::NoLimit { .. } | Self::Advise(_)
        )
    }
}
