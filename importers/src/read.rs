//! Reading a described source: each table row by row into one stream of records.

use std::io::{self, Read};
use std::sync::Arc;

use crate::ecsv::EcsvReader;
use crate::error::ImportError;
use crate::fits::FitsReader;
use crate::infer::infer;
use crate::input;
use crate::jsonl::JsonlReader;
use crate::limits::Limits;
use crate::mapping::{Fault, Plan};
use crate::mrt::{self, MrtReader};
use crate::parquet::ParquetReader;
use crate::row::{ColumnInfo, Row, RowError, RowReader};
use crate::sink::{ReadReport, Refusal, Sink, shown};
use crate::source::{Counting, Format, Ignore, SourceDescription, TableDescription};
use crate::table;
use crate::unpack;
use crate::votable::VotableReader;
use crate::xsams::XsamsReader;

/// How strictly and how far to read.
#[derive(Clone, Debug, Default)]
pub struct ReadOptions {
    /// Bad rows that are listed instead of ending the import.
    pub skip_bad: usize,
    /// Limits on what a file may ask for.
    pub limits: Limits,
}

/// Opens a table file by the name that the description gives.
pub type Opener<'a> = dyn FnMut(&str) -> io::Result<Box<dyn Read>> + 'a;

/// Reads all tables of a source, in the order of the description.
///
/// Memory does not grow with the size of the files. Records reach `sink` before later rows are
/// seen, so the sink must be able to give up what it took.
///
/// # Errors
/// A file that cannot be opened or read, a description that does not fit, the first bad row (or
/// the one beyond `skip_bad`), or what the sink reports.
pub fn read_source(
    description: &SourceDescription,
    open: &mut Opener<'_>,
    options: &ReadOptions,
    sink: &mut dyn Sink,
) -> Result<ReadReport, ImportError> {
    let mut report = ReadReport::default();
    for table in &description.table {
        let input = open(&table.file).map_err(|error| ImportError::Open {
            file: table.file.clone(),
            error,
        })?;
        let readme = match &table.readme {
            None => None,
            Some(name) => Some(open(name).map_err(|error| ImportError::Open {
                file: name.clone(),
                error,
            })?),
        };
        let mut rows = open_table(table, input, readme, &options.limits)?;
        let told = told(table, rows.columns(), &mut report);
        let table = told.as_ref().unwrap_or(table);
        read_table(
            description,
            table,
            rows.as_mut(),
            options,
            sink,
            &mut report,
        )?;
        report.warnings.extend(rows.warnings());
    }
    Ok(report)
}

/// The description with the columns that a self-describing file tells itself.
fn told(
    table: &TableDescription,
    columns: &[ColumnInfo],
    report: &mut ReadReport,
) -> Option<TableDescription> {
    let alone = matches!(table.format, Format::Delimited | Format::Fixed);
    if alone || !table.columns.is_empty() {
        return None;
    }
    let inferred = infer(columns);
    for name in &inferred.unrecognised {
        let warning = format!(
            "{}: column `{}` is not recognised and left out",
            table.file,
            shown(name)
        );
        report.warnings.push(warning);
    }
    let mut told = table.clone();
    told.records = inferred.records();
    told.columns = inferred.columns;
    told.ignore = Ignore::Word("rest".to_owned());
    Some(told)
}

/// The rows of a file of a format that describes itself, for [`crate::handover::read`].
///
/// # Errors
/// A file that is not of the format.
pub fn open_file(
    file: &str,
    format: Format,
    input: Box<dyn Read>,
    limits: &Limits,
) -> Result<Box<dyn RowReader>, ImportError> {
    open_table(
        &TableDescription::of_file(file, format),
        input,
        None,
        limits,
    )
}

/// The rows of a table file.
pub(crate) fn open_table(
    table: &TableDescription,
    input: Box<dyn Read>,
    readme: Option<Box<dyn Read>>,
    limits: &Limits,
) -> Result<Box<dyn RowReader>, ImportError> {
    let encoding =
        input::encoding(table.encoding.as_deref()).map_err(|label| ImportError::NoEncoding {
            file: table.file.clone(),
            label,
        })?;
    let input = unpack::unpack(input, limits).map_err(|error| ImportError::Open {
        file: table.file.clone(),
        error,
    })?;
    let input = table::decoded(input, encoding);
    let opened: Result<Box<dyn RowReader>, RowError> = match table.format {
        Format::Fixed => {
            let mut table = table.clone();
            // A decoded text counts in characters; so does a file of one byte per character.
            if encoding.is_some_and(encoding_rs::Encoding::is_single_byte) {
                table.counting = Counting::Characters;
            }
            Ok(table::open_fixed(input, &table, limits))
        }
        Format::Mrt => match readme {
            None => MrtReader::new(input, limits).map(|reader| Box::new(reader) as _),
            Some(readme) => mrt::read_readme(readme, &table.file, limits)
                .map(|columns| Box::new(MrtReader::with_description(input, columns, limits)) as _),
        },
        Format::Ecsv => EcsvReader::new(input, limits).map(|reader| Box::new(reader) as _),
        Format::Fits => FitsReader::new(input, table.table.as_deref(), limits)
            .map(|reader| Box::new(reader) as _),
        Format::Xsams => {
            XsamsReader::new(input, table.records, limits).map(|reader| Box::new(reader) as _)
        }
        Format::Votable => VotableReader::new(input, table.table.as_deref(), limits)
            .map(|reader| Box::new(reader) as _),
        Format::Jsonl => JsonlReader::new(input, limits).map(|reader| Box::new(reader) as _),
        Format::Parquet => ParquetReader::new(input, limits).map(|reader| Box::new(reader) as _),
        Format::Delimited => table::open_delimited(input, table, limits),
    };
    opened.map_err(|error| header_error(table, error))
}

