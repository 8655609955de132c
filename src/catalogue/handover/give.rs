//! Levels, lines or reports of a selection, row by row.

use std::collections::{BTreeSet, HashMap};
use std::io;

use importers::handover::{Cell, Content, FORM, Header, ScopeHeader, SourceHeader};
use importers::source::{Completeness, SourceKind};
use rusqlite::{Connection, Row, params};
use sha2::{Digest, Sha256};
use vocabulary::atom::{HalfInteger, Species, SpeciesRequest};
use vocabulary::light::Air;
use vocabulary::spectrum::{LineKind, PositionOrigin, RateOrigin};

use crate::catalogue::derive::{line_kind, position_origin, rate_origin};
use crate::catalogue::error::{CatalogueError, Result};
use crate::catalogue::files::hex;
use crate::catalogue::gap_fill;
use crate::catalogue::store::{Catalogue, failed};

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
struct Held {
    id: i64,
    header: SourceHeader,
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
struct Late<'r> {
    receiver: &'r mut dyn Receiver,
    header: Option<Header>,
}

impl Late<'_> {
    fn row(&mut self, species: Species, cells: &[Cell<'_>]) -> Result<()> {
        let begun = match self.header.take() {
            Some(header) => self.receiver.begin(&header),
            None => Ok(()),
        };
        begun
            .and_then(|()| self.receiver.row(species, cells))
            .map_err(CatalogueError::Receiver)
    }
}

struct Giver<'a> {
    connection: &'a Connection,
    selection: &'a Selection,
    held: Vec<Held>,
    read: &'a dyn Fn(rusqlite::Error) -> CatalogueError,
}

