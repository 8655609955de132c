//! The rows of BINARY and BINARY2 streams: big-endian values, in BINARY2 behind a null mask.

use std::io::Read;

use base64::Engine as _;
use base64::engine::general_purpose::STANDARD;

use super::field::{Field, Size, Type};
use crate::limits::Limits;
use crate::row::{Row, RowError, RowProblem};
use crate::xml::{Node, Xml};

/// Reads the base64 text of the STREAM that has just opened and unpacks it.
pub(super) fn stream<R: Read>(xml: &mut Xml<R>, limits: &Limits) -> Result<Vec<u8>, RowError> {
    let depth = xml.depth();
    let mut text: Vec<u8> = Vec::new();
    loop {
        match xml.pull()? {
            Some(Node::Text(piece)) => {
                text.extend(piece.bytes().filter(|b| !b.is_ascii_whitespace()));
            }
            Some(Node::Close(_)) if xml.depth() < depth => break,
            Some(_) => {}
            None => break,
        }
        if text.len() > limits.header_bytes {
            let problem = RowProblem::TooLong {
                what: "stream",
                limit: limits.header_bytes,
            };
            return Err(RowError::fatal(xml.line(), problem));
        }
    }
    let bytes = STANDARD
        .decode(&text)
        .map_err(|error| xml.fail(format!("the stream is no base64: {error}")))?;
    if bytes.starts_with(&[0x1f, 0x8b]) {
        return Err(xml.fail("the stream is packed inside its base64, which is not read"));
    }
    Ok(bytes)
}

/// Rows taken one by one from the bytes of a stream.
pub(super) struct BinaryRows {
    bytes: Vec<u8>,
    at: usize,
    masked: bool,
    /// Line of the stream in the document.
    line: u64,
    row: u64,
    cell_limit: usize,
}

impl BinaryRows {
    pub fn new(bytes: Vec<u8>, masked: bool, line: u64, limits: &Limits) -> Self {
        Self {
            bytes,
            at: 0,
            masked,
            line,
            row: 0,
            cell_limit: limits.cell_bytes,
        }
    }

    /// The next row; its place is the row number, from 1.
    pub fn read(&mut self, fields: &[Field], row: &mut Row) -> Result<bool, RowError> {
        if self.at == self.bytes.len() || fields.is_empty() {
            return Ok(false);
        }
        self.row += 1;
        row.start(self.row);
        let number = self.row;
        let fatal = |cell: Option<usize>, problem| {
            let mut error = RowError::row(number, cell, "", problem);
            error.fatal = true;
            error
        };
        let mask = if self.masked {
            let length = fields.len().div_ceil(8);
            self.take(length)
                .map_err(|problem| fatal(None, problem))?
                .to_vec()
        } else {
            Vec::new()
        };
        for (index, field) in fields.iter().enumerate() {
            let cell = self
                .cell(field)
                .map_err(|problem| fatal(Some(index), problem))?;
            let bit = 0x80u8 >> (index % 8);
            let null = mask.get(index / 8).is_some_and(|byte| byte & bit != 0);
            let null = null || field.null.as_deref().is_some_and(|null| null == cell);
            row.push(if null { "" } else { &cell });
        }
        Ok(true)
    }

    fn take(&mut self, count: usize) -> Result<&[u8], RowProblem> {
        let end = self
            .at
            .checked_add(count)
            .filter(|end| *end <= self.bytes.len());
        let Some(end) = end else {
            return Err(RowProblem::Format(format!(
                "the stream (line {}) ends inside a row: {} bytes are left where {count} are needed",
                self.line,
                self.bytes.len() - self.at
            )));
        };
        let start = std::mem::replace(&mut self.at, end);
        Ok(&self.bytes[start..end])
    }

