//! One strict layer over XML for all formats that use it: places, limits, no entities, one root.

use std::io::{BufReader, Read};

use quick_xml::Reader;
use quick_xml::events::{BytesStart, Event};

use crate::limits::Limits;
use crate::row::{RowError, RowProblem};

/// What a document is made of, for the readers above.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Node {
    /// An element opens.
    Open(Element),
    /// The element that opened last and is still open ends; its local name.
    Close(String),
    /// Text, character data and character references, in pieces.
    Text(String),
}

/// The start of an element.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Element {
    /// Name without prefix.
    pub name: String,
    /// Namespace that the name belongs to; empty where there is none.
    pub namespace: String,
    /// Attributes by name, prefixes kept, namespace bindings left out.
    pub attributes: Vec<(String, String)>,
}

impl Element {
    /// The value of an attribute.
    pub fn attribute(&self, name: &str) -> Option<&str> {
        let found = self.attributes.iter().find(|(own, _)| own == name);
        found.map(|(_, value)| value.as_str())
    }
}

/// Pulls nodes out of a document.
pub struct Xml<R: Read> {
    reader: Reader<BufReader<LineCounter<R>>>,
    buffer: Vec<u8>,
    limits: Limits,
    /// Open elements: local name and the namespace bindings made there.
    open: Vec<(String, Vec<(String, String)>)>,
    /// An empty element whose end is still to be told.
    pending_close: bool,
    root_seen: bool,
}

impl<R: Read> Xml<R> {
    /// A document in UTF-8.
    pub fn new(input: R, limits: &Limits) -> Self {
        let counted = LineCounter {
            input,
            starts: vec![0],
            before: 0,
            taken: 0,
            budget: limits.header_bytes,
        };
        let mut reader = Reader::from_reader(BufReader::new(counted));
        reader.config_mut().check_end_names = true;
        Self {
            reader,
            buffer: Vec::new(),
            limits: limits.clone(),
            open: Vec::new(),
            pending_close: false,
            root_seen: false,
        }
    }

    /// Line of the node read last, from 1.
    pub fn line(&self) -> u64 {
        let position = self.reader.buffer_position();
        self.reader.get_ref().get_ref().line(position)
    }

    /// Number of open elements.
    pub fn depth(&self) -> usize {
        self.open.len()
    }

    /// A fault at the present place, after which nothing can be read.
    pub fn fail(&self, message: impl Into<String>) -> RowError {
        RowError::fatal(self.line(), RowProblem::Format(message.into()))
    }

    /// The next node; `None` at the end of a whole document.
    ///
    /// # Errors
    /// Anything that is no well-formed document without entities of its own.
    pub fn pull(&mut self) -> Result<Option<Node>, RowError> {
        if std::mem::take(&mut self.pending_close) {
            return Ok(self.open.pop().map(|(name, _)| Node::Close(name)));
        }
        loop {
            self.buffer.clear();
            self.reader.get_mut().get_mut().budget = self.limits.header_bytes;
            let event = self.reader.read_event_into(&mut self.buffer);
            let event = event.map(Event::into_owned);
            let event = event.map_err(|error| {
                let line = self.line();
                RowError::fatal(
                    line,
                    RowProblem::Format(format!("no well-formed XML: {error}")),
                )
            })?;
            match event {
                Event::Start(start) => return self.open(&start).map(Some),
                Event::Empty(start) => {
                    self.pending_close = true;
                    return self.open(&start).map(Some);
                }
                Event::End(_) => return Ok(self.open.pop().map(|(name, _)| Node::Close(name))),
                Event::Text(text) => {
                    if let Some(node) = self.text(&text.xml10_content())? {
                        return Ok(Some(node));
                    }
                }
                Event::CData(data) => {
                    if let Some(node) = self.text(&data.xml10_content())? {
                        return Ok(Some(node));
                    }
                }
                Event::GeneralRef(reference) => {
                    let text = self.reference(&reference)?;
                    return Ok(Some(Node::Text(text)));
                }
                Event::DocType(_) | Event::Decl(_) | Event::PI(_) | Event::Comment(_) => {}
                Event::Eof => return self.end(),
            }
        }
    }

