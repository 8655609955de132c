//! Parquet files in a folder split by element (`element=Fe/part-0.parquet`), as query engines
//! expect it. Columns are flat and may be missing; units stand in the names and, with the
//! descriptions, in the metadata under `columns`.

use std::fs::File;
use std::io;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use importers::handover::{Cell, Column, Header, Kind, NAME};
use parquet::basic::{Compression, LogicalType, Repetition, Type as Physical};
use parquet::data_type::{BoolType, ByteArray, ByteArrayType, DataType, DoubleType, Int64Type};
use parquet::errors::ParquetError;
use parquet::file::metadata::KeyValue;
use parquet::file::properties::WriterProperties;
use parquet::file::writer::{SerializedFileWriter, SerializedRowGroupWriter};
use parquet::schema::types::Type;
use vocabulary::atom::{Species, element};

use super::RowWriter;
use crate::catalogue::Receiver;

/// Rows held before they are written.
const GROUP_ROWS: usize = 65_536;

pub(super) struct ParquetWriter {
    folder: PathBuf,
    about: Vec<KeyValue>,
    columns: &'static [Column],
    buffers: Vec<Buffer>,
    rows: usize,
    file: Option<(u8, SerializedFileWriter<File>)>,
}

/// The cells of a column: which are there, and those.
struct Buffer {
    there: Vec<i16>,
    values: Values,
}

enum Values {
    Text(Vec<ByteArray>),
    Number(Vec<f64>),
    Integer(Vec<i64>),
    Truth(Vec<bool>),
}

impl ParquetWriter {
    pub fn new(folder: &Path) -> Self {
        Self {
            folder: folder.to_owned(),
            about: Vec::new(),
            columns: &[],
            buffers: Vec::new(),
            rows: 0,
            file: None,
        }
    }

    fn open(&mut self, atomic_number: u8) -> io::Result<()> {
        self.close()?;
        let symbol = element(atomic_number).map_or("unknown", |e| e.symbol);
        let folder = self.folder.join(format!("element={symbol}"));
        std::fs::create_dir_all(&folder)?;
        let file = File::create_new(folder.join("part-0.parquet"))?;
        let properties = WriterProperties::builder()
            .set_compression(Compression::SNAPPY)
            .set_created_by(format!("lineclear {}", env!("CARGO_PKG_VERSION")))
            .set_key_value_metadata(Some(self.about.clone()))
            .build();
        let schema = schema(self.columns).map_err(other)?;
        let writer = SerializedFileWriter::new(file, Arc::new(schema), Arc::new(properties));
        self.file = Some((atomic_number, writer.map_err(other)?));
        Ok(())
    }

    fn close(&mut self) -> io::Result<()> {
        self.write_group()?;
        if let Some((_, writer)) = self.file.take() {
            let file = writer.into_inner().map_err(other)?;
            file.sync_all()?;
        }
        Ok(())
    }

    fn write_group(&mut self) -> io::Result<()> {
        let Some((_, writer)) = self.file.as_mut().filter(|_| self.rows > 0) else {
            return Ok(());
        };
        let mut group = writer.next_row_group().map_err(other)?;
        for buffer in &mut self.buffers {
            buffer.write(&mut group).map_err(other)?;
        }
        group.close().map_err(other)?;
        self.rows = 0;
        Ok(())
    }
}

impl Receiver for ParquetWriter {
    fn begin(&mut self, header: &Header) -> io::Result<()> {
        self.columns = header.content.columns();
        self.buffers = self.columns.iter().map(|c| Buffer::new(c.kind)).collect();
        let columns: Vec<serde_json::Value> = self
            .columns
            .iter()
            .map(|c| {
                serde_json::json!({
                    "name": c.name, "unit": c.unit.vounit(), "ucd": c.ucd,
                    "description": c.description,
                })
            })
            .collect();
        let columns = serde_json::Value::Array(columns).to_string();
        self.about = vec![
            KeyValue::new(NAME.to_owned(), header.to_json()),
            KeyValue::new("columns".to_owned(), columns),
        ];
        Ok(())
    }

