//! FITS binary tables (FITS standard 4.0, section 7.3): plain tables, scaled columns, nulls and
//! variable arrays that are skipped.

mod header;

use std::io::Read;

use crate::limits::Limits;
use crate::number;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader};
use crate::unit::Dialect;
use header::{Header, read_header, skip_data};

/// Length of a block, bytes.
pub(crate) const BLOCK: usize = 2880;

/// One column.
#[derive(Clone, Debug)]
struct Field {
    info: ColumnInfo,
    letter: u8,
    repeat: usize,
    null: Option<i64>,
    scale: f64,
    zero: f64,
    start: usize,
    length: usize,
}

/// Reads the rows of one binary table.
pub struct FitsReader<R> {
    input: R,
    fields: Vec<Field>,
    columns: Vec<ColumnInfo>,
    buffer: Vec<u8>,
    rows: u64,
    row: u64,
}

impl<R: Read> FitsReader<R> {
    /// Finds the binary table called `wanted` (its EXTNAME or number from 1; the first where
    /// `None`).
    ///
    /// # Errors
    /// No such table, a broken header, sizes that contradict each other.
    pub fn new(mut input: R, wanted: Option<&str>, limits: &Limits) -> Result<Self, RowError> {
        let fail = |message: String| RowError::fatal(1, RowProblem::Format(message));
        let mut number = 0usize;
        loop {
            let header = read_header(&mut input, limits)
                .map_err(|problem| RowError::fatal(1, problem))?
                .ok_or_else(|| fail("the file holds no such binary table".to_owned()))?;
            let table = header.text("XTENSION").as_deref() == Some("BINTABLE");
            number += usize::from(table);
            let chosen = wanted.is_none_or(|wanted| {
                header.text("EXTNAME").as_deref() == Some(wanted) || wanted.parse() == Ok(number)
            });
            if table && chosen {
                return Self::with_header(input, &header, limits).map_err(fail);
            }
            skip_data(&mut input, &header).map_err(|problem| RowError::fatal(1, problem))?;
        }
    }

    fn with_header(input: R, header: &Header, limits: &Limits) -> Result<Self, String> {
        let width = header.size("NAXIS1")?;
        let rows = header.size("NAXIS2")? as u64;
        let count = header.size("TFIELDS")?;
        if count > limits.columns || count > 999 {
            return Err(format!("{count} columns; at most 999 are allowed"));
        }
        let mut fields = Vec::with_capacity(count);
        let mut start = 0usize;
        for index in 1..=count {
            let field = read_field(header, index, start)?;
            start = start
                .checked_add(field.length)
                .ok_or("the row is too long")?;
            fields.push(field);
        }
        if start != width {
            return Err(format!(
                "the columns take {start} bytes where NAXIS1 says {width}"
            ));
        }
        if width > limits.row_bytes {
            return Err(format!("rows of {width} bytes are beyond the limit"));
        }
        Ok(Self {
            input,
            columns: fields.iter().map(|field| field.info.clone()).collect(),
            fields,
            buffer: vec![0; width],
            rows,
            row: 0,
        })
    }
}

impl<R: Read> RowReader for FitsReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        if self.row == self.rows || self.fields.is_empty() {
            return Ok(false);
        }
        self.row += 1;
        let number = self.row;
        self.input.read_exact(&mut self.buffer).map_err(|error| {
            let text = format!("the file ends in row {number} of {}: {error}", self.rows);
            RowError::fatal(number, RowProblem::Format(text))
        })?;
        row.start(number);
        for (index, field) in self.fields.iter().enumerate() {
            let bytes = &self.buffer[field.start..field.start + field.length];
            let cell = field
                .cell(bytes)
                .map_err(|problem| RowError::row(number, Some(index), "", problem))?;
            row.push(&cell);
        }
        Ok(true)
    }
}

