//! A stream of lines with a limit on their length; LF, CR LF and CR all end a line.

use std::io::{BufRead, BufReader, Read};

use crate::row::{RowProblem, check_length};

/// Reads lines as bytes, without their ends.
pub struct Lines<R> {
    input: BufReader<R>,
    line: u64,
    limit: usize,
    after_return: bool,
}

impl<R: Read> Lines<R> {
    /// Lines of `input`, none longer than `limit` bytes.
    pub fn new(input: R, limit: usize) -> Self {
        Self {
            input: BufReader::with_capacity(64 * 1024, input),
            line: 0,
            limit,
            after_return: false,
        }
    }

    /// Number of the line read last, from 1.
    pub fn line(&self) -> u64 {
        self.line
    }

    /// Reads the next line into `line`; false at the end of the file. A byte order mark before
    /// the first line is dropped.
    ///
    /// # Errors
    /// A failing input or a line beyond the limit.
    pub fn read(&mut self, line: &mut Vec<u8>) -> Result<bool, RowProblem> {
        line.clear();
        let mut any = false;
        self.line += 1;
        loop {
            let buffer = self.input.fill_buf()?;
            if buffer.is_empty() {
                self.line -= u64::from(!any);
                break;
            }
            let skip = usize::from(self.after_return && buffer[0] == b'\n');
            self.after_return = false;
            let rest = &buffer[skip..];
            any |= !rest.is_empty();
            match rest.iter().position(|b| matches!(b, b'\r' | b'\n')) {
                Some(end) => {
                    line.extend_from_slice(&rest[..end]);
                    self.after_return = rest[end] == b'\r';
                    self.input.consume(skip + end + 1);
                    break;
                }
                None => {
                    line.extend_from_slice(rest);
                    let used = buffer.len();
                    self.input.consume(used);
                }
            }
            check_length("row", line.len(), self.limit)?;
        }
        check_length("row", line.len(), self.limit)?;
        if self.line == 1 && line.starts_with(b"\xef\xbb\xbf") {
            line.drain(..3);
        }
        Ok(any)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn all_line_ends_count_once() {
        let mut lines = Lines::new(&b"a\r\nb\rc\n\nd"[..], 100);
        let mut line = Vec::new();
        let mut seen = Vec::new();
        while lines.read(&mut line).unwrap() {
            seen.push((lines.line(), String::from_utf8(line.clone()).unwrap()));
        }
        let expected = [(1, "a"), (2, "b"), (3, "c"), (4, ""), (5, "d")];
        assert_eq!(seen, expected.map(|(n, text)| (n, text.to_owned())));
        assert!(Lines::new(&b"long line"[..], 4).read(&mut line).is_err());
    }
}
