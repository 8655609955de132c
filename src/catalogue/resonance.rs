//! What the source of resonance lines says beside levels and lines: measured lifetimes, branching
//! fractions and hyperfine constants. They count only while that source is in the catalogue.

use csv::StringRecord;
use rusqlite::OptionalExtension;
use vocabulary::atom::{HalfInteger, Species};

use super::error::{CatalogueError, Result};
use super::store::Catalogue;

/// Key of the source.
pub const RESONANCE_SOURCE: &str = "resonance-lines";

const LIFETIMES: &str = include_str!("../../data/resonance-lines/lifetimes.csv");
const BRANCHING: &str = include_str!("../../data/resonance-lines/branching.csv");
const HYPERFINE: &str = include_str!("../../data/resonance-lines/hyperfine.csv");

/// A level as a table names it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NamedLevel {
    /// Configuration without closed inner shells.
    pub configuration: String,
    /// Term, a trailing `o` for odd parity.
    pub term: String,
    /// Total angular momentum.
    pub j: HalfInteger,
}

/// A lifetime of a level, of every isotope alike.
#[derive(Clone, Debug, PartialEq)]
pub struct LifetimeRow {
    /// Whose level; natural mixture.
    pub species: Species,
    /// The level.
    pub level: NamedLevel,
    /// Lifetime, ns.
    pub lifetime_ns: f64,
    /// 1 σ, ns.
    pub uncertainty_ns: f64,
    /// The paper.
    pub paper: String,
}

/// The part of the decays of a level that one line takes, of every isotope alike.
#[derive(Clone, Debug, PartialEq)]
pub struct BranchingRow {
    /// Whose line; natural mixture.
    pub species: Species,
    /// Lower level.
    pub lower: NamedLevel,
    /// Upper level.
    pub upper: NamedLevel,
    /// Fraction of 1.
    pub fraction: f64,
    /// 1 σ of the fraction.
    pub uncertainty: f64,
}

/// Hyperfine constants of a level of one isotope.
#[derive(Clone, Debug, PartialEq)]
pub struct HyperfineRow {
    /// The isotope.
    pub species: Species,
    /// The level.
    pub level: NamedLevel,
    /// Nuclear spin I.
    pub nuclear_spin: HalfInteger,
    /// Magnetic dipole constant A with its 1 σ, MHz.
    pub a_mhz: (f64, f64),
    /// Electric quadrupole constant B with its 1 σ, MHz, where there is one.
    pub b_mhz: Option<(f64, f64)>,
    /// The paper.
    pub paper: String,
}

/// The three tables.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ResonanceTables {
    /// Lifetimes.
    pub lifetimes: Vec<LifetimeRow>,
    /// Branching fractions.
    pub branching: Vec<BranchingRow>,
    /// Hyperfine constants.
    pub hyperfine: Vec<HyperfineRow>,
}

impl Catalogue {
    /// Lifetimes, branching fractions and hyperfine constants; all empty where the source of
    /// resonance lines was taken out.
    ///
    /// # Errors
    /// A catalogue that cannot be read.
    pub fn resonance_tables(&self) -> Result<ResonanceTables> {
        let held = self
            .connection
            .query_row(
                "SELECT 1 FROM source WHERE key = ?1",
                [RESONANCE_SOURCE],
                |row| row.get::<_, i64>(0),
            )
            .optional()
            .map_err(self.failed("read"))?;
        match held {
            Some(_) => read(),
            None => Ok(ResonanceTables::default()),
        }
    }
}

fn read() -> Result<ResonanceTables> {
    Ok(ResonanceTables {
        lifetimes: rows(LIFETIMES, "lifetimes.csv", lifetime)?,
        branching: rows(BRANCHING, "branching.csv", branching)?,
        hyperfine: rows(HYPERFINE, "hyperfine.csv", hyperfine)?,
    })
}

fn rows<T>(text: &str, file: &str, row: fn(&StringRecord) -> Option<T>) -> Result<Vec<T>> {
    csv::Reader::from_reader(text.as_bytes())
        .records()
        .enumerate()
        .map(|(index, record)| {
            record
                .ok()
                .and_then(|r| row(&r))
                .ok_or_else(|| CatalogueError::Damaged {
                    path: format!("{RESONANCE_SOURCE}/{file}").into(),
                    what: format!("row {} cannot be read", index + 1),
                })
        })
        .collect()
}

fn named(record: &StringRecord, first: usize) -> Option<NamedLevel> {
    Some(NamedLevel {
        configuration: record.get(first)?.to_owned(),
        term: record.get(first + 1)?.to_owned(),
        j: HalfInteger::parse(record.get(first + 2)?)?,
    })
}

fn number(record: &StringRecord, column: usize) -> Option<f64> {
    record.get(column)?.parse().ok()
}

fn lifetime(record: &StringRecord) -> Option<LifetimeRow> {
    Some(LifetimeRow {
        species: record.get(0)?.parse().ok()?,
        level: named(record, 1)?,
        lifetime_ns: number(record, 4)?,
        uncertainty_ns: number(record, 5)?,
        paper: record.get(6)?.to_owned(),
    })
}

fn branching(record: &StringRecord) -> Option<BranchingRow> {
    Some(BranchingRow {
        species: record.get(0)?.parse().ok()?,
        lower: named(record, 1)?,
        upper: named(record, 4)?,
        fraction: number(record, 7)?,
        uncertainty: number(record, 8)?,
    })
}

fn hyperfine(record: &StringRecord) -> Option<HyperfineRow> {
    let b_mhz = match record.get(7)? {
        "" => None,
        _ => Some((number(record, 7)?, number(record, 8)?)),
    };
    Some(HyperfineRow {
        species: record.get(0)?.parse().ok()?,
        level: named(record, 1)?,
        nuclear_spin: HalfInteger::parse(record.get(4)?)?,
        a_mhz: (number(record, 5)?, number(record, 6)?),
        b_mhz,
        paper: record.get(9)?.to_owned(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_row_is_read() {
        let tables = read().unwrap();
        let lines = |text: &str| text.lines().count() - 1;
        assert_eq!(tables.lifetimes.len(), lines(LIFETIMES));
        assert_eq!(tables.branching.len(), lines(BRANCHING));
        assert_eq!(tables.hyperfine.len(), lines(HYPERFINE));
        let quadrupoles = tables
            .hyperfine
            .iter()
            .filter(|r| r.b_mhz.is_some())
            .count();
        assert!(quadrupoles > 10, "{quadrupoles}");
    }
}
