//! Machine-readable tables with a byte-by-byte description (CDS "Standards for Astronomical
//! Catalogues" 2.0 and the one-file layout of the AAS journals).

use std::io::Read;

use crate::fixed::{Counting, checked_line, cut};
use crate::limits::Limits;
use crate::lines::Lines;
use crate::number;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader, check_columns};
use crate::unit::Dialect;

/// One column of a byte-by-byte description.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct MrtColumn {
    /// First byte, from 1.
    pub first: usize,
    /// Last byte.
    pub last: usize,
    /// The format letter: A for text, I, F, E or D for numbers.
    pub letter: char,
    /// What the description says.
    pub info: ColumnInfo,
    /// How a missing value looks; `None` where none is allowed.
    pub null: Option<Null>,
}

/// How a missing value looks, besides a blank cell.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Null {
    /// Blank only.
    Blank,
    /// This number, in any print, or this text.
    Value(String),
}

impl MrtColumn {
    fn is_number(&self) -> bool {
        self.letter != 'A'
    }

    /// Whether a cell means a missing value.
    fn is_null(&self, cell: &str) -> bool {
        match &self.null {
            _ if cell.is_empty() => true,
            Some(Null::Value(mark)) if cell == mark => true,
            // `?=-` is printed as one to three dashes.
            Some(Null::Value(mark)) if mark == "-" => cell.bytes().all(|b| b == b'-'),
            Some(Null::Value(mark)) if self.is_number() => {
                let same = number::parse(cell).ok().zip(number::parse(mark).ok());
                same.is_some_and(|(cell, mark)| cell.value == mark.value)
            }
            _ => false,
        }
    }
}

/// Reads the data of one table behind its description.
pub struct MrtReader<R> {
    lines: Lines<R>,
    columns: Vec<MrtColumn>,
    infos: Vec<ColumnInfo>,
    line: Vec<u8>,
    /// The first data line was read while looking for the end of the notes.
    pending: bool,
    blank_numbers: u64,
}

impl<R: Read> MrtReader<R> {
    /// Reads the description at the head of `input` and stops before the data.
    ///
    /// # Errors
    /// A missing, broken or overlong description.
    pub fn new(input: R, limits: &Limits) -> Result<Self, RowError> {
        let mut lines = Lines::new(input, limits.row_bytes);
        let columns = read_description(&mut lines, None, limits)?;
        let mut reader = Self::with_columns(lines, columns);
        reader.skip_notes(limits)?;
        Ok(reader)
    }

    /// Data in a file of its own, described by `columns` (from [`read_readme`]).
    pub fn with_description(input: R, columns: Vec<MrtColumn>, limits: &Limits) -> Self {
        Self::with_columns(Lines::new(input, limits.row_bytes), columns)
    }

    fn with_columns(lines: Lines<R>, columns: Vec<MrtColumn>) -> Self {
        Self {
            lines,
            infos: columns.iter().map(|column| column.info.clone()).collect(),
            columns,
            line: Vec::new(),
            pending: false,
            blank_numbers: 0,
        }
    }

    fn next_line(&mut self) -> Result<bool, RowError> {
        let read = self.lines.read(&mut self.line);
        read.map_err(|problem| RowError::fatal(self.lines.line(), problem))
    }

    /// Notes and other sections stand between rule lines behind the description; the data follow the
    /// last of them. A rule line further on is an error, so that no text passes for data.
    fn skip_notes(&mut self, limits: &Limits) -> Result<(), RowError> {
        let mut length = 0;
        let mut in_note = false;
        while self.next_line()? {
            length += self.line.len();
            if length > limits.header_bytes {
                return Err(too_long(self.lines.line(), limits));
            }
            if is_rule(&self.line) {
                in_note = false;
            } else if begins_section(&self.line) {
                in_note = true;
            } else if !in_note && !is_blank(&self.line) {
                self.pending = true;
                return Ok(());
            }
        }
        if in_note {
            let problem = RowProblem::Format(
                "no rule line stands between the notes and the data, so the data cannot be told"
                    .to_owned(),
            );
            return Err(RowError::fatal(self.lines.line(), problem));
        }
        Ok(())
    }