    fn cell(&mut self, field: &Field) -> Result<String, RowProblem> {
        let count = match field.size {
            Size::One => 1,
            Size::Fixed(count) => count,
            Size::Variable => self.count()?,
            Size::Unclear => {
                return Err(RowProblem::Format(
                    "a variable array of several dimensions: programs disagree on its count"
                        .to_owned(),
                ));
            }
        };
        let length = match field.kind {
            Type::Bit => count.div_ceil(8),
            kind => count.saturating_mul(width(kind)),
        };
        if length > self.cell_limit {
            return Err(RowProblem::TooLong {
                what: "cell",
                limit: self.cell_limit,
            });
        }
        let bytes = self.take(length)?;
        match field.kind {
            Type::Char => text(bytes),
            Type::UnicodeChar => unicode(bytes),
            // A lone bit is the leftmost by the standard; one widely used writer sets another, and
            // the rest are padding, so any set bit counts.
            Type::Bit if count == 1 => Ok(u8::from(bytes != [0]).to_string()),
            Type::Bit => Ok(bits(bytes, count)),
            kind => Ok(values(kind, bytes)),
        }
    }

    fn count(&mut self) -> Result<usize, RowProblem> {
        let bytes = self.take(4)?;
        let count = i32::from_be_bytes([bytes[0], bytes[1], bytes[2], bytes[3]]);
        usize::try_from(count)
            .map_err(|_| RowProblem::Format(format!("an array claims {count} values")))
    }
}

fn width(kind: Type) -> usize {
    match kind {
        Type::Boolean | Type::Bit | Type::UnsignedByte | Type::Char => 1,
        Type::Short | Type::UnicodeChar => 2,
        Type::Int | Type::Float => 4,
        Type::Long | Type::Double | Type::FloatComplex => 8,
        Type::DoubleComplex => 16,
    }
}

/// Text up to its first zero byte.
fn text(bytes: &[u8]) -> Result<String, RowProblem> {
    let end = bytes.iter().position(|b| *b == 0).unwrap_or(bytes.len());
    let text = std::str::from_utf8(&bytes[..end]);
    text.map(str::to_owned)
        .map_err(|_| RowProblem::Encoding { encoding: "UTF-8" })
}

fn unicode(bytes: &[u8]) -> Result<String, RowProblem> {
    let units = bytes
        .chunks_exact(2)
        .map(|pair| u16::from_be_bytes([pair[0], pair[1]]));
    let units: Vec<u16> = units.take_while(|unit| *unit != 0).collect();
    String::from_utf16(&units).map_err(|_| RowProblem::Encoding { encoding: "UTF-16" })
}

fn bits(bytes: &[u8], count: usize) -> String {
    let bit = |index: usize| bytes[index / 8] & (0x80 >> (index % 8)) != 0;
    let words = (0..count).map(|index| if bit(index) { "1" } else { "0" });
    words.collect::<Vec<_>>().join(" ")
}

fn values(kind: Type, bytes: &[u8]) -> String {
    let part = match kind {
        Type::FloatComplex => 4,
        Type::DoubleComplex => 8,
        other => width(other),
    };
    let words = bytes.chunks_exact(part).map(|value| one(kind, value));
    words.collect::<Vec<_>>().join(" ")
}

fn one(kind: Type, value: &[u8]) -> String {
    match (kind, value) {
        (Type::Boolean, [b'T' | b't' | b'1']) => "true".to_owned(),
        (Type::Boolean, [b'F' | b'f' | b'0']) => "false".to_owned(),
        (Type::UnsignedByte, [byte]) => byte.to_string(),
        (Type::Short, &[a, b]) => i16::from_be_bytes([a, b]).to_string(),
        (Type::Int, &[a, b, c, d]) => i32::from_be_bytes([a, b, c, d]).to_string(),
        (Type::Float | Type::FloatComplex, &[a, b, c, d]) => {
            crate::number::single_text(f32::from_be_bytes([a, b, c, d]))
        }
        (_, &[a, b, c, d, e, f, g, h]) => {
            let bytes = [a, b, c, d, e, f, g, h];
            if kind == Type::Long {
                i64::from_be_bytes(bytes).to_string()
            } else {
                crate::number::double_text(f64::from_be_bytes(bytes))
            }
        }
        // `?`, blank and zero mean no value.
        _ => String::new(),
    }
}
