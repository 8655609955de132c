//! Where records go, and what is told about the rows that became none.

use std::error::Error;
use std::fmt;
use std::sync::Arc;

use crate::record::Record;

/// Whatever the receiver of the records reports; handed back unchanged in
/// [`crate::error::ImportError::Sink`].
pub type SinkError = Box<dyn Error + Send + Sync>;

/// Receives records one by one, in the order of the file.
pub trait Sink {
    /// Takes one record.
    ///
    /// # Errors
    /// Any error ends the import and is passed through (a full disk, a wish to stop).
    fn accept(&mut self, record: Record) -> Result<(), SinkError>;
}

impl Sink for Vec<Record> {
    fn accept(&mut self, record: Record) -> Result<(), SinkError> {
        self.push(record);
        Ok(())
    }
}

/// A row that could not become a record, and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Refusal {
    /// File name as the description gives it, without folders.
    pub file: Arc<str>,
    /// Line of the file, from 1 (row of a binary table, line of the element in XML).
    pub line: u64,
    /// Name of the column, where one column is at fault.
    pub column: Option<String>,
    /// The text found there, control characters escaped, at most 80 characters.
    pub text: String,
    /// What was expected, as a clause without a full stop.
    pub reason: String,
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:{}", self.file, self.line)?;
        if let Some(column) = &self.column {
            write!(f, ": column `{column}`")?;
        }
        if !self.text.is_empty() {
            write!(f, ": `{}`", self.text)?;
        }
        write!(f, ": {}", self.reason)
    }
}

/// What a whole import did. `read` is `records + refused.len()` plus the skipped rows.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct ReadReport {
    /// Data rows seen (header, comment and blank lines are none).
    pub read: u64,
    /// Rows that became a record.
    pub records: u64,
    /// Rows left out by a rule of the description: its reason and how many.
    pub skipped: Vec<(String, u64)>,
    /// Rows refused; empty unless bad rows were allowed.
    pub refused: Vec<Refusal>,
    /// Things worth knowing that refuse nothing.
    pub warnings: Vec<String>,
}

impl ReadReport {
    pub(crate) fn count_skip(&mut self, reason: &str) {
        match self.skipped.iter_mut().find(|(known, _)| known == reason) {
            Some((_, count)) => *count += 1,
            None => self.skipped.push((reason.to_owned(), 1)),
        }
    }
}

/// Text from a file, safe to show: control and direction characters are escaped, and at most
/// 80 characters are kept.
pub fn shown(text: &str) -> String {
    let mut out = String::new();
    for (index, c) in text.chars().enumerate() {
        if index == 80 {
            out.push('…');
            break;
        }
        match c {
            c if c.is_control() || is_direction_mark(c) => out.extend(c.escape_unicode()),
            c => out.push(c),
        }
    }
    out
}

fn is_direction_mark(c: char) -> bool {
    matches!(c, '\u{200e}' | '\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}' | '\u{feff}')
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shown_text_has_no_control_or_direction_characters() {
        assert_eq!(shown("a\u{1b}[31m\u{202e}b"), "a\\u{1b}[31m\\u{202e}b");
        assert_eq!(shown(&"x".repeat(100)).chars().count(), 81);
    }
}