impl Giver<'_> {
    fn bounds(&self) -> (f64, f64) {
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
    fn sources_of(&self, species: Species) -> rusqlite::Result<Vec<i64>> {
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

    fn lines(&self, species: Species, receiver: &mut Late<'_>) -> Result<u64> {
        let (from, to) = self.bounds();
        let mut select = self
            .connection
            .prepare_cached(
                "SELECT l.wavenumber_per_cm, l.wavenumber_uncertainty_per_cm, l.position_origin,
                        l.position_source, l.kind, l.rate_per_s, l.rate_relative_uncertainty,
                        l.rate_origin, l.rate_source,
                        l.lower, a.energy_per_cm, a.energy_uncertainty_per_cm, ac.text, at.text,
                        a.twice_j, a.g, a.source,
                        l.upper, b.energy_per_cm, b.energy_uncertainty_per_cm, bc.text, bt.text,
                        b.twice_j, b.g, b.source
                   FROM line l
                   LEFT JOIN level a ON a.species = l.species AND a.number = l.lower
                   LEFT JOIN label ac ON ac.id = a.configuration
                   LEFT JOIN label at ON at.id = a.term
                   LEFT JOIN level b ON b.species = l.species AND b.number = l.upper
                   LEFT JOIN label bc ON bc.id = b.configuration
                   LEFT JOIN label bt ON bt.id = b.term
                  WHERE l.species = ?1 AND l.wavenumber_per_cm BETWEEN ?2 AND ?3
                  ORDER BY l.wavenumber_per_cm, l.number",
            )
            .map_err(self.read)?;
        let found = select
            .query(params![species.code(), from, to])
            .map_err(self.read)?;
        self.each(found, species, receiver, |giver, row, cells| {
            let wavenumber: f64 = row.get(0)?;
            let vacuum_nm = 1e7 / wavenumber;
            let air = Air::standard().to_air_nm(vacuum_nm).ok();
            cells.extend([
                Cell::Number(vacuum_nm),
                air.map_or(Cell::Missing, |air| Cell::Number(air.nm)),
                Cell::Number(wavenumber),
                number(row, 1)?,
                Cell::Text(origin_word(position_origin(row.get(2)?))),
                giver.key(row, 3)?,
                Cell::Text(kind_word(line_kind(row.get(4)?))),
            ]);
            giver.end(row, 9, cells)?;
            giver.end(row, 17, cells)?;
            cells.extend([
                number(row, 5)?,
                number(row, 6)?,
                rate_origin_cell(row, 7)?,
                giver.key(row, 8)?,
            ]);
            Ok(())
        })
    }

    /// A level of a line, its columns from `at` on.
    fn end<'r>(
        &'r self,
        row: &'r Row<'_>,
        at: usize,
        cells: &mut Vec<Cell<'r>>,
    ) -> rusqlite::Result<()> {
        cells.extend([
            integer(row, at)?,
            number(row, at + 1)?,
            number(row, at + 2)?,
            text(row, at + 3)?,
            text(row, at + 4)?,
            momentum(row, at + 5)?,
            number(row, at + 6)?,
            self.key(row, at + 7)?,
        ]);
        Ok(())
    }

    fn levels(&self, species: Species, receiver: &mut Late<'_>) -> Result<u64> {
        let mut select = self
            .connection
            .prepare_cached(
                "SELECT number, energy_per_cm, energy_uncertainty_per_cm, c.text, t.text, twice_j,
                        g, computed, source
                   FROM level
                   LEFT JOIN label c ON c.id = configuration
                   LEFT JOIN label t ON t.id = term
                  WHERE species = ?1
                  ORDER BY number",
            )
            .map_err(self.read)?;
        let found = select.query([species.code()]).map_err(self.read)?;
        self.each(found, species, receiver, |giver, row, cells| {
            cells.extend([
                integer(row, 0)?,
                number(row, 1)?,
                number(row, 2)?,
                text(row, 3)?,
                text(row, 4)?,
                momentum(row, 5)?,
                number(row, 6)?,
                truth(row, 7)?,
                giver.key(row, 8)?,
            ]);
            Ok(())
        })
    }

    fn reports(&self, species: Species, receiver: &mut Late<'_>) -> Result<u64> {
        let sources = self.sources_of(species).map_err(self.read)?;
        let mut rows = 0;
        for held in self.held.iter().filter(|h| sources.contains(&h.id)) {
            rows += self.level_reports(species, held, receiver)?;
            rows += self.line_reports(species, held, receiver)?;
        }
        Ok(rows)
    }

    fn level_reports(&self, species: Species, held: &Held, receiver: &mut Late<'_>) -> Result<u64> {
        let mut select = self
            .connection
            .prepare_cached(
                "SELECT number, place, energy_per_cm, energy_uncertainty_per_cm, c.text, t.text,
                        twice_j, g, own_row, computed
                   FROM level_report
                   LEFT JOIN label c ON c.id = configuration
                   LEFT JOIN label t ON t.id = term
                  WHERE species = ?1 AND source = ?2
                  ORDER BY number",
            )
            .map_err(self.read)?;
        let id = held.id;
        let found = select.query([species.code(), id]).map_err(self.read)?;
        self.each(found, species, receiver, |giver, row, cells| {
            cells.insert(0, Cell::Text("level"));
            cells.insert(1, giver.key_of(id));
            cells.extend([
                integer(row, 0)?,
                integer(row, 1)?,
                number(row, 2)?,
                number(row, 3)?,
                text(row, 4)?,
                text(row, 5)?,
                momentum(row, 6)?,
                number(row, 7)?,
                truth(row, 8)?,
            ]);
            cells.extend([Cell::Missing; 12]);
            cells.push(truth(row, 9)?);
            Ok(())
        })
    }

    fn line_reports(&self, species: Species, held: &Held, receiver: &mut Late<'_>) -> Result<u64> {
        let mut select = self
            .connection
            .prepare_cached(
                "SELECT number, place, wavenumber_per_cm, wavenumber_uncertainty_per_cm,
                        from_levels, lower, upper, lower_twice_j, upper_twice_j, rate_per_s,
                        rate_relative_uncertainty, rate_origin, intensity, kind, computed
                   FROM line_report r
                  WHERE species = ?1 AND source = ?2
                    AND coalesce(wavenumber_per_cm,
                                 (SELECT energy_per_cm FROM level_report u
                                   WHERE u.species = ?1 AND u.source = ?2 AND u.number = r.upper)
                                 - (SELECT energy_per_cm FROM level_report l
                                     WHERE l.species = ?1 AND l.source = ?2 AND l.number = r.lower))
                        BETWEEN ?3 AND ?4
                  ORDER BY number",
            )
            .map_err(self.read)?;
        let id = held.id;
        let (from, to) = self.bounds();
        let found = select
            .query(params![species.code(), id, from, to])
            .map_err(self.read)?;
        self.each(found, species, receiver, |giver, row, cells| {
            cells.insert(0, Cell::Text("line"));
            cells.insert(1, giver.key_of(id));
            cells.extend([integer(row, 0)?, integer(row, 1)?]);
            cells.extend([Cell::Missing; 7]);
            cells.extend([
                number(row, 2)?,
                number(row, 3)?,
                truth(row, 4)?,
                integer(row, 5)?,
                integer(row, 6)?,
                momentum(row, 7)?,
                momentum(row, 8)?,
                number(row, 9)?,
                number(row, 10)?,
                rate_origin_cell(row, 11)?,
                number(row, 12)?,
                Cell::Text(kind_word(line_kind(row.get(13)?))),
                truth(row, 14)?,
            ]);
            Ok(())
        })
    }

    /// Hands on each row that `fill` makes behind the cell of the species.
    fn each(
        &self,
        mut found: rusqlite::Rows<'_>,
        species: Species,
        receiver: &mut Late<'_>,
        fill: impl for<'r> Fn(&'r Self, &'r Row<'_>, &mut Vec<Cell<'r>>) -> rusqlite::Result<()>,
    ) -> Result<u64> {
        let name = species.to_string();
        let mut count = 0;
        while let Some(row) = found.next().map_err(self.read)? {
            let mut cells = Vec::with_capacity(32);
            cells.push(Cell::Text(&name));
            fill(self, row, &mut cells).map_err(self.read)?;
            receiver.row(species, &cells)?;
            count += 1;
        }
        Ok(count)
    }

    /// The key of a source by its number.
    fn key(&self, row: &Row<'_>, index: usize) -> rusqlite::Result<Cell<'_>> {
        let id: Option<i64> = row.get(index)?;
        Ok(id.map_or(Cell::Missing, |id| self.key_of(id)))
    }

    fn key_of(&self, id: i64) -> Cell<'_> {
        let held = self.held.iter().find(|held| held.id == id);
        held.map_or(Cell::Missing, |held| Cell::Text(&held.header.key))
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

fn number(row: &Row<'_>, index: usize) -> rusqlite::Result<Cell<'static>> {
    let value: Option<f64> = row.get(index)?;
    Ok(value.map_or(Cell::Missing, Cell::Number))
}

fn integer(row: &Row<'_>, index: usize) -> rusqlite::Result<Cell<'static>> {
    let value: Option<i64> = row.get(index)?;
    Ok(value.map_or(Cell::Missing, Cell::Integer))
}

fn truth(row: &Row<'_>, index: usize) -> rusqlite::Result<Cell<'static>> {
    row.get(index).map(Cell::Truth)
}

/// J from twice its value.
fn momentum(row: &Row<'_>, index: usize) -> rusqlite::Result<Cell<'static>> {
    let twice: Option<u16> = row.get(index)?;
    Ok(twice.map_or(Cell::Missing, |twice| {
        Cell::Number(HalfInteger::from_twice(twice).value())
    }))
}

fn text<'r>(row: &'r Row<'_>, index: usize) -> rusqlite::Result<Cell<'r>> {
    let value = row.get_ref(index)?.as_str_or_null()?;
    Ok(value.map_or(Cell::Missing, Cell::Text))
}

fn rate_origin_cell(row: &Row<'_>, index: usize) -> rusqlite::Result<Cell<'static>> {
    let stored: Option<u8> = row.get(index)?;
    Ok(stored.map_or(Cell::Missing, |stored| {
        Cell::Text(match rate_origin(stored) {
            RateOrigin::Published => "published",
            RateOrigin::Derived => "derived",
            RateOrigin::Computed | RateOrigin::Prior => "computed",
        })
    }))
}

const fn kind_word(kind: LineKind) -> &'static str {
    match kind {
        LineKind::Line => "line",
        LineKind::Mean => "mean",
        LineKind::Blend => "blend",
        LineKind::Isotope => "isotope",
    }
}

const fn origin_word(origin: PositionOrigin) -> &'static str {
    match origin {
        PositionOrigin::Measured => "measured",
        PositionOrigin::Ritz => "ritz",
        PositionOrigin::Computed => "computed",
    }
}