fn read_field(header: &Header, index: usize, start: usize) -> Result<Field, String> {
    let key = |name: &str| format!("{name}{index}");
    let form = header
        .text(&key("TFORM"))
        .ok_or_else(|| format!("TFORM{index} is missing"))?;
    let form = form.trim();
    let end = form
        .find(|c: char| !c.is_ascii_digit())
        .unwrap_or(form.len());
    let bad = || {
        format!(
            "TFORM{index}: `{}` is no column form",
            crate::sink::shown(form)
        )
    };
    let repeat: usize = match &form[..end] {
        "" => 1,
        digits => digits.parse().map_err(|_| bad())?,
    };
    let letter = *form.as_bytes().get(end).ok_or_else(bad)?;
    let length = match letter {
        b'X' => repeat.div_ceil(8),
        letter => width(letter)
            .ok_or_else(bad)?
            .checked_mul(repeat)
            .ok_or_else(bad)?,
    };
    let number = |name: &str, usual: f64| match header.text(&key(name)) {
        None => Ok(usual),
        Some(text) => number::parse(&text)
            .map(|read| read.value)
            .map_err(|error| format!("{name}{index}: {error}")),
    };
    Ok(Field {
        info: ColumnInfo {
            name: header
                .text(&key("TTYPE"))
                .unwrap_or_default()
                .trim()
                .to_owned(),
            unit: header
                .text(&key("TUNIT"))
                .filter(|unit| !unit.trim().is_empty()),
            dialect: Dialect::Fits,
            ucd: header.text(&key("TUCD")),
            description: header.text(&key("TCOMM")),
        },
        letter,
        repeat,
        null: header
            .text(&key("TNULL"))
            .and_then(|text| text.trim().parse().ok()),
        scale: number("TSCAL", 1.0)?,
        zero: number("TZERO", 0.0)?,
        start,
        length,
    })
}

/// Bytes of one value.
fn width(letter: u8) -> Option<usize> {
    Some(match letter {
        b'L' | b'B' | b'A' => 1,
        b'I' => 2,
        b'J' | b'E' => 4,
        b'K' | b'D' | b'C' | b'P' => 8,
        b'M' | b'Q' => 16,
        _ => return None,
    })
}

impl Field {
    fn cell(&self, bytes: &[u8]) -> Result<String, RowProblem> {
        match self.letter {
            b'A' => {
                let end = bytes.iter().position(|b| *b == 0).unwrap_or(bytes.len());
                let text = std::str::from_utf8(&bytes[..end]);
                let text = text.map_err(|_| RowProblem::Encoding { encoding: "ASCII" })?;
                Ok(text.trim_end_matches(' ').to_owned())
            }
            // Arrays of variable length stand in the heap; they are no level or line quantity.
            b'P' | b'Q' => Ok(String::new()),
            b'X' => {
                let bit = |i: usize| bytes[i / 8] & (0x80 >> (i % 8)) != 0;
                let words = (0..self.repeat).map(|i| if bit(i) { "1" } else { "0" });
                Ok(words.collect::<Vec<_>>().join(" "))
            }
            letter => {
                let part = match letter {
                    b'C' => 4,
                    b'M' => 8,
                    other => width(other).unwrap_or(1),
                };
                let words = bytes.chunks_exact(part).map(|value| self.one(value));
                Ok(words.collect::<Vec<_>>().join(" "))
            }
        }
    }

    fn one(&self, value: &[u8]) -> String {
        match (self.letter, value) {
            (b'L', [b'T']) => "true".to_owned(),
            (b'L', [b'F']) => "false".to_owned(),
            (b'L', _) => String::new(),
            (b'B', &[byte]) => self.whole(i64::from(byte)),
            (b'I', &[a, b]) => self.whole(i64::from(i16::from_be_bytes([a, b]))),
            (b'J', &[a, b, c, d]) => self.whole(i64::from(i32::from_be_bytes([a, b, c, d]))),
            (b'E' | b'C', &[a, b, c, d]) => {
                let value = f32::from_be_bytes([a, b, c, d]);
                if self.is_plain() {
                    number::single_text(value)
                } else {
                    number::double_text(f64::from(value) * self.scale + self.zero)
                }
            }
            (letter, &[a, b, c, d, e, f, g, h]) => {
                let bytes = [a, b, c, d, e, f, g, h];
                if letter == b'K' {
                    self.whole(i64::from_be_bytes(bytes))
                } else if self.is_plain() {
                    number::double_text(f64::from_be_bytes(bytes))
                } else {
                    number::double_text(f64::from_be_bytes(bytes) * self.scale + self.zero)
                }
            }
            _ => String::new(),
        }
    }

    fn is_plain(&self) -> bool {
        self.scale == 1.0 && self.zero == 0.0
    }

    /// A whole number: null before scaling; a whole shift (unsigned types) stays exact.
    fn whole(&self, value: i64) -> String {
        if self.null == Some(value) {
            return String::new();
        }
        if self.scale == 1.0 && self.zero.fract() == 0.0 {
            return (i128::from(value) + self.zero as i128).to_string();
        }
        number::double_text(value as f64 * self.scale + self.zero)
    }
}