    fn end(&self) -> Result<Option<Node>, RowError> {
        match self.open.last() {
            Some((name, _)) => Err(self.fail(format!("the document ends inside `{name}`"))),
            None if !self.root_seen => Err(self.fail("the document has no element")),
            None => Ok(None),
        }
    }

    fn open(&mut self, start: &BytesStart) -> Result<Node, RowError> {
        if self.open.is_empty() && self.root_seen {
            return Err(self.fail("a second document follows the first"));
        }
        self.root_seen = true;
        if self.open.len() >= self.limits.nesting {
            return Err(self.fail(format!(
                "elements are nested deeper than {}",
                self.limits.nesting
            )));
        }
        let mut bindings = Vec::new();
        let mut attributes = Vec::new();
        for attribute in start.attributes() {
            let attribute =
                attribute.map_err(|error| self.fail(format!("no well-formed XML: {error}")))?;
            let value = attribute
                .normalized_value(quick_xml::XmlVersion::Implicit1_0)
                .map_err(|_| {
                    self.fail("an attribute uses an entity; only the predefined ones are read")
                })?;
            check_characters(&value).map_err(|message| self.fail(message))?;
            let key = attribute.key.into_inner().to_owned();
            match key.strip_prefix("xmlns") {
                Some("") => bindings.push((String::new(), value.into_owned())),
                Some(rest) if rest.starts_with(':') => {
                    bindings.push((rest[1..].to_owned(), value.into_owned()));
                }
                _ => attributes.push((key, value.into_owned())),
            }
            if attributes.len() + bindings.len() > 1000 {
                return Err(self.fail("an element has more than 1000 attributes"));
            }
        }
        let name = start.name();
        let prefix = name
            .prefix()
            .map(|p| p.into_inner().to_owned())
            .unwrap_or_default();
        let local = name.local_name().into_inner().to_owned();
        self.open.push((local.clone(), bindings));
        let namespace = self.namespace(&prefix)?;
        Ok(Node::Open(Element {
            name: local,
            namespace,
            attributes,
        }))
    }

    fn namespace(&self, prefix: &str) -> Result<String, RowError> {
        let mut bindings = self.open.iter().rev().flat_map(|(_, own)| own.iter());
        match bindings.find(|(own, _)| own == prefix) {
            Some((_, namespace)) => Ok(namespace.clone()),
            None if prefix.is_empty() => Ok(String::new()),
            None => Err(self.fail(format!("the prefix `{prefix}` is not bound to a namespace"))),
        }
    }

    fn text(&self, text: &str) -> Result<Option<Node>, RowError> {
        check_characters(text).map_err(|message| self.fail(message))?;
        if self.open.is_empty() {
            return match text.trim_matches(['\u{feff}', ' ', '\t', '\n', '\r']) {
                "" => Ok(None),
                _ => Err(self.fail("text stands outside the document")),
            };
        }
        Ok((!text.is_empty()).then(|| Node::Text(text.to_owned())))
    }

    fn reference(&self, reference: &quick_xml::events::BytesRef) -> Result<String, RowError> {
        if self.open.is_empty() {
            return Err(self.fail("text stands outside the document"));
        }
        if let Ok(Some(c)) = reference.resolve_char_ref() {
            let text = c.to_string();
            check_characters(&text).map_err(|message| self.fail(message))?;
            return Ok(text);
        }
        match reference.xml10_content().as_ref() {
            "lt" => Ok("<".to_owned()),
            "gt" => Ok(">".to_owned()),
            "amp" => Ok("&".to_owned()),
            "apos" => Ok("'".to_owned()),
            "quot" => Ok("\"".to_owned()),
            other => {
                let other = crate::sink::shown(other);
                Err(self.fail(format!(
                    "`&{other};`: only the predefined entities are read"
                )))
            }
        }
    }

    /// Skips what is left of the element that opened last.
    ///
    /// # Errors
    /// As [`Xml::pull`].
    pub fn skip(&mut self) -> Result<(), RowError> {
        let depth = self.depth();
        while self.depth() >= depth {
            if self.pull()?.is_none() {
                break;
            }
        }
        Ok(())
    }

