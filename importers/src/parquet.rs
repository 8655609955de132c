//! Parquet files with flat columns: numbers, words, truths, each perhaps missing.
//!
//! The footer stands at the end, so that the file is first laid down aside (in memory while it is
//! small, else in a temporary file without a name); rows are then read in batches. The library that
//! decodes them panics on some damaged files, which is caught: the program must unwind.

use std::cell::Cell;
use std::fs::File;
use std::io::{Read, Seek, SeekFrom, Write};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::{Arc, Once};

use bytes::Bytes;
use parquet::basic::{ConvertedType, LogicalType, Type as Physical};
use parquet::column::reader::{ColumnReader, ColumnReaderImpl};
use parquet::data_type::DataType;
use parquet::errors::ParquetError;
use parquet::file::metadata::ParquetMetaData;
use parquet::file::reader::{FileReader, SerializedFileReader};
use parquet::schema::types::ColumnDescriptor;

use crate::limits::Limits;
use crate::number::{double_text, single_text};
use crate::row::{ColumnInfo, Row, RowError, RowProblem, RowReader, check_columns, check_length};

/// Files up to this are held in memory, bytes.
const IN_MEMORY: usize = 4 << 20;
/// Rows decoded at a time.
const BATCH: usize = 1024;

/// Reads rows, row group by row group.
pub struct ParquetReader {
    file: Arc<dyn FileReader>,
    columns: Vec<ColumnInfo>,
    about: Option<String>,
    group: usize,
    readers: Vec<ColumnReader>,
    /// Of each column the definition level at which a value is there; 0 where it always is.
    full: Vec<i16>,
    /// Cells of the batch, column by column.
    batch: Vec<Vec<Option<String>>>,
    rows_in_batch: usize,
    next_in_batch: usize,
    row: u64,
    limits: Limits,
}

impl ParquetReader {
    /// Reads the footer.
    ///
    /// # Errors
    /// A file that is no Parquet, or with columns that are no cells of a table.
    pub fn new<R: Read>(input: R, limits: &Limits) -> Result<Self, RowError> {
        let (file, length) = lay_down(input).map_err(fatal)?;
        let metadata = file.metadata();
        check_places(metadata, length).map_err(|message| fatal(RowProblem::Format(message)))?;
        let descriptors = metadata.file_metadata().schema_descr().columns();
        check_columns(descriptors.len(), limits).map_err(fatal)?;
        for descriptor in descriptors {
            check_type(descriptor).map_err(|message| fatal(RowProblem::Format(message)))?;
        }
        let columns = descriptors
            .iter()
            .map(|descriptor| ColumnInfo::with_unit_in_name(descriptor.path().parts().join("_")))
            .collect();
        let about = metadata
            .file_metadata()
            .key_value_metadata()
            .and_then(|all| all.iter().find(|kv| kv.key == crate::handover::NAME))
            .and_then(|kv| kv.value.clone());
        Ok(Self {
            columns,
            about,
            full: descriptors.iter().map(|d| d.max_def_level()).collect(),
            file: Arc::clone(&file),
            group: 0,
            readers: Vec::new(),
            batch: Vec::new(),
            rows_in_batch: 0,
            next_in_batch: 0,
            row: 0,
            limits: limits.clone(),
        })
    }

    fn fail(&self, problem: RowProblem) -> RowError {
        RowError::fatal(self.row + 1, problem)
    }

    /// Decodes the next rows; false at the end of the file.
    fn next_batch(&mut self) -> Result<bool, RowError> {
        loop {
            if self.readers.is_empty() && !self.open_group()? {
                return Ok(false);
            }
            let mut batch = Vec::with_capacity(self.readers.len());
            for (reader, full) in self.readers.iter_mut().zip(&self.full) {
                batch.push(read_column(reader, *full));
            }
            let batch = batch
                .into_iter()
                .collect::<Result<Vec<_>, _>>()
                .map_err(|problem| self.fail(problem))?;
            let rows = batch.first().map_or(0, Vec::len);
            if batch.iter().any(|column| column.len() != rows) {
                let message = "the columns of a row group are not of one length";
                return Err(self.fail(RowProblem::Format(message.to_owned())));
            }
            if rows == 0 {
                self.readers.clear();
                continue;
            }
            self.batch = batch;
            self.rows_in_batch = rows;
            self.next_in_batch = 0;
            return Ok(true);
        }
    }

