//! What can end an import.

use thiserror::Error;

use crate::mapping::MappingError;
use crate::sink::{Refusal, SinkError};

/// Why an import ended. Nothing that was handed to the sink before should be kept.
#[derive(Debug, Error)]
pub enum ImportError {
    /// A table file cannot be opened.
    #[error("{file}: cannot be opened: {error}")]
    Open {
        /// The file.
        file: String,
        /// Why.
        #[source]
        error: std::io::Error,
    },
    /// The file breaks off or cannot be read on.
    #[error("{file}:{line}: {problem}")]
    Read {
        /// The file.
        file: String,
        /// Line, from 1.
        line: u64,
        /// What is wrong.
        #[source]
        problem: crate::row::RowProblem,
    },
    /// A bad row, and bad rows are not allowed.
    #[error("{0}")]
    BadRow(Refusal),
    /// More bad rows than allowed.
    #[error("more than {allowed} bad rows; the first is {}", first(.refused))]
    TooManyBadRows {
        /// How many were allowed.
        allowed: usize,
        /// All that were found, one more than allowed.
        refused: Vec<Refusal>,
    },
    /// The description does not fit the table.
    #[error("{file}: {problem}")]
    Mapping {
        /// The file.
        file: String,
        /// What does not fit.
        #[source]
        problem: MappingError,
    },
    /// An encoding that does not exist.
    #[error("{file}: no encoding is called `{label}`")]
    NoEncoding {
        /// The file.
        file: String,
        /// The label.
        label: String,
    },
    /// The number of rows is not the one that the description states.
    #[error("{file}: {found} rows where the description states {stated}")]
    RowCount {
        /// The file.
        file: String,
        /// Rows read.
        found: u64,
        /// Rows stated.
        stated: u64,
    },
    /// The receiver of the records stopped the import.
    #[error(transparent)]
    Sink(SinkError),
}

fn first(refused: &[Refusal]) -> String {
    refused.first().map(Refusal::to_string).unwrap_or_default()
}
