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
    /// A line that is not held.
    #[error(
        "{wanted}: no such line is held within {reach_nm} nm{}",
        offer(.nearest)
    )]
    NoSuchLine {
        /// As it was typed.
        wanted: String,
        /// How far it was looked for, nm.
        reach_nm: f64,
        /// The nearest that are held, in words.
        nearest: Vec<String>,
    },
    /// Wavelengths in air outside the range of the index.
    #[error(transparent)]
    Light(#[from] vocabulary::light::QuantityError),
}

fn offer(nearest: &[String]) -> String {
    match nearest {
        [] => "; nothing of that species is held, see `lineclear sources`".into(),
        [one] => format!("; the nearest is {one}"),
        several => format!("; the nearest are {}", several.join(", ")),
    }
}
