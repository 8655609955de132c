//! Reading the kept reference tables of `tests/reference`.
#![allow(dead_code, reason = "each test file uses what it needs")]

/// The data rows of a CSV of numbers with one header line.
pub fn rows(name: &str) -> Vec<Vec<f64>> {
    let path = format!("{}/tests/reference/{name}", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{path}: {e}"));
    text.lines()
        .skip(1)
        .map(|line| {
            line.split(',')
                .map(|cell| {
                    cell.parse()
                        .unwrap_or_else(|e| panic!("{path}: {cell}: {e}"))
                })
                .collect()
        })
        .collect()
}

/// |got − want| ≤ tolerance · |want| (absolute where `want` is 0); NaN fails.
#[track_caller]
pub fn assert_close(got: f64, want: f64, tolerance: f64, what: &str) {
    let scale = if want == 0.0 { 1.0 } else { want.abs() };
    let near = (got - want).abs() <= tolerance * scale;
    assert!(
        near,
        "{what}: got {got:e}, want {want:e} within {tolerance:e}"
    );
}
