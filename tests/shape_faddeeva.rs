//! w(z) against scipy 1.17 `wofz` (`tests/reference/shape/make_reference.py`; spot-checked there
//! with mpmath), and its known limits.
#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]

#[path = "reference/table.rs"]
mod table;

use lineclear::calc::shape::{faddeeva, voigt_function};
use table::{assert_close, rows};

/// The accuracy that the algorithm claims; wofz itself claims 1e-13.
const CLAIM: f64 = 2e-10;

#[test]
fn w_agrees_with_the_reference_library_over_the_used_domain() {
    let table = rows("shape/faddeeva.csv");
    assert_eq!(table.len(), 3120, "the whole net is compared");
    let mut worst = 0.0_f64;
    for row in &table {
        let [x, y, real, imaginary] = row[..] else {
            panic!("four columns")
        };
        let (got_real, got_imaginary) = faddeeva(x, y);
        // Below the smallest normal number there are no relative digits left.
        if real > 1e-300 {
            let error = (got_real / real - 1.0).abs();
            assert!(error <= CLAIM, "x {x:e} y {y:e}: {got_real:e} for {real:e}");
            worst = worst.max(error);
        }
        let size = real.hypot(imaginary);
        let error = (got_imaginary - imaginary).abs() / size;
        assert!(
            error <= CLAIM,
            "x {x:e} y {y:e}: imaginary {got_imaginary:e}"
        );
        assert_close(voigt_function(x, y), got_real, 0.0, "same function");
    }
    println!("worst relative error of the real part: {worst:e}");
}

#[test]
fn on_the_real_axis_it_is_the_gaussian() {
    for x in [0.0, 1e-9, 0.3, 0.7, 1.1, 3.0, 6.78, 6.79, 12.0, 26.0_f64] {
        assert_close(voigt_function(x, 0.0), (-x * x).exp(), 1e-9, "e^(-x²)");
    }
}

#[test]
fn it_is_even_in_x_and_odd_in_the_imaginary_part() {
    for (x, y) in [(0.2, 0.1), (2.0, 1e-6), (9.0, 3.0), (1e5, 0.5)] {
        let (right, left) = (faddeeva(x, y), faddeeva(-x, y));
        assert_eq!(right.0, left.0);
        assert_eq!(right.1, -left.1);
    }
}

#[test]
fn the_borders_between_methods_leave_no_step() {
    for y in [0.0, 1e-8, 1e-3, 0.5, 4.0] {
        for r2 in [46.0, 1.2e3, 2.0e5, 1.0e10_f64] {
            let x = (r2 - y * y).sqrt();
            let (below, above) = (
                voigt_function(x * (1.0 - 1e-12), y),
                voigt_function(x * (1.0 + 1e-12), y),
            );
            // A step of 1e-12 in x changes the function by at most 2 x² 1e-12 = 1e-10 of itself.
            if above > 0.0 {
                assert_close(below / above, 1.0, 3e-10, "no step");
            }
        }
    }
}

#[test]
fn nonsense_is_not_a_number() {
    for (x, y) in [(f64::NAN, 1.0), (1.0, f64::NAN), (1.0, -1.0)] {
        assert!(voigt_function(x, y).is_nan());
        assert!(faddeeva(x, y).0.is_nan());
    }
    assert_eq!(voigt_function(f64::INFINITY, 1.0), 0.0);
    assert_eq!(faddeeva(1e200, 1e-200).0, 0.0);
}
