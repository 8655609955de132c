//! Files that the program writes to hand data on, and takes in again without loss.
//!
//! Whatever the format, such a file carries a [`Header`] (what it holds, and of which sources, with
//! citation and licence) as JSON under the name [`NAME`], and one table. With
//! [`Content::Reports`] the rows are the reports of the sources as they were kept, in the
//! catalogue's own units, so that reading them back is no conversion.

mod columns;
mod read;

pub use columns::{Cell, Column, Kind, LEVELS, LINES, Quantity, REPORTS};
pub use read::{LevelRow, LineRow, Rejected, ReportRow, read};

use serde::{Deserialize, Serialize};
use thiserror::Error;

use crate::source::{Completeness, SourceDescription, SourceKind};

/// The name under which formats keep the header.
pub const NAME: &str = "lineclear";

/// Revision of the columns and the header; files of another one are refused.
pub const FORM: u32 = 1;

/// What the rows of a file are.
#[derive(Clone, Copy, Debug, Deserialize, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Content {
    /// Lines as concluded from all sources, with their levels.
    Lines,
    /// Levels as concluded from all sources.
    Levels,
    /// The rows of the sources, as kept.
    Reports,
}

impl Content {
    /// The columns of its table.
    pub const fn columns(self) -> &'static [Column] {
        match self {
            Self::Lines => LINES,
            Self::Levels => LEVELS,
            Self::Reports => REPORTS,
        }
    }
}

/// What a file says about itself.
#[derive(Clone, Debug, Deserialize, PartialEq, Serialize)]
pub struct Header {
    /// Revision of the form, [`FORM`].
    pub form: u32,
    /// Program and version that wrote it.
    pub program: String,
    /// What the rows are.
    pub content: Content,
    /// What was asked for, in words.
    pub selection: String,
    /// The sources, by key.
    pub sources: Vec<SourceHeader>,
}

/// A source of a file.
#[derive(Clone, Debug, Deserialize, PartialEq, Serialize)]
pub struct SourceHeader {
    /// Short name.
    pub key: String,
    /// Title.
    pub title: String,
    /// Citation.
    pub citation: String,
    /// Licence, SPDX identifier or words.
    pub licence: String,
    /// Kind.
    pub kind: SourceKind,
    /// Things a reader of the data should know.
    pub notes: Vec<String>,
    /// Names the source's content: that of the catalogue where the file holds all of it, else one
    /// of the selection; empty for conclusions.
    pub checksum: String,
    /// The file holds all reports of the source.
    pub whole: bool,
    /// 1 σ common to all its levels, cm⁻¹.
    pub level_scale_uncertainty_per_cm: f64,
    /// The same as a fraction of the energy.
    pub level_scale_uncertainty_relative: f64,
    /// Rows of its tables, as first imported.
    pub rows_read: u64,
    /// Of these left out on request.
    pub rows_refused: u64,
    /// What it claims to cover.
    pub scope: Vec<ScopeHeader>,
}

/// One claim of a source.
#[derive(Clone, Debug, Deserialize, PartialEq, Serialize)]
pub struct ScopeHeader {
    /// Species in words.
    pub species: String,
    /// Shortest vacuum wavelength, nm.
    pub from_nm: f64,
    /// Longest vacuum wavelength, nm.
    pub to_nm: f64,
    /// Down to which strength.
    pub completeness: Completeness,
}

/// Why a header cannot be used.
#[derive(Debug, Error)]
pub enum HeaderError {
    /// No JSON of this shape.
    #[error("what the file says under `{NAME}` cannot be read: {0}")]
    Json(#[from] serde_json::Error),
    /// Another revision.
    #[error("the file is of form {found}, this program reads form {FORM}; use a fitting version")]
    Form {
        /// The revision found.
        found: u32,
    },
    /// Not what can be taken in.
    #[error(
        "the file holds what was concluded from several sources; taken in again, each measurement \
         would count twice; export the sources' own rows with --content reports"
    )]
    Conclusions,
    /// A source that makes no sense.
    #[error("source `{key}`: {place}: {message}")]
    Source {
        /// Its key.
        key: String,
        /// Which entry.
        place: String,
        /// What is wrong with it.
        message: String,
    },
}

impl Header {
    /// Reads and checks a header.
    ///
    /// # Errors
    /// Other JSON, another form, sources without key, citation or licence, or named twice.
    pub fn parse(text: &str) -> Result<Self, HeaderError> {
        #[derive(Deserialize)]
        struct Form {
            form: u32,
        }
        let Form { form } = serde_json::from_str(text)?;
        if form != FORM {
            return Err(HeaderError::Form { found: form });
        }
        let header: Self = serde_json::from_str(text)?;
        for (index, source) in header.sources.iter().enumerate() {
            let twice = header.sources[..index].iter().any(|s| s.key == source.key);
            source
                .check(twice, header.content)
                .map_err(|(place, message)| HeaderError::Source {
                    key: crate::sink::shown(&source.key),
                    place,
                    message,
                })?;
        }
        Ok(header)
    }

    /// Whether the rows are those of the sources.
    ///
    /// # Errors
    /// Conclusions, which do not come in as measurements.
    pub fn check_reports(&self) -> Result<(), HeaderError> {
        match self.content {
            Content::Reports => Ok(()),
            Content::Lines | Content::Levels => Err(HeaderError::Conclusions),
        }
    }

    /// The header as JSON in one line.
    pub fn to_json(&self) -> String {
        serde_json::to_string(self).unwrap_or_default()
    }
}

impl SourceHeader {
    fn check(&self, twice: bool, content: Content) -> Result<(), (String, String)> {
        if twice {
            return Err(("key".into(), "stands twice".into()));
        }
        if self.licence.trim().is_empty() {
            return Err(("licence".into(), "is empty".into()));
        }
        let nameless = self.checksum.is_empty() && content == Content::Reports;
        if nameless || self.checksum.len() > 128 {
            return Err(("checksum".into(), "must be 1 to 128 bytes long".into()));
        }
        for scope in &self.scope {
            if !(scope.from_nm >= 0.0 && scope.to_nm > scope.from_nm && scope.to_nm.is_finite()) {
                return Err((
                    "scope".into(),
                    "needs two wavelengths, shorter first".into(),
                ));
            }
            if scope.species.parse::<vocabulary::atom::Species>().is_err() {
                let species = crate::sink::shown(&scope.species);
                return Err(("scope".into(), format!("`{species}` is no species")));
            }
        }
        self.description().checked()
    }

    /// The source as a description without tables and claims.
    pub fn description(&self) -> SourceDescription {
        SourceDescription {
            key: self.key.clone(),
            title: self.title.clone(),
            citation: self.citation.clone(),
            doi: None,
            licence: self.licence.clone(),
            licence_note: None,
            kind: self.kind,
            level_scale_uncertainty_per_cm: self.level_scale_uncertainty_per_cm,
            level_scale_uncertainty_relative: self.level_scale_uncertainty_relative,
            energy_scale: None,
            computed_species: Vec::new(),
            notes: self.notes.clone(),
            scope: Vec::new(),
            table: Vec::new(),
        }
    }
}
