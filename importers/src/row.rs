//! The neutral row that every format is read into, and the trait that hands rows on.

use thiserror::Error;

use crate::limits::Limits;
use crate::unit::Dialect;

/// What a format tells about a column.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct ColumnInfo {
    /// Name; positions are used where there is none.
    pub name: String,
    /// Unit text as the file has it.
    pub unit: Option<String>,
    /// The grammar of the unit.
    pub dialect: Dialect,
    /// Words of a controlled vocabulary (UCD) that say what the column is.
    pub ucd: Option<String>,
    /// What the file says about the column in words.
    pub description: Option<String>,
}

impl ColumnInfo {
    /// A column of a format without units, whose name may end in one (`wavelength_nm`).
    pub fn with_unit_in_name(name: impl Into<String>) -> Self {
        let name = name.into();
        let ends = [("_nm", "nm"), ("_per_cm", "cm-1"), ("_per_s", "s-1")];
        let found = ends.iter().find(|(end, _)| name.ends_with(end));
        Self {
            unit: found.map(|(_, unit)| (*unit).to_owned()),
            dialect: Dialect::Mapping,
            ..Self::named(name)
        }
    }

    /// A column of which only the name is known.
    pub fn named(name: impl Into<String>) -> Self {
        Self {
            name: name.into(),
            ..Self::default()
        }
    }
}

/// One row: its cells as text, one after the other. Reused from row to row.
#[derive(Clone, Debug, Default)]
pub struct Row {
    text: String,
    ends: Vec<usize>,
    line: u64,
}

impl Row {
    /// Line of the file (or row of a binary table), from 1.
    pub fn line(&self) -> u64 {
        self.line
    }

    /// Number of cells.
    pub fn len(&self) -> usize {
        self.ends.len()
    }

    /// Whether the row has no cell.
    pub fn is_empty(&self) -> bool {
        self.ends.is_empty()
    }

    /// Text of a cell, empty where the cell is missing or null.
    pub fn cell(&self, index: usize) -> &str {
        let Some(&end) = self.ends.get(index) else {
            return "";
        };
        let start = if index == 0 { 0 } else { self.ends[index - 1] };
        self.text.get(start..end).unwrap_or("")
    }

    /// All cells, one after the other, without what separated them.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Empties the row for the next use.
    pub fn start(&mut self, line: u64) {
        self.text.clear();
        self.ends.clear();
        self.line = line;
    }

    /// Adds a cell.
    pub fn push(&mut self, cell: &str) {
        self.text.push_str(cell);
        self.ends.push(self.text.len());
    }

    /// Adds text to the cell that [`Row::finish_cell`] will end.
    pub fn push_part(&mut self, part: &str) {
        self.text.push_str(part);
    }

    /// Ends the cell that the last parts made.
    pub fn finish_cell(&mut self) {
        self.ends.push(self.text.len());
    }

    /// Lends the text as bytes to a reader that checks them afterwards.
    pub(crate) fn take_bytes(&mut self) -> (Vec<u8>, Vec<usize>) {
        let bytes = std::mem::take(&mut self.text).into_bytes();
        (bytes, std::mem::take(&mut self.ends))
    }

    /// Takes the bytes back; fails with the cell that is no UTF-8.
    pub(crate) fn put_bytes(
        &mut self,
        bytes: Vec<u8>,
        ends: Vec<usize>,
        line: u64,
    ) -> Result<(), usize> {
        self.line = line;
        self.ends = ends;
        match String::from_utf8(bytes) {
            Ok(text) => {
                self.text = text;
                Ok(())
            }
            Err(error) => {
                let at = error.utf8_error().valid_up_to();
                let cell = self.ends.iter().filter(|end| **end <= at).count();
                self.text = String::from_utf8_lossy(error.as_bytes()).into_owned();
                self.ends.clear();
                Err(cell)
            }
        }
    }
}

