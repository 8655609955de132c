//! A table's description bound to the columns that the file really has.

use std::sync::Arc;

use thiserror::Error;
use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::spectrum::RateOrigin;

use super::bind::Binder;
use super::cell::{Marks, Place};
use super::level::LevelPlan;
use super::line::{self, LevelScale, LinePlan};
use super::problem::{CellFault, Fault};
use super::species::SpeciesPlan;
use crate::record::{LevelRecord, LineRecord, Place as RecordPlace, Record};
use crate::row::{ColumnInfo, Row};
use crate::source::{Part, RecordKind, SourceDescription, SourceKind, TableDescription};
use crate::unit::UnitError;

/// Why a description does not fit a table.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum MappingError {
    /// A target names a column that the table does not have.
    #[error("`{target}` needs a column `{column}`; the table has {known}")]
    NoColumn {
        /// The target.
        target: String,
        /// The column.
        column: String,
        /// The columns that there are.
        known: String,
    },
    /// Two columns of the same name, and a target needs one of them.
    #[error("the table has two columns `{column}`; give the position of the one that is meant")]
    TwoColumns {
        /// The name.
        column: String,
    },
    /// Columns that no target uses and no word leaves out.
    #[error("no target uses {columns}; map them or list them under ignore (\"rest\" for all)")]
    Unmapped {
        /// The names.
        columns: String,
    },
    /// A target without its unit.
    #[error("`{target}` needs a unit such as {example}")]
    NoUnit {
        /// The target.
        target: String,
        /// A fitting unit.
        example: &'static str,
    },
    /// A unit that does not fit.
    #[error("`{target}`: {problem}")]
    Unit {
        /// The target.
        target: String,
        /// What is wrong with it.
        problem: UnitError,
    },
    /// Wavelengths without a stated medium.
    #[error(
        "the medium of the wavelengths is not stated: say whether they are in vacuum or in air"
    )]
    NoMedium,
    /// Targets that a record cannot do without.
    #[error("the table does not say {what}: map a column for it")]
    NoTarget {
        /// What is missing.
        what: &'static str,
    },
}

/// Turns the rows of one table into records.
#[derive(Debug)]
pub struct Plan {
    file: Arc<str>,
    species: SpeciesPlan,
    what: What,
    context: Context,
    /// Species that the source took from theory.
    computed_species: Vec<SpeciesRequest>,
    skips: Vec<Skip>,
    pub(crate) counts: Counts,
}

/// What holds for all rows of the table.
#[derive(Clone, Copy, Debug)]
struct Context {
    computed: bool,
    /// The source took this species from theory, its rates as well, whatever their column says.
    from_theory: bool,
    scale: LevelScale,
    /// The source has a table of levels, which says how well their energies are known.
    level_table: bool,
}

/// Rows worth a warning.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct Counts {
    /// Rows that give a strength but not the weights for a rate.
    pub weightless: u64,
    /// Wavelengths in air outside the published range of the index.
    pub extrapolated: u64,
    /// Positions left out because the index of air is not known there.
    pub beyond_air: u64,
}

#[derive(Debug)]
enum What {
    Levels(Box<LevelPlan>),
    Lines(Box<LinePlan>),
}

#[derive(Debug)]
struct Skip {
    column: Option<usize>,
    test: Test,
    reason: String,
}

#[derive(Debug)]
enum Test {
    Equals(String),
    StartsWith(String),
    Contains(String),
}

impl Plan {
    /// Binds a description to the columns of a table.
    ///
    /// # Errors
    /// Columns that are not there, columns that nothing uses, missing or wrong units.
    pub fn new(
        description: &SourceDescription,
        table: &TableDescription,
        columns: &[ColumnInfo],
    ) -> Result<Self, MappingError> {
        let binder = Binder {
            table,
            columns,
            marks: Marks {
                decimal: table.decimal_mark.as_ref().and_then(|m| m.chars().next()),
                group: table.group_mark.as_ref().and_then(|m| m.chars().next()),
            },
        };
        let plan = Self {
            file: Arc::from(table.file.as_str()),
            species: binder.species()?,
            what: match table.records {
                RecordKind::Levels => What::Levels(Box::new(binder.level_table()?)),
                RecordKind::Lines => What::Lines(Box::new(binder.line_table()?)),
            },
            context: Context {
                computed: description.kind == SourceKind::Computed,
                from_theory: false,
                scale: LevelScale {
                    per_cm: description.level_scale_uncertainty_per_cm,
                    relative: description.level_scale_uncertainty_relative,
                },
                level_table: has_level_table(description),
            },
            computed_species: (description.computed_species.iter())
                .filter_map(|text| text.parse().ok()) // checked with the description
                .collect(),
            skips: skips(&binder)?,
            counts: Counts::default(),
        };
        binder.check_unmapped()?;
        Ok(plan)
    }

