//! One small element with all that is in it.

use std::io::Read;

use crate::row::RowError;
use crate::xml::{Element, Node, Xml};

/// An element, its text and its children.
#[derive(Clone, Debug, Default)]
pub(super) struct Tree {
    pub name: String,
    attributes: Vec<(String, String)>,
    text: String,
    pub children: Vec<Tree>,
}

impl Tree {
    /// Reads the element that has just opened, at most `limit` bytes of names and text.
    pub fn read<R: Read>(
        xml: &mut Xml<R>,
        element: Element,
        limit: usize,
    ) -> Result<Self, RowError> {
        let mut budget = limit;
        let mut stack = vec![Self::of(element)];
        loop {
            match xml.pull()? {
                Some(Node::Open(element)) => {
                    budget = budget.saturating_sub(64 + element.name.len());
                    stack.push(Self::of(element));
                }
                Some(Node::Text(text)) => {
                    budget = budget.saturating_sub(text.len());
                    if let Some(top) = stack.last_mut() {
                        top.text.push_str(&text);
                    }
                }
                Some(Node::Close(_)) | None => {
                    let Some(done) = stack.pop() else {
                        return Ok(Self::default());
                    };
                    match stack.last_mut() {
                        Some(parent) => parent.children.push(done),
                        None => return Ok(done),
                    }
                }
            }
            if budget == 0 {
                return Err(xml.fail(format!(
                    "an element holds more than the limit of {limit} bytes"
                )));
            }
        }
    }

    fn of(element: Element) -> Self {
        Self {
            name: element.name,
            attributes: element.attributes,
            ..Self::default()
        }
    }

    /// The value of an attribute.
    pub fn attribute(&self, name: &str) -> Option<&str> {
        let found = self.attributes.iter().find(|(own, _)| own == name);
        found.map(|(_, value)| value.trim())
    }

    /// The first element at the end of a path of names.
    pub fn at(&self, path: &[&str]) -> Option<&Self> {
        let Some((first, rest)) = path.split_first() else {
            return Some(self);
        };
        let mut children = self.children.iter().filter(|child| child.name == *first);
        children.find_map(|child| child.at(rest))
    }

    /// All children of this name.
    pub fn all<'a>(&'a self, name: &'a str) -> impl Iterator<Item = &'a Self> {
        self.children.iter().filter(move |child| child.name == name)
    }

    /// The trimmed text at the end of a path, if there is any.
    pub fn text_at(&self, path: &[&str]) -> Option<String> {
        let text = self.at(path)?.text.trim();
        (!text.is_empty()).then(|| text.to_owned())
    }
}
