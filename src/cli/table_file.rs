//! Small tables that a user hands in: CSV with a header, read whole, numbers checked where they
//! stand.

use std::path::{Path, PathBuf};

use csv::{ReaderBuilder, StringRecord, Trim};
use vocabulary::light::{Air, Medium, SpectralQuantity, SpectralUnit, SpectralWidth};

/// What is wrong with a user's table; each is one sentence with file, line and column.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum TableFileError {
    /// Not CSV.
    #[error("{}: not a table of comma-separated values: {cause}", path.display())]
    NotCsv {
        /// The file.
        path: PathBuf,
        /// What the reader says.
        #[source]
        cause: csv::Error,
    },
    /// A row of another length than the header.
    #[error(
        "{}: line {line}: {found} cell{} where the header has {wanted}; give each row one cell per column",
        path.display(), if *.found == 1 { "" } else { "s" }
    )]
    Cells {
        /// The file.
        path: PathBuf,
        /// Line, the header being 1.
        line: u64,
        /// Cells of the row.
        found: u64,
        /// Cells of the header.
        wanted: u64,
    },
    /// Another separator.
    #[error(
        "{}: line 1: `{found}`: cells are separated by {separator} here; separate them by commas, \
         and write decimal points",
        path.display()
    )]
    Separator {
        /// The file.
        path: PathBuf,
        /// The header.
        found: String,
        /// What separates its cells.
        separator: &'static str,
    },
    /// No rows.
    #[error("{}: holds no row; write a header line and one row per entry", path.display())]
    Empty {
        /// The file.
        path: PathBuf,
    },
    /// A column that is needed is not there.
    #[error(
        "{}: line 1: no column {wanted}; the columns there are: {found}", path.display()
    )]
    NoColumn {
        /// The file.
        path: PathBuf,
        /// What is needed.
        wanted: String,
        /// What is there.
        found: String,
    },
    /// Two columns say the same thing, or in other units.
    #[error(
        "{}: line 1: units are mixed: columns `{first}` and `{second}`; keep one of them",
        path.display()
    )]
    Mixed {
        /// The file.
        path: PathBuf,
        /// One column.
        first: String,
        /// The other.
        second: String,
    },
    /// A cell that cannot be used.
    #[error("{}: line {line}, column `{column}`: `{text}` {problem}", path.display())]
    Cell {
        /// The file.
        path: PathBuf,
        /// Line, the header being 1.
        line: u64,
        /// Name of the column.
        column: String,
        /// What stands there.
        text: String,
        /// What is wrong with it and what to write.
        problem: String,
    },
    /// Two rows at the same place.
    #[error(
        "{}: line {line}: the position {text} stands already in line {before}; keep one of them",
        path.display()
    )]
    Twice {
        /// The file.
        path: PathBuf,
        /// Line of the second.
        line: u64,
        /// Line of the first.
        before: u64,
        /// The position as written.
        text: String,
    },
}

/// A table as it was written.
#[derive(Clone, Debug)]
pub struct TableFile {
    path: PathBuf,
    header: Vec<String>,
    rows: Vec<(u64, StringRecord)>,
}

/// A column of the table.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct ColumnIndex(usize);

/// A column of positions with the unit in its name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct PositionColumn {
    /// Which.
    pub column: ColumnIndex,
    /// Unit that its name states.
    pub unit: SpectralUnit,
}

/// Words that a column of positions begins with, and unit endings.
const POSITIONS: [&str; 6] = [
    "position",
    "wavelength",
    "peak",
    "wavenumber",
    "frequency",
    "energy",
];
const UNITS: [(&str, SpectralUnit); 10] = [
    ("nm", SpectralUnit::Nanometre),
    ("a", SpectralUnit::Angstrom),
    ("angstrom", SpectralUnit::Angstrom),
    ("um", SpectralUnit::Micrometre),
    ("pm", SpectralUnit::Picometre),
    ("per_cm", SpectralUnit::PerCm),
    ("ev", SpectralUnit::Electronvolt),
    ("mev", SpectralUnit::MilliElectronvolt),
    ("thz", SpectralUnit::Terahertz),
    ("ghz", SpectralUnit::Gigahertz),
];

impl TableFile {
    /// Reads a table: a header, then rows of as many cells. Lines that begin with `#` are left out.
    ///
    /// # Errors
    /// A file that cannot be read, is no CSV, or has no row.
    pub fn read(path: &Path) -> Result<Self, super::CliError> {
        let bytes = std::fs::read(path).map_err(|cause| super::CliError::Unreadable {
            path: path.to_owned(),
            cause,
        })?;
        Ok(Self::parse(path, &bytes)?)
    }