    fn open_group(&mut self) -> Result<bool, RowError> {
        if self.group >= self.file.num_row_groups() || self.columns.is_empty() {
            return Ok(false);
        }
        let opened = guarded(|| {
            let group = self.file.get_row_group(self.group)?;
            (0..self.columns.len())
                .map(|index| group.get_column_reader(index))
                .collect::<Result<Vec<_>, _>>()
        });
        self.readers = opened.map_err(|problem| self.fail(problem))?;
        self.group += 1;
        Ok(true)
    }
}

impl RowReader for ParquetReader {
    fn columns(&self) -> &[ColumnInfo] {
        &self.columns
    }

    fn about(&self) -> Option<&str> {
        self.about.as_deref()
    }

    fn read_row(&mut self, row: &mut Row) -> Result<bool, RowError> {
        if self.next_in_batch == self.rows_in_batch && !self.next_batch()? {
            return Ok(false);
        }
        self.row += 1;
        row.start(self.row);
        for (index, column) in self.batch.iter().enumerate() {
            let cell = column[self.next_in_batch].as_deref().unwrap_or("");
            check_length("cell", cell.len(), self.limits.cell_bytes)
                .map_err(|problem| RowError::row(self.row, Some(index), "", problem))?;
            row.push(cell);
        }
        self.next_in_batch += 1;
        Ok(true)
    }
}

fn fatal(problem: RowProblem) -> RowError {
    RowError::fatal(1, problem)
}

thread_local! {
    /// The library is at work on this thread: what it panics about is told as an error.
    static GUARDED: Cell<bool> = const { Cell::new(false) };
}

/// Runs the library, which panics on some damaged files, and makes an error of that. Nothing that it
/// was given is used afterwards: every such error is the end of the file.
fn guarded<T>(work: impl FnOnce() -> Result<T, ParquetError>) -> Result<T, RowProblem> {
    static QUIET: Once = Once::new();
    QUIET.call_once(|| {
        let told = std::panic::take_hook();
        std::panic::set_hook(Box::new(move |info| {
            if !GUARDED.get() {
                told(info);
            }
        }));
    });
    GUARDED.set(true);
    let done = catch_unwind(AssertUnwindSafe(work));
    GUARDED.set(false);
    match done {
        Ok(result) => result.map_err(|error| broken(&error)),
        Err(_) => {
            let message = "the file is no sound Parquet: its pages contradict its footer";
            Err(RowProblem::Format(message.to_owned()))
        }
    }
}

fn broken(error: &ParquetError) -> RowProblem {
    RowProblem::Format(format!("the file is no sound Parquet: {error}"))
}

/// The file where it can be read from any place.
fn lay_down<R: Read>(mut input: R) -> Result<(Arc<dyn FileReader>, u64), RowProblem> {
    let mut head = Vec::new();
    input
        .by_ref()
        .take(IN_MEMORY as u64 + 1)
        .read_to_end(&mut head)?;
    let mut length = head.len() as u64;
    if head.len() <= IN_MEMORY {
        let reader = guarded(|| SerializedFileReader::new(Bytes::from(head)))?;
        return Ok((Arc::new(reader), length));
    }
    let mut aside: File = tempfile::tempfile()?;
    aside.write_all(&head)?;
    length += std::io::copy(&mut input, &mut aside)?;
    aside.seek(SeekFrom::Start(0))?;
    let reader = guarded(|| SerializedFileReader::new(aside))?;
    Ok((Arc::new(reader), length))
}

