//! Whatever stands in a file that claims to be an export, it is read or refused with a sentence.
#![no_main]

use importers::handover::{self, Header};
use importers::row::RowReader;
use importers::{Limits, ecsv::EcsvReader};
use libfuzzer_sys::fuzz_target;

fuzz_target!(|bytes: &[u8]| {
    let Ok(mut reader) = EcsvReader::new(bytes, &Limits::default()) else {
        return;
    };
    let Some(Ok(header)) = reader.about().map(Header::parse) else {
        return;
    };
    let _ = handover::read(&mut reader, "x", &header, &mut |_| Ok(()));
});