    /// As [`TableFile::read`], from bytes; `path` is for messages.
    ///
    /// # Errors
    /// No CSV, or no row.
    pub fn parse(path: &Path, bytes: &[u8]) -> Result<Self, TableFileError> {
        let bytes = bytes.strip_prefix(b"\xef\xbb\xbf").unwrap_or(bytes);
        let not_csv = |cause: csv::Error| match cause.kind() {
            csv::ErrorKind::UnequalLengths {
                pos: Some(place),
                expected_len,
                len,
            } => TableFileError::Cells {
                path: path.to_owned(),
                line: place.line(),
                found: *len,
                wanted: *expected_len,
            },
            _ => TableFileError::NotCsv {
                path: path.to_owned(),
                cause,
            },
        };
        let mut reader = ReaderBuilder::new()
            .trim(Trim::All)
            .comment(Some(b'#'))
            .from_reader(bytes);
        let header: Vec<String> = reader
            .headers()
            .map_err(not_csv)?
            .iter()
            .map(str::to_owned)
            .collect();
        if let [one] = header.as_slice() {
            let other = [(';', "semicolons"), ('\t', "tabs"), ('|', "bars")];
            if let Some((_, separator)) = other.iter().find(|(sign, _)| one.contains(*sign)) {
                return Err(TableFileError::Separator {
                    path: path.to_owned(),
                    found: one.clone(),
                    separator,
                });
            }
        }
        let mut rows = Vec::new();
        for record in reader.into_records() {
            let record = record.map_err(not_csv)?;
            rows.push((record.position().map_or(0, csv::Position::line), record));
        }
        if rows.is_empty() {
            return Err(TableFileError::Empty {
                path: path.to_owned(),
            });
        }
        Ok(Self {
            path: path.to_owned(),
            header,
            rows,
        })
    }

    /// Number of rows.
    pub fn len(&self) -> usize {
        self.rows.len()
    }

    /// Line of a row in the file.
    pub fn line(&self, row: usize) -> u64 {
        self.rows.get(row).map_or(0, |(line, _)| *line)
    }

    /// The column of one of these names, letter case aside.
    pub fn column(&self, names: &[&str]) -> Option<ColumnIndex> {
        let is = |h: &String| names.iter().any(|n| h.eq_ignore_ascii_case(n));
        self.header.iter().position(is).map(ColumnIndex)
    }

    /// As [`TableFile::column`], required.
    ///
    /// # Errors
    /// No such column.
    pub fn needed(&self, names: &[&str]) -> Result<ColumnIndex, TableFileError> {
        self.column(names)
            .ok_or_else(|| self.no_column(&format!("`{}`", names.join("` or `"))))
    }

    fn no_column(&self, wanted: &str) -> TableFileError {
        TableFileError::NoColumn {
            path: self.path.clone(),
            wanted: wanted.to_owned(),
            found: self.header.join(", "),
        }
    }

    /// The one column of spectral positions: `position_nm`, `wavelength_A`, `wavenumber_per_cm` …
    ///
    /// # Errors
    /// None there, or two.
    pub fn position_column(&self) -> Result<PositionColumn, TableFileError> {
        let mut found: Option<PositionColumn> = None;
        for (index, name) in self.header.iter().enumerate() {
            let lower = name.to_ascii_lowercase();
            let Some((head, tail)) = lower.split_once('_') else {
                continue;
            };
            let unit = UNITS
                .iter()
                .find(|(end, _)| *end == tail)
                .map(|(_, unit)| *unit);
            let Some(unit) = unit.filter(|_| POSITIONS.contains(&head)) else {
                continue;
            };
            if let Some(before) = found {
                return Err(TableFileError::Mixed {
                    path: self.path.clone(),
                    first: self.header[before.column.0].clone(),
                    second: name.clone(),
                });
            }
            found = Some(PositionColumn {
                column: ColumnIndex(index),
                unit,
            });
        }
        found.ok_or_else(|| {
            self.no_column(
                "of positions with its unit, such as `position_nm` or `wavenumber_per_cm`",
            )
        })
    }

    /// The column of 1 σ of positions, `uncertainty_nm`, in the unit of the positions.
    ///
    /// # Errors
    /// One in another unit.
    pub fn position_uncertainty(
        &self,
        position: PositionColumn,
    ) -> Result<Option<ColumnIndex>, TableFileError> {
        for (index, name) in self.header.iter().enumerate() {
            let lower = name.to_ascii_lowercase();
            let Some(tail) = lower.strip_prefix("uncertainty_") else {
                continue;
            };
            let unit = UNITS
                .iter()
                .find(|(end, _)| *end == tail)
                .map(|(_, unit)| *unit);
            if unit == Some(position.unit) {
                return Ok(Some(ColumnIndex(index)));
            }
            if unit.is_some() {
                return Err(TableFileError::Mixed {
                    path: self.path.clone(),
                    first: self.header[position.column.0].clone(),
                    second: name.clone(),
                });
            }
        }
        Ok(None)
    }

    /// A cell, trimmed.
    pub fn text(&self, row: usize, column: ColumnIndex) -> &str {
        self.rows
            .get(row)
            .and_then(|(_, r)| r.get(column.0))
            .unwrap_or_default()
    }

