//! The atomic part of XSAMS 1.0: species, states, radiative transitions.
//!
//! States may stand behind the transitions that name them, so both are gathered (up to
//! [`Limits::links`]) before the first row is handed on. Rows are in the catalogue's units.

mod quantity;
mod state;
mod transition;
mod tree;

use std::collections::HashMap;
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
pub struct XsamsReader {
    columns: Vec<ColumnInfo>,
    rows: std::vec::IntoIter<Result<Ready, RowError>>,
    warnings: Vec<String>,
}

/// A row in the order of the columns.
struct Ready {
    line: u64,
    cells: Vec<String>,
}

impl XsamsReader {
    /// Reads the whole document and links its transitions to its states.
    ///
    /// # Errors
    /// Another document, one that is not well-formed, or one beyond the limits.
    pub fn new<R: Read>(input: R, kind: RecordKind, limits: &Limits) -> Result<Self, RowError> {
        let mut document = Document::new(input, limits);
        document.read()?;
        let Document {
            states,
            order,
            transitions,
            warnings,
            ..
        } = document;
        let (columns, rows) = match kind {
            RecordKind::Levels => {
                let rows = order.iter().filter_map(|id| states.get(id));
                (state::columns(), rows.map(state_row).collect::<Vec<_>>())
            }
            RecordKind::Lines => {
                let rows = transitions.iter().map(|transition| {
                    let cells = transition.cells(&states);
                    cells
                        .map(|cells| Ready {
                            line: transition.line,
                            cells,
                        })
                        .map_err(|message| fault(transition.line, message))
                });
                (transition::columns(), rows.collect())
            }
        };
        Ok(Self {
            columns,
            rows: rows.into_iter(),
            warnings,
        })
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

impl RowReader for XsamsReader {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        let Some(next) = self.rows.next() else {
            return Ok(false);
        };
        let ready = next?;
        row.start(ready.line);
        for cell in &ready.cells {
            row.push(cell);
        }
        Ok(true)
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }
}

/// What has been read so far.
struct Document<R: Read> {
    xml: Xml<R>,
    limits: Limits,
    owner: Owner,
    states: HashMap<String, State>,
    order: Vec<String>,
    transitions: Vec<Transition>,
    warnings: Vec<String>,
}

impl<R: Read> Document<R> {
    fn new(input: R, limits: &Limits) -> Self {
        Self {
            xml: Xml::new(input, limits),
            limits: limits.clone(),
            owner: Owner::default(),
            states: HashMap::new(),
            order: Vec::new(),
            transitions: Vec::new(),
            warnings: Vec::new(),
        }
    }

    fn read(&mut self) -> Result<(), RowError> {
        match self.xml.pull()? {
            Some(Node::Open(root)) if root.name == "XSAMSData" && root.namespace == NAMESPACE => {}
            _ => {
                let message =
                    "the document is no XSAMS 1.0; older schemas of that name are not read";
                return Err(self.xml.fail(message));
            }
        }
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
                "AtomicState" => self.state(element)?,
                "RadiativeTransition" => self.transition(element)?,
                "Molecules" | "Solids" | "Particles" | "Collisions" | "NonRadiative" => {
                    self.warnings
                        .push(format!("the part `{}` is not read", element.name));
                    self.xml.skip()?;
                }
                _ => self.xml.skip()?,
            }
        }
        Ok(())
    }

    fn tree(&mut self, element: crate::xml::Element) -> Result<Tree, RowError> {
        Tree::read(&mut self.xml, element, self.limits.cell_bytes)
    }

    fn check_links(&self) -> Result<(), RowError> {
        if self.states.len() + self.transitions.len() >= self.limits.links {
            return Err(self.xml.fail(format!(
                "more than the limit of {} states and transitions",
                self.limits.links
            )));
        }
        Ok(())
    }

    fn state(&mut self, element: crate::xml::Element) -> Result<(), RowError> {
        self.check_links()?;
        let line = self.xml.line();
        let tree = self.tree(element)?;
        let Some(id) = tree.attribute("stateID").map(str::to_owned) else {
            return Err(self.xml.fail("an AtomicState has no stateID"));
        };
        let state = State::new(&tree, &self.owner, line);
        if self.states.insert(id.clone(), state).is_some() {
            let id = crate::sink::shown(&id);
            return Err(self.xml.fail(format!("two states are called `{id}`")));
        }
        self.order.push(id);
        Ok(())
    }

    fn transition(&mut self, element: crate::xml::Element) -> Result<(), RowError> {
        self.check_links()?;
        let line = self.xml.line();
        let tree = self.tree(element)?;
        self.transitions.push(Transition::new(&tree, line));
        Ok(())
    }
}

#[cfg(test)]
mod tests;
