//! Cell by cell against what astropy reads from the same files (`tests/reference/formats/make.py`
//! says how and with which version): whole numbers, words and truth values exactly, floating-point
//! numbers to 2 ulp.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

use std::fs::File;
use std::io::Read;
use std::path::Path;

use importers::Limits;
use importers::ecsv::EcsvReader;
use importers::fits::FitsReader;
use importers::mrt::MrtReader;
use importers::row::{Row, RowError, RowReader};
use importers::votable::VotableReader;
use serde_json::Value;

fn folder() -> std::path::PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference/formats")
}

fn open(name: &str) -> Result<Box<dyn RowReader>, RowError> {
    let input: Box<dyn Read> = Box::new(File::open(folder().join("files").join(name)).unwrap());
    let limits = Limits::default();
    Ok(match name.rsplit_once('.').unwrap().1 {
        "ecsv" => Box::new(EcsvReader::new(input, &limits)?),
        "xml" => Box::new(VotableReader::new(input, None, &limits)?),
        "fits" => Box::new(FitsReader::new(input, None, &limits)?),
        _ => Box::new(MrtReader::new(input, &limits)?),
    })
}

/// Whether a cell says what astropy read; `None` where the kind is not compared (arrays).
fn agrees(cell: &str, kind: &str, expected: &Value) -> Option<bool> {
    let cell = cell.trim();
    if kind == "other" {
        return None;
    }
    if expected.is_null() {
        return Some(cell.is_empty());
    }
    if let (true, Some(infinite)) = (kind.starts_with('f'), expected.as_str()) {
        return Some(cell.parse::<f64>().ok() == infinite.parse().ok());
    }
    Some(match kind {
        "text" => Some(cell) == expected.as_str(),
        "int" => cell.parse().ok() == expected.as_i64(),
        // A bit is printed as a digit.
        "bool" => ["true", "1"].contains(&cell) == expected.as_bool().unwrap() && !cell.is_empty(),
        "f4" => cell.parse::<f32>().ok() == expected.as_f64().map(|value| value as f32),
        _ => {
            let found: f64 = cell.replace(['D', 'd'], "e").parse().unwrap_or(f64::NAN);
            let expected = expected.as_f64().unwrap();
            // astropy's quick reader of text misses the nearest number by up to 2 ulp far from 1.
            found == expected || (found / expected - 1.0).abs() <= 2.0 * f64::EPSILON
        }
    })
}

/// File, column and row where astropy leaves the null mask of a text out of account: the mask rules
/// over the value (VOTable 1.4, section 5.4), and make.py masked these cells.
const MASKED: [(&str, &str, [usize; 2]); 1] = [("written_binary2.xml", "words", [1, 4])];

#[test]
fn every_cell_is_what_astropy_reads() {
    let text = std::fs::read_to_string(folder().join("readings.json")).unwrap();
    let readings: Value = serde_json::from_str(&text).unwrap();
    let mut compared = 0;
    for (file, expected) in readings["files"].as_object().unwrap() {
        let mut reader = open(file).unwrap_or_else(|error| panic!("{file}: {error}"));
        let names: Vec<&str> = reader.columns().iter().map(|c| c.name.as_str()).collect();
        let wanted: Vec<&str> = expected["columns"]
            .as_array()
            .unwrap()
            .iter()
            .map(|c| c.as_str().unwrap())
            .collect();
        assert_eq!(names, wanted, "{file}");
        let kinds = expected["kinds"].as_array().unwrap();
        let mut row = Row::default();
        for (number, cells) in expected["rows"].as_array().unwrap().iter().enumerate() {
            let more = reader
                .read_row(&mut row)
                .unwrap_or_else(|error| panic!("{file}: {error}"));
            assert!(more, "{file}: row {number} is missing");
            for (index, value) in cells.as_array().unwrap().iter().enumerate() {
                let kind = kinds[index].as_str().unwrap();
                let masked = |(f, c, rows): &(&str, &str, [usize; 2])| {
                    f == file && *c == wanted[index] && rows.contains(&number)
                };
                if MASKED.iter().any(masked) {
                    assert_eq!(row.cell(index), "", "{file}: row {number}");
                    continue;
                }
                let Some(agrees) = agrees(row.cell(index), kind, value) else {
                    continue;
                };
                assert!(
                    agrees,
                    "{file}: row {number}, column {}: `{}` where astropy reads {value}",
                    wanted[index],
                    row.cell(index)
                );
                compared += 1;
            }
        }
        assert!(!reader.read_row(&mut row).unwrap(), "{file}: more rows");
    }
    // All that the 17 files hold, so that a loop which compares nothing cannot pass.
    assert_eq!(compared, 675);
}
