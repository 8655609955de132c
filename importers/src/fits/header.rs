//! Headers: cards of 80 bytes in blocks of 2880, up to END.

use std::collections::HashMap;
use std::io::{self, Read};

use super::BLOCK;
use crate::limits::Limits;
use crate::row::{RowProblem, check_length};

const CARD: usize = 80;

/// The keywords of one header and their values as text.
#[derive(Debug, Default)]
pub(super) struct Header {
    values: HashMap<String, String>,
}

impl Header {
    /// The value of a keyword.
    pub fn text(&self, key: &str) -> Option<String> {
        self.values.get(key).cloned()
    }

    /// A size that must be there.
    pub fn size(&self, key: &str) -> Result<usize, String> {
        let text = self
            .values
            .get(key)
            .ok_or_else(|| format!("{key} is missing"))?;
        let text = text.trim();
        text.parse()
            .map_err(|_| format!("{key}: `{}` is no size", crate::sink::shown(text)))
    }
}

/// Reads the next header; `None` at the end of the file.
pub(super) fn read_header<R: Read>(
    input: &mut R,
    limits: &Limits,
) -> Result<Option<Header>, RowProblem> {
    let mut header = Header::default();
    let mut block = vec![0; BLOCK];
    let mut length = 0;
    let mut last = String::new();
    loop {
        if !fill(input, &mut block)? {
            return if length == 0 {
                Ok(None)
            } else {
                Err(RowProblem::Format(
                    "the file ends inside a header".to_owned(),
                ))
            };
        }
        length += BLOCK;
        check_length("header", length, limits.header_bytes)?;
        for card in block.chunks_exact(CARD) {
            let Ok(card) = std::str::from_utf8(card) else {
                return Err(RowProblem::Encoding { encoding: "ASCII" });
            };
            if card.trim_end() == "END" {
                return Ok(Some(header));
            }
            read_card(card, &mut header, &mut last);
        }
    }
}

/// Fills a block; false at the end of the file.
fn fill<R: Read>(input: &mut R, block: &mut [u8]) -> Result<bool, RowProblem> {
    let mut filled = 0;
    while filled < block.len() {
        match input.read(&mut block[filled..]) {
            Ok(0) => break,
            Ok(count) => filled += count,
            Err(error) if error.kind() == io::ErrorKind::Interrupted => {}
            Err(error) => return Err(error.into()),
        }
    }
    if filled == block.len() {
        return Ok(true);
    }
    // Files may end in padding of less than a block.
    if block[..filled].iter().all(|b| matches!(b, 0 | b' ')) {
        return Ok(false);
    }
    Err(RowProblem::Format(
        "the file ends inside a block".to_owned(),
    ))
}

fn read_card(card: &str, header: &mut Header, last: &mut String) {
    let (Some(key), Some(rest)) = (card.get(..8), card.get(8..)) else {
        return;
    };
    let key = key.trim_end();
    if key == "CONTINUE" {
        if let Some(value) = header.values.get_mut(last)
            && value.ends_with('&')
        {
            value.pop();
            value.push_str(&value_text(rest));
        }
        return;
    }
    if let Some(value) = rest.strip_prefix("= ") {
        header
            .values
            .entry(key.to_owned())
            .or_insert_with(|| value_text(value));
        key.clone_into(last);
    }
}

/// A value without its comment; quotes inside a quoted text are doubled.
fn value_text(rest: &str) -> String {
    let rest = rest.trim_start();
    let Some(quoted) = rest.strip_prefix('\'') else {
        return rest.split('/').next().unwrap_or_default().trim().to_owned();
    };
    let mut text = String::new();
    let mut chars = quoted.chars().peekable();
    while let Some(c) = chars.next() {
        if c == '\'' {
            if chars.peek() != Some(&'\'') {
                break;
            }
            chars.next();
        }
        text.push(c);
    }
    text.trim_end().to_owned()
}

/// Skips the data of a header, padding included.
pub(super) fn skip_data<R: Read>(input: &mut R, header: &Header) -> Result<(), RowProblem> {
    let number = |key: &str| {
        header
            .text(key)
            .and_then(|text| text.trim().parse::<u64>().ok())
    };
    let axes = number("NAXIS").unwrap_or(0);
    let mut size = u64::from(axes > 0);
    for axis in 1..=axes.min(999) {
        size = size.saturating_mul(number(&format!("NAXIS{axis}")).unwrap_or(0));
    }
    let bits = header
        .text("BITPIX")
        .and_then(|text| text.trim().parse::<i64>().ok());
    let bytes = bits.unwrap_or(8).unsigned_abs() / 8;
    let size = size
        .saturating_add(number("PCOUNT").unwrap_or(0))
        .saturating_mul(bytes);
    let padded = size.div_ceil(BLOCK as u64).saturating_mul(BLOCK as u64);
    let skipped = io::copy(&mut input.by_ref().take(padded), &mut io::sink())?;
    if skipped < size {
        return Err(RowProblem::Format(
            "the file ends inside its data".to_owned(),
        ));
    }
    Ok(())
}
