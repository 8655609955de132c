//! Reads the reports of a species, applies the rule, writes what follows.

use std::collections::HashMap;
use std::path::Path;
use std::sync::Arc;

use rusqlite::{Connection, params};
use vocabulary::atom::Species;
use vocabulary::spectrum::{LineKind, PositionOrigin, RateOrigin};

use super::error::{CatalogueError, Result};
use super::gap_fill;
use super::ingest::{kind_number, rate_origin_number};
use super::reconcile::{
    self, Derived, Label, LevelReport, LineReport, RankedSource, SourceKind, SourceReports,
};
use super::store::failed;

/// Texts of configurations and terms, both ways.
#[derive(Default)]
pub(super) struct Labels {
    ids: HashMap<Arc<str>, i64>,
    texts: HashMap<i64, Arc<str>>,
}

impl Labels {
    pub fn load(connection: &Connection) -> rusqlite::Result<Self> {
        let mut labels = Self::default();
        let mut select = connection.prepare("SELECT id, text FROM label")?;
        let mut rows = select.query([])?;
        while let Some(row) = rows.next()? {
            labels.keep(row.get(0)?, Arc::from(row.get_ref(1)?.as_str()?));
        }
        Ok(labels)
    }

    fn keep(&mut self, id: i64, text: Arc<str>) {
        self.ids.insert(text.clone(), id);
        self.texts.insert(id, text);
    }

    /// The number of a text, stored where it is new.
    pub fn id(&mut self, connection: &Connection, text: &str) -> rusqlite::Result<i64> {
        if let Some(&id) = self.ids.get(text) {
            return Ok(id);
        }
        connection
            .prepare_cached("INSERT INTO label (text) VALUES (?1)")?
            .execute([text])?;
        let id = connection.last_insert_rowid();
        self.keep(id, Arc::from(text));
        Ok(id)
    }

    fn text(&self, id: Option<i64>) -> Option<Arc<str>> {
        id.and_then(|id| self.texts.get(&id).cloned())
    }
}

/// How many records of each source stand as a line or level of their own.
pub(super) struct Counts(HashMap<i64, u64>);

impl Counts {
    pub fn kept_of(&self, source: i64) -> u64 {
        self.0.get(&source).copied().unwrap_or(0)
    }
}

/// Derives one species anew and replaces what was concluded of it.
pub(super) fn species(
    connection: &Connection,
    path: &Path,
    code: i64,
    labels: &mut Labels,
) -> Result<Counts> {
    let (derived, own_rows) = conclude(connection, path, code, labels)?;
    write(connection, code, &derived, labels).map_err(failed(path, "written"))?;
    Ok(count(&derived, &own_rows))
}

/// Derives one species in memory; nothing is written. With it, for each source in rank, which of
/// its level reports are rows of their own.
pub(super) fn conclude(
    connection: &Connection,
    path: &Path,
    code: i64,
    labels: &Labels,
) -> Result<(Derived, Vec<Vec<bool>>)> {
    let species = Species::from_code(code).ok_or_else(|| CatalogueError::Damaged {
        path: path.to_owned(),
        what: format!("species code {code} names no species"),
    })?;
    let mut reports = read(connection, code, labels).map_err(failed(path, "read"))?;
    let computed = gap_fill::Sources::held(connection).map_err(failed(path, "read"))?;
    reconcile::rank(&mut reports);
    let (filled, of_tables) = computed.fill(species, &reports);
    let mut derived = match (filled, of_tables) {
        (None, Some(derived)) => derived,
        (filled, _) => {
            reports.extend(filled);
            reconcile::rank(&mut reports);
            reconcile::derive_ranked(species, &reports)
        }
    };
    let own_rows = reports
        .iter()
        .map(|r| r.levels.iter().map(|l| l.own_row).collect())
        .collect();
    reconcile::add_ritz(species, &reports, &mut derived);
    Ok((derived, own_rows))
}

