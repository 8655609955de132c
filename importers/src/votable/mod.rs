//! IVOA VOTable 1.0 to 1.5: one table of a document, as TABLEDATA, BINARY or BINARY2.

mod binary;
mod field;

use std::io::Read;

use crate::limits::Limits;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader, check_columns};
use crate::xml::{Element, Node, Xml};
use binary::BinaryRows;
use field::Field;

const NAMESPACE: &str = "http://www.ivoa.net/xml/VOTable/";

/// Reads the rows of one table.
pub struct VotableReader<R: Read> {
    xml: Xml<R>,
    fields: Vec<Field>,
    columns: Vec<ColumnInfo>,
    body: Body,
    about: Option<String>,
    warnings: Vec<String>,
}

enum Body {
    /// Rows as elements.
    Text,
    /// Rows as bytes, already unpacked from base64.
    Binary(BinaryRows),
    /// No more rows.
    Ended,
}

impl<R: Read> VotableReader<R> {
    /// Finds the table called `wanted` (its name, ID or number from 1; the first where `None`).
    ///
    /// # Errors
    /// No such table, a document that reports an error, a broken head.
    pub fn new(input: R, wanted: Option<&str>, limits: &Limits) -> Result<Self, RowError> {
        let mut reader = Self {
            xml: Xml::new(input, limits),
            fields: Vec::new(),
            columns: Vec::new(),
            body: Body::Ended,
            about: None,
            warnings: Vec::new(),
        };
        reader.find_root()?;
        reader.find_table(wanted)?;
        reader.read_head(limits)?;
        reader.columns = reader.fields.iter().map(Field::info).collect();
        Ok(reader)
    }

    fn find_root(&mut self) -> Result<(), RowError> {
        match self.xml.pull()? {
            Some(Node::Open(root)) if root.name == "VOTABLE" && is_own(&root) => Ok(()),
            Some(Node::Open(root)) => {
                let name = crate::sink::shown(&root.name);
                Err(self
                    .xml
                    .fail(format!("the document is a `{name}`, not a VOTABLE")))
            }
            _ => Err(self.xml.fail("the document is no VOTABLE")),
        }
    }

    fn find_table(&mut self, wanted: Option<&str>) -> Result<(), RowError> {
        let mut number = 0usize;
        while let Some(node) = self.xml.pull()? {
            let Node::Open(element) = node else {
                continue;
            };
            match element.name.as_str() {
                _ if !is_own(&element) => self.xml.skip()?,
                "RESOURCE" => {}
                "INFO" => self.check_status(&element)?,
                "TABLE" => {
                    number += 1;
                    if is_wanted(&element, number, wanted) {
                        return Ok(());
                    }
                    self.xml.skip()?;
                }
                _ => self.xml.skip()?,
            }
        }
        Err(self.xml.fail(match wanted {
            None => "the document holds no table".to_owned(),
            Some(name) => format!("the document holds no table `{}`", crate::sink::shown(name)),
        }))
    }

    /// A service says in an INFO whether its answer is whole.
    fn check_status(&mut self, info: &Element) -> Result<(), RowError> {
        let status = info.attribute("name") == Some("QUERY_STATUS");
        let own = info.attribute("name") == Some(crate::handover::NAME);
        let value = info.attribute("value").unwrap_or_default().to_owned();
        let text = self.xml.content()?;
        if own && self.about.is_none() {
            self.about = Some(text.clone());
        }
        match value.as_str() {
            "ERROR" if status => {
                let text = crate::sink::shown(text.trim());
                Err(self
                    .xml
                    .fail(format!("the service answered with an error: {text}")))
            }
            "OVERFLOW" if status => {
                self.warnings
                    .push("the service cut its answer short: rows are missing".to_owned());
                Ok(())
            }
            _ => Ok(()),
        }
    }

    fn read_head(&mut self, limits: &Limits) -> Result<(), RowError> {
        loop {
            match self.xml.pull()? {
                Some(Node::Open(element)) => match element.name.as_str() {
                    _ if !is_own(&element) => self.xml.skip()?,
                    "FIELD" => {
                        let field = Field::read(&mut self.xml, &element)?;
                        self.fields.push(field);
                        let line = self.xml.line();
                        check_columns(self.fields.len(), limits)
                            .map_err(|problem| RowError::fatal(line, problem))?;
                    }
                    "DATA" => return self.read_data_head(limits),
                    _ => self.xml.skip()?,
                },
                Some(Node::Close(name)) if name == "TABLE" => return Ok(()),
                Some(_) => {}
                None => return Ok(()),
            }
        }
    }

