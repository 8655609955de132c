//! Whatever the bytes are, splitting ends with rows or a sentence.
#![no_main]

use importers::Limits;
use importers::delimited::{Dialect, Splitter};
use importers::row::Row;
use libfuzzer_sys::fuzz_target;

fuzz_target!(|bytes: &[u8]| {
    let mut splitter = Splitter::new(bytes, Dialect::default(), Limits::default());
    let mut row = Row::default();
    loop {
        match splitter.read_row(&mut row) {
            Ok(true) => {}
            Ok(false) => break,
            Err(error) if error.fatal => break,
            Err(_) => {}
        }
    }
});