    fn row(&mut self, species: Species, cells: &[Cell<'_>]) -> io::Result<()> {
        let open = self.file.as_ref().map(|(number, _)| *number);
        if open != Some(species.atomic_number) {
            self.open(species.atomic_number)?;
        }
        for (buffer, cell) in self.buffers.iter_mut().zip(cells) {
            buffer.push(*cell)?;
        }
        self.rows += 1;
        if self.rows == GROUP_ROWS {
            self.write_group()?;
        }
        Ok(())
    }
}

impl RowWriter for ParquetWriter {
    fn finish(&mut self) -> io::Result<()> {
        self.close()
    }
}

impl Buffer {
    fn new(kind: Kind) -> Self {
        Self {
            there: Vec::new(),
            values: match kind {
                Kind::Text => Values::Text(Vec::new()),
                Kind::Number => Values::Number(Vec::new()),
                Kind::Integer => Values::Integer(Vec::new()),
                Kind::Truth => Values::Truth(Vec::new()),
            },
        }
    }

    fn push(&mut self, cell: Cell<'_>) -> io::Result<()> {
        match (&mut self.values, cell) {
            (_, Cell::Missing) => {
                self.there.push(0);
                return Ok(());
            }
            (Values::Text(all), Cell::Text(text)) => all.push(text.into()),
            (Values::Number(all), Cell::Number(value)) => all.push(value),
            (Values::Integer(all), Cell::Integer(value)) => all.push(value),
            (Values::Truth(all), Cell::Truth(value)) => all.push(value),
            _ => return Err(io::Error::other("a cell is not of the kind of its column")),
        }
        self.there.push(1);
        Ok(())
    }

    /// Writes the cells as the next column and forgets them.
    fn write(
        &mut self,
        group: &mut SerializedRowGroupWriter<'_, File>,
    ) -> Result<(), ParquetError> {
        match &mut self.values {
            Values::Text(all) => write_column::<ByteArrayType>(group, all, &self.there)?,
            Values::Number(all) => write_column::<DoubleType>(group, all, &self.there)?,
            Values::Integer(all) => write_column::<Int64Type>(group, all, &self.there)?,
            Values::Truth(all) => write_column::<BoolType>(group, all, &self.there)?,
        }
        self.there.clear();
        Ok(())
    }
}

fn write_column<T: DataType>(
    group: &mut SerializedRowGroupWriter<'_, File>,
    values: &mut Vec<T::T>,
    there: &[i16],
) -> Result<(), ParquetError> {
    let missing = || ParquetError::General("a row group has fewer columns than the table".into());
    let mut column = group.next_column()?.ok_or_else(missing)?;
    column.typed::<T>().write_batch(values, Some(there), None)?;
    column.close()?;
    values.clear();
    Ok(())
}

fn schema(columns: &[Column]) -> Result<Type, ParquetError> {
    let fields = columns.iter().map(|column| {
        let (physical, logical) = match column.kind {
            Kind::Text => (Physical::BYTE_ARRAY, Some(LogicalType::String)),
            Kind::Number => (Physical::DOUBLE, None),
            Kind::Integer => (Physical::INT64, None),
            Kind::Truth => (Physical::BOOLEAN, None),
        };
        Type::primitive_type_builder(column.name, physical)
            .with_repetition(Repetition::OPTIONAL)
            .with_logical_type(logical)
            .build()
            .map(Arc::new)
    });
    let fields = fields.collect::<Result<Vec<_>, _>>()?;
    Type::group_type_builder("lineclear")
        .with_fields(fields)
        .build()
}

/// A failed write as such, whatever stood between.
fn other(error: ParquetError) -> io::Error {
    io::Error::other(error)
}