    fn fill(&mut self, row: &mut Row) -> Result<(), RowError> {
        let number = self.lines.line();
        if is_rule(&self.line) {
            let problem = RowProblem::Format(
                "a rule line inside the data: what stands before it is no table".to_owned(),
            );
            return Err(RowError::fatal(number, problem));
        }
        let text = checked_line(&self.line, number)?;
        let counting = counting(text, &self.columns);
        row.start(number);
        for (index, column) in self.columns.iter().enumerate() {
            let cell = cut(text, (column.first, column.last), counting)
                .ok_or_else(|| RowError::row(number, Some(index), text, RowProblem::CutCharacter))?
                .trim();
            if column.is_number() && counting == Counting::Bytes {
                check_borders(text, column, &self.columns)
                    .map_err(|problem| RowError::row(number, Some(index), text, problem))?;
            }
            if column.is_null(cell) {
                self.blank_numbers += u64::from(column.is_number() && column.null.is_none());
                row.push("");
            } else {
                row.push(cell);
            }
        }
        Ok(())
    }
}

impl<R: Read> RowReader for MrtReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.infos
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        loop {
            if !std::mem::take(&mut self.pending) && !self.next_line()? {
                return Ok(false);
            }
            if !is_blank(&self.line) {
                self.fill(row)?;
                return Ok(true);
            }
        }
    }

    fn warnings(&self) -> Vec<String> {
        match self.blank_numbers {
            0 => Vec::new(),
            count => vec![format!(
                "{count} blank cells in columns whose description allows no missing value; taken as missing"
            )],
        }
    }
}

/// Finds the columns of `file` in a description that stands in a file of its own.
///
/// # Errors
/// A broken description, or none for this file.
pub fn read_readme<R: Read>(
    input: R,
    file: &str,
    limits: &Limits,
) -> Result<Vec<MrtColumn>, RowError> {
    let mut lines = Lines::new(input, limits.row_bytes);
    read_description(&mut lines, Some(file), limits)
}

fn read_description<R: Read>(
    lines: &mut Lines<R>,
    file: Option<&str>,
    limits: &Limits,
) -> Result<Vec<MrtColumn>, RowError> {
    let mut header = Header {
        lines,
        line: Vec::new(),
        length: 0,
        limits,
    };
    loop {
        let Some(text) = header.next()? else {
            return Err(header.fail("no byte-by-byte description of this table was found"));
        };
        let Some(names) = described_files(&text) else {
            continue;
        };
        if file.is_none_or(|file| names_file(&names, file)) {
            break;
        }
    }
    header.rule()?;
    header.rule()?;
    let columns = header.columns()?;
    if columns.is_empty() {
        return Err(header.fail("the byte-by-byte description has no columns"));
    }
    check_columns(columns.len(), limits)
        .map_err(|problem| RowError::fatal(header.lines.line(), problem))?;
    Ok(columns)
}

/// The lines of a description, counted against the limit.
struct Header<'a, R> {
    lines: &'a mut Lines<R>,
    line: Vec<u8>,
    length: usize,
    limits: &'a Limits,
}