/// Why a row could not be read.
#[derive(Debug, Error)]
pub enum RowProblem {
    /// The file cannot be read on.
    #[error("cannot read on: {0}")]
    Io(#[from] std::io::Error),
    /// A quote was opened and never closed.
    #[error("the quote opened here is never closed")]
    UnclosedQuote,
    /// A quote inside a cell that did not start with one.
    #[error("a quote stands inside a cell that does not begin with one")]
    StrayQuote,
    /// Text between a closing quote and the next delimiter.
    #[error("text follows a closing quote; a quote inside quotes is written twice")]
    TextAfterQuote,
    /// A zero byte.
    #[error("a zero byte: this is no text table")]
    ZeroByte,
    /// Bytes that are no text in the stated encoding.
    #[error("the bytes are no text in {encoding}; name the encoding in the description")]
    Encoding {
        /// The encoding that was expected.
        encoding: &'static str,
    },
    /// A tabulator in a table of fixed width.
    #[error("a tabulator in a table of fixed width: columns cannot be told apart")]
    Tabulator,
    /// Not the number of cells that the header has.
    #[error("{found} cells where the header has {expected}")]
    Ragged {
        /// Cells of this row.
        found: usize,
        /// Cells of the header.
        expected: usize,
    },
    /// A cell, row or header beyond the limit.
    #[error("the {what} is longer than the limit of {limit} bytes")]
    TooLong {
        /// `cell`, `row` or `header`.
        what: &'static str,
        /// The limit.
        limit: usize,
    },
    /// Too many columns.
    #[error("more than the limit of {limit} columns")]
    TooManyColumns {
        /// The limit.
        limit: usize,
    },
    /// A byte range of fixed width that cuts a character in two.
    #[error(
        "the byte range cuts a character in two; state whether ranges count bytes or characters"
    )]
    CutCharacter,
    /// Anything that one format alone can find wrong.
    #[error("{0}")]
    Format(String),
}

/// A row that could not be read, with its place.
#[derive(Debug, Error)]
#[error("line {line}: {problem}")]
pub struct RowError {
    /// Line of the file, from 1.
    pub line: u64,
    /// Index of the cell, from 0, where one cell is at fault.
    pub cell: Option<usize>,
    /// The text there.
    pub text: String,
    /// What is wrong.
    #[source]
    pub problem: RowProblem,
    /// Reading cannot go on behind this row.
    pub fatal: bool,
}

impl RowError {
    /// A fault of the whole file at this line, after which nothing can be read.
    pub fn fatal(line: u64, problem: RowProblem) -> Self {
        Self {
            line,
            cell: None,
            text: String::new(),
            problem,
            fatal: true,
        }
    }

    /// A fault of one row.
    pub fn row(line: u64, cell: Option<usize>, text: &str, problem: RowProblem) -> Self {
        Self {
            line,
            cell,
            text: text.to_owned(),
            problem,
            fatal: false,
        }
    }
}

/// A table that can be read row by row.
pub trait RowReader {
    /// The columns, known before the first row.
    fn columns(&self) -> &[ColumnInfo];

    /// Reads the next row into `row`; false at the end.
    ///
    /// # Errors
    /// A row that breaks the rules of the format; reading may go on unless the error is fatal.
    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError>;

    /// What the file says about itself under the name of this program (see [`crate::handover`]).
    fn about(&self) -> Option<&str> {
        None
    }

    /// Things worth knowing that refused nothing, after the last row.
    fn warnings(&self) -> Vec<String> {
        Vec::new()
    }
}

pub(crate) fn check_length(
    what: &'static str,
    length: usize,
    limit: usize,
) -> Result<(), RowProblem> {
    if length > limit {
        return Err(RowProblem::TooLong { what, limit });
    }
    Ok(())
}

pub(crate) fn check_columns(count: usize, limits: &Limits) -> Result<(), RowProblem> {
    if count > limits.columns {
        return Err(RowProblem::TooManyColumns {
            limit: limits.columns,
        });
    }
    Ok(())
}
