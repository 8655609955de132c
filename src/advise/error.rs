//! Why a question cannot be answered.

use vocabulary::atom::Species;

use crate::calc::plasma::PlasmaError;
use crate::calc::shape::ShapeError;

/// Errors of the answers.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum AdviseError {
    /// Populations cannot be computed.
    #[error("{species}: {cause}")]
    Plasma {
        /// Whose.
        species: Species,
        /// Why.
        #[source]
        cause: PlasmaError,
    },
    /// A profile cannot be computed.
    #[error("{species}: {cause}")]
    Shape {
        /// Whose.
        species: Species,
        /// Why.
        #[source]
        cause: ShapeError,
    },
    /// The ionisation balance needs a limit that is not held.
    #[error(
        "{species}: no ionisation energy is held, so the ionisation balance at --ne cannot be \
         computed; leave --ne out or name the stages that are there"
    )]
    NoLimit {
        /// Whose.
        species: Species,
    },
    /// Wavelengths in air outside the range of the index.
    #[error(transparent)]
    Light(#[from] vocabulary::light::QuantityError),
}
