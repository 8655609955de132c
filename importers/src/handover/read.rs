//! Reports read back, each checked where it stands.

use std::sync::Arc;

use vocabulary::atom::{HalfInteger, Species};
use vocabulary::spectrum::{LineKind, RateOrigin};

use super::Header;
use super::columns::REPORTS;
use crate::error::ImportError;
use crate::number;
use crate::row::{Row, RowReader};
use crate::sink::{Refusal, SinkError, shown};

/// A level of a source, as kept.
#[derive(Clone, Debug, PartialEq)]
pub struct LevelRow {
    /// Which of the header's sources.
    pub source: usize,
    /// Whose level.
    pub species: Species,
    /// Counts from 0 inside source and species.
    pub number: u32,
    /// Line of the source's own table.
    pub row: u64,
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub energy_uncertainty_per_cm: f64,
    /// Configuration.
    pub configuration: Option<String>,
    /// Term.
    pub term: Option<String>,
    /// J.
    pub j: Option<HalfInteger>,
    /// Statistical weight.
    pub g: Option<f64>,
    /// A row of its table, not only named by a line.
    pub own_row: bool,
    /// Computed, not measured.
    pub computed: bool,
}

/// A line of a source, as kept.
#[derive(Clone, Debug, PartialEq)]
pub struct LineRow {
    /// Which of the header's sources.
    pub source: usize,
    /// Whose line.
    pub species: Species,
    /// Line of the source's own table.
    pub row: u64,
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: Option<f64>,
    /// 1 σ, cm⁻¹.
    pub wavenumber_uncertainty_per_cm: Option<f64>,
    /// The source computed the position from its levels.
    pub from_levels: bool,
    /// Number of the lower level.
    pub lower: Option<u32>,
    /// Number of the upper level.
    pub upper: Option<u32>,
    /// J of a lower level that is not given.
    pub lower_j: Option<HalfInteger>,
    /// J of an upper level that is not given.
    pub upper_j: Option<HalfInteger>,
    /// Rate of spontaneous emission, s⁻¹.
    pub rate_per_s: Option<f64>,
    /// 1 σ of the rate, relative.
    pub rate_relative_uncertainty: Option<f64>,
    /// Where the rate comes from.
    pub rate_origin: Option<RateOrigin>,
    /// The source's own intensity.
    pub intensity: Option<f64>,
    /// What the row stands for.
    pub kind: LineKind,
    /// Computed, not measured.
    pub computed: bool,
}

/// A report.
#[derive(Clone, Debug, PartialEq)]
pub enum ReportRow {
    /// A level.
    Level(LevelRow),
    /// A line.
    Line(LineRow),
}

/// What is wrong with a cell: its column, and what was expected.
type Fault = (&'static str, String);

/// Where each column of [`REPORTS`] stands in the file.
struct Places {
    file: Arc<str>,
    index: Vec<usize>,
}

/// One row with the columns by name.
struct Cells<'a> {
    row: &'a Row,
    places: &'a Places,
    header: &'a Header,
}

/// Reads all reports of a file; the number of rows.
///
/// `accept` gets the rows in order; where it says why a row cannot be used, as the column and a
/// clause, the import ends there.
///
/// # Errors
/// A file of conclusions, missing columns, the first row that cannot be used, or what `accept`
/// reports.
pub fn read(
    rows: &mut dyn RowReader,
    file: &str,
    header: &Header,
    accept: &mut dyn FnMut(ReportRow) -> Result<(), Rejected>,
) -> Result<u64, ImportError> {
    let fail = |message: String| ImportError::Read {
        file: file.to_owned(),
        line: 1,
        problem: crate::row::RowProblem::Format(message),
    };
    header.check_reports().map_err(|e| fail(e.to_string()))?;
    let places = Places::find(rows, file).map_err(fail)?;
    let mut row = Row::default();
    let mut count = 0;
    loop {
        match rows.read_row(&mut row) {
            Ok(true) => {}
            Ok(false) => return Ok(count),
            Err(error) => {
                return Err(ImportError::Read {
                    file: file.to_owned(),
                    line: error.line,
                    problem: error.problem,
                });
            }
        }
        count += 1;
        let cells = Cells {
            row: &row,
            places: &places,
            header,
        };
        let report = cells.report().map_err(|fault| cells.refusal(fault))?;
        match accept(report) {
            Ok(()) => {}
            Err(Rejected::Row(column, reason)) => return Err(cells.refusal((column, reason))),
            Err(Rejected::Sink(error)) => return Err(ImportError::Sink(error)),
        }
    }
}

