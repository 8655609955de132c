//! What a file is, by its content.

use crate::source::Format;

/// What the first bytes of a file tell.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Detected {
    /// A format that can be read; [`Format::Delimited`] only after a look at its lines.
    Table(Format),
    /// A page made for browsers, often an error message in place of a table.
    WebPage,
    /// A packed file of a kind that is not read.
    Packed,
    /// Nothing there.
    Empty,
    /// Text that no rule recognises: it needs a description.
    Text,
    /// Bytes that are no text.
    Binary,
}

/// Bytes that [`detect`] wants to see.
pub const HEAD_BYTES: usize = 64 * 1024;

/// Tells the kind of a file by its first [`HEAD_BYTES`], already unpacked.
pub fn detect(head: &[u8]) -> Detected {
    let head = head.strip_prefix(b"\xef\xbb\xbf").unwrap_or(head);
    let text = head.trim_ascii_start();
    if text.is_empty() {
        return Detected::Empty;
    }
    if head.starts_with(b"SIMPLE  =") {
        return Detected::Table(Format::Fits);
    }
    if head.starts_with(b"PAR1") {
        return Detected::Table(Format::Parquet);
    }
    if [
        &b"PK\x03\x04"[..],
        b"BZh",
        b"\xfd7zXZ\0",
        b"\x28\xb5\x2f\xfd",
    ]
    .iter()
    .any(|m| head.starts_with(m))
    {
        return Detected::Packed;
    }
    if head.contains(&0) {
        return Detected::Binary;
    }
    if text[0] == b'<' {
        return markup(text);
    }
    if text.starts_with(b"{\"") {
        return Detected::Table(Format::Jsonl);
    }
    if text.starts_with(b"# %ECSV") {
        return Detected::Table(Format::Ecsv);
    }
    if contains(text, b"byte-by-byte description of file") {
        return Detected::Table(Format::Mrt);
    }
    Detected::Text
}

fn markup(text: &[u8]) -> Detected {
    if contains(text, b"<votable") || contains(text, b":votable") {
        Detected::Table(Format::Votable)
    } else if contains(text, b"xsamsdata") {
        Detected::Table(Format::Xsams)
    } else if contains(text, b"<html") || contains(text, b"<!doctype html") {
        Detected::WebPage
    } else {
        Detected::Text
    }
}

/// Whether `text` holds `wanted` (lower case) in any case.
fn contains(text: &[u8], wanted: &[u8]) -> bool {
    let mut windows = text.windows(wanted.len());
    windows.any(|window| window.eq_ignore_ascii_case(wanted))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn kinds_are_told_by_content() {
        for (head, expected) in [
            (
                &b"SIMPLE  =                    T"[..],
                Detected::Table(Format::Fits),
            ),
            (
                b"<?xml version='1.0'?>\n<VOTABLE version='1.4'>",
                Detected::Table(Format::Votable),
            ),
            (b"<vot:VOTABLE>", Detected::Table(Format::Votable)),
            (b"<XSAMSData xmlns='x'>", Detected::Table(Format::Xsams)),
            (b"<!DOCTYPE html><html>", Detected::WebPage),
            (b"# %ECSV 1.0\n", Detected::Table(Format::Ecsv)),
            (
                b"Title: x\nByte-by-byte Description of file: a\n",
                Detected::Table(Format::Mrt),
            ),
            (b"PAR1", Detected::Table(Format::Parquet)),
            (b"{\"a\": 1}\n", Detected::Table(Format::Jsonl)),
            (b"PK\x03\x04", Detected::Packed),
            (b"a,b\n1,2\n", Detected::Text),
            (b" \n", Detected::Empty),
            (b"\x00\x01", Detected::Binary),
        ] {
            assert_eq!(detect(head), expected, "{}", String::from_utf8_lossy(head));
        }
    }
}
