//! Levels, lines or reports of a selection, row by row.

use std::collections::{BTreeSet, HashMap};
use std::io;
use std::sync::atomic::AtomicBool;

use importers::handover::{Cell, Content, FORM, Header, ScopeHeader, SourceHeader};
use importers::source::{Completeness, SourceKind};
use rusqlite::{Connection, params};
use sha2::{Digest, Sha256};
use vocabulary::atom::{Species, SpeciesRequest};

use crate::catalogue::error::{CatalogueError, Result};
use crate::catalogue::files::hex;
use crate::catalogue::gap_fill;
use crate::catalogue::store::{Catalogue, failed, go_on};

/// What is handed on.
#[derive(Clone, Debug)]
pub struct Selection {
    /// Lines, levels or reports.
    pub content: Content,
    /// These species; all that are held where empty.
    pub species: Vec<SpeciesRequest>,
    /// Lines whose vacuum wavenumber lies in this closed range, cm⁻¹; levels are not bound by it.
    pub range_per_cm: Option<(f64, f64)>,
    /// Reports of these sources only; of all where empty.
    pub sources: Vec<String>,
    /// The selection in words.
    pub words: String,
}

/// Where the rows go.
pub trait Receiver {
    /// Called once, before the first row.
    ///
    /// # Errors
    /// What the system says.
    fn begin(&mut self, header: &Header) -> io::Result<()>;

    /// One row; rows of one element follow each other.
    ///
    /// # Errors
    /// What the system says.
    fn row(&mut self, species: Species, cells: &[Cell<'_>]) -> io::Result<()>;
}

/// A source as the catalogue holds it.
pub(super) struct Held {
    pub id: i64,
    pub header: SourceHeader,
}

impl Catalogue {
    /// Hands a selection on, all of it from one state of the catalogue; the number of rows.
    ///
    /// # Errors
    /// A source that is not held, a catalogue that cannot be read, a receiver that fails.
    pub fn hand_over(&self, selection: &Selection, receiver: &mut dyn Receiver) -> Result<u64> {
        let read = failed(&self.path, "read");
        let transaction = self.connection.unchecked_transaction().map_err(&read)?;
        let giver = Giver {
            connection: &transaction,
            selection,
            held: held(&transaction, selection).map_err(&read)?,
            read: &read,
        };
        for key in &selection.sources {
            if giver.held.iter().all(|h| h.header.key != *key) {
                return Err(CatalogueError::NoSuchSource { key: key.clone() });
            }
        }
        let species = giver.species().map_err(&read)?;
        let header = giver.header(&species).map_err(&read)?;
        let mut receiver = Late {
            receiver,
            header: Some(header),
            stop: &self.stop,
        };
        let mut rows = 0;
        for species in species {
            rows += match selection.content {
                Content::Lines => giver.lines(species, &mut receiver)?,
                Content::Levels => giver.levels(species, &mut receiver)?,
                Content::Reports => giver.reports(species, &mut receiver)?,
            };
        }
        Ok(rows)
    }
}

/// Begins with the first row, so that an empty selection writes nothing.
pub(super) struct Late<'r> {
    receiver: &'r mut dyn Receiver,
    header: Option<Header>,
    stop: &'r AtomicBool,
}

impl Late<'_> {
    pub fn row(&mut self, species: Species, cells: &[Cell<'_>]) -> Result<()> {
        go_on(self.stop)?;
        let begun = match self.header.take() {
            Some(header) => self.receiver.begin(&header),
            None => Ok(()),
        };
        begun
            .and_then(|()| self.receiver.row(species, cells))
            .map_err(CatalogueError::Receiver)
    }
}

pub(super) struct Giver<'a> {
    pub connection: &'a Connection,
    selection: &'a Selection,
    pub held: Vec<Held>,
    pub read: &'a dyn Fn(rusqlite::Error) -> CatalogueError,
}

