//! The rows of lines, levels and reports, cell by cell in the order of their columns.

use importers::handover::Cell;
use rusqlite::{Row, params};
use vocabulary::atom::{HalfInteger, Species};
use vocabulary::light::Air;
use vocabulary::spectrum::{LineKind, PositionOrigin, RateOrigin};

use super::give::{Giver, Held, Late};
use crate::catalogue::derive::{line_kind, position_origin, rate_origin};
use crate::catalogue::error::Result;

impl Giver<'_> {
    pub(super) fn lines(&self, species: Species, receiver: &mut Late<'_>) -> Result<u64> {
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

    pub(super) fn levels(&self, species: Species, receiver: &mut Late<'_>) -> Result<u64> {
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

    pub(super) fn reports(&self, species: Species, receiver: &mut Late<'_>) -> Result<u64> {
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
        LineKind::Ritz => "ritz",
    }
}

const fn origin_word(origin: PositionOrigin) -> &'static str {
    match origin {
        PositionOrigin::Measured => "measured",
        PositionOrigin::Ritz => "ritz",
        PositionOrigin::Computed => "computed",
    }
}
