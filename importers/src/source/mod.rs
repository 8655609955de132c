//! The description of a source (`source.toml`): who published it, under which licence, what it
//! claims to cover, and how its tables map to levels and lines.

mod check;
mod columns;

pub use crate::fixed::Counting;
pub use columns::{
    Cell, Columns, Grades, MediumChoice, MediumColumn, MediumName, MediumSpec, NumberScale, Part,
    Piece, Split,
};

use serde::{Deserialize, Serialize};
use thiserror::Error;

/// What kind of source it is; decides its rank when sources disagree.
#[derive(Clone, Copy, Debug, Deserialize, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum SourceKind {
    /// A table published in a paper.
    Paper,
    /// Entered by hand from published compilations.
    Curated,
    /// A model atom of some program, without a citation per row.
    Model,
    /// Made by a calculation; never counts as measured.
    Computed,
}

/// Down to which strength a source claims to be complete.
#[derive(Clone, Copy, Debug, Deserialize, PartialEq, Eq, Hash, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Completeness {
    /// Lines down to 1e-3 of the strongest.
    Full,
    /// Lines down to 3e-2 of the strongest.
    Strong,
    /// Complete for its computed series.
    Computed,
    /// Lines from the ground term only; nothing between excited states.
    GroundTerm,
}

/// What a source claims to cover.
#[derive(Clone, Debug, Deserialize, PartialEq)]
#[serde(deny_unknown_fields)]
pub struct Scope {
    /// Species as written (`Fe II`, `Fe`), or `*` for all that the tables hold.
    pub species: Vec<String>,
    /// Band in vacuum wavelength, nm.
    pub band_nm: [f64; 2],
    /// Down to which strength.
    pub completeness: Completeness,
}

/// What the rows of a table become.
#[derive(Clone, Copy, Debug, Deserialize, PartialEq, Eq, Hash)]
#[serde(rename_all = "lowercase")]
pub enum RecordKind {
    /// Energy levels.
    Levels,
    /// Spectral lines.
    Lines,
}

/// How the file is laid out.
#[derive(Clone, Copy, Debug, Default, Deserialize, PartialEq, Eq, Hash)]
#[serde(rename_all = "lowercase")]
pub enum Format {
    /// Cells separated by a delimiter.
    #[default]
    Delimited,
    /// Columns at fixed positions.
    Fixed,
    /// A byte-by-byte description and data in one file.
    Mrt,
    /// VOTable.
    Votable,
    /// Enhanced character-separated values.
    Ecsv,
    /// The atomic part of XSAMS.
    Xsams,
    /// A FITS binary table.
    Fits,
    /// One JSON object per line.
    Jsonl,
    /// Parquet, without nested columns.
    Parquet,
}

/// A rule that leaves rows out, and the reason that the report gives.
#[derive(Clone, Debug, Deserialize, PartialEq, Eq)]
#[serde(deny_unknown_fields)]
pub struct SkipRule {
    /// Column to look at; the whole row where absent.
    pub column: Option<String>,
    /// The cell is this text.
    pub equals: Option<String>,
    /// The cell begins with this text.
    pub starts_with: Option<String>,
    /// The cell contains this text.
    pub contains: Option<String>,
    /// Why such rows are left out.
    pub reason: String,
}

/// Columns that are left out on purpose.
#[derive(Clone, Debug, Deserialize, PartialEq, Eq)]
#[serde(untagged)]
pub enum Ignore {
    /// These, by name.
    Names(Vec<String>),
    /// `rest`: all that no target uses.
    Word(String),
}

impl Default for Ignore {
    fn default() -> Self {
        Self::Names(Vec::new())
    }
}

/// One table of a source and how its columns map.
#[derive(Clone, Debug, Deserialize, PartialEq)]
#[serde(deny_unknown_fields)]
pub struct TableDescription {
    /// File name, without folders.
    pub file: String,
    /// SHA-256 of the file, hexadecimal.
    pub sha256: Option<String>,
    /// Number of data rows, checked after reading.
    pub rows: Option<u64>,
    /// What the rows become.
    pub records: RecordKind,
    /// Layout of the file.
    #[serde(default)]
    pub format: Format,
    /// Name or number (from 1) of the table in a file that holds several.
    pub table: Option<String>,
    /// Text encoding by its WHATWG label; UTF-8 where absent.
    pub encoding: Option<String>,
    /// One character, `tab`, or `blanks` for any run of blanks; comma where absent.
    pub delimiter: Option<String>,
    /// Quote character; `"` where absent, the empty text for none.
    pub quote: Option<String>,
    /// Lines that begin with this are comments.
    pub comment: Option<String>,
    /// Rows begin and end with a delimiter.
    #[serde(default)]
    pub edge_delimiters: bool,
    /// Rows (lines in fixed width) before the data; 1 where absent, 0 in fixed width. The first
    /// names the columns.
    pub header_rows: Option<u64>,
    /// What byte ranges of fixed width count.
    #[serde(default)]
    pub counting: Counting,
    /// Rows that are left out.
    #[serde(default)]
    pub skip: Vec<SkipRule>,
    /// Medium of wavelengths that do not state their own.
    pub medium: Option<String>,
    /// File with the byte-by-byte description, where it is not in the table's own file.
    pub readme: Option<String>,
    /// Texts that mean a missing value in every column; an empty cell always does.
    #[serde(default)]
    pub missing: Vec<String>,
    /// Decimal mark; a point where absent.
    pub decimal_mark: Option<String>,
    /// Mark between groups of digits.
    pub group_mark: Option<String>,
    /// Columns that no target uses.
    #[serde(default)]
    pub ignore: Ignore,
    /// Target → column.
    #[serde(default)]
    pub columns: Columns,
}