impl<R: Read> Header<'_, R> {
    fn next(&mut self) -> Result<Option<String>, RowError> {
        let number = self.lines.line() + 1;
        let more = self
            .lines
            .read(&mut self.line)
            .map_err(|problem| RowError::fatal(number, problem))?;
        self.length += self.line.len() + 1;
        if self.length > self.limits.header_bytes {
            return Err(too_long(number, self.limits));
        }
        // Descriptions carry names of people in many encodings; only labels matter here.
        Ok(more.then(|| String::from_utf8_lossy(&self.line).into_owned()))
    }

    fn fail(&self, message: &str) -> RowError {
        RowError::fatal(self.lines.line(), RowProblem::Format(message.to_owned()))
    }

    /// Skips to the next rule line.
    fn rule(&mut self) -> Result<(), RowError> {
        while let Some(text) = self.next()? {
            if is_rule(text.as_bytes()) {
                return Ok(());
            }
        }
        Err(self.fail("the byte-by-byte description breaks off"))
    }

    fn columns(&mut self) -> Result<Vec<MrtColumn>, RowError> {
        let mut columns: Vec<MrtColumn> = Vec::new();
        loop {
            let Some(text) = self.next()? else {
                return Err(self.fail("the byte-by-byte description breaks off"));
            };
            if is_rule(text.as_bytes()) {
                break;
            }
            if let Some(column) = parse_row(&text) {
                if column.first == 0 || column.last < column.first {
                    return Err(
                        self.fail("a byte range of the description is reversed or begins at 0")
                    );
                }
                columns.push(column);
                check_columns(columns.len(), self.limits)
                    .map_err(|problem| RowError::fatal(self.lines.line(), problem))?;
            } else if let Some(last) = columns.last_mut()
                && let Some(words) = &mut last.info.description
            {
                words.push(' ');
                words.push_str(text.trim());
            }
        }
        for column in &mut columns {
            let words = column.info.description.as_deref().unwrap_or_default();
            column.null = null_rule(words);
        }
        Ok(columns)
    }
}

fn too_long(line: u64, limits: &Limits) -> RowError {
    let problem = RowProblem::TooLong {
        what: "header",
        limit: limits.header_bytes,
    };
    RowError::fatal(line, problem)
}

fn is_blank(line: &[u8]) -> bool {
    line.iter().all(u8::is_ascii_whitespace)
}

/// A line of nothing but dashes or equal signs, long enough to be no data.
fn is_rule(line: &[u8]) -> bool {
    let line = line.trim_ascii();
    let uniform = |mark: u8| line.iter().all(|b| *b == mark);
    line.len() >= 20 && (uniform(b'-') || uniform(b'='))
}

/// A section between description and data: a note, acknowledgements, the closing line.
fn begins_section(line: &[u8]) -> bool {
    let heading =
        line.first().is_some_and(u8::is_ascii_uppercase) && line.trim_ascii_end().ends_with(b":");
    heading || line.starts_with(b"Note") || line.starts_with(b"(End)")
}

fn described_files(line: &str) -> Option<String> {
    let lower = line.to_ascii_lowercase();
    let at = lower.find("byte-by-byte description of file")?;
    let rest = line.get(at..)?;
    Some(
        rest.split_once(':')
            .map_or("", |(_, names)| names)
            .trim()
            .to_owned(),
    )
}

fn names_file(names: &str, file: &str) -> bool {
    let file = file.strip_suffix(".gz").unwrap_or(file);
    let mut names = names.split([',', ' ', ';']).filter(|name| !name.is_empty());
    names.any(|name| match name.split_once('*') {
        None => name == file,
        Some((start, end)) => {
            file.len() >= start.len() + end.len() && file.starts_with(start) && file.ends_with(end)
        }
    })
}

/// A row of the description; `None` for a continued explanation.
fn parse_row(text: &str) -> Option<MrtColumn> {
    let text = text.trim();
    let (first, rest) = digits(text)?;
    let after = rest.trim_start();
    let (last, rest) = match after.strip_prefix('-') {
        Some(rest) => digits(rest.trim_start())?,
        None => (first, rest),
    };
    if !rest.starts_with(char::is_whitespace) {
        return None;
    }
    let (format, rest) = word(rest)?;
    let letter = format_letter(format)?;
    let (unit, rest) = word(rest)?;
    let (label, rest) = word(rest)?;
    Some(MrtColumn {
        first,
        last,
        letter,
        info: ColumnInfo {
            name: label.to_owned(),
            unit: Some(unit.to_owned()),
            dialect: Dialect::Cds,
            description: Some(rest.trim().to_owned()),
            ..ColumnInfo::default()
        },
        null: None,
    })
}

