//! One answer, ready to be written in any form.

use std::collections::BTreeMap;
use std::io::{self, BufWriter, IsTerminal, Write};

use serde_json::{Map, Value};

use super::{csv, json, markdown, table};

/// Forms of an answer.
#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
pub enum Format {
    /// For reading: a headline, a table, notes.
    Table,
    /// The rows, columns named as the JSON keys.
    Csv,
    /// One object with everything.
    Json,
    /// One object per row.
    Jsonl,
    /// The table as Markdown.
    Markdown,
}

/// On which side a column is flush.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Align {
    /// Words.
    Left,
    /// Numbers.
    Right,
}

/// A column of the table for reading.
#[derive(Clone, Copy, Debug)]
pub struct Column {
    /// Its heading, unit included.
    pub title: &'static str,
    /// Its side.
    pub align: Align,
    /// Its cells may be broken into lines.
    pub wraps: bool,
}

impl Column {
    /// A column whose cells stay on one line.
    pub const fn whole(title: &'static str, align: Align) -> Self {
        Self {
            title,
            align,
            wraps: false,
        }
    }

    /// A column whose cells are broken where space is short.
    pub const fn wrapped(title: &'static str, align: Align) -> Self {
        Self {
            title,
            align,
            wraps: true,
        }
    }
}

/// What every answer states beside its rows.
#[derive(Clone, Debug, Default)]
pub struct Context {
    /// Name of the command.
    pub command: &'static str,
    /// Medium asked for.
    pub medium: String,
    /// Conditions, by key with unit.
    pub conditions: Map<String, Value>,
    /// What was assumed, one phrase each.
    pub assumed: Vec<String>,
    /// Sources by key: citation and licence.
    pub sources: BTreeMap<String, (String, String)>,
}

/// An answer to be written.
#[derive(Clone, Debug)]
pub struct Sheet {
    /// The answer in words.
    pub headline: Vec<String>,
    /// Columns of the table.
    pub columns: Vec<Column>,
    /// Cells of the table.
    pub rows: Vec<Vec<String>>,
    /// Sentences below the table.
    pub notes: Vec<String>,
    /// The whole answer.
    pub object: Map<String, Value>,
    /// Key of the list in `object` that CSV and JSON lines are made of.
    pub list: &'static str,
}

impl Sheet {
    /// Writes the answer to standard output.
    ///
    /// # Errors
    /// What the system says; a closed pipe comes back as `BrokenPipe`.
    pub fn print(&self, format: Format) -> io::Result<()> {
        let stdout = io::stdout();
        let terminal = stdout.is_terminal();
        let mut out = BufWriter::new(stdout.lock());
        self.write(format, terminal, &mut out)?;
        out.flush()
    }

    /// Writes the answer; on a terminal the table takes its width, else 100 columns.
    ///
    /// # Errors
    /// What the writer says.
    pub fn write(&self, format: Format, terminal: bool, out: &mut dyn Write) -> io::Result<()> {
        match format {
            Format::Table => table::write(self, terminal, out),
            Format::Csv => csv::write(self, out),
            Format::Json => json::write(self, out),
            Format::Jsonl => json::write_lines(self, out),
            Format::Markdown => markdown::write(self, out),
        }
    }

    /// Text to be copied as it stands, shown below all else.
    pub(super) fn verbatim(&self) -> Option<&str> {
        self.object.get("mapping").and_then(Value::as_str)
    }

    /// The rows of the machine-readable forms.
    pub(super) fn list(&self) -> &[Value] {
        self.object
            .get(self.list)
            .and_then(Value::as_array)
            .map_or(&[], Vec::as_slice)
    }
}

impl Context {
    /// The keys that every answer carries.
    pub fn object(self, notes: &[String]) -> Map<String, Value> {
        let mut object = Map::new();
        object.insert("command".into(), self.command.into());
        object.insert("version".into(), env!("CARGO_PKG_VERSION").into());
        object.insert("medium".into(), self.medium.into());
        object.insert("conditions".into(), Value::Object(self.conditions));
        object.insert("assumed".into(), self.assumed.into());
        object.insert("notes".into(), notes.into());
        let sources = self.sources.into_iter().map(|(key, (citation, licence))| {
            (
                key,
                serde_json::json!({"citation": citation, "licence": licence}),
            )
        });
        object.insert("sources".into(), Value::Object(sources.collect()));
        object
    }

    /// One line per source.
    pub fn source_notes(&self) -> Vec<String> {
        self.sources
            .iter()
            .map(|(key, (citation, licence))| format!("{key}: {citation} ({licence})."))
            .collect()
    }
}