/// A record is kept where it is the first, by rank of the sources, of its line or level.
fn count(derived: &Derived, own_rows: &[Vec<bool>]) -> Counts {
    let mut kept: HashMap<i64, u64> = HashMap::new();
    let mut count = |source: usize| *kept.entry(derived.sources[source].id).or_default() += 1;
    for line in &derived.lines {
        if let Some(&(source, _)) = line.reports.iter().min() {
            count(source);
        }
    }
    let mut seen = vec![false; derived.levels.len()];
    for (source, rows) in own_rows.iter().enumerate() {
        for (report, _) in rows.iter().enumerate().filter(|(_, own)| **own) {
            if let Some(level) = derived.level_of[source][report]
                && !std::mem::replace(&mut seen[level], true)
            {
                count(source);
            }
        }
    }
    Counts(kept)
}

/// The reports of one species, source by source in no order.
pub(super) fn read(
    connection: &Connection,
    code: i64,
    labels: &Labels,
) -> rusqlite::Result<Vec<SourceReports>> {
    let mut select = connection.prepare_cached(
        "SELECT id, key, kind, level_scale_uncertainty_per_cm, level_scale_uncertainty_relative
           FROM source
          WHERE id IN (SELECT source FROM level_report WHERE species = ?1
                        UNION SELECT source FROM line_report WHERE species = ?1)",
    )?;
    let sources = select.query_map([code], |row| {
        Ok(RankedSource {
            id: row.get(0)?,
            key: Arc::from(row.get_ref(1)?.as_str()?),
            kind: source_kind(row.get_ref(2)?.as_str()?),
            scale_per_cm: row.get(3)?,
            scale_relative: row.get(4)?,
        })
    })?;
    let mut reports = Vec::new();
    for source in sources {
        let source = source?;
        let levels = read_levels(connection, code, source.id, labels)?;
        let lines = read_lines(connection, code, source.id)?;
        reports.push(SourceReports {
            source,
            levels,
            lines,
        });
    }
    Ok(reports)
}

fn source_kind(word: &str) -> SourceKind {
    match word {
        "paper" => SourceKind::Paper,
        "curated" => SourceKind::Curated,
        "model" => SourceKind::Model,
        _ => SourceKind::Computed,
    }
}

fn read_levels(
    connection: &Connection,
    code: i64,
    source: i64,
    labels: &Labels,
) -> rusqlite::Result<Vec<LevelReport>> {
    connection
        .prepare_cached(
            "SELECT energy_per_cm, energy_uncertainty_per_cm, configuration, term, twice_j, g,
                    computed, own_row
               FROM level_report
              WHERE species = ?1 AND source = ?2
              ORDER BY number",
        )?
        .query_map([code, source], |row| {
            Ok(LevelReport {
                energy_per_cm: row.get(0)?,
                uncertainty_per_cm: row.get(1)?,
                label: Label {
                    configuration: labels.text(row.get(2)?),
                    term: labels.text(row.get(3)?),
                },
                twice_j: row.get(4)?,
                g: row.get(5)?,
                computed: row.get(6)?,
                own_row: row.get(7)?,
            })
        })?
        .collect()
}

fn read_lines(
    connection: &Connection,
    code: i64,
    source: i64,
) -> rusqlite::Result<Vec<LineReport>> {
    connection
        .prepare_cached(
            "SELECT wavenumber_per_cm, wavenumber_uncertainty_per_cm, from_levels, lower, upper,
                    lower_twice_j, upper_twice_j, rate_per_s, rate_relative_uncertainty,
                    rate_origin, kind, computed
               FROM line_report
              WHERE species = ?1 AND source = ?2
              ORDER BY number",
        )?
        .query_map([code, source], |row| {
            Ok(LineReport {
                wavenumber_per_cm: row.get(0)?,
                uncertainty_per_cm: row.get(1)?,
                from_levels: row.get(2)?,
                lower: row.get(3)?,
                upper: row.get(4)?,
                lower_twice_j: row.get(5)?,
                upper_twice_j: row.get(6)?,
                rate_per_s: row.get(7)?,
                rate_relative_uncertainty: row.get(8)?,
                rate_origin: row.get::<_, Option<u8>>(9)?.map(rate_origin),
                kind: line_kind(row.get(10)?),
                computed: row.get(11)?,
            })
        })?
        .collect()
}