fn header_error(table: &TableDescription, error: RowError) -> ImportError {
    ImportError::Read {
        file: table.file.clone(),
        line: error.line,
        problem: error.problem,
    }
}

/// Reads one table into the sink.
fn read_table(
    description: &SourceDescription,
    table: &TableDescription,
    rows: &mut dyn RowReader,
    options: &ReadOptions,
    sink: &mut dyn Sink,
    report: &mut ReadReport,
) -> Result<(), ImportError> {
    let mut plan =
        Plan::new(description, table, rows.columns()).map_err(|problem| ImportError::Mapping {
            file: table.file.clone(),
            problem,
        })?;
    let file: Arc<str> = Arc::from(table.file.as_str());
    let before = report.read;
    let mut row = Row::default();
    loop {
        let refusal = match rows.read_row(&mut row) {
            Ok(false) => break,
            Ok(true) => {
                report.read += 1;
                if let Some(reason) = plan.skip_reason(&row) {
                    report.count_skip(reason);
                    continue;
                }
                match plan.record(&row) {
                    Ok(record) => {
                        sink.accept(record).map_err(ImportError::Sink)?;
                        report.records += 1;
                        continue;
                    }
                    Err(fault) => cell_refusal(&file, row.line(), &fault),
                }
            }
            Err(error) if error.fatal => return Err(header_error(table, error)),
            Err(error) => {
                report.read += 1;
                row_refusal(&file, rows, error)
            }
        };
        refuse(report, refusal, options.skip_bad)?;
    }
    finish_table(table, &plan, report, report.read - before)
}

fn finish_table(
    table: &TableDescription,
    plan: &Plan,
    report: &mut ReadReport,
    found: u64,
) -> Result<(), ImportError> {
    let counts = plan.counts;
    for (count, what) in [
        (
            counts.weightless,
            "rows give an oscillator strength but no weight of the level, so no rate follows from them",
        ),
        (
            counts.beyond_air,
            "wavelengths in air lie where the index of air is not known; their lines stand at the difference of their levels",
        ),
        (
            counts.extrapolated,
            "wavelengths in air lie outside 300 to 1690 nm, where the index of air is extrapolated",
        ),
    ] {
        if count > 0 {
            report
                .warnings
                .push(format!("{}: {count} {what}", table.file));
        }
    }
    match table.rows {
        Some(stated) if stated != found => Err(ImportError::RowCount {
            file: table.file.clone(),
            found,
            stated,
        }),
        _ => Ok(()),
    }
}

fn refuse(report: &mut ReadReport, refusal: Refusal, allowed: usize) -> Result<(), ImportError> {
    if allowed == 0 {
        return Err(ImportError::BadRow(refusal));
    }
    report.refused.push(refusal);
    if report.refused.len() > allowed {
        return Err(ImportError::TooManyBadRows {
            allowed,
            refused: std::mem::take(&mut report.refused),
        });
    }
    Ok(())
}

fn cell_refusal(file: &Arc<str>, line: u64, fault: &Fault) -> Refusal {
    Refusal {
        file: Arc::clone(file),
        line,
        column: fault.column.as_deref().map(shown),
        text: shown(&fault.text),
        reason: shown_reason(&fault.problem.to_string()),
    }
}

fn row_refusal(file: &Arc<str>, rows: &dyn RowReader, error: RowError) -> Refusal {
    let column = error.cell.map(|cell| match rows.columns().get(cell) {
        Some(column) => shown(&column.name),
        None => format!("number {}", cell + 1),
    });
    Refusal {
        file: Arc::clone(file),
        line: error.line,
        column,
        text: shown(&error.text),
        reason: shown_reason(&error.problem.to_string()),
    }
}

/// A reason may quote the file: no control characters in it either.
fn shown_reason(reason: &str) -> String {
    reason
        .chars()
        .flat_map(|c| {
            let escape = c.is_control();
            let plain = (!escape).then_some(c);
            plain
                .into_iter()
                .chain(escape.then(|| c.escape_unicode()).into_iter().flatten())
        })
        .collect()
}