/// The footer says where each column stands: inside the file, or nothing of it is read.
fn check_places(metadata: &ParquetMetaData, length: u64) -> Result<(), String> {
    let columns = metadata.file_metadata().schema_descr().num_columns();
    for group in metadata.row_groups() {
        if group.num_columns() != columns || group.num_rows() < 0 {
            return Err("the file is no sound Parquet: a row group is not of its table".into());
        }
        for column in group.columns() {
            let first = column.data_page_offset();
            let from = column
                .dictionary_page_offset()
                .map_or(first, |at| at.min(first));
            let size = column.compressed_size();
            let end = u64::try_from(from)
                .ok()
                .zip(u64::try_from(size).ok())
                .and_then(|(from, size)| from.checked_add(size));
            let sound = end.is_some_and(|end| end <= length)
                && column.num_values() >= 0
                && column.uncompressed_size() >= 0
                && column.dictionary_page_offset().is_none_or(|at| at >= 0);
            if !sound {
                let name = crate::sink::shown(&column.column_path().string());
                return Err(format!(
                    "the file is no sound Parquet: column `{name}` does not stand inside it"
                ));
            }
        }
    }
    Ok(())
}

/// Lists, and types that are neither number, word nor truth, are no cells.
fn check_type(column: &ColumnDescriptor) -> Result<(), String> {
    let name = crate::sink::shown(&column.path().string());
    if column.max_rep_level() > 0 {
        return Err(format!("column `{name}` holds lists, which are no cells"));
    }
    let decimal = column.converted_type() == ConvertedType::DECIMAL
        || matches!(column.logical_type_ref(), Some(LogicalType::Decimal { .. }));
    let plain = !matches!(
        column.physical_type(),
        Physical::INT96 | Physical::FIXED_LEN_BYTE_ARRAY
    );
    if plain && !decimal {
        return Ok(());
    }
    Err(format!(
        "column `{name}` is neither number, word nor truth; write it as one of these"
    ))
}

/// Up to [`BATCH`] cells of a column; fewer only at the end of the row group.
fn read_column(reader: &mut ColumnReader, full: i16) -> Result<Vec<Option<String>>, RowProblem> {
    match reader {
        ColumnReader::BoolColumnReader(r) => typed(r, full, |v| Some(Ok(v.to_string()))),
        ColumnReader::Int32ColumnReader(r) => typed(r, full, |v| Some(Ok(v.to_string()))),
        ColumnReader::Int64ColumnReader(r) => typed(r, full, |v| Some(Ok(v.to_string()))),
        ColumnReader::FloatColumnReader(r) => {
            typed(r, full, |v| number(v.is_nan(), single_text(*v)))
        }
        ColumnReader::DoubleColumnReader(r) => {
            typed(r, full, |v| number(v.is_nan(), double_text(*v)))
        }
        ColumnReader::ByteArrayColumnReader(r) => typed(r, full, |v| {
            let text = std::str::from_utf8(v.data()).map(str::to_owned);
            Some(text.map_err(|_| RowProblem::Encoding { encoding: "UTF-8" }))
        }),
        ColumnReader::Int96ColumnReader(_) | ColumnReader::FixedLenByteArrayColumnReader(_) => Err(
            RowProblem::Format("a column of this type is not read".to_owned()),
        ),
    }
}

/// A float that is no number is no value.
fn number(nan: bool, text: String) -> Option<Result<String, RowProblem>> {
    (!nan).then_some(Ok(text))
}

fn typed<T: DataType>(
    reader: &mut ColumnReaderImpl<T>,
    full: i16,
    text: impl Fn(&T::T) -> Option<Result<String, RowProblem>>,
) -> Result<Vec<Option<String>>, RowProblem> {
    let (mut levels, mut values) = (Vec::new(), Vec::new());
    let mut records = 0;
    while records < BATCH {
        let (read, _, _) =
            guarded(|| reader.read_records(BATCH - records, Some(&mut levels), None, &mut values))?;
        if read == 0 {
            break;
        }
        records += read;
    }
    let mut values = values.iter();
    let cells = (0..records).map(|index| {
        let present = full == 0 || levels.get(index).is_some_and(|level| *level == full);
        let value = if present { values.next() } else { None };
        value.and_then(&text).transpose()
    });
    cells.collect()
}