/// Rate origins as read back.
pub(super) const fn rate_origin(number: u8) -> RateOrigin {
    match number {
        0 => RateOrigin::Published,
        1 => RateOrigin::Derived,
        _ => RateOrigin::Computed,
    }
}

/// Line kinds as read back.
pub(super) const fn line_kind(number: u8) -> LineKind {
    match number {
        1 => LineKind::Mean,
        2 => LineKind::Blend,
        3 => LineKind::Isotope,
        4 => LineKind::Ritz,
        _ => LineKind::Line,
    }
}

/// Position origins as stored.
const fn position_origin_number(origin: PositionOrigin) -> u8 {
    match origin {
        PositionOrigin::Measured => 0,
        PositionOrigin::Ritz => 1,
        PositionOrigin::Computed => 2,
    }
}

/// Position origins as read back.
pub(super) const fn position_origin(number: u8) -> PositionOrigin {
    match number {
        0 => PositionOrigin::Measured,
        1 => PositionOrigin::Ritz,
        _ => PositionOrigin::Computed,
    }
}

fn write(
    connection: &Connection,
    code: i64,
    derived: &Derived,
    labels: &mut Labels,
) -> rusqlite::Result<()> {
    connection
        .prepare_cached("DELETE FROM level WHERE species = ?1")?
        .execute([code])?;
    connection
        .prepare_cached("DELETE FROM line WHERE species = ?1")?
        .execute([code])?;
    write_levels(connection, code, derived, labels)?;
    write_lines(connection, code, derived)
}

fn write_levels(
    connection: &Connection,
    code: i64,
    derived: &Derived,
    labels: &mut Labels,
) -> rusqlite::Result<()> {
    let mut insert = connection.prepare_cached(
        "INSERT INTO level (species, number, energy_per_cm, energy_uncertainty_per_cm,
                            configuration, term, twice_j, g, computed, source)
         VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10)",
    )?;
    for (number, level) in derived.levels.iter().enumerate() {
        let mut id = |text: &Option<Arc<str>>| {
            text.as_deref()
                .map(|text| labels.id(connection, text))
                .transpose()
        };
        insert.execute(params![
            code,
            number as i64,
            level.energy_per_cm,
            level.uncertainty_per_cm,
            id(&level.label.configuration)?,
            id(&level.label.term)?,
            level.twice_j,
            level.g,
            level.computed,
            derived.sources[level.source].id,
        ])?;
    }
    Ok(())
}

fn write_lines(connection: &Connection, code: i64, derived: &Derived) -> rusqlite::Result<()> {
    let mut insert = connection.prepare_cached(
        "INSERT INTO line (species, wavenumber_per_cm, number, wavenumber_uncertainty_per_cm,
                           position_origin, position_source, lower, upper, rate_per_s,
                           rate_relative_uncertainty, rate_origin, rate_source, kind)
         VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13)",
    )?;
    for (number, line) in derived.lines.iter().enumerate() {
        insert.execute(params![
            code,
            line.wavenumber_per_cm,
            number as i64,
            line.uncertainty_per_cm,
            position_origin_number(line.position_origin),
            derived.sources[line.position_source].id,
            line.lower.map(|l| l as i64),
            line.upper.map(|l| l as i64),
            line.rate_per_s,
            line.rate_relative_uncertainty,
            line.rate_origin.map(rate_origin_number),
            line.rate_source.map(|s| derived.sources[s].id),
            kind_number(line.kind),
        ])?;
    }
    Ok(())
}
