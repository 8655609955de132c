//! The table of `--given`: what the user knows of the light.

use std::path::Path;

use vocabulary::atom::{Species, SpeciesRequest, Stages};
use vocabulary::light::Medium;

use super::CliError;
use super::mix::check_sums;
use super::table_file::{ColumnIndex, TableFile};
use crate::advise::{Details, Entry, GivenIntensity};

/// Reads a table of `species` with `ion_fraction`, or with a position and `intensity`; both may
/// have `relative_uncertainty`.
pub fn read(path: &Path, details: &mut Details) -> Result<(), CliError> {
    let table = TableFile::read(path)?;
    let species = table.needed(&["species"])?;
    let fraction = table.column(&["ion_fraction"]);
    let intensity = table.column(&["intensity"]);
    let sigma = table.column(&["relative_uncertainty"]);
    let reader = Reader {
        table: &table,
        species,
        sigma,
    };
    match (fraction, intensity) {
        (Some(_), Some(_)) => Err(CliError::Usage(format!(
            "{}: columns `ion_fraction` and `intensity` do not go together; keep one of them",
            path.display()
        ))),
        (None, None) => Err(table.needed(&["ion_fraction", "intensity"]).err().map_or(
            CliError::Options("the table of --given has no column to read"),
            CliError::from,
        )),
        (Some(column), None) => {
            details.ion_fractions = reader.fractions(column)?;
            check_sums(&details.ion_fractions, &format!("{}: ", path.display()))
        }
        (None, Some(column)) => {
            details.intensities = reader.intensities(column)?;
            Ok(())
        }
    }
}

struct Reader<'t> {
    table: &'t TableFile,
    species: ColumnIndex,
    sigma: Option<ColumnIndex>,
}

impl Reader<'_> {
    fn species(&self, row: usize) -> Result<Species, CliError> {
        let request: SpeciesRequest = self.table.text(row, self.species).parse().map_err(|e| {
            self.table
                .bad(row, self.species, &format!("cannot be read: {e}"))
        })?;
        let problem = "is not one stage; write it as `Fe I`";
        Ok(request
            .single()
            .ok_or_else(|| self.table.bad(row, self.species, problem))?)
    }

    /// 0 where the cell is empty or the column is not there.
    fn sigma(&self, row: usize) -> Result<f64, CliError> {
        match self.sigma {
            Some(column) if !self.table.text(row, column).is_empty() => {
                self.not_negative(row, column)
            }
            _ => Ok(0.0),
        }
    }

    fn not_negative(&self, row: usize, column: ColumnIndex) -> Result<f64, CliError> {
        match self.table.number(row, column)? {
            value if value >= 0.0 => Ok(value),
            _ => Err(self.table.bad(row, column, "is below zero").into()),
        }
    }

    fn fractions(&self, column: ColumnIndex) -> Result<Vec<Entry>, CliError> {
        let mut out: Vec<Entry> = Vec::with_capacity(self.table.len());
        for row in 0..self.table.len() {
            let value = self.not_negative(row, column)?;
            if value > 1.0 {
                let problem = "is above 1; it is the part of the element that the stage is";
                return Err(self.table.bad(row, column, problem).into());
            }
            let species = self.species(row)?;
            let request = SpeciesRequest {
                atomic_number: species.atomic_number,
                isotope: species.isotope,
                stages: Stages::Range {
                    first: species.stage,
                    last: species.stage,
                },
            };
            if out.iter().any(|e| e.request == request) {
                let problem = "stands twice; keep one row of it";
                return Err(self.table.bad(row, self.species, problem).into());
            }
            out.push(Entry {
                request,
                value,
                relative_sigma: self.sigma(row)?,
            });
        }
        Ok(out)
    }

    fn intensities(&self, column: ColumnIndex) -> Result<Vec<GivenIntensity>, CliError> {
        let position = self.table.position_column()?;
        let mut out: Vec<GivenIntensity> = Vec::with_capacity(self.table.len());
        for row in 0..self.table.len() {
            let species = self.species(row)?;
            let wavenumber = self.table.wavenumber_per_cm(row, position, Medium::Auto)?;
            let vacuum_nm = 1e7 / wavenumber;
            let same = |g: &GivenIntensity| g.species == species && g.vacuum_nm == vacuum_nm;
            if out.iter().any(same) {
                let problem = "stands twice for its species; keep one row of it";
                return Err(self.table.bad(row, position.column, problem).into());
            }
            let written = self.table.text(row, position.column);
            out.push(GivenIntensity {
                species,
                vacuum_nm,
                intensity: self.not_negative(row, column)?,
                relative_sigma: self.sigma(row)?,
                typed: format!(
                    "--given, line {}: {species} {written}",
                    self.table.line(row)
                ),
            });
        }
        if out.iter().all(|g| g.intensity == 0.0) {
            let problem = "and all other intensities are zero; at least one must be above";
            return Err(self.table.bad(0, column, problem).into());
        }
        Ok(out)
    }
}
