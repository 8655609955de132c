//! What the checks of the bundled paper tables share: reading a table of `data/`, its checksum and its manifest.
#![allow(dead_code)] // each test file uses its own part

pub mod morton;

use std::collections::HashMap;
use std::path::PathBuf;

use sha2::{Digest, Sha256};

/// One CSV row by column name.
pub type Row = HashMap<String, String>;

/// Path of a file of a bundled source.
pub fn path(key: &str, file: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("data")
        .join(key)
        .join(file)
}

/// The bytes of a file of a bundled source.
pub fn bytes(key: &str, file: &str) -> Vec<u8> {
    std::fs::read(path(key, file)).unwrap_or_else(|e| panic!("{key}/{file}: {e}"))
}

/// Lower-case hexadecimal SHA-256 of a file.
pub fn sha256(key: &str, file: &str) -> String {
    Sha256::digest(bytes(key, file))
        .iter()
        .map(|b| format!("{b:02x}"))
        .collect()
}

/// Latin-1 bytes as text: each byte is the code point of the same number.
pub fn latin1(data: &[u8]) -> String {
    data.iter().map(|&b| char::from(b)).collect()
}

/// All rows of a CSV file, each by column name.
pub fn rows(key: &str, file: &str) -> Vec<Row> {
    let mut reader = csv::Reader::from_path(path(key, file)).unwrap();
    let header = reader.headers().unwrap().clone();
    reader
        .records()
        .map(|r| {
            header
                .iter()
                .map(str::to_owned)
                .zip(r.unwrap().iter().map(str::to_owned))
                .collect()
        })
        .collect()
}

/// A cell as a number; panics with the row where it is none.
pub fn number(row: &Row, column: &str) -> f64 {
    row[column]
        .parse()
        .unwrap_or_else(|_| panic!("{column} of {row:?} is no number"))
}

/// A cell that may be empty.
pub fn optional(row: &Row, column: &str) -> Option<f64> {
    (!row[column].is_empty()).then(|| number(row, column))
}

/// The parsed manifest of a source.
pub fn manifest(key: &str) -> toml::Table {
    String::from_utf8(bytes(key, "source.toml"))
        .unwrap()
        .parse()
        .unwrap()
}

/// Checks every table of a manifest: checksum, number of rows, and that each column is mapped or ignored.
pub fn check_manifest(key: &str) {
    let manifest = manifest(key);
    assert_eq!(manifest["key"].as_str(), Some(key));
    for table in manifest["table"].as_array().unwrap() {
        let file = table["file"].as_str().unwrap();
        assert_eq!(
            table["sha256"].as_str().unwrap(),
            sha256(key, file),
            "checksum of {key}/{file}"
        );
        let rows = rows(key, file);
        assert_eq!(
            table["rows"].as_integer().unwrap(),
            rows.len() as i64,
            "rows of {key}/{file}"
        );
        let mapping = table["columns"].to_string();
        let ignored = table
            .get("ignore")
            .map(ToString::to_string)
            .unwrap_or_default();
        for column in rows[0].keys() {
            let quoted = format!("\"{column}\"");
            assert!(
                mapping.contains(&quoted) || ignored.contains(&quoted),
                "{key}/{file}: column {column} is unused"
            );
        }
    }
}

/// A ≥ b within a relative tolerance; NaN fails.
pub fn close(a: f64, b: f64, relative: f64) -> bool {
    (a - b).abs() <= relative * a.abs().max(b.abs())
}

/// A from f, s⁻¹: 0.667025·σ²·(g_l/g_u)·f with σ in cm⁻¹ (2π e²/(ε₀ m c); Hilborn 1982, Am. J. Phys. 50, 982, table I).
pub fn rate_from_f(wavenumber_per_cm: f64, lower_g: f64, upper_g: f64, f: f64) -> f64 {
    0.667_025 * wavenumber_per_cm.powi(2) * lower_g / upper_g * f
}
