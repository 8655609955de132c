//! Whatever the bytes and the ranges are, the reader ends with rows or a sentence.
#![no_main]

use importers::Limits;
use importers::fixed::{Counting, FixedReader};
use importers::row::{ColumnInfo, Row, RowReader};
use libfuzzer_sys::fuzz_target;

fuzz_target!(|input: (Vec<(u8, u8)>, bool, Vec<u8>)| {
    let (ranges, characters, bytes) = input;
    let columns = ranges.iter().enumerate().map(|(number, &(first, length))| {
        let first = usize::from(first) + 1;
        let info = ColumnInfo {
            name: format!("column {number}"),
            ..ColumnInfo::default()
        };
        (info, (first, first + usize::from(length)))
    });
    let counting = if characters {
        Counting::Characters
    } else {
        Counting::Bytes
    };
    let limits = Limits::default();
    let columns = columns.collect();
    let mut reader = FixedReader::new(&bytes[..], columns, counting, None, 0, &limits);
    let mut row = Row::default();
    while let Ok(true) = reader.read_row(&mut row) {}
});
