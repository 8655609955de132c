//! The form for reading: words, table, notes; at most 100 columns where nobody says otherwise.

use std::io::{self, Write};

use comfy_table::presets::NOTHING;
use comfy_table::{CellAlignment, ColumnConstraint, ContentArrangement, LineStyle, Table};

use super::sheet::{Align, Sheet};
use super::text::{safe, wrap};

/// Width of an answer that goes to a file or a pipe.
const PIPED_COLUMNS: u16 = 100;

pub(super) fn write(sheet: &Sheet, terminal: bool, out: &mut dyn Write) -> io::Result<()> {
    let mut table = Table::new();
    if !terminal {
        table.force_no_tty();
    }
    let width = table.width().filter(|_| terminal).unwrap_or(PIPED_COLUMNS);
    for sentence in &sheet.headline {
        writeln!(out, "{}", wrap(&safe(sentence), usize::from(width)))?;
    }
    if !sheet.rows.is_empty() {
        fill(&mut table, sheet, width);
        writeln!(out, "\n{}\n", table.trim_fmt())?;
    } else if !sheet.notes.is_empty() {
        writeln!(out)?;
    }
    for note in &sheet.notes {
        writeln!(out, "{}", wrap(&safe(note), usize::from(width)))?;
    }
    if let Some(text) = sheet.verbatim() {
        write!(out, "\n{}", safe(text))?;
    }
    Ok(())
}

fn fill(table: &mut Table, sheet: &Sheet, width: u16) {
    table
        .load_style(NOTHING.header_separator(LineStyle::none().fill('─')))
        .set_content_arrangement(ContentArrangement::Dynamic)
        .set_width(width)
        .set_header(sheet.columns.iter().map(|c| c.title));
    for row in &sheet.rows {
        table.add_row(row.iter().map(|cell| safe(cell)));
    }
    for (index, column) in sheet.columns.iter().enumerate() {
        if let Some(cells) = table.column_mut(index) {
            cells.set_padding((0, 1));
            if !column.wraps {
                cells.set_constraint(ColumnConstraint::ContentWidth);
            }
            if column.align == Align::Right {
                cells.set_cell_alignment(CellAlignment::Right);
            }
        }
    }
}
