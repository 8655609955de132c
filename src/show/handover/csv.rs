//! CSV behind comment lines: ECSV 1.0 (APE 6 of the Astropy project) with commas, which any reader
//! of CSV takes that leaves out lines beginning with `#`.

use std::io::{self, Write};

use importers::handover::{Cell, Header, Kind, NAME};
use importers::number::double_text;
use vocabulary::atom::Species;

use super::{RowWriter, source_lines};
use crate::catalogue::Receiver;

pub(super) struct CsvWriter<'w> {
    out: Box<dyn Write + 'w>,
}

impl<'w> CsvWriter<'w> {
    pub fn new(out: Box<dyn Write + 'w>) -> Self {
        Self { out }
    }
}

impl Receiver for CsvWriter<'_> {
    fn begin(&mut self, header: &Header) -> io::Result<()> {
        let out = &mut self.out;
        writeln!(out, "# %ECSV 1.0\n# ---")?;
        writeln!(out, "# # {}, {}", header.program, header.selection)?;
        for line in source_lines(header) {
            writeln!(out, "# # {line}")?;
        }
        writeln!(out, "# delimiter: ','\n# datatype:")?;
        for column in header.content.columns() {
            let datatype = match column.kind {
                Kind::Text => "string",
                Kind::Number => "float64",
                Kind::Integer => "int64",
                Kind::Truth => "bool",
            };
            write!(out, "# - {{name: {}, datatype: {datatype}", column.name)?;
            if let Some(unit) = column.unit.free() {
                write!(out, ", unit: {unit}")?;
            }
            let description = column.description.replace('\'', "''");
            writeln!(out, ", description: '{description}'}}")?;
        }
        let about = ascii(&header.to_json()).replace('\'', "''");
        writeln!(out, "# meta:\n#   {NAME}: '{about}'")?;
        let names: Vec<&str> = header.content.columns().iter().map(|c| c.name).collect();
        writeln!(out, "{}", names.join(","))
    }

    fn row(&mut self, _: Species, cells: &[Cell<'_>]) -> io::Result<()> {
        for (index, cell) in cells.iter().enumerate() {
            if index > 0 {
                self.out.write_all(b",")?;
            }
            match cell {
                Cell::Missing => {}
                Cell::Text(text) => quoted(text, &mut self.out)?,
                Cell::Number(value) => self.out.write_all(double_text(*value).as_bytes())?,
                Cell::Integer(value) => write!(self.out, "{value}")?,
                Cell::Truth(true) => self.out.write_all(b"True")?,
                Cell::Truth(false) => self.out.write_all(b"False")?,
            }
        }
        self.out.write_all(b"\n")
    }
}

impl RowWriter for CsvWriter<'_> {
    fn finish(&mut self) -> io::Result<()> {
        self.out.flush()
    }
}

/// A text in quotes where it holds what CSV or ECSV gives a meaning.
fn quoted(text: &str, out: &mut dyn Write) -> io::Result<()> {
    let special = |b: u8| matches!(b, b',' | b'"' | b'#' | b' ' | b'\n' | b'\r');
    if text.bytes().any(special) {
        write!(out, "\"{}\"", text.replace('"', "\"\""))
    } else {
        out.write_all(text.as_bytes())
    }
}

/// JSON with all but printable ASCII as escapes, as YAML and the header of ECSV want it.
fn ascii(json: &str) -> String {
    let mut out = String::with_capacity(json.len());
    let mut units = [0u16; 2];
    for c in json.chars() {
        if (' '..='~').contains(&c) {
            out.push(c);
        } else {
            for unit in c.encode_utf16(&mut units) {
                out.push_str(&format!("\\u{unit:04x}"));
            }
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn json_stays_the_same_text_in_ascii() {
        let text = "{\"a\":\"Å ⁻¹ 𝄞 'x'\"}";
        let plain = ascii(text);
        assert!(plain.is_ascii());
        let read = |t: &str| serde_json::from_str::<serde_json::Value>(t).unwrap();
        assert_eq!(read(&plain), read(text));
    }

    #[test]
    fn texts_with_marks_are_quoted() {
        let shown = |text: &str| {
            let mut out = Vec::new();
            quoted(text, &mut out).unwrap();
            String::from_utf8(out).unwrap()
        };
        assert_eq!(shown("3d6.(5D).4s"), "3d6.(5D).4s");
        assert_eq!(shown("a, \"b\""), "\"a, \"\"b\"\"\"");
    }
}
