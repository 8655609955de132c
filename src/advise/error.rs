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
    /// A level that is not held.
    #[error("{species} {typed}: no such level is held; the nearest are {nearest}")]
    NoSuchLevel {
        /// Whose.
        species: Species,
        /// As it was typed.
        typed: String,
        /// The nearest that are held, in words.
        nearest: String,
    },
    /// The user's table says nothing of a species.
    #[error(
        "{species}: the table of --given says nothing of this element; add a row for it, or leave \
         it out of the species"
    )]
    NothingGiven {
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
    /// A target that the filter does not let through.
    #[error(
        "{wanted}: the line near {line_nm:.1} nm lies outside the passband around {centre_nm:.3} nm \
         (FWHM {fwhm_nm} nm); move the centre there, or tilt less"
    )]
    OutsidePassband {
        /// As it was typed.
        wanted: String,
        /// Where the line lies, nm.
        line_nm: f64,
        /// Where the passband lies in this light, nm.
        centre_nm: f64,
        /// Its width, nm.
        fwhm_nm: f64,
    },
    /// A target without a rate.
    #[error("{wanted}: no rate of this line is known, so no filter can be weighed for it")]
    TargetUnrated {
        /// As it was typed.
        wanted: String,
    },
    /// A filter or an illumination that no transmission can be computed from.
    #[error(transparent)]
    Filter(#[from] crate::calc::filter::FilterError),
    /// A continuum that cannot be computed.
    #[error("the free–free continuum: {0}")]
    Continuum(#[from] PlasmaError),
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