/// Why a report was not taken.
#[derive(Debug)]
pub enum Rejected {
    /// It cannot be used: the column at fault, and what was expected.
    Row(&'static str, String),
    /// The receiver failed.
    Sink(SinkError),
}

impl Places {
    fn find(rows: &dyn RowReader, file: &str) -> Result<Self, String> {
        let index = REPORTS.iter().map(|column| {
            let mut found = rows
                .columns()
                .iter()
                .enumerate()
                .filter(|(_, c)| c.name == column.name);
            match (found.next(), found.next()) {
                (Some((index, _)), None) => Ok(index),
                (None, _) => Err(format!("the table has no column `{}`", column.name)),
                (Some(_), Some(_)) => Err(format!("the table has two columns `{}`", column.name)),
            }
        });
        Ok(Self {
            file: Arc::from(file),
            index: index.collect::<Result<_, _>>()?,
        })
    }
}

impl Cells<'_> {
    fn text(&self, name: &'static str) -> &str {
        let at = REPORTS.iter().position(|column| column.name == name);
        let index = at.and_then(|at| self.places.index.get(at));
        index.map_or("", |index| self.row.cell(*index).trim())
    }

    fn refusal(&self, (column, reason): Fault) -> ImportError {
        ImportError::BadRow(Refusal {
            file: Arc::clone(&self.places.file),
            line: self.row.line(),
            column: Some(column.to_owned()),
            text: shown(self.text(column)),
            reason,
        })
    }

    fn report(&self) -> Result<ReportRow, Fault> {
        match self.text("record") {
            "level" => self.level().map(ReportRow::Level),
            "line" => self.line().map(ReportRow::Line),
            _ => Err(("record", "expected level or line".to_owned())),
        }
    }

    fn level(&self) -> Result<LevelRow, Fault> {
        let energy = self.needed("energy_per_cm")?;
        if energy < 0.0 {
            return Err(("energy_per_cm", "expected zero or more".to_owned()));
        }
        Ok(LevelRow {
            source: self.source()?,
            species: self.species()?,
            number: self.needed_whole("number")?,
            row: self.needed_whole("row")?,
            energy_per_cm: energy,
            energy_uncertainty_per_cm: self.not_negative("energy_uncertainty_per_cm")?.ok_or((
                "energy_uncertainty_per_cm",
                "expected a number, found nothing".to_owned(),
            ))?,
            configuration: self.label("configuration")?,
            term: self.label("term")?,
            j: self.momentum("j")?,
            g: self.positive("g")?,
            own_row: self.truth("own_row")?,
            computed: self.truth("computed")?,
        })
    }

    fn line(&self) -> Result<LineRow, Fault> {
        let wavenumber = self.positive("wavenumber_per_cm")?;
        let (lower, upper) = (self.whole("lower")?, self.whole("upper")?);
        if wavenumber.is_none() && (lower.is_none() || upper.is_none()) {
            let message = "expected a position, or both levels";
            return Err(("wavenumber_per_cm", message.to_owned()));
        }
        Ok(LineRow {
            source: self.source()?,
            species: self.species()?,
            row: self.needed_whole("row")?,
            wavenumber_per_cm: wavenumber,
            wavenumber_uncertainty_per_cm: self.not_negative("wavenumber_uncertainty_per_cm")?,
            from_levels: self.truth("from_levels")?,
            lower,
            upper,
            lower_j: self.momentum("lower_j")?,
            upper_j: self.momentum("upper_j")?,
            rate_per_s: self.positive("rate_per_s")?,
            rate_relative_uncertainty: self.not_negative("rate_relative_uncertainty")?,
            rate_origin: self.rate_origin()?,
            intensity: self.not_negative("intensity")?,
            kind: self.kind()?,
            computed: self.truth("computed")?,
        })
    }