/// A published source and its tables.
#[derive(Clone, Debug, Deserialize, PartialEq)]
#[serde(deny_unknown_fields)]
pub struct SourceDescription {
    /// Short name, lower case: letters, digits, `-`, `_`, `.`.
    pub key: String,
    /// Title of the publication.
    pub title: String,
    /// Citation in words.
    pub citation: String,
    /// Digital object identifier.
    pub doi: Option<String>,
    /// SPDX identifier of the licence; absent where the file does not say.
    #[serde(default)]
    pub licence: String,
    /// Anything to add about the licence.
    pub licence_note: Option<String>,
    /// Kind of source.
    pub kind: SourceKind,
    /// Uncertainty of the level scale as a whole, cm⁻¹.
    #[serde(default)]
    pub level_scale_uncertainty_per_cm: f64,
    /// Uncertainty of the level scale as a fraction of the energy.
    #[serde(default)]
    pub level_scale_uncertainty_relative: f64,
    /// What the energies are measured from, in words.
    pub energy_scale: Option<String>,
    /// Species (`H I`, `He II`) whose energies and rates the source took from theory, whatever its
    /// kind: they count as computed.
    #[serde(default)]
    pub computed_species: Vec<String>,
    /// Things a reader of the data should know.
    #[serde(default)]
    pub notes: Vec<String>,
    /// What the source claims to cover.
    #[serde(default)]
    pub scope: Vec<Scope>,
    /// Its tables, read in this order.
    #[serde(default)]
    pub table: Vec<TableDescription>,
}

/// Why a description cannot be used.
#[derive(Debug, Error)]
pub enum DescriptionError {
    /// No valid TOML, an unknown key or a value of the wrong type.
    #[error("{file}:{line}: {message}")]
    Syntax {
        /// The description file.
        file: String,
        /// Line, from 1.
        line: usize,
        /// What the parser found.
        message: String,
    },
    /// A value that makes no sense.
    #[error("{file}: {place}: {message}")]
    Value {
        /// The description file.
        file: String,
        /// The key, with its table.
        place: String,
        /// What is wrong and what was expected.
        message: String,
    },
}

impl Format {
    /// The word for it in a description.
    pub fn name(self) -> &'static str {
        match self {
            Self::Delimited => "delimited",
            Self::Fixed => "fixed",
            Self::Mrt => "mrt",
            Self::Votable => "votable",
            Self::Ecsv => "ecsv",
            Self::Xsams => "xsams",
            Self::Fits => "fits",
            Self::Jsonl => "jsonl",
            Self::Parquet => "parquet",
        }
    }
}

impl TableDescription {
    /// A description with nothing but the file and its format; the columns of a self-describing
    /// format are then recognised by what the file says.
    pub fn of_file(file: &str, format: Format) -> Self {
        Self {
            file: file.to_owned(),
            sha256: None,
            rows: None,
            records: RecordKind::Lines,
            format,
            table: None,
            encoding: None,
            delimiter: None,
            quote: None,
            comment: None,
            edge_delimiters: false,
            header_rows: None,
            counting: Counting::default(),
            skip: Vec::new(),
            medium: None,
            readme: None,
            missing: Vec::new(),
            decimal_mark: None,
            group_mark: None,
            ignore: Ignore::default(),
            columns: Columns::default(),
        }
    }
}

impl SourceDescription {
    /// Reads a description; `file` names it in errors.
    ///
    /// # Errors
    /// Unknown keys, missing keys, values out of range, targets that do not fit the kind of
    /// record, columns named twice in one target.
    pub fn parse(text: &str, file: &str) -> Result<Self, DescriptionError> {
        let description: Self = toml::from_str(text).map_err(|error| {
            let start = error.span().map_or(0, |span| span.start.min(text.len()));
            DescriptionError::Syntax {
                file: file.to_owned(),
                line: text.as_bytes()[..start]
                    .iter()
                    .filter(|b| **b == b'\n')
                    .count()
                    + 1,
                message: error.message().replace('\n', ", "),
            }
        })?;
        check::check(&description).map_err(|(place, message)| DescriptionError::Value {
            file: file.to_owned(),
            place,
            message,
        })?;
        Ok(description)
    }

    /// The place and the reason where a value makes no sense.
    pub(crate) fn checked(&self) -> Result<(), (String, String)> {
        check::check(self)
    }
}

/// The delimiter of a checked table.
pub(crate) fn delimiter(table: &TableDescription) -> crate::delimited::Delimiter {
    check::delimiter(table).unwrap_or(crate::delimited::Delimiter::Byte(b','))
}
