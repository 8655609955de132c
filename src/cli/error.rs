//! What ends a command, and with which status.

use std::path::PathBuf;

use vocabulary::atom::SpeciesError;
use vocabulary::light::QuantityError;

use super::Exit;
use crate::advise::AdviseError;
use crate::catalogue::CatalogueError;

/// Errors of the command line; each is one sentence.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum CliError {
    /// A quantity that cannot be read.
    #[error(transparent)]
    Quantity(#[from] QuantityError),
    /// A species that cannot be read.
    #[error(transparent)]
    Species(#[from] SpeciesError),
    /// Amounts that make no mix.
    #[error("--mix: `{entry}`: {problem}; write amounts as `Fe=0.01,He=1`")]
    Mix {
        /// The entry.
        entry: String,
        /// What is wrong with it.
        problem: &'static str,
    },
    /// Arguments that the parser refuses.
    #[error("{0}")]
    Usage(String),
    /// Options that do not go together.
    #[error("{0}")]
    Options(&'static str),
    /// The data folder is not known.
    #[error("no folder for user data is known (HOME is not set); name a file with --catalogue")]
    NoDataFolder,
    /// A file that cannot be read.
    #[error("{}: cannot be read: {cause}", path.display())]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// The system's own words.
        #[source]
        cause: std::io::Error,
    },
    /// A file that cannot be written.
    #[error("{}: cannot be written: {cause}", path.display())]
    Unwritable {
        /// The file.
        path: PathBuf,
        /// The system's own words.
        #[source]
        cause: std::io::Error,
    },
    /// The selection is empty.
    #[error("nothing is held of this selection ({words}); `lineclear sources` lists what is")]
    NothingToExport {
        /// The selection.
        words: String,
    },
    /// Something stands where the answer should go.
    #[error("{}: {problem}", path.display())]
    PathTaken {
        /// The path.
        path: PathBuf,
        /// What is there and what to do.
        problem: &'static str,
    },
    /// A file of lasers that cannot be used.
    #[error("{}:{line}: {problem}", path.display())]
    LaserFile {
        /// The file.
        path: PathBuf,
        /// The line, from 1.
        line: u64,
        /// What is wrong there.
        problem: String,
    },
    /// The catalogue.
    #[error(transparent)]
    Catalogue(#[from] CatalogueError),
    /// A filter or a beam that no transmission can be computed from.
    #[error(transparent)]
    Filter(#[from] crate::calc::filter::FilterError),
    /// A measured response of an instrument that cannot be used.
    #[error("{}: {cause}", path.display())]
    Response {
        /// The file.
        path: PathBuf,
        /// What is wrong with it.
        #[source]
        cause: crate::calc::shape::ShapeError,
    },
    /// A measured curve that cannot be used.
    #[error("{}: {cause}", path.display())]
    Curve {
        /// The file.
        path: PathBuf,
        /// What is wrong with it.
        #[source]
        cause: crate::calc::filter::FilterError,
    },
    /// The answer.
    #[error(transparent)]
    Advise(#[from] AdviseError),
    /// A table that the user handed in.
    #[error(transparent)]
    TableFile(#[from] super::table_file::TableFileError),
    /// A table of peaks in which there is none.
    #[error(
        "{}: no peak stands out of the noise; check --fwhm, which the spectrum is filtered with",
        path.display()
    )]
    NoPeak {
        /// The file.
        path: PathBuf,
    },
    /// No line is held where the peaks are.
    #[error(
        "{}: no line of these species is held from {from_nm:.1} to {to_nm:.1} nm (vacuum); check \
         the unit in the name of the column and --among",
        path.display()
    )]
    NothingHeldThere {
        /// The file.
        path: PathBuf,
        /// Shortest peak, vacuum nm.
        from_nm: f64,
        /// Longest peak, vacuum nm.
        to_nm: f64,
    },
    /// No temperature from measured lines.
    #[error(transparent)]
    Plot(#[from] crate::advise::pairs::PlotError),
    /// A dispersion that cannot be fitted.
    #[error(transparent)]
    Dispersion(#[from] crate::advise::marks::DispersionError),
    /// The list of known findings.
    #[error(transparent)]
    Known(#[from] crate::advise::audit::KnownError),
    /// The answer about a laser.
    #[error(transparent)]
    Laser(#[from] crate::advise::tune::LaserError),
    /// Nothing can be predicted.
    #[error(transparent)]
    Predict(#[from] crate::advise::predict::PredictError),
    /// A table to import.
    #[error(transparent)]
    Import(#[from] importers::ImportError),
    /// The system does not pass signals on.
    #[error("Ctrl-C cannot be listened for: {0}")]
    Signal(#[source] std::io::Error),
    /// Standard output is gone or full.
    #[error("standard output cannot be written: {0}")]
    Output(#[source] std::io::Error),
}

impl CliError {
    /// The exit status that this error sets. A closed pipe is no error.
    pub fn exit(&self) -> Exit {
        match self {
            Self::Quantity(_)
            | Self::Species(_)
            | Self::Mix { .. }
            | Self::Usage(_)
            | Self::Filter(_)
            | Self::Advise(AdviseError::Filter(_) | AdviseError::OutsidePassband { .. })
            | Self::Options(_) => Exit::Usage,
            Self::Laser(cause) if cause.is_usage() => Exit::Usage,
            Self::Predict(cause) if cause.is_usage() => Exit::Usage,
            Self::Catalogue(CatalogueError::Receiver(cause))
                if cause.kind() == std::io::ErrorKind::BrokenPipe =>
            {
                Exit::Answered
            }
            Self::Output(cause) if cause.kind() == std::io::ErrorKind::BrokenPipe => Exit::Answered,
            _ => Exit::Failed,
        }
    }
}
