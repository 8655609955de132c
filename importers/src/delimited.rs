//! Splitting delimited text (RFC 4180 with declared variations) strictly: what the grammar does
//! not allow is an error with its place, never a guess.

use std::io::Read;

use crate::limits::Limits;
use crate::row::{Row, RowError, RowProblem, check_columns, check_length};

/// How cells are told apart.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Dialect {
    /// What separates cells.
    pub delimiter: Delimiter,
    /// The quote, doubled inside quoted cells; `None` where quotes are plain text.
    pub quote: Option<u8>,
    /// Lines that begin with this are no rows.
    pub comment: Option<Vec<u8>>,
    /// A delimiter stands at both ends of each row and makes no cell there.
    pub edge_delimiters: bool,
}

/// What separates the cells of a row.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Delimiter {
    /// One byte.
    Byte(u8),
    /// Any run of blanks and tabulators, leading and trailing ones ignored.
    Blanks,
}

impl Default for Dialect {
    fn default() -> Self {
        Self {
            delimiter: Delimiter::Byte(b','),
            quote: Some(b'"'),
            comment: None,
            edge_delimiters: false,
        }
    }
}

const BUFFER_BYTES: usize = 64 * 1024;
const BYTE_ORDER_MARK: &[u8] = b"\xef\xbb\xbf";

/// What a byte means outside quotes.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Class {
    Plain,
    Delimiter,
    LineEnd,
    Quote,
    Zero,
}

/// How a cell ended.
#[derive(Clone, Copy, PartialEq, Eq)]
enum After {
    Delimiter,
    LineEnd,
    FileEnd,
}

/// Splits a stream of UTF-8 (or ASCII-compatible) bytes into rows of cells.
pub struct Splitter<R> {
    input: R,
    buffer: Box<[u8]>,
    at: usize,
    filled: usize,
    ended: bool,
    /// Line of the next byte, from 1.
    line: u64,
    classes: [Class; 256],
    dialect: Dialect,
    limits: Limits,
    started: bool,
}

impl<R: Read> Splitter<R> {
    /// A splitter at the start of `input`.
    pub fn new(input: R, dialect: Dialect, limits: Limits) -> Self {
        Self {
            input,
            buffer: vec![0; BUFFER_BYTES].into_boxed_slice(),
            at: 0,
            filled: 0,
            ended: false,
            line: 1,
            classes: classes(&dialect),
            dialect,
            limits,
            started: false,
        }
    }

    /// Line of the next byte, from 1.
    pub fn line(&self) -> u64 {
        self.line
    }