    fn read_data_head(&mut self, limits: &Limits) -> Result<(), RowError> {
        loop {
            match self.xml.pull()? {
                Some(Node::Open(element)) => match element.name.as_str() {
                    _ if !is_own(&element) => self.xml.skip()?,
                    "TABLEDATA" => {
                        self.body = Body::Text;
                        return Ok(());
                    }
                    "BINARY" => return self.read_binary(false, limits),
                    "BINARY2" => return self.read_binary(true, limits),
                    "INFO" => self.check_status(&element)?,
                    other => {
                        let other = crate::sink::shown(other);
                        return Err(self.xml.fail(format!(
                            "the data stand as {other}, which is not read; TABLEDATA, BINARY and BINARY2 are"
                        )));
                    }
                },
                Some(Node::Close(_)) | None => return Ok(()),
                Some(Node::Text(_)) => {}
            }
        }
    }

    fn read_binary(&mut self, masked: bool, limits: &Limits) -> Result<(), RowError> {
        loop {
            match self.xml.pull()? {
                Some(Node::Open(element)) if element.name == "STREAM" => {
                    if element
                        .attribute("href")
                        .is_some_and(|href| !href.is_empty())
                    {
                        return Err(self
                            .xml
                            .fail("the data stand in another file, which is not opened"));
                    }
                    if element.attribute("encoding") != Some("base64") {
                        return Err(self.xml.fail("the data are not in base64"));
                    }
                    let line = self.xml.line();
                    let bytes = binary::stream(&mut self.xml, limits)?;
                    self.body = Body::Binary(BinaryRows::new(bytes, masked, line, limits));
                    return Ok(());
                }
                Some(Node::Open(_)) => self.xml.skip()?,
                Some(Node::Close(_)) | None => return Ok(()),
                Some(Node::Text(_)) => {}
            }
        }
    }

    /// The next TR, its cells into `row`; false at the end of the table.
    fn text_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        loop {
            match self.xml.pull()? {
                Some(Node::Open(element)) if element.name == "TR" && is_own(&element) => break,
                Some(Node::Open(_)) => self.xml.skip()?,
                Some(Node::Close(name)) if name == "TABLEDATA" => return Ok(false),
                Some(_) => {}
                None => return Ok(false),
            }
        }
        row.start(self.xml.line());
        let mut fault = None;
        loop {
            match self.xml.pull()? {
                Some(Node::Open(element)) if element.name == "TD" => {
                    let text = self.xml.content()?;
                    let field = self.fields.get(row.len());
                    match field.map_or(Ok(text.clone()), |field| field.text(&text)) {
                        Ok(cell) => row.push(&cell),
                        Err(problem) => {
                            let cell = Some(row.len());
                            fault = fault.or(Some(RowError::row(row.line(), cell, &text, problem)));
                            row.push("");
                        }
                    }
                }
                Some(Node::Open(_)) => self.xml.skip()?,
                Some(Node::Close(name)) if name == "TR" => break,
                Some(_) => {}
                None => break,
            }
        }
        match fault {
            Some(fault) => Err(fault),
            None => self.check_width(row),
        }
    }

    fn check_width(&self, row: &Row) -> Result<bool, RowError> {
        if row.len() == self.fields.len() {
            return Ok(true);
        }
        let problem = RowProblem::Ragged {
            found: row.len(),
            expected: self.fields.len(),
        };
        Err(RowError::row(row.line(), None, row.text(), problem))
    }

    /// What stands behind the table may still say that the answer is not whole.
    fn finish(&mut self) -> Result<(), RowError> {
        while let Some(node) = self.xml.pull()? {
            if let Node::Open(element) = node {
                match element.name.as_str() {
                    "INFO" if is_own(&element) => self.check_status(&element)?,
                    "RESOURCE" => {}
                    _ => self.xml.skip()?,
                }
            }
        }
        Ok(())
    }
}

impl<R: Read> RowReader for VotableReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        let more = match &mut self.body {
            Body::Ended => return Ok(false),
            Body::Binary(rows) => rows.read(&self.fields, row)?,
            Body::Text => self.text_row(row)?,
        };
        if !more {
            self.body = Body::Ended;
            self.finish()?;
        }
        Ok(more)
    }

    fn about(&self) -> Option<&str> {
        self.about.as_deref()
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }
}

fn is_own(element: &Element) -> bool {
    element.namespace.is_empty() || element.namespace.starts_with(NAMESPACE)
}

fn is_wanted(table: &Element, number: usize, wanted: Option<&str>) -> bool {
    let Some(wanted) = wanted else {
        return true;
    };
    [table.attribute("name"), table.attribute("ID")].contains(&Some(wanted))
        || wanted.parse() == Ok(number)
}
