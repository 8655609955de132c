//! The whole answer as one JSON object, or its rows one object a line.

use std::io::{self, Write};

use super::sheet::Sheet;

pub(super) fn write(sheet: &Sheet, out: &mut dyn Write) -> io::Result<()> {
    serde_json::to_writer_pretty(&mut *out, &sheet.object)?;
    writeln!(out)
}

pub(super) fn write_lines(sheet: &Sheet, out: &mut dyn Write) -> io::Result<()> {
    for row in sheet.list() {
        serde_json::to_writer(&mut *out, row)?;
        writeln!(out)?;
    }
    Ok(())
}
