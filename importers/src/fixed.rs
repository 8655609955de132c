//! Tables of fixed width: columns are byte (or character) ranges of each line.

use std::io::Read;

use crate::limits::Limits;
use crate::lines::Lines;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader};

/// What a range counts.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, serde::Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Counting {
    /// Bytes of the file.
    #[default]
    Bytes,
    /// Characters, where the encoding needs several bytes for some.
    Characters,
}

/// First and last position of a column, from 1, both inside.
pub type Range = (usize, usize);

/// Reads lines and cuts them at fixed ranges. Text beyond the end of a line is blank.
pub struct FixedReader<R> {
    lines: Lines<R>,
    ranges: Vec<Range>,
    columns: Vec<ColumnInfo>,
    counting: Counting,
    comment: Option<Vec<u8>>,
    skip_lines: u64,
    line: Vec<u8>,
}

impl<R: Read> FixedReader<R> {
    /// A reader that leaves out the first `header_lines` lines and lines that begin with `comment`.
    pub fn new(
        input: R,
        columns: Vec<(ColumnInfo, Range)>,
        counting: Counting,
        comment: Option<Vec<u8>>,
        header_lines: u64,
        limits: &Limits,
    ) -> Self {
        let (columns, ranges) = columns.into_iter().unzip();
        Self {
            lines: Lines::new(input, limits.row_bytes),
            ranges,
            columns,
            counting,
            comment,
            skip_lines: header_lines,
            line: Vec::new(),
        }
    }

    fn next_line(&mut self) -> Result<bool, RowError> {
        loop {
            let more = self
                .lines
                .read(&mut self.line)
                .map_err(|problem| RowError::fatal(self.lines.line(), problem))?;
            if !more {
                return Ok(false);
            }
            if self.lines.line() <= self.skip_lines || self.is_no_row() {
                continue;
            }
            return Ok(true);
        }
    }

    fn is_no_row(&self) -> bool {
        let blank = self.line.iter().all(u8::is_ascii_whitespace);
        let comment = self.comment.as_deref();
        blank || comment.is_some_and(|prefix| self.line.starts_with(prefix))
    }
}

impl<R: Read> RowReader for FixedReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        if !self.next_line()? {
            return Ok(false);
        }
        let line = self.lines.line();
        let text = checked_line(&self.line, line)?;
        row.start(line);
        for (index, range) in self.ranges.iter().enumerate() {
            let cell = cut(text, *range, self.counting)
                .ok_or_else(|| RowError::row(line, Some(index), text, RowProblem::CutCharacter))?;
            row.push(cell);
        }
        Ok(true)
    }
}

/// A line as text, tabulators and zero bytes refused.
pub(crate) fn checked_line(bytes: &[u8], line: u64) -> Result<&str, RowError> {
    let fail = |problem| {
        let text = String::from_utf8_lossy(bytes);
        RowError::row(line, None, &text, problem)
    };
    if bytes.contains(&b'\t') {
        return Err(fail(RowProblem::Tabulator));
    }
    if bytes.contains(&0) {
        return Err(fail(RowProblem::ZeroByte));
    }
    std::str::from_utf8(bytes).map_err(|_| fail(RowProblem::Encoding { encoding: "UTF-8" }))
}

/// The text of a range; empty beyond the end of the line, `None` where a character is cut.
pub(crate) fn cut(text: &str, (first, last): Range, counting: Counting) -> Option<&str> {
    let (start, end) = (first.saturating_sub(1), last);
    if counting == Counting::Bytes || text.is_ascii() {
        let end = end.min(text.len());
        return text.get(start.min(end)..end);
    }
    let mut marks = text.char_indices().map(|(at, _)| at);
    let from = marks.nth(start).unwrap_or(text.len());
    let rest = &text[from..];
    let length = rest
        .char_indices()
        .nth(end - start)
        .map_or(rest.len(), |(at, _)| at);
    rest.get(..length)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges_count_bytes_or_characters() {
        assert_eq!(cut("abcdef", (2, 4), Counting::Bytes), Some("bcd"));
        assert_eq!(cut("abc", (3, 9), Counting::Bytes), Some("c"));
        assert_eq!(cut("abc", (5, 9), Counting::Bytes), Some(""));
        assert_eq!(cut("3P°x", (3, 4), Counting::Bytes), Some("°"));
        assert_eq!(cut("3P°x", (4, 5), Counting::Bytes), None);
        assert_eq!(cut("3P°x", (4, 5), Counting::Characters), Some("x"));
        assert_eq!(cut("°°°", (2, 2), Counting::Characters), Some("°"));
    }
}