    fn source(&self) -> Result<usize, Fault> {
        let key = self.text("source");
        let found = self.header.sources.iter().position(|s| s.key == key);
        found.ok_or((
            "source",
            "expected a source of the file's own list".to_owned(),
        ))
    }

    fn species(&self) -> Result<Species, Fault> {
        let text = self.text("species");
        text.parse::<Species>()
            .map_err(|problem| ("species", shown(&problem.to_string())))
    }

    fn number(&self, name: &'static str) -> Result<Option<f64>, Fault> {
        match self.text(name) {
            "" => Ok(None),
            text => number::parse(text)
                .map(|printed| Some(printed.value))
                .map_err(|problem| (name, problem.to_string())),
        }
    }

    fn needed(&self, name: &'static str) -> Result<f64, Fault> {
        let missing = || (name, "expected a number, found nothing".to_owned());
        self.number(name)?.ok_or_else(missing)
    }

    fn positive(&self, name: &'static str) -> Result<Option<f64>, Fault> {
        match self.number(name)? {
            Some(value) if value <= 0.0 => Err((name, "expected a value above zero".to_owned())),
            other => Ok(other),
        }
    }

    fn not_negative(&self, name: &'static str) -> Result<Option<f64>, Fault> {
        match self.number(name)? {
            Some(value) if value < 0.0 => Err((name, "expected zero or more".to_owned())),
            other => Ok(other),
        }
    }

    /// A whole number; programs between here and there may have written it as 3.0.
    fn whole<T: TryFrom<u64>>(&self, name: &'static str) -> Result<Option<T>, Fault> {
        let Some(value) = self.number(name)? else {
            return Ok(None);
        };
        let whole = (value >= 0.0 && value.fract() == 0.0 && value < 9e15).then_some(value as u64);
        whole
            .and_then(|value| T::try_from(value).ok())
            .map(Some)
            .ok_or((name, "expected a whole number, zero or more".to_owned()))
    }

    fn needed_whole<T: TryFrom<u64>>(&self, name: &'static str) -> Result<T, Fault> {
        let missing = || (name, "expected a whole number, found nothing".to_owned());
        self.whole(name)?.ok_or_else(missing)
    }

    fn momentum(&self, name: &'static str) -> Result<Option<HalfInteger>, Fault> {
        let expected = || {
            (
                name,
                "expected an angular momentum such as 2 or 2.5".to_owned(),
            )
        };
        match self.text(name) {
            "" => Ok(None),
            text => HalfInteger::parse(text).map(Some).ok_or_else(expected),
        }
    }

    fn label(&self, name: &'static str) -> Result<Option<String>, Fault> {
        match self.text(name) {
            "" => Ok(None),
            text if text.chars().any(char::is_control) => {
                Err((name, "the text holds control characters".to_owned()))
            }
            text => Ok(Some(text.to_owned())),
        }
    }

    fn truth(&self, name: &'static str) -> Result<bool, Fault> {
        match self.text(name) {
            "true" | "True" => Ok(true),
            "false" | "False" => Ok(false),
            _ => Err((name, "expected true or false".to_owned())),
        }
    }

    fn kind(&self) -> Result<LineKind, Fault> {
        match self.text("kind") {
            "line" => Ok(LineKind::Line),
            "mean" => Ok(LineKind::Mean),
            "blend" => Ok(LineKind::Blend),
            "isotope" => Ok(LineKind::Isotope),
            _ => Err(("kind", "expected line, mean, blend or isotope".to_owned())),
        }
    }

    fn rate_origin(&self) -> Result<Option<RateOrigin>, Fault> {
        match self.text("rate_origin") {
            "" => Ok(None),
            "published" => Ok(Some(RateOrigin::Published)),
            "derived" => Ok(Some(RateOrigin::Derived)),
            "computed" => Ok(Some(RateOrigin::Computed)),
            _ => Err((
                "rate_origin",
                "expected published, derived or computed".to_owned(),
            )),
        }
    }
}
