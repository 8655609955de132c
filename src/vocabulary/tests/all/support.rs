//! Reading of kept files.

use std::path::PathBuf;

/// A path below the top of the repository.
pub fn path(below_top: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("../..")
        .join(below_top)
}

/// All rows of a kept CSV file, without its header.
pub fn rows(below_top: &str) -> Vec<Vec<String>> {
    let mut reader = csv::Reader::from_path(path(below_top)).unwrap();
    let rows: Result<Vec<_>, _> = reader
        .records()
        .map(|row| row.map(|row| row.iter().map(str::to_owned).collect()))
        .collect();
    rows.unwrap()
}

/// A field as a number.
pub fn number(field: &str) -> f64 {
    field.parse().unwrap_or_else(|e| panic!("{field}: {e}"))
}

/// Fails unless two numbers agree to a fraction; NaN fails.
#[track_caller]
pub fn assert_relative(found: f64, expected: f64, fraction: f64, what: &str) {
    let gap = (found - expected).abs();
    assert!(
        gap <= fraction * expected.abs(),
        "{what}: {found} against {expected}, off by {:e}",
        gap / expected.abs()
    );
}
