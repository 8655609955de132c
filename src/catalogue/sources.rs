//! Which sources are held, and taking one out.

use std::sync::Arc;

use rusqlite::{OptionalExtension, TransactionBehavior};

use super::derive::{self, Labels};
use super::error::{CatalogueError, Result};
use super::gap_fill;
use super::store::{Catalogue, LOCKED, failed, go_on};

/// A source as listed.
#[derive(Clone, Debug, PartialEq)]
pub struct SourceRow {
    /// Short name.
    pub key: String,
    /// Title.
    pub title: String,
    /// Citation.
    pub citation: String,
    /// Licence.
    pub licence: String,
    /// `paper`, `curated`, `model` or `computed`.
    pub kind: String,
    /// Notes, a JSON list of sentences.
    pub notes: Vec<String>,
    /// It came with the program.
    pub bundled: bool,
    /// Line reports held from it; of the calculator, which reports nothing, lines whose position or
    /// rate it made.
    pub lines: u64,
    /// Level reports held from it; of the calculator levels that it made.
    pub levels: u64,
    /// Species it reports.
    pub species: u64,
}

impl Catalogue {
    /// All sources, by key.
    pub fn sources(&self) -> Result<Vec<SourceRow>> {
        let read = || -> rusqlite::Result<Vec<SourceRow>> {
            self.connection
                .prepare_cached(
                    "WITH l AS (SELECT source, count(*) AS n, count(DISTINCT species) AS s
                                  FROM line_report GROUP BY source),
                          e AS (SELECT source, count(*) AS n, count(DISTINCT species) AS s
                                  FROM level_report GROUP BY source),
                          made AS (SELECT id FROM source
                                    WHERE kind = 'computed' AND id NOT IN (SELECT source FROM l)),
                          ml AS (SELECT source, count(*) AS n, count(DISTINCT species) AS s
                                   FROM (SELECT position_source AS source, species FROM line
                                          UNION ALL
                                         SELECT rate_source, species FROM line
                                          WHERE rate_source <> position_source)
                                  WHERE source IN made GROUP BY source),
                          me AS (SELECT source, count(*) AS n FROM level
                                  WHERE source IN made GROUP BY source)
                     SELECT key, title, citation, licence, kind, notes, bundled,
                            coalesce(l.n, ml.n, 0), coalesce(e.n, me.n, 0),
                            max(coalesce(l.s, ml.s, 0), coalesce(e.s, 0))
                       FROM source
                       LEFT JOIN l ON l.source = source.id
                       LEFT JOIN e ON e.source = source.id
                       LEFT JOIN ml ON ml.source = source.id
                       LEFT JOIN me ON me.source = source.id
                      ORDER BY key",
                )?
                .query_map([], |row| {
                    Ok(SourceRow {
                        key: row.get(0)?,
                        title: row.get(1)?,
                        citation: row.get(2)?,
                        licence: row.get(3)?,
                        kind: row.get(4)?,
                        notes: serde_json::from_str(row.get_ref(5)?.as_str()?).unwrap_or_default(),
                        bundled: row.get(6)?,
                        lines: row.get(7)?,
                        levels: row.get(8)?,
                        species: row.get(9)?,
                    })
                })?
                .collect()
        };
        read().map_err(self.failed("read"))
    }

    /// Takes a source out and leaves what would be there had it never come in.
    ///
    /// # Errors
    /// No such source, a source of the calculator; a catalogue that cannot be written.
    pub fn forget(&mut self, key: &str) -> Result<u64> {
        if gap_fill::is_ours(key) {
            return Err(CatalogueError::Computed {
                key: key.to_owned(),
            });
        }
        let path = self.path.clone();
        self.keys.take();
        let written = failed(&path, "written");
        let stop = Arc::clone(&self.stop);
        let transaction = self
            .connection
            .transaction_with_behavior(TransactionBehavior::Immediate)
            .map_err(failed(&path, LOCKED))?;
        let source: i64 = transaction
            .query_row("SELECT id FROM source WHERE key = ?1", [key], |row| {
                row.get(0)
            })
            .optional()
            .map_err(&written)?
            .ok_or_else(|| CatalogueError::NoSuchSource {
                key: key.to_owned(),
            })?;
        let (species, reports) = retract(&transaction, source).map_err(&written)?;
        let mut labels = Labels::load(&transaction).map_err(&written)?;
        for code in species {
            go_on(&stop)?;
            derive::species(&transaction, &path, code, &mut labels)?;
        }
        transaction
            .execute(
                "DELETE FROM label
                  WHERE id NOT IN (SELECT configuration FROM level_report WHERE configuration NOTNULL)
                    AND id NOT IN (SELECT term FROM level_report WHERE term NOTNULL)
                    AND id NOT IN (SELECT configuration FROM level WHERE configuration NOTNULL)
                    AND id NOT IN (SELECT term FROM level WHERE term NOTNULL)",
                [],
            )
            .map_err(&written)?;
        transaction.commit().map_err(&written)?;
        Ok(reports)
    }
}

/// Deletes the reports of a source; the species they were about, and how many there were.
pub(super) fn retract(
    connection: &rusqlite::Connection,
    source: i64,
) -> rusqlite::Result<(Vec<i64>, u64)> {
    let species: Vec<i64> = connection
        .prepare(
            "SELECT species FROM line_report WHERE source = ?1
              UNION SELECT species FROM level_report WHERE source = ?1",
        )?
        .query_map([source], |row| row.get(0))?
        .collect::<rusqlite::Result<_>>()?;
    let mut reports = 0;
    for &code in &species {
        for delete in [
            "DELETE FROM line_report WHERE species = ?1 AND source = ?2",
            "DELETE FROM level_report WHERE species = ?1 AND source = ?2",
        ] {
            reports += connection.prepare_cached(delete)?.execute([code, source])? as u64;
        }
    }
    connection.execute("DELETE FROM scope WHERE source = ?1", [source])?;
    connection.execute("DELETE FROM source WHERE id = ?1", [source])?;
    Ok((species, reports))
}
