//! Rows that are handed on, in the formats of others. Each format is one file; all carry the header
//! of [`importers::handover`], so that sources and licences travel with the numbers.

mod csv;
mod jsonl;
mod parquet;
mod votable;

use std::io::{self, Write};
use std::path::Path;

use crate::catalogue::Receiver;

/// Formats.
#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
pub enum Form {
    /// Comma-separated values behind a header of comment lines (ECSV 1.0).
    Csv,
    /// One JSON object per line, the first about the file.
    Jsonl,
    /// VOTable 1.4.
    Votable,
    /// Parquet, one folder per element.
    Parquet,
}

/// Receives rows and writes them.
pub trait RowWriter: Receiver {
    /// Writes what is still to be written.
    ///
    /// # Errors
    /// What the system says.
    fn finish(&mut self) -> io::Result<()>;
}

/// A writer of one stream; `None` for a format that needs a folder.
pub fn text_writer<'w>(form: Form, out: Box<dyn Write + 'w>) -> Option<Box<dyn RowWriter + 'w>> {
    match form {
        Form::Csv => Some(Box::new(csv::CsvWriter::new(out))),
        Form::Jsonl => Some(Box::new(jsonl::JsonlWriter::new(out))),
        Form::Votable => Some(Box::new(votable::VotableWriter::new(out))),
        Form::Parquet => None,
    }
}

/// A writer of Parquet files below a folder that is there and empty.
pub fn folder_writer(folder: &Path) -> Box<dyn RowWriter> {
    Box::new(parquet::ParquetWriter::new(folder))
}

/// One line about each source, without line breaks.
fn source_lines(header: &importers::handover::Header) -> impl Iterator<Item = String> {
    header.sources.iter().map(|source| {
        let line = format!("{}: {} ({})", source.key, source.citation, source.licence);
        line.chars()
            .map(|c| if c.is_control() { ' ' } else { c })
            .collect()
    })
}