impl Giver<'_> {
    pub fn bounds(&self) -> (f64, f64) {
        self.selection.range_per_cm.unwrap_or((0.0, f64::MAX))
    }

    /// The species asked for of which there is something, by code.
    fn species(&self) -> rusqlite::Result<Vec<Species>> {
        let sql = match self.selection.content {
            Content::Lines => "SELECT DISTINCT species FROM line",
            Content::Levels => "SELECT DISTINCT species FROM level",
            Content::Reports => {
                "SELECT species FROM level_report UNION SELECT species FROM line_report"
            }
        };
        let codes = self
            .connection
            .prepare(sql)?
            .query_map([], |row| row.get(0))?
            .collect::<rusqlite::Result<BTreeSet<i64>>>()?;
        let all = codes.into_iter().filter_map(Species::from_code);
        let asked = &self.selection.species;
        Ok(all
            .filter(|s| asked.is_empty() || asked.iter().any(|r| r.matches(*s)))
            .collect())
    }

    /// What the file says about itself: the sources that its rows come from.
    fn header(&self, species: &[Species]) -> rusqlite::Result<Header> {
        let mut used: HashMap<i64, BTreeSet<i64>> = HashMap::new();
        for species in species {
            for source in self.sources_of(*species)? {
                used.entry(source).or_default().insert(species.code());
            }
        }
        let reports = self.selection.content == Content::Reports;
        // The calculator's sources keep no reports; whoever takes in all tables computes anew.
        let all = self.selection.sources.is_empty();
        let computed = |key: &str| reports && all && gap_fill::is_ours(key);
        let mut sources = Vec::new();
        for held in &self.held {
            if used.contains_key(&held.id) || computed(&held.header.key) {
                let species = used.remove(&held.id).unwrap_or_default();
                sources.push(self.source_header(held, &species)?);
            }
        }
        Ok(Header {
            form: FORM,
            program: format!("lineclear {}", env!("CARGO_PKG_VERSION")),
            content: self.selection.content,
            selection: self.selection.words.clone(),
            sources,
        })
    }

    /// Numbers of the sources that the rows of a species come from.
    pub fn sources_of(&self, species: Species) -> rusqlite::Result<Vec<i64>> {
        let sql = match self.selection.content {
            Content::Lines => {
                "SELECT position_source FROM line
                  WHERE species = ?1 AND wavenumber_per_cm BETWEEN ?2 AND ?3
                  UNION
                 SELECT rate_source FROM line
                  WHERE species = ?1 AND wavenumber_per_cm BETWEEN ?2 AND ?3
                    AND rate_source NOTNULL
                  UNION
                 SELECT level.source FROM line
                   JOIN level ON level.species = line.species
                             AND level.number IN (line.lower, line.upper)
                  WHERE line.species = ?1 AND wavenumber_per_cm BETWEEN ?2 AND ?3"
            }
            Content::Levels => "SELECT source FROM level WHERE species = ?1 AND ?2 <= ?3",
            Content::Reports => {
                "SELECT source FROM level_report WHERE species = ?1 AND ?2 <= ?3
                  UNION SELECT source FROM line_report WHERE species = ?1"
            }
        };
        let (from, to) = self.bounds();
        let wanted = |id: &i64| self.held.iter().any(|held| held.id == *id);
        self.connection
            .prepare_cached(sql)?
            .query_map(params![species.code(), from, to], |row| row.get(0))?
            .filter(|id| id.as_ref().map_or(true, wanted))
            .collect::<rusqlite::Result<BTreeSet<i64>>>()
            .map(|all| all.into_iter().collect())
    }

    /// A source cut down to the species that are handed on. Claims end where the range ends.
    fn source_header(
        &self,
        held: &Held,
        species: &BTreeSet<i64>,
    ) -> rusqlite::Result<SourceHeader> {
        let mut header = held.header.clone();
        if self.selection.content != Content::Reports {
            // What is said of the source's own rows does not hold for conclusions.
            header.notes.clear();
            header.scope.clear();
            header.checksum.clear();
            return Ok(header);
        }
        let own: BTreeSet<i64> = self
            .connection
            .prepare_cached(
                "SELECT species FROM level_report WHERE source = ?1
                  UNION SELECT species FROM line_report WHERE source = ?1",
            )?
            .query_map([held.id], |row| row.get(0))?
            .collect::<rusqlite::Result<_>>()?;
        header.whole = self.selection.range_per_cm.is_none() && own.is_subset(species);
        if !header.whole {
            let mut hash = Sha256::new();
            hash.update(&header.checksum);
            hash.update(&self.selection.words);
            header.checksum = hex(&hash.finalize());
        }
        let (from, to) = self.bounds();
        let (shortest, longest) = (1e7 / to, if from > 0.0 { 1e7 / from } else { f64::MAX });
        header
            .scope
            .retain_mut(|scope| match scope.species.parse::<Species>() {
                Ok(s) if species.contains(&s.code()) => {
                    scope.from_nm = scope.from_nm.max(shortest);
                    scope.to_nm = scope.to_nm.min(longest);
                    scope.from_nm < scope.to_nm
                }
                _ => false,
            });
        Ok(header)
    }
}

/// All sources, by key; of reports those asked for.
fn held(connection: &Connection, selection: &Selection) -> rusqlite::Result<Vec<Held>> {
    let mut select = connection.prepare(
        "SELECT id, key, title, citation, licence, kind, notes, checksum,
                level_scale_uncertainty_per_cm, level_scale_uncertainty_relative,
                rows_read, rows_refused
           FROM source
          ORDER BY key",
    )?;
    let found = select.query_map([], |row| {
        let id = row.get(0)?;
        let header = SourceHeader {
            key: row.get(1)?,
            title: row.get(2)?,
            citation: row.get(3)?,
            licence: row.get(4)?,
            kind: kind(row.get_ref(5)?.as_str()?),
            notes: serde_json::from_str(row.get_ref(6)?.as_str()?).unwrap_or_default(),
            checksum: row.get(7)?,
            whole: false,
            level_scale_uncertainty_per_cm: row.get(8)?,
            level_scale_uncertainty_relative: row.get(9)?,
            rows_read: row.get(10)?,
            rows_refused: row.get(11)?,
            scope: scopes(connection, id)?,
        };
        Ok(Held { id, header })
    })?;
    let asked = |key: &String| selection.sources.is_empty() || selection.sources.contains(key);
    found
        .filter(|held| held.as_ref().map_or(true, |h| asked(&h.header.key)))
        .collect()
}

fn scopes(connection: &Connection, source: i64) -> rusqlite::Result<Vec<ScopeHeader>> {
    connection
        .prepare_cached(
            "SELECT species, from_nm, to_nm, completeness
               FROM scope
              WHERE source = ?1
              ORDER BY species, from_nm, to_nm",
        )?
        .query_map([source], |row| {
            let code: i64 = row.get(0)?;
            Ok(ScopeHeader {
                species: Species::from_code(code).map_or_else(String::new, |s| s.to_string()),
                from_nm: row.get(1)?,
                to_nm: row.get(2)?,
                completeness: completeness(row.get_ref(3)?.as_str()?),
            })
        })?
        .collect()
}

fn kind(word: &str) -> SourceKind {
    match word {
        "paper" => SourceKind::Paper,
        "curated" => SourceKind::Curated,
        "model" => SourceKind::Model,
        _ => SourceKind::Computed,
    }
}

fn completeness(word: &str) -> Completeness {
    match word {
        "full" => Completeness::Full,
        "strong" => Completeness::Strong,
        "computed" => Completeness::Computed,
        _ => Completeness::GroundTerm,
    }
}