    /// The whole text of the element that opened last, up to its end; elements inside are skipped.
    ///
    /// # Errors
    /// As [`Xml::pull`]; text longer than the limit of a cell.
    pub fn content(&mut self) -> Result<String, RowError> {
        let depth = self.depth();
        let mut text = String::new();
        loop {
            match self.pull()? {
                Some(Node::Text(piece)) if self.depth() == depth => text.push_str(&piece),
                Some(Node::Close(_)) if self.depth() < depth => return Ok(text),
                Some(_) => {}
                None => return Ok(text),
            }
            if text.len() > self.limits.cell_bytes {
                let problem = RowProblem::TooLong {
                    what: "cell",
                    limit: self.limits.cell_bytes,
                };
                return Err(RowError::fatal(self.line(), problem));
            }
        }
    }
}

/// XML 1.0 allows no control characters but tabulator and line ends.
fn check_characters(text: &str) -> Result<(), &'static str> {
    let bad = |b: u8| b < 0x20 && !matches!(b, b'\t' | b'\n' | b'\r');
    if text.bytes().any(bad) {
        return Err("a control character, which XML does not allow");
    }
    Ok(())
}

/// Knows where lines begin, so that byte offsets become line numbers, and bounds the bytes that
/// one piece of the document may take.
struct LineCounter<R> {
    input: R,
    /// Offsets of the line starts in the block read last, and the last one before it.
    starts: Vec<u64>,
    /// Lines before the first of these.
    before: u64,
    taken: u64,
    /// Bytes that may be read until the next piece is complete.
    budget: usize,
}

impl<R> LineCounter<R> {
    fn line(&self, offset: u64) -> u64 {
        let here = self.starts.partition_point(|start| *start <= offset) as u64;
        self.before + here.max(1)
    }
}

impl<R: Read> Read for LineCounter<R> {
    fn read(&mut self, out: &mut [u8]) -> std::io::Result<usize> {
        if self.budget == 0 {
            return Err(std::io::Error::new(
                std::io::ErrorKind::InvalidData,
                "a piece of the document is longer than the limit",
            ));
        }
        let count = self.input.read(out)?;
        self.budget = self.budget.saturating_sub(count);
        let last = self.starts.len().saturating_sub(1);
        self.starts.drain(..last);
        self.before += last as u64;
        for (index, byte) in out[..count].iter().enumerate() {
            if *byte == b'\n' {
                self.starts.push(self.taken + index as u64 + 1);
            }
        }
        self.taken += count as u64;
        Ok(count)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn nodes(text: &str) -> Result<Vec<Node>, String> {
        let mut xml = Xml::new(text.as_bytes(), &Limits::default());
        let mut all = Vec::new();
        loop {
            match xml.pull() {
                Ok(Some(node)) => all.push(node),
                Ok(None) => return Ok(all),
                Err(error) => return Err(error.to_string()),
            }
        }
    }

    #[test]
    fn text_is_joined_from_its_kinds() {
        let text = "<a><b x='1&amp;2'>1<!-- no -->&lt;<![CDATA[<&]]>&#65;</b></a>";
        let mut xml = Xml::new(text.as_bytes(), &Limits::default());
        xml.pull().unwrap();
        let Some(Node::Open(b)) = xml.pull().unwrap() else {
            panic!()
        };
        assert_eq!(b.attribute("x"), Some("1&2"));
        assert_eq!(xml.content().unwrap(), "1<<&A");
    }

    #[test]
    fn what_is_not_one_plain_document_is_an_error() {
        let deep = "<a>".repeat(300);
        for bad in [
            "",
            "<a>",
            "<a></b>",
            "<a/><b/>",
            "<a/>x",
            "x<a/>",
            "<a x='1' x='2'/>",
            "<a>&other;</a>",
            "<a x='&other;'/>",
            "<a>\u{1}</a>",
            "<a>&#1;</a>",
            "<p:a/>",
            "<a",
            deep.as_str(),
        ] {
            assert!(nodes(bad).is_err(), "{bad}");
        }
        let bomb = "<!DOCTYPE a [<!ENTITY b 'bbbb'><!ENTITY c '&b;&b;'>]><a>&c;</a>";
        assert!(nodes(bomb).unwrap_err().contains("predefined entities"));
    }

    #[test]
    fn faults_name_their_line() {
        assert!(
            nodes("<a>\n\n<b>&x;</b></a>")
                .unwrap_err()
                .starts_with("line 3:")
        );
    }
}
