//! VOTable 1.4 (IVOA Recommendation of 21 October 2019), rows as TABLEDATA; units in the notation
//! of VOUnits.

use std::io::{self, Write};

use importers::handover::{Cell, Content, Header, Kind, NAME};
use importers::number::double_text;
use vocabulary::atom::Species;

use super::{RowWriter, source_lines};
use crate::catalogue::Receiver;

pub(super) struct VotableWriter<'w> {
    out: Box<dyn Write + 'w>,
}

impl<'w> VotableWriter<'w> {
    pub fn new(out: Box<dyn Write + 'w>) -> Self {
        Self { out }
    }
}

impl Receiver for VotableWriter<'_> {
    fn begin(&mut self, header: &Header) -> io::Result<()> {
        let out = &mut self.out;
        let name = match header.content {
            Content::Lines => "lines",
            Content::Levels => "levels",
            Content::Reports => "reports",
        };
        writeln!(
            out,
            "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n\
             <VOTABLE version=\"1.4\" xmlns=\"http://www.ivoa.net/xml/VOTable/v1.3\">\n\
             <RESOURCE type=\"results\">\n\
             <DESCRIPTION>{}, {}</DESCRIPTION>",
            escaped(&header.program),
            escaped(&header.selection),
        )?;
        let about = header.to_json();
        let about = escaped(&about);
        writeln!(out, "<INFO name=\"{NAME}\" value=\"{name}\">{about}</INFO>")?;
        for line in source_lines(header) {
            writeln!(out, "<INFO name=\"source\" value=\"{}\"/>", escaped(&line))?;
        }
        writeln!(out, "<TABLE name=\"{name}\">")?;
        for column in header.content.columns() {
            let datatype = match column.kind {
                Kind::Text => "datatype=\"char\" arraysize=\"*\"",
                Kind::Number => "datatype=\"double\"",
                Kind::Integer => "datatype=\"long\"",
                Kind::Truth => "datatype=\"boolean\"",
            };
            write!(out, "<FIELD name=\"{}\" {datatype}", column.name)?;
            if let Some(unit) = column.unit.vounit() {
                write!(out, " unit=\"{unit}\"")?;
            }
            if let Some(ucd) = column.ucd {
                write!(out, " ucd=\"{ucd}\"")?;
            }
            let description = escaped(column.description);
            writeln!(out, "><DESCRIPTION>{description}</DESCRIPTION></FIELD>")?;
        }
        writeln!(out, "<DATA><TABLEDATA>")
    }

    fn row(&mut self, _: Species, cells: &[Cell<'_>]) -> io::Result<()> {
        let out = &mut self.out;
        out.write_all(b"<TR>")?;
        for cell in cells {
            match cell {
                Cell::Missing => out.write_all(b"<TD/>")?,
                Cell::Text(text) => write!(out, "<TD>{}</TD>", escaped(text))?,
                Cell::Number(value) => write!(out, "<TD>{}</TD>", double_text(*value))?,
                Cell::Integer(value) => write!(out, "<TD>{value}</TD>")?,
                Cell::Truth(value) => write!(out, "<TD>{value}</TD>")?,
            }
        }
        out.write_all(b"</TR>\n")
    }
}

impl RowWriter for VotableWriter<'_> {
    fn finish(&mut self) -> io::Result<()> {
        self.out
            .write_all(b"</TABLEDATA></DATA>\n</TABLE>\n</RESOURCE>\n</VOTABLE>\n")?;
        self.out.flush()
    }
}

/// Text between tags or in quotes.
fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            c => out.push(c),
        }
    }
    out
}
