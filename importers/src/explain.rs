//! Saying what a file is and offering a mapping that only needs editing.

use std::fmt::Write as _;
use std::io::Read;

use crate::detect::{Detected, HEAD_BYTES, detect};
use crate::error::ImportError;
use crate::infer::{infer, target_of};
use crate::limits::Limits;
use crate::read::open_table;
use crate::row::ColumnInfo;
use crate::sink::shown;
use crate::source::{Format, RecordKind, TableDescription};

/// What was recognised in a file.
#[derive(Clone, Debug, PartialEq)]
pub struct Explanation {
    /// What the file is.
    pub detected: Detected,
    /// Its columns and the targets that they are taken for.
    pub columns: Vec<(ColumnInfo, Option<&'static str>)>,
    /// A `source.toml` to edit; empty where the file is no table.
    pub mapping: String,
    /// What to know or to do, one sentence each.
    pub notes: Vec<String>,
}

/// Explains a file given as its unpacked bytes (all of it, or the head that holds the columns).
pub fn explain(bytes: &[u8], file: &str) -> Explanation {
    let detected = detect(&bytes[..bytes.len().min(HEAD_BYTES)]);
    let mut explanation = Explanation {
        detected,
        columns: Vec::new(),
        mapping: String::new(),
        notes: Vec::new(),
    };
    let format = match detected {
        Detected::Table(format) => format,
        Detected::Text => Format::Delimited,
        other => {
            explanation.notes.push(no_table(other).to_owned());
            return explanation;
        }
    };
    let table = guess_layout(bytes, file, format);
    match columns_of(bytes, &table) {
        Ok(columns) => fill(&mut explanation, &table, columns),
        Err(error) => explanation.notes.push(error.to_string()),
    }
    explanation
}

fn no_table(detected: Detected) -> &'static str {
    match detected {
        Detected::WebPage => "this is a web page, not a table; save the table itself",
        Detected::Packed => {
            "this is an archive of a kind that is not read; unpack it first (gzip is read)"
        }
        Detected::Empty => "the file is empty",
        _ => "the bytes are no text and no known binary table",
    }
}

/// A table description with the delimiter that fits the first line best.
fn guess_layout(bytes: &[u8], file: &str, format: Format) -> TableDescription {
    let mut table = TableDescription::of_file(file, format);
    if format == Format::Delimited {
        let line = bytes
            .split(|b| matches!(b, b'\r' | b'\n'))
            .next()
            .unwrap_or_default();
        let count = |mark: u8| line.iter().filter(|b| **b == mark).count();
        let best = [b',', b';', b'\t', b'|']
            .into_iter()
            .max_by_key(|mark| count(*mark));
        table.delimiter = match best.filter(|mark| count(*mark) > 0) {
            Some(b'\t') => Some("tab".to_owned()),
            Some(mark) => Some(char::from(mark).to_string()),
            None => Some("blanks".to_owned()),
        };
    }
    table
}

fn columns_of(bytes: &[u8], table: &TableDescription) -> Result<Vec<ColumnInfo>, ImportError> {
    let input: Box<dyn Read> = Box::new(std::io::Cursor::new(bytes.to_vec()));
    let rows = open_table(table, input, None, &Limits::default())?;
    Ok(rows.columns().to_vec())
}

fn fill(explanation: &mut Explanation, table: &TableDescription, columns: Vec<ColumnInfo>) {
    let inferred = infer(&columns);
    let records = inferred.records();
    explanation.mapping = mapping(table, &columns, records);
    if inferred.columns.wavelength.is_some() {
        explanation.notes.push(
            "the file does not say whether its wavelengths are in vacuum or in air: state medium"
                .to_owned(),
        );
    }
    if !inferred.unrecognised.is_empty() {
        explanation.notes.push(format!(
            "{} of {} columns are not recognised; map them or leave them under ignore",
            inferred.unrecognised.len(),
            columns.len()
        ));
    }
    explanation.columns = columns
        .into_iter()
        .map(|column| {
            let target = target_of(&column);
            (column, target)
        })
        .collect();
}

fn mapping(table: &TableDescription, columns: &[ColumnInfo], records: RecordKind) -> String {
    let mut text = String::from(
        "key = \"\"            # short name, a-z 0-9 - _ .\ntitle = \"\"\ncitation = \"\"\nlicence = \"\"        # SPDX identifier\nkind = \"paper\"      # or curated, model, computed\n\n[[table]]\n",
    );
    let records = match records {
        RecordKind::Levels => "levels",
        RecordKind::Lines => "lines",
    };
    let _ = writeln!(text, "file = {}", quoted(&table.file));
    let _ = writeln!(text, "records = \"{records}\"");
    let _ = writeln!(text, "format = \"{}\"", table.format.name());
    if let Some(delimiter) = &table.delimiter {
        let _ = writeln!(text, "delimiter = {}", quoted(delimiter));
    }
    let mut ignored = Vec::new();
    let mut mapped = String::new();
    for column in columns {
        let unit = column.unit.as_deref().unwrap_or_default();
        match target_of(column) {
            Some(target) => {
                let medium = if target == "wavelength" {
                    ", medium = \"\""
                } else {
                    ""
                };
                let _ = write!(
                    mapped,
                    "{target} = {{ column = {}{medium} }}",
                    quoted(&column.name)
                );
            }
            None => {
                ignored.push(quoted(&column.name));
                let _ = write!(mapped, "#        {{ column = {} }}", quoted(&column.name));
            }
        }
        let words = column.description.as_deref().unwrap_or_default();
        let _ = writeln!(mapped, "  # {} {}", shown(unit), shown(words));
    }
    let _ = writeln!(text, "ignore = [{}]\n[table.columns]", ignored.join(", "));
    text + &mapped
}

/// A TOML basic string.
fn quoted(text: &str) -> String {
    let mut out = String::from("\"");
    for c in text.chars() {
        match c {
            '"' => out.push_str("\\\""),
            '\\' => out.push_str("\\\\"),
            c if c.is_control() => {
                let _ = write!(out, "\\u{:04X}", u32::from(c));
            }
            c => out.push(c),
        }
    }
    out.push('"');
    out
}
