//! What the sources report of a species, with the row of each report, beside what follows from it.

use std::collections::HashMap;

use vocabulary::atom::{HalfInteger, Species};
use vocabulary::report::{
    ConcludedLevel, ConcludedLine, ReportedLevel, ReportedLine, ReportedSource, Reports,
};
use vocabulary::spectrum::Parity;

use super::derive::{self, Labels};
use super::error::Result;
use super::gap_fill;
use super::reconcile::{self, Derived, LevelReport, LineReport, SourceKind, SourceReports};
use super::store::Catalogue;

/// Rows of the tables, by source; then by number of the report.
type Rows = HashMap<i64, Vec<u64>>;

impl Catalogue {
    /// All reports of each species asked for, in their order, those that the calculator makes
    /// included (their row is 0), and what the rule concludes from them. Nothing is written.
    ///
    /// # Errors
    /// A catalogue that cannot be read.
    pub fn reports(&self, species: &[Species]) -> Result<Vec<Reports>> {
        let labels = Labels::load(&self.connection).map_err(self.failed("read"))?;
        species
            .iter()
            .map(|&species| {
                self.reports_of(species, &labels)
                    .map_err(self.failed("read"))
            })
            .collect()
    }

    fn reports_of(&self, species: Species, labels: &Labels) -> rusqlite::Result<Reports> {
        let mut given = derive::read(&self.connection, species.code(), labels)?;
        reconcile::rank(&mut given);
        let (computed, _) = gap_fill::Sources::held(&self.connection)?.fill(species, &given);
        given.extend(computed);
        reconcile::rank(&mut given);
        let derived = reconcile::derive_ranked(species, &given);
        let level_rows = self.rows(
            "SELECT source, place FROM level_report WHERE species = ?1 ORDER BY source, number",
            species,
        )?;
        let line_rows = self.rows(
            "SELECT source, place FROM line_report WHERE species = ?1 ORDER BY source, number",
            species,
        )?;
        Ok(assemble(species, &given, &derived, &level_rows, &line_rows))
    }

    fn rows(&self, select: &str, species: Species) -> rusqlite::Result<Rows> {
        let mut select = self.connection.prepare_cached(select)?;
        let mut found = select.query([species.code()])?;
        let mut rows = Rows::new();
        while let Some(row) = found.next()? {
            rows.entry(row.get(0)?).or_default().push(row.get(1)?);
        }
        Ok(rows)
    }
}

fn assemble(
    species: Species,
    given: &[SourceReports],
    derived: &Derived,
    level_rows: &Rows,
    line_rows: &Rows,
) -> Reports {
    let mut levels = concluded_levels(derived);
    for (source, joined) in derived.level_of.iter().enumerate() {
        for (report, level) in joined.iter().enumerate() {
            if let Some(level) = level.and_then(|l| levels.get_mut(l)) {
                level.reports.push((source, report));
            }
        }
    }
    let mut line_of: Vec<Vec<Option<usize>>> =
        given.iter().map(|of| vec![None; of.lines.len()]).collect();
    for (number, line) in derived.lines.iter().enumerate() {
        for &(source, report) in &line.reports {
            line_of[source][report] = Some(number);
        }
    }
    let row = |rows: &Rows, source: i64, report: usize| {
        rows.get(&source)
            .and_then(|r| r.get(report))
            .copied()
            .unwrap_or(0)
    };
    let sources = given.iter().enumerate().map(|(index, of)| {
        let level_at = |(report, level): (usize, &LevelReport)| {
            let at = row(level_rows, of.source.id, report);
            reported_level(level, at, derived.level_of[index][report])
        };
        let line_at = |(report, line): (usize, &LineReport)| {
            let at = row(line_rows, of.source.id, report);
            reported_line(line, at, line_of[index][report])
        };
        ReportedSource {
            key: of.source.key.clone(),
            computed: of.source.kind == SourceKind::Computed,
            scale_per_cm: of.source.scale_per_cm,
            scale_relative: of.source.scale_relative,
            levels: of.levels.iter().enumerate().map(level_at).collect(),
            lines: of.lines.iter().enumerate().map(line_at).collect(),
        }
    });
    Reports {
        species,
        sources: sources.collect(),
        levels,
        lines: concluded_lines(derived),
    }
}

fn reported_level(level: &LevelReport, row: u64, joined: Option<usize>) -> ReportedLevel {
    ReportedLevel {
        energy_per_cm: level.energy_per_cm,
        uncertainty_per_cm: level.uncertainty_per_cm,
        configuration: level.label.configuration.clone(),
        term: level.label.term.clone(),
        j: level.twice_j.map(HalfInteger::from_twice),
        g: level.g,
        parity: level
            .label
            .odd()
            .map(|odd| if odd { Parity::Odd } else { Parity::Even }),
        computed: level.computed,
        own_row: level.own_row,
        row,
        joined,
    }
}

fn reported_line(line: &LineReport, row: u64, joined: Option<usize>) -> ReportedLine {
    ReportedLine {
        wavenumber_per_cm: line.wavenumber_per_cm,
        uncertainty_per_cm: line.uncertainty_per_cm,
        from_levels: line.from_levels,
        lower: line.lower,
        upper: line.upper,
        rate_per_s: line.rate_per_s,
        rate_relative_uncertainty: line.rate_relative_uncertainty,
        rate_origin: line.rate_origin,
        kind: line.kind,
        computed: line.computed,
        row,
        joined,
    }
}

fn concluded_levels(derived: &Derived) -> Vec<ConcludedLevel> {
    derived
        .levels
        .iter()
        .map(|level| ConcludedLevel {
            energy_per_cm: level.energy_per_cm,
            uncertainty_per_cm: level.uncertainty_per_cm,
            configuration: level.label.configuration.clone(),
            term: level.label.term.clone(),
            j: level.twice_j.map(HalfInteger::from_twice),
            computed: level.computed,
            source: level.source,
            reports: Vec::new(),
        })
        .collect()
}

fn concluded_lines(derived: &Derived) -> Vec<ConcludedLine> {
    derived
        .lines
        .iter()
        .map(|line| ConcludedLine {
            wavenumber_per_cm: line.wavenumber_per_cm,
            uncertainty_per_cm: line.uncertainty_per_cm,
            position_origin: line.position_origin,
            position_source: line.position_source,
            lower: line.lower,
            upper: line.upper,
            kind: line.kind,
            reports: line.reports.clone(),
        })
        .collect()
}
