//! The measured levels of one electron outside a core, as the calculator takes them.

use std::collections::BTreeMap;
use std::sync::Arc;

use rusqlite::Row;
use vocabulary::atom::Species;

use crate::calc::coulomb::{OuterLevel, Setting};
use crate::catalogue::error::Result;
use crate::catalogue::store::Catalogue;

impl Catalogue {
    /// Measured levels whose labels show one outer electron, in one form, and what the calculator
    /// has to know of the species: the levels that the gap fill of the catalogue is fitted to. Where
    /// one name stands at several energies, the level of the best table. `None` where the
    /// ionisation energy of the species is not known.
    pub fn outer_levels(&self, species: Species) -> Result<Option<(Setting, Vec<OuterLevel>)>> {
        let read = || -> rusqlite::Result<Vec<Held>> {
            self.connection
                .prepare_cached(
                    "SELECT energy_per_cm, energy_uncertainty_per_cm, c.text, t.text, twice_j, key,
                            level_scale_uncertainty_per_cm
                              + level_scale_uncertainty_relative * abs(energy_per_cm)
                       FROM level
                       JOIN source ON source.id = level.source
                       LEFT JOIN label c ON c.id = configuration
                       LEFT JOIN label t ON t.id = term
                      WHERE species = ?1 AND NOT computed
                      ORDER BY CASE kind WHEN 'paper' THEN 0 WHEN 'curated' THEN 1
                                         WHEN 'model' THEN 2 ELSE 3 END,
                               energy_uncertainty_per_cm, number",
                )?
                .query_map([species.code()], held)?
                .collect()
        };
        let held = read().map_err(self.failed("read"))?;
        let Some(setting) = Setting::of(species) else {
            return Ok(None);
        };
        let mut best = BTreeMap::new();
        for level in held {
            if let Some(level) = level.in_one_form(&setting) {
                let name = (
                    level.configuration.clone(),
                    level.term.clone(),
                    level.twice_j,
                );
                best.entry(name).or_insert(level);
            }
        }
        let mut levels: Vec<OuterLevel> = best.into_values().collect();
        levels.sort_by(|a, b| a.energy_per_cm.total_cmp(&b.energy_per_cm));
        Ok(Some((setting, levels)))
    }
}

/// A level as stored.
struct Held {
    energy_per_cm: f64,
    uncertainty_per_cm: f64,
    configuration: Option<String>,
    term: Option<String>,
    twice_j: Option<u16>,
    source: Arc<str>,
    scale_per_cm: f64,
}

fn held(row: &Row<'_>) -> rusqlite::Result<Held> {
    Ok(Held {
        energy_per_cm: row.get(0)?,
        uncertainty_per_cm: row.get(1)?,
        configuration: row.get(2)?,
        term: row.get(3)?,
        twice_j: row.get(4)?,
        source: Arc::from(row.get_ref(5)?.as_str()?),
        scale_per_cm: row.get(6)?,
    })
}

impl Held {
    fn in_one_form(self, setting: &Setting) -> Option<OuterLevel> {
        (self.energy_per_cm < setting.limit_per_cm).then_some(())?;
        Some(OuterLevel {
            configuration: setting.one_form(self.configuration.as_deref()?)?,
            term: self.term?,
            twice_j: self.twice_j?,
            energy_per_cm: self.energy_per_cm,
            uncertainty_per_cm: self.uncertainty_per_cm,
            scale_per_cm: self.scale_per_cm,
            source: self.source,
        })
    }
}
