//! What the answers are made of: levels, lines, strengths and scopes of species.

use std::collections::HashMap;
use std::sync::Arc;

use rusqlite::Row;
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::spectrum::{
    Completeness, Level, Line, LineKind, Parity, PositionOrigin, Scope, Strength,
};

use super::derive::{line_kind, position_origin, rate_origin};
use super::error::Result;
use super::store::Catalogue;

/// All levels of a species, by number.
pub type Levels = Vec<Arc<Level>>;

impl Catalogue {
    /// All species of which lines or levels are held, by nuclear charge and stage.
    pub fn species(&self) -> Result<Vec<Species>> {
        // One seek per species: the tables are clustered by it.
        let read = || -> rusqlite::Result<Vec<i64>> {
            self.connection
                .prepare_cached(
                    "WITH RECURSIVE held (code) AS (
                         SELECT min(species) FROM level
                         UNION ALL
                         SELECT (SELECT min(species) FROM level WHERE species > code)
                           FROM held WHERE code NOTNULL),
                     lined (code) AS (
                         SELECT min(species) FROM line
                         UNION ALL
                         SELECT (SELECT min(species) FROM line WHERE species > code)
                           FROM lined WHERE code NOTNULL)
                     SELECT code FROM held WHERE code NOTNULL
                      UNION SELECT code FROM lined WHERE code NOTNULL
                      ORDER BY 1",
                )?
                .query_map([], |row| row.get(0))?
                .collect()
        };
        let codes = read().map_err(self.failed("read"))?;
        Ok(codes.into_iter().filter_map(Species::from_code).collect())
    }

    /// Keys of all sources by their number.
    fn source_keys(&self) -> rusqlite::Result<&HashMap<i64, Arc<str>>> {
        if let Some(keys) = self.keys.get() {
            return Ok(keys);
        }
        let keys = self
            .connection
            .prepare_cached("SELECT id, key FROM source")?
            .query_map([], |row| {
                Ok((row.get(0)?, Arc::from(row.get_ref(1)?.as_str()?)))
            })?
            .collect::<rusqlite::Result<_>>()?;
        Ok(self.keys.get_or_init(|| keys))
    }

    /// All levels of a species, by energy.
    pub fn levels(&self, species: Species) -> Result<Levels> {
        let read = || -> rusqlite::Result<Levels> {
            let keys = self.source_keys()?;
            self.connection
                .prepare_cached(
                    "SELECT number, energy_per_cm, energy_uncertainty_per_cm, c.text, t.text,
                            twice_j, g, computed, source
                       FROM level
                       LEFT JOIN label c ON c.id = configuration
                       LEFT JOIN label t ON t.id = term
                      WHERE species = ?1
                      ORDER BY number",
                )?
                .query_map([species.code()], |row| {
                    level(row, species, keys).map(Arc::new)
                })?
                .collect()
        };
        read().map_err(self.failed("read"))
    }

    /// Lines of a species whose vacuum wavenumber lies in a closed range, by wavenumber.
    /// `levels` are those of [`Catalogue::levels`].
    pub fn lines(
        &self,
        species: Species,
        levels: &Levels,
        from_per_cm: f64,
        to_per_cm: f64,
    ) -> Result<Vec<Line>> {
        let read = || -> rusqlite::Result<Vec<Line>> {
            let keys = self.source_keys()?;
            self.connection
                .prepare_cached(
                    "SELECT wavenumber_per_cm, wavenumber_uncertainty_per_cm, position_origin,
                            position_source, lower, upper, rate_per_s, rate_relative_uncertainty,
                            rate_origin, rate_source, kind
                       FROM line
                      WHERE species = ?1 AND wavenumber_per_cm BETWEEN ?2 AND ?3
                      ORDER BY wavenumber_per_cm, number",
                )?
                .query_map((species.code(), from_per_cm, to_per_cm), |row| {
                    line(row, species, levels, keys)
                })?
                .collect()
        };
        read().map_err(self.failed("read"))
    }

    /// How strong each line of a species is, by wavenumber.
    pub fn strengths(&self, species: Species) -> Result<Vec<Strength>> {
        let read = || -> rusqlite::Result<Vec<Strength>> {
            self.connection
                .prepare_cached(
                    "SELECT wavenumber_per_cm, rate_per_s, lower, upper, position_origin, kind
                       FROM line
                      WHERE species = ?1
                      ORDER BY wavenumber_per_cm, number",
                )?
                .query_map([species.code()], |row| {
                    Ok(Strength {
                        wavenumber_per_cm: row.get(0)?,
                        rate_per_s: row.get(1)?,
                        lower: row.get(2)?,
                        upper: row.get(3)?,
                        computed: position_origin(row.get(4)?) == PositionOrigin::Computed
                            || line_kind(row.get(5)?) == LineKind::Ritz,
                    })
                })?
                .collect()
        };
        read().map_err(self.failed("read"))
    }

    /// Key, citation and licence of every source, by key.
    pub fn citations(&self) -> Result<Vec<(String, String, String)>> {
        let read = || -> rusqlite::Result<Vec<(String, String, String)>> {
            self.connection
                .prepare_cached("SELECT key, citation, licence FROM source ORDER BY key")?
                .query_map([], |row| Ok((row.get(0)?, row.get(1)?, row.get(2)?)))?
                .collect()
        };
        read().map_err(self.failed("read"))
    }

    /// How many lines of a species lie in a range of vacuum wavenumbers.
    pub fn count_lines(&self, species: Species, from_per_cm: f64, to_per_cm: f64) -> Result<u64> {
        self.connection
            .prepare_cached(
                "SELECT count(*) FROM line WHERE species = ?1 AND wavenumber_per_cm BETWEEN ?2 AND ?3",
            )
            .and_then(|mut count| {
                count.query_row((species.code(), from_per_cm, to_per_cm), |row| row.get(0))
            })
            .map_err(self.failed("read"))
    }

    /// What the sources claim to cover of a species.
    pub fn scopes(&self, species: Species) -> Result<Vec<Scope>> {
        let read = || -> rusqlite::Result<Vec<Scope>> {
            self.connection
                .prepare_cached(
                    "SELECT from_nm, to_nm, completeness, key
                       FROM scope JOIN source ON source.id = scope.source
                      WHERE species = ?1
                      ORDER BY key, from_nm",
                )?
                .query_map([species.code()], |row| {
                    Ok(Scope {
                        from_nm: row.get(0)?,
                        to_nm: row.get(1)?,
                        completeness: completeness(row.get_ref(2)?.as_str()?),
                        source: Arc::from(row.get_ref(3)?.as_str()?),
                    })
                })?
                .collect()
        };
        read().map_err(self.failed("read"))
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

fn level(
    row: &Row<'_>,
    species: Species,
    keys: &HashMap<i64, Arc<str>>,
) -> rusqlite::Result<Level> {
    let text = |index: usize| -> rusqlite::Result<Option<Arc<str>>> {
        Ok(row.get_ref(index)?.as_str_or_null()?.map(Arc::from))
    };
    let (configuration, term) = (text(3)?, text(4)?);
    let label = super::reconcile::Label {
        configuration,
        term,
    };
    let parity = label
        .odd()
        .map(|odd| if odd { Parity::Odd } else { Parity::Even });
    let computed: bool = row.get(7)?;
    Ok(Level {
        number: row.get(0)?,
        species,
        energy_per_cm: row.get(1)?,
        energy_uncertainty_per_cm: row.get(2)?,
        configuration: label.configuration,
        term: label.term,
        j: row.get::<_, Option<u16>>(5)?.map(HalfInteger::from_twice),
        g: row.get(6)?,
        parity,
        origin: if computed {
            PositionOrigin::Computed
        } else {
            PositionOrigin::Measured
        },
        source: key(keys, row.get(8)?),
    })
}

fn line(
    row: &Row<'_>,
    species: Species,
    levels: &Levels,
    keys: &HashMap<i64, Arc<str>>,
) -> rusqlite::Result<Line> {
    let end = |index: usize| -> rusqlite::Result<Option<Arc<Level>>> {
        let number: Option<usize> = row.get(index)?;
        Ok(number.and_then(|n| levels.get(n).cloned()))
    };
    Ok(Line {
        species,
        wavenumber_per_cm: row.get(0)?,
        wavenumber_uncertainty_per_cm: row.get(1)?,
        position_origin: position_origin(row.get(2)?),
        position_source: key(keys, row.get(3)?),
        lower: end(4)?,
        upper: end(5)?,
        rate_per_s: row.get(6)?,
        rate_relative_uncertainty: row.get(7)?,
        rate_origin: row.get::<_, Option<u8>>(8)?.map(rate_origin),
        rate_source: row.get::<_, Option<i64>>(9)?.map(|id| key(keys, id)),
        kind: line_kind(row.get(10)?),
    })
}

fn key(keys: &HashMap<i64, Arc<str>>, id: i64) -> Arc<str> {
    keys.get(&id).cloned().unwrap_or_else(|| Arc::from("?"))
}