    /// The error of a cell.
    pub fn bad(&self, row: usize, column: ColumnIndex, problem: &str) -> TableFileError {
        TableFileError::Cell {
            path: self.path.clone(),
            line: self.line(row),
            column: self.header.get(column.0).cloned().unwrap_or_default(),
            text: self.text(row, column).to_owned(),
            problem: problem.to_owned(),
        }
    }

    /// A finite number.
    ///
    /// # Errors
    /// Anything else.
    pub fn number(&self, row: usize, column: ColumnIndex) -> Result<f64, TableFileError> {
        let text = self.text(row, column);
        match text.parse::<f64>() {
            Ok(value) if value.is_finite() => Ok(value),
            _ if text.is_empty() => Err(self.bad(row, column, "is empty; a number is needed")),
            _ => Err(self.bad(
                row,
                column,
                "is no finite number; the unit stands in the name of the column, not in the cell",
            )),
        }
    }

    /// A finite number above zero.
    ///
    /// # Errors
    /// Anything else.
    pub fn positive(&self, row: usize, column: ColumnIndex) -> Result<f64, TableFileError> {
        match self.number(row, column)? {
            value if value > 0.0 => Ok(value),
            _ => Err(self.bad(row, column, "is not above zero")),
        }
    }

    /// A position as vacuum wavenumber, cm⁻¹.
    ///
    /// # Errors
    /// A cell that is no number above zero, or a wavelength in air outside its index.
    pub fn wavenumber_per_cm(
        &self,
        row: usize,
        position: PositionColumn,
        medium: Medium,
    ) -> Result<f64, TableFileError> {
        let value = self.positive(row, position.column)?;
        SpectralQuantity::new(value, position.unit)
            .and_then(|q| q.wavenumber_per_cm(medium, Air::standard()))
            .map_err(|e| self.bad(row, position.column, &format!("cannot be read: {e}")))
    }

    /// Size of a 1 σ given in the unit of the positions, in nm of vacuum wavelength.
    ///
    /// # Errors
    /// A cell that is no number above zero.
    pub fn uncertainty_nm(
        &self,
        row: usize,
        column: ColumnIndex,
        unit: SpectralUnit,
        vacuum_nm: f64,
    ) -> Result<f64, TableFileError> {
        let width = SpectralWidth {
            value: self.positive(row, column)?,
            unit,
            unit_assumed: false,
        };
        Ok(width.at_nm(vacuum_nm))
    }

    /// Refuses positions that stand twice.
    ///
    /// # Errors
    /// The first such row.
    pub fn refuse_twice(&self, position: ColumnIndex) -> Result<(), TableFileError> {
        let mut seen = std::collections::HashMap::new();
        for row in 0..self.len() {
            let value = self.number(row, position)?;
            if let Some(before) = seen.insert(value.to_bits(), self.line(row)) {
                return Err(TableFileError::Twice {
                    path: self.path.clone(),
                    line: self.line(row),
                    before,
                    text: self.text(row, position).to_owned(),
                });
            }
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn table(text: &str) -> Result<TableFile, TableFileError> {
        TableFile::parse(Path::new("peaks.csv"), text.as_bytes())
    }

    #[test]
    fn the_unit_is_read_from_the_name_of_the_column() {
        for (name, unit) in [
            ("position_nm", SpectralUnit::Nanometre),
            ("position_A", SpectralUnit::Angstrom),
            ("wavenumber_per_cm", SpectralUnit::PerCm),
            ("energy_eV", SpectralUnit::Electronvolt),
        ] {
            let table = table(&format!("{name},intensity\n5,1\n")).unwrap();
            assert_eq!(table.position_column().unwrap().unit, unit, "{name}");
        }
    }

    #[test]
    fn each_message_says_where() {
        let said = |text: &str| {
            let table = match table(text) {
                Ok(table) => table,
                Err(e) => return e.to_string(),
            };
            let position = match table.position_column() {
                Ok(position) => position,
                Err(e) => return e.to_string(),
            };
            (0..table.len())
                .map(|row| table.wavenumber_per_cm(row, position, Medium::Auto))
                .find_map(Result::err)
                .or_else(|| table.refuse_twice(position.column).err())
                .map_or_else(String::new, |e| e.to_string())
        };
        assert!(said("position_nm\n500\n-3\n").contains("line 3, column `position_nm`: `-3`"));
        assert!(said("position_nm\n500\n500\n").contains("stands already in line 2"));
        assert!(said("position_nm\n500nm\n").contains("the unit stands in the name"));
        assert!(said("position_nm,wavelength_A\n500,5000\n").contains("units are mixed"));
        assert!(said("position_nm\n").contains("holds no row"));
        assert!(said("x\n1\n").contains("no column of positions"));
        assert!(said("position_nm;intensity\n500;1\n").contains("separated by semicolons here"));
    }
}
