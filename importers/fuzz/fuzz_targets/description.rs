//! Whatever the text is, a description is read or refused with a sentence.
#![no_main]

use importers::source::SourceDescription;
use libfuzzer_sys::fuzz_target;

fuzz_target!(|text: &str| {
    let _ = SourceDescription::parse(text, "source.toml");
});