    /// The reason for which a row is left out, if a rule says so.
    pub fn skip_reason(&self, row: &Row) -> Option<&str> {
        let hit = self.skips.iter().find(|skip| skip.applies(row))?;
        Some(&hit.reason)
    }

    /// The record of a row.
    ///
    /// # Errors
    /// The cell or the contradiction that makes the row unusable.
    pub fn record(&mut self, row: &Row) -> Result<Record, Fault> {
        let species = self.species.read(row)?;
        let place = RecordPlace {
            file: Arc::clone(&self.file),
            line: row.line(),
        };
        let from_theory = self.computed_species.iter().any(|s| s.matches(species));
        let context = Context {
            computed: self.context.computed || from_theory,
            from_theory,
            ..self.context
        };
        match &self.what {
            What::Levels(plan) => level_record(plan, row, species, context.computed, place),
            What::Lines(plan) => {
                let owner = (species, context);
                line_record(plan, row, owner, place, &mut self.counts)
            }
        }
    }
}

fn level_record(
    plan: &LevelPlan,
    row: &Row,
    species: Species,
    computed: bool,
    place: RecordPlace,
) -> Result<Record, Fault> {
    let cells = plan.read(row)?;
    let Some(energy) = cells.energy else {
        let missing = super::Problem::Missing;
        return Err(match &plan.energy {
            Some((bound, _)) => bound.fault("", missing),
            None => CellFault::row(missing),
        });
    };
    Ok(Record::Level(LevelRecord {
        species,
        energy_per_cm: energy.per_cm,
        energy_uncertainty_per_cm: energy.uncertainty_per_cm(),
        configuration: cells.configuration,
        term: cells.term,
        j: cells.j,
        g: cells.g,
        computed,
        place,
    }))
}

fn line_record(
    plan: &LinePlan,
    row: &Row,
    (species, context): (Species, Context),
    place: RecordPlace,
    counts: &mut Counts,
) -> Result<Record, Fault> {
    let lower = plan.lower.read(row)?;
    let mut upper = plan.upper.read(row)?;
    let position = match plan.position(row) {
        // No index of air there, but the levels say where the line is.
        Err(fault) if fault.is_beyond_air() && line::has_energies(&lower, &upper) => {
            counts.beyond_air += 1;
            None
        }
        other => other?,
    };
    line::complete_upper(&plan.upper, &mut upper, &lower, position.as_ref());
    line::check(&lower, &upper, position.as_ref(), context.scale)?;
    let weights = line::weights(&lower, &upper, position.as_ref());
    let rate = plan.rate.read(row, weights, context.computed)?;
    counts.weightless += u64::from(rate.weightless);
    counts.extrapolated += u64::from(position.is_some_and(|p| p.extrapolated));
    Ok(Record::Line(LineRecord {
        species,
        wavenumber_per_cm: position.map(|p| p.wavenumber_per_cm),
        wavenumber_uncertainty_per_cm: position.map(|p| p.uncertainty_per_cm),
        from_levels: plan.reads_from_levels(row)?,
        lower: lower.into_end(context.level_table),
        upper: upper.into_end(context.level_table),
        rate_per_s: rate.per_s,
        rate_relative_uncertainty: rate.relative_uncertainty,
        rate_origin: match rate.origin {
            Some(_) if context.from_theory => Some(RateOrigin::Computed),
            origin => origin,
        },
        intensity: plan.intensity(row)?,
        kind: plan.kind(row)?,
        computed: context.computed,
        place,
    }))
}

fn has_level_table(description: &SourceDescription) -> bool {
    let mut tables = description.table.iter();
    tables.any(|table| table.records == RecordKind::Levels)
}

impl Skip {
    fn applies(&self, row: &Row) -> bool {
        let text = match self.column {
            Some(index) => row.cell(index).trim(),
            None => row.text().trim(),
        };
        match &self.test {
            Test::Equals(whole) => text == whole,
            Test::StartsWith(start) => text.starts_with(start.as_str()),
            Test::Contains(part) => text.contains(part.as_str()),
        }
    }
}

fn skips(binder: &Binder) -> Result<Vec<Skip>, MappingError> {
    let rules = binder.table.skip.iter();
    rules
        .map(|rule| {
            let column = match &rule.column {
                None => None,
                Some(name) => {
                    let part = Part {
                        column: Some(name.clone()),
                        ..Part::default()
                    };
                    match binder.place("skip", &part)? {
                        Place::Column(index) => Some(index),
                        Place::Constant(_) => None,
                    }
                }
            };
            let text = |text: &Option<String>| text.clone().unwrap_or_default();
            let test = if rule.equals.is_some() {
                Test::Equals(text(&rule.equals))
            } else if rule.starts_with.is_some() {
                Test::StartsWith(text(&rule.starts_with))
            } else {
                Test::Contains(text(&rule.contains))
            };
            Ok(Skip {
                column,
                test,
                reason: rule.reason.clone(),
            })
        })
        .collect()
}
