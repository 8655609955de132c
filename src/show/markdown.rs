//! The table as Markdown, for a logbook.

use std::io::{self, Write};

use super::sheet::{Align, Sheet};
use super::text::safe;

pub(super) fn write(sheet: &Sheet, out: &mut dyn Write) -> io::Result<()> {
    for sentence in &sheet.headline {
        writeln!(out, "{}\n", safe(sentence))?;
    }
    if !sheet.rows.is_empty() {
        row(out, sheet.columns.iter().map(|c| c.title))?;
        let rule = |align| if align == Align::Right { "---:" } else { "---" };
        row(out, sheet.columns.iter().map(|c| rule(c.align)))?;
        for cells in &sheet.rows {
            row(out, cells.iter().map(String::as_str))?;
        }
        writeln!(out)?;
    }
    for note in &sheet.notes {
        writeln!(out, "- {}", safe(note))?;
    }
    Ok(())
}

fn row<'t>(out: &mut dyn Write, cells: impl Iterator<Item = &'t str>) -> io::Result<()> {
    for cell in cells {
        write!(
            out,
            "| {} ",
            safe(&cell.replace('|', "\\|").replace('\n', " "))
        )?;
    }
    writeln!(out, "|")
}
