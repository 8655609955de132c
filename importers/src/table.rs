//! Delimited and fixed-width tables as the description lays them out.

use std::io::Read;

use crate::delimited::{Dialect, Splitter};
use crate::fixed::{FixedReader, Range};
use crate::input::Decoded;
use crate::limits::Limits;
use crate::mapping::range_name;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader};
use crate::source::{TableDescription, delimiter};

/// Delimited text with its header read.
pub struct DelimitedReader<R> {
    splitter: Splitter<R>,
    columns: Vec<ColumnInfo>,
    /// Cells that every row must have; known from the first row at the latest.
    width: Option<usize>,
}

impl<R: Read> DelimitedReader<R> {
    /// Reads `header_rows` rows, the first of which names the columns.
    ///
    /// # Errors
    /// A header that cannot be split.
    pub fn new(
        input: R,
        dialect: Dialect,
        header_rows: u64,
        limits: &Limits,
    ) -> Result<Self, RowError> {
        let mut splitter = Splitter::new(input, dialect, limits.clone());
        let mut columns = Vec::new();
        let mut row = Row::default();
        for index in 0..header_rows {
            if !splitter.read_row(&mut row)? {
                break;
            }
            if index == 0 {
                let names = (0..row.len()).map(|cell| row.cell(cell).trim());
                columns = names.map(ColumnInfo::named).collect();
            }
        }
        let width = (!columns.is_empty()).then_some(columns.len());
        Ok(Self {
            splitter,
            columns,
            width,
        })
    }

    /// Names the columns of a table that has no header.
    pub fn number_columns(&mut self, count: usize) {
        if self.columns.is_empty() {
            let names = (1..=count).map(|number| ColumnInfo::named(number.to_string()));
            self.columns = names.collect();
            self.width = Some(count);
        }
    }
}

impl<R: Read> RowReader for DelimitedReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        if !self.splitter.read_row(row)? {
            return Ok(false);
        }
        let expected = *self.width.get_or_insert(row.len());
        if row.len() == expected {
            return Ok(true);
        }
        let problem = RowProblem::Ragged {
            found: row.len(),
            expected,
        };
        let text = (0..row.len()).map(|cell| row.cell(cell));
        let text: Vec<&str> = text.take(20).collect();
        Err(RowError::row(row.line(), None, &text.join(" "), problem))
    }
}

/// Opens a table by its description.
///
/// # Errors
/// A header that cannot be read.
pub(crate) fn open_delimited(
    input: Box<dyn Read>,
    table: &TableDescription,
    limits: &Limits,
) -> Result<Box<dyn RowReader>, RowError> {
    let quote = match table.quote.as_deref() {
        None => Some(b'"'),
        Some(mark) => mark.bytes().next(),
    };
    let dialect = Dialect {
        delimiter: delimiter(table),
        quote,
        comment: table.comment.as_ref().map(|text| text.clone().into_bytes()),
        edge_delimiters: table.edge_delimiters,
    };
    let header_rows = table.header_rows.unwrap_or(1);
    let mut reader = DelimitedReader::new(input, dialect, header_rows, limits)?;
    if header_rows == 0 {
        reader.number_columns(positions(table));
    }
    Ok(Box::new(reader))
}

/// Number of columns that a table without header must have: the highest position in use.
fn positions(table: &TableDescription) -> usize {
    let cells = table.columns.named();
    let all = cells.flat_map(|(_, cell)| cell.sources());
    all.filter_map(|part| part.position).max().unwrap_or(0)
}

/// Opens a table of fixed width; each byte range of the mapping is a column.
pub(crate) fn open_fixed(
    input: Box<dyn Read>,
    table: &TableDescription,
    limits: &Limits,
) -> Box<dyn RowReader> {
    let mut columns: Vec<(ColumnInfo, Range)> = Vec::new();
    for (_, cell) in table.columns.named() {
        for range in cell.sources().into_iter().filter_map(|part| part.bytes) {
            let name = range_name(range);
            if !columns.iter().any(|(known, _)| known.name == name) {
                columns.push((ColumnInfo::named(name), (range[0], range[1])));
            }
        }
    }
    let comment = table.comment.as_ref().map(|text| text.clone().into_bytes());
    let header = table.header_rows.unwrap_or(0);
    Box::new(FixedReader::new(
        input,
        columns,
        table.counting,
        comment,
        header,
        limits,
    ))
}

/// Decodes the input where the description names an encoding.
pub(crate) fn decoded(
    input: Box<dyn Read>,
    encoding: Option<&'static encoding_rs::Encoding>,
) -> Box<dyn Read> {
    match encoding {
        None => input,
        Some(encoding) => Box::new(Decoded::new(input, encoding)),
    }
}
