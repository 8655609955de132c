//! The atomic part of XSAMS 1.0: species, states, radiative transitions.
//!
//! Rows are handed on while the document is read, in the catalogue's units. Of the states only what
//! a line needs is kept, by name; a transition that stands before its states waits for the end of
//! the document. Both are bound by [`Limits::links`].

mod quantity;
mod state;
mod transition;
mod tree;

use std::collections::{HashMap, HashSet, VecDeque};
use std::io::Read;

use crate::limits::Limits;
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader};
use crate::source::RecordKind;
use crate::xml::{Node, Xml};
use state::State;
use transition::Transition;
use tree::Tree;

const NAMESPACE: &str = "http://vamdc.org/xml/xsams/1.0";

/// Atom that the states being read belong to.
#[derive(Clone, Debug, Default)]
struct Owner {
    element: String,
    charge: String,
    isotope: String,
}

/// Reads the levels or the lines of a document.
pub struct XsamsReader<R: Read> {
    columns: Vec<ColumnInfo>,
    kind: RecordKind,
    document: Document<R>,
    /// Transitions that came before their states.
    waiting: VecDeque<Transition>,
    ended: bool,
}

/// A row in the order of the columns.
struct Ready {
    line: u64,
    cells: Vec<String>,
}

impl<R: Read> XsamsReader<R> {
    /// Begins a document; its transitions are linked to its states.
    ///
    /// # Errors
    /// Another document.
    pub fn new(input: R, kind: RecordKind, limits: &Limits) -> Result<Self, RowError> {
        let mut document = Document::new(input, limits);
        document.begin()?;
        let columns = match kind {
            RecordKind::Levels => state::columns(),
            RecordKind::Lines => transition::columns(),
        };
        Ok(Self {
            columns,
            kind,
            document,
            waiting: VecDeque::new(),
            ended: false,
        })
    }

    /// The next level or line; `None` at the end.
    fn next_ready(&mut self) -> Result<Option<Ready>, RowError> {
        while !self.ended {
            match self.document.next_part()? {
                None => self.ended = true,
                Some(Part::State(id, state)) => {
                    if self.kind == RecordKind::Levels {
                        return state_row(&state).map(Some);
                    }
                    self.document.states.insert(id, *state);
                }
                Some(Part::Transition(_)) if self.kind == RecordKind::Levels => {}
                Some(Part::Transition(transition)) => {
                    if transition.is_linked(&self.document.states) {
                        return self.line_row(&transition).map(Some);
                    }
                    self.document.check_links(self.waiting.len())?;
                    self.waiting.push_back(*transition);
                }
            }
        }
        match self.waiting.pop_front() {
            None => Ok(None),
            Some(transition) => self.line_row(&transition).map(Some),
        }
    }

    fn line_row(&self, transition: &Transition) -> Result<Ready, RowError> {
        match transition.cells(&self.document.states) {
            Ok(cells) => Ok(Ready {
                line: transition.line,
                cells,
            }),
            Err(message) => Err(fault(transition.line, message)),
        }
    }
}

fn fault(line: u64, message: String) -> RowError {
    RowError::row(line, None, "", RowProblem::Format(message))
}

fn state_row(state: &State) -> Result<Ready, RowError> {
    match state.cells() {
        Ok(cells) => Ok(Ready {
            line: state.line,
            cells,
        }),
        Err(message) => Err(fault(state.line, message)),
    }
}

impl<R: Read> RowReader for XsamsReader<R> {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        let Some(ready) = self.next_ready()? else {
            return Ok(false);
        };
        row.start(ready.line);
        for cell in &ready.cells {
            row.push(cell);
        }
        Ok(true)
    }

    fn warnings(&self) -> Vec<String> {
        self.document.warnings.clone()
    }
}

/// A part of the document that may become a row.
enum Part {
    State(String, Box<State>),
    Transition(Box<Transition>),
}

/// What has been read so far.
struct Document<R: Read> {
    xml: Xml<R>,
    limits: Limits,
    owner: Owner,
    /// Names of all states.
    names: HashSet<String>,
    /// States that lines may refer to.
    states: HashMap<String, State>,
    warnings: Vec<String>,
}

impl<R: Read> Document<R> {
    fn new(input: R, limits: &Limits) -> Self {
        Self {
            xml: Xml::new(input, limits),
            limits: limits.clone(),
            owner: Owner::default(),
            names: HashSet::new(),
            states: HashMap::new(),
            warnings: Vec::new(),
        }
    }

    fn begin(&mut self) -> Result<(), RowError> {
        match self.xml.pull()? {
            Some(Node::Open(root)) if root.name == "XSAMSData" && root.namespace == NAMESPACE => {
                Ok(())
            }
            _ => {
                let message =
                    "the document is no XSAMS 1.0; older schemas of that name are not read";
                Err(self.xml.fail(message))
            }
        }
    }

    /// Reads on to the next state or transition; `None` at the end.
    fn next_part(&mut self) -> Result<Option<Part>, RowError> {
        while let Some(node) = self.xml.pull()? {
            let Node::Open(element) = node else {
                continue;
            };
            match element.name.as_str() {
                "Species" | "Atoms" | "Processes" | "Radiative" => {}
                "Atom" => self.owner = Owner::default(),
                "Isotope" => self.owner.isotope.clear(),
                "Ion" => self.owner.charge.clear(),
                "ChemicalElement" => {
                    let tree = self.tree(element)?;
                    let charge = tree.text_at(&["NuclearCharge"]);
                    self.owner.element = charge
                        .or(tree.text_at(&["ElementSymbol"]))
                        .unwrap_or_default();
                }
                "IsotopeParameters" => {
                    let tree = self.tree(element)?;
                    self.owner.isotope = tree.text_at(&["MassNumber"]).unwrap_or_default();
                }
                "IonCharge" => self.owner.charge = self.xml.content()?.trim().to_owned(),
                "AtomicState" => return self.state(element).map(Some),
                "RadiativeTransition" => {
                    let line = self.xml.line();
                    let tree = self.tree(element)?;
                    let transition = Box::new(Transition::new(&tree, line));
                    return Ok(Some(Part::Transition(transition)));
                }
                "Molecules" | "Solids" | "Particles" | "Collisions" | "NonRadiative" => {
                    self.warnings
                        .push(format!("the part `{}` is not read", element.name));
                    self.xml.skip()?;
                }
                _ => self.xml.skip()?,
            }
        }
        Ok(None)
    }

    fn tree(&mut self, element: crate::xml::Element) -> Result<Tree, RowError> {
        Tree::read(&mut self.xml, element, self.limits.cell_bytes)
    }

    fn check_links(&self, waiting: usize) -> Result<(), RowError> {
        if self.names.len() + waiting >= self.limits.links {
            return Err(self.xml.fail(format!(
                "more than the limit of {} states and waiting transitions",
                self.limits.links
            )));
        }
        Ok(())
    }

    fn state(&mut self, element: crate::xml::Element) -> Result<Part, RowError> {
        self.check_links(0)?;
        let line = self.xml.line();
        let tree = self.tree(element)?;
        let Some(id) = tree.attribute("stateID").map(str::to_owned) else {
            return Err(self.xml.fail("an AtomicState has no stateID"));
        };
        if !self.names.insert(id.clone()) {
            let id = crate::sink::shown(&id);
            return Err(self.xml.fail(format!("two states are called `{id}`")));
        }
        let state = Box::new(State::new(&tree, &self.owner, line));
        Ok(Part::State(id, state))
    }
}

#[cfg(test)]
mod tests;