fn digits(text: &str) -> Option<(usize, &str)> {
    let end = text
        .find(|c: char| !c.is_ascii_digit())
        .unwrap_or(text.len());
    let number = text.get(..end)?.parse().ok()?;
    Some((number, &text[end..]))
}

fn word(text: &str) -> Option<(&str, &str)> {
    let text = text.trim_start();
    let end = text.find(char::is_whitespace).unwrap_or(text.len());
    (end > 0).then(|| text.split_at(end))
}

fn format_letter(format: &str) -> Option<char> {
    let letter = format.chars().next()?.to_ascii_uppercase();
    let rest = &format[letter.len_utf8()..];
    let sound = !rest.is_empty() && rest.bytes().all(|b| b.is_ascii_digit() || b == b'.');
    ("AIFEDG".contains(letter) && sound).then_some(letter)
}

/// The null rule at the head of an explanation: `*`, limits in brackets, then `?` or `?=value`.
fn null_rule(words: &str) -> Option<Null> {
    let words = words.trim_start().trim_start_matches('*');
    let rest = match words.chars().next() {
        Some('[' | ']') => {
            let end = words[1..].find([']', '['])? + 2;
            words.get(end..)?.trim_start()
        }
        _ => words,
    };
    let rest = rest.trim_start().strip_prefix('?')?;
    match rest.strip_prefix('=') {
        None => Some(Null::Blank),
        Some(value) => {
            let value = value.split_whitespace().next().unwrap_or_default();
            Some(Null::Value(value.to_owned()))
        }
    }
}

/// Ranges count bytes, unless a line with wider characters only fits when they count characters.
fn counting(text: &str, columns: &[MrtColumn]) -> Counting {
    let end = columns.iter().map(|column| column.last).max().unwrap_or(0);
    if !text.is_ascii() && text.len() > end && text.chars().count() <= end {
        Counting::Characters
    } else {
        Counting::Bytes
    }
}

/// A digit directly outside a range, which no other column covers, means a shifted description.
fn check_borders(text: &str, column: &MrtColumn, all: &[MrtColumn]) -> Result<(), RowProblem> {
    let bytes = text.as_bytes();
    let digit = |at: usize| {
        at.checked_sub(1)
            .and_then(|i| bytes.get(i))
            .is_some_and(u8::is_ascii_digit)
    };
    for (inside, outside) in [
        (column.first, column.first - 1),
        (column.last, column.last + 1),
    ] {
        let covered = all.iter().any(|c| (c.first..=c.last).contains(&outside));
        if !covered && digit(inside) && digit(outside) {
            return Err(RowProblem::Format(format!(
                "a digit stands at byte {outside}, just outside the bytes {}-{} of the description",
                column.first, column.last
            )));
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn description_rows_and_their_nulls() {
        let column =
            parse_row("  11-  18 F8.3  0.1nm  lambda  [100/900]?=-9.9 Wavelength").unwrap();
        assert_eq!((column.first, column.last, column.letter), (11, 18, 'F'));
        assert_eq!(column.info.unit.as_deref(), Some("0.1nm"));
        let words = column.info.description.as_deref().unwrap();
        assert_eq!(null_rule(words), Some(Null::Value("-9.9".to_owned())));
        assert_eq!(null_rule("? Note"), Some(Null::Blank));
        assert_eq!(null_rule("*]0,]? Weight"), Some(Null::Blank));
        assert_eq!(null_rule("Is it? No"), None);
        assert!(parse_row("   1 A1 --- f Flag").is_some());
        assert!(parse_row("   continued text - 2").is_none());
        assert!(parse_row("   12 lines of text - 2").is_none());
    }

    #[test]
    fn file_names_may_be_lists_and_patterns() {
        let names = described_files("Byte-by-byte Description of file: table1.dat t*.dat").unwrap();
        assert!(names_file(&names, "table1.dat"));
        assert!(names_file(&names, "t77.dat.gz"));
        assert!(!names_file(&names, "other.dat"));
    }
}