    /// Reads the next row, blank and comment lines left out; false at the end of the file.
    ///
    /// # Errors
    /// Anything outside the grammar; only an unclosed quote and a failing input are fatal.
    pub fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        if !self.skip_to_row()? {
            return Ok(false);
        }
        let line = self.line;
        let (mut bytes, mut ends) = row.take_bytes();
        bytes.clear();
        ends.clear();
        let result = self.split(&mut bytes, &mut ends);
        match result {
            Ok(()) => row.put_bytes(bytes, ends, line).map_err(|cell| {
                let problem = RowProblem::Encoding { encoding: "UTF-8" };
                RowError::row(line, Some(cell), row.text(), problem)
            })?,
            Err(problem) => {
                let fatal = matches!(problem, RowProblem::UnclosedQuote | RowProblem::Io(_));
                let start = ends.last().copied().unwrap_or(0);
                let mut error = RowError::row(line, Some(ends.len()), "", problem);
                error.text = String::from_utf8_lossy(&bytes[start..]).into_owned();
                error.fatal = fatal;
                if !fatal {
                    self.skip_line()
                        .map_err(|problem| RowError::fatal(line, problem))?;
                }
                return Err(error);
            }
        }
        Ok(true)
    }

    /// Moves to the first byte of the next row; false at the end of the file.
    fn skip_to_row(&mut self) -> Result<bool, RowError> {
        let line = self.line;
        self.skip_to_row_inner()
            .map_err(|problem| RowError::fatal(line, problem))
    }

    fn skip_to_row_inner(&mut self) -> Result<bool, RowProblem> {
        if !self.started {
            self.started = true;
            self.ensure(BYTE_ORDER_MARK.len())?;
            if self.buffer[self.at..self.filled].starts_with(BYTE_ORDER_MARK) {
                self.at += BYTE_ORDER_MARK.len();
            }
        }
        loop {
            let comment_bytes = self.dialect.comment.as_ref().map_or(1, Vec::len);
            self.ensure(comment_bytes)?;
            let rest = &self.buffer[self.at..self.filled];
            let Some(&first) = rest.first() else {
                return Ok(false);
            };
            let comment = self.dialect.comment.as_deref();
            if comment.is_some_and(|prefix| rest.starts_with(prefix)) {
                self.skip_line()?;
            } else if matches!(first, b'\r' | b'\n') {
                self.take_line_end()?;
            } else if matches!(first, b' ' | b'\t') && self.blank_line()? {
                self.skip_line()?;
            } else {
                return Ok(true);
            }
        }
    }

    /// Whether only blanks stand before the next line end; nothing is consumed.
    fn blank_line(&mut self) -> Result<bool, RowProblem> {
        if self.dialect.delimiter == Delimiter::Byte(b'\t') {
            return Ok(false);
        }
        self.ensure(BUFFER_BYTES / 2)?;
        let rest = &self.buffer[self.at..self.filled];
        let end = rest.iter().position(|b| !matches!(b, b' ' | b'\t'));
        Ok(end.map_or(rest.len() < BUFFER_BYTES / 2, |end| {
            matches!(rest[end], b'\r' | b'\n')
        }))
    }

    fn split(&mut self, bytes: &mut Vec<u8>, ends: &mut Vec<usize>) -> Result<(), RowProblem> {
        if self.dialect.edge_delimiters {
            self.skip_blanks()?;
            if self
                .peek()?
                .is_some_and(|b| self.class(b) == Class::Delimiter)
            {
                self.at += 1;
            }
        }
        loop {
            if self.dialect.delimiter == Delimiter::Blanks {
                self.skip_blanks()?;
                if self.line_ends()? && !ends.is_empty() {
                    return self.end_row();
                }
            }
            let after = self.cell(bytes, ends.last().copied().unwrap_or(0))?;
            ends.push(bytes.len());
            check_columns(ends.len(), &self.limits)?;
            check_length("row", bytes.len(), self.limits.row_bytes)?;
            if after == After::Delimiter {
                if self.dialect.edge_delimiters && self.row_is_over()? {
                    return self.end_row();
                }
                continue;
            }
            if after == After::LineEnd {
                self.take_line_end()?;
            }
            return Ok(());
        }
    }

    /// One cell, up to and including its delimiter, or up to the line end.
    fn cell(&mut self, bytes: &mut Vec<u8>, start: usize) -> Result<After, RowProblem> {
        let quoted = match (self.peek()?, self.dialect.quote) {
            (Some(byte), Some(quote)) => byte == quote,
            _ => false,
        };
        if quoted {
            self.quoted_cell(bytes, start)
        } else {
            self.plain_cell(bytes, start)
        }
    }

    fn plain_cell(&mut self, bytes: &mut Vec<u8>, start: usize) -> Result<After, RowProblem> {
        loop {
            let rest = &self.buffer[self.at..self.filled];
            let run = rest
                .iter()
                .position(|b| self.classes[usize::from(*b)] != Class::Plain);
            bytes.extend_from_slice(&rest[..run.unwrap_or(rest.len())]);
            self.at += run.unwrap_or(rest.len());
            check_length("cell", bytes.len() - start, self.limits.cell_bytes)?;
            if run.is_none() {
                if self.refill()? {
                    continue;
                }
                return Ok(After::FileEnd);
            }
            match self.class(self.buffer[self.at]) {
                Class::Delimiter => {
                    self.at += 1;
                    return Ok(After::Delimiter);
                }
                Class::LineEnd => return Ok(After::LineEnd),
                Class::Quote => return Err(RowProblem::StrayQuote),
                Class::Zero => return Err(RowProblem::ZeroByte),
                Class::Plain => {}
            }
        }
    }

    fn quoted_cell(&mut self, bytes: &mut Vec<u8>, start: usize) -> Result<After, RowProblem> {
        self.at += 1;
        loop {
            let Some(byte) = self.next_byte()? else {
                return Err(RowProblem::UnclosedQuote);
            };
            match byte {
                byte if Some(byte) == self.dialect.quote => {
                    if self.peek()? == Some(byte) {
                        self.at += 1;
                        bytes.push(byte);
                    } else {
                        return self.after_quote();
                    }
                }
                0 => return Err(RowProblem::ZeroByte),
                b'\r' => {
                    bytes.push(byte);
                    if self.peek()? != Some(b'\n') {
                        self.line += 1;
                    }
                }
                b'\n' => {
                    bytes.push(byte);
                    self.line += 1;
                }
                _ => bytes.push(byte),
            }
            check_length("cell", bytes.len() - start, self.limits.cell_bytes)?;
        }
    }

    /// What may follow a closing quote: padding, then a delimiter or the end of the line.
    fn after_quote(&mut self) -> Result<After, RowProblem> {
        loop {
            let Some(byte) = self.peek()? else {
                return Ok(After::FileEnd);
            };
            match self.class(byte) {
                Class::Delimiter => {
                    self.at += 1;
                    return Ok(After::Delimiter);
                }
                Class::LineEnd => return Ok(After::LineEnd),
                _ if matches!(byte, b' ' | b'\t') => self.at += 1,
                _ => return Err(RowProblem::TextAfterQuote),
            }
        }
    }

    fn skip_blanks(&mut self) -> Result<(), RowProblem> {
        while matches!(self.peek()?, Some(b' ' | b'\t')) {
            self.at += 1;
        }
        Ok(())
    }

    fn line_ends(&mut self) -> Result<bool, RowProblem> {
        Ok(matches!(self.peek()?, None | Some(b'\r' | b'\n')))
    }

    /// After the delimiter at the right edge nothing but blanks may stand.
    fn row_is_over(&mut self) -> Result<bool, RowProblem> {
        self.ensure(1)?;
        let rest = &self.buffer[self.at..self.filled];
        let next = rest.iter().find(|b| !matches!(b, b' ' | b'\t'));
        Ok(matches!(next, None | Some(b'\r' | b'\n')))
    }

    fn end_row(&mut self) -> Result<(), RowProblem> {
        self.skip_blanks()?;
        if self.peek()?.is_some() {
            self.take_line_end()?;
        }
        Ok(())
    }

    fn skip_line(&mut self) -> Result<(), RowProblem> {
        loop {
            let rest = &self.buffer[self.at..self.filled];
            if let Some(end) = rest.iter().position(|b| matches!(b, b'\r' | b'\n')) {
                self.at += end;
                return self.take_line_end();
            }
            self.at = self.filled;
            if !self.refill()? {
                return Ok(());
            }
        }
    }

    /// Takes LF, CR LF or CR, where the next byte is one of them.
    fn take_line_end(&mut self) -> Result<(), RowProblem> {
        let first = self.next_byte()?;
        if first == Some(b'\r') && self.peek()? == Some(b'\n') {
            self.at += 1;
        }
        if first.is_some() {
            self.line += 1;
        }
        Ok(())
    }

    fn class(&self, byte: u8) -> Class {
        self.classes[usize::from(byte)]
    }

    fn peek(&mut self) -> Result<Option<u8>, RowProblem> {
        if self.at == self.filled && !self.refill()? {
            return Ok(None);
        }
        Ok(Some(self.buffer[self.at]))
    }

    fn next_byte(&mut self) -> Result<Option<u8>, RowProblem> {
        let byte = self.peek()?;
        self.at += usize::from(byte.is_some());
        Ok(byte)
    }

    /// Makes at least `count` bytes ready to look at, fewer only before the end of the file.
    fn ensure(&mut self, count: usize) -> Result<(), RowProblem> {
        if self.filled - self.at >= count || self.ended {
            return Ok(());
        }
        self.buffer.copy_within(self.at..self.filled, 0);
        self.filled -= self.at;
        self.at = 0;
        while self.filled < count && !self.ended {
            self.fill()?;
        }
        Ok(())
    }

    fn refill(&mut self) -> Result<bool, RowProblem> {
        if self.at == self.filled && !self.ended {
            self.at = 0;
            self.filled = 0;
            self.fill()?;
        }
        Ok(self.at < self.filled)
    }

    fn fill(&mut self) -> Result<(), RowProblem> {
        let read = loop {
            match self.input.read(&mut self.buffer[self.filled..]) {
                Err(error) if error.kind() == std::io::ErrorKind::Interrupted => {}
                other => break other?,
            }
        };
        self.filled += read;
        self.ended = read == 0;
        Ok(())
    }
}

fn classes(dialect: &Dialect) -> [Class; 256] {
    let mut classes = [Class::Plain; 256];
    match dialect.delimiter {
        Delimiter::Byte(byte) => classes[usize::from(byte)] = Class::Delimiter,
        Delimiter::Blanks => {
            classes[usize::from(b' ')] = Class::Delimiter;
            classes[usize::from(b'\t')] = Class::Delimiter;
        }
    }
    if let Some(quote) = dialect.quote {
        classes[usize::from(quote)] = Class::Quote;
    }
    classes[usize::from(b'\r')] = Class::LineEnd;
    classes[usize::from(b'\n')] = Class::LineEnd;
    classes[0] = Class::Zero;
    classes
}
