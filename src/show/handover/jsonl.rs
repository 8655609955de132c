//! JSON lines: the first line is about the file, each other one is a row.

use std::io::{self, Write};

use importers::handover::{Cell, Column, Header, NAME};
use vocabulary::atom::Species;

use super::RowWriter;
use crate::catalogue::Receiver;

pub(super) struct JsonlWriter<'w> {
    out: Box<dyn Write + 'w>,
    columns: &'static [Column],
}

impl<'w> JsonlWriter<'w> {
    pub fn new(out: Box<dyn Write + 'w>) -> Self {
        Self { out, columns: &[] }
    }
}

impl Receiver for JsonlWriter<'_> {
    fn begin(&mut self, header: &Header) -> io::Result<()> {
        self.columns = header.content.columns();
        writeln!(self.out, "{{\"{NAME}\":{}}}", header.to_json())
    }

    fn row(&mut self, _: Species, cells: &[Cell<'_>]) -> io::Result<()> {
        let out = &mut self.out;
        for (index, (column, cell)) in self.columns.iter().zip(cells).enumerate() {
            let mark = if index == 0 { '{' } else { ',' };
            write!(out, "{mark}\"{}\":", column.name)?;
            match cell {
                Cell::Missing => out.write_all(b"null")?,
                Cell::Text(text) => serde_json::to_writer(&mut *out, text)?,
                Cell::Number(value) => serde_json::to_writer(&mut *out, value)?,
                Cell::Integer(value) => write!(out, "{value}")?,
                Cell::Truth(value) => write!(out, "{value}")?,
            }
        }
        self.out.write_all(b"}\n")
    }
}

impl RowWriter for JsonlWriter<'_> {
    fn finish(&mut self) -> io::Result<()> {
        self.out.flush()
    }
}
