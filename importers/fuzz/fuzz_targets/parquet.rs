//! Whatever the bytes are, the reader ends with rows or a sentence.
#![no_main]

use importers::Limits;
use importers::row::{Row, RowReader};
use libfuzzer_sys::fuzz_target;

fuzz_target!(|bytes: &[u8]| {
    let Ok(mut reader) = importers::parquet::ParquetReader::new(bytes, &Limits::default()) else {
        return;
    };
    let mut row = Row::default();
    while let Ok(true) = reader.read_row(&mut row) {}
});
