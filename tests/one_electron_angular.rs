//! 3j and 6j symbols against sympy, and the shares that follow from them.

#![allow(clippy::unwrap_used, reason = "in a test a panic is the report")]

use lineclear::calc::angular::{hyperfine_share, multiplet_share, six_j, three_j};
use vocabulary::atom::HalfInteger;

fn half(twice: i64) -> HalfInteger {
    HalfInteger::from_twice(u16::try_from(twice).unwrap())
}

fn rows(table: &str) -> Vec<(Vec<i64>, f64)> {
    table
        .lines()
        .skip(1)
        .map(|row| {
            let (numbers, value) = row.rsplit_once(',').unwrap();
            let numbers = numbers.split(',').map(|n| n.parse().unwrap()).collect();
            (numbers, value.parse().unwrap())
        })
        .collect()
}

/// Ours and sympy's are both exact up to the last rounding: a few 1e-16.
fn assert_same(ours: f64, reference: f64, what: &[i64]) {
    let error = (ours - reference).abs();
    assert!(
        error <= 1e-15 * reference.abs(),
        "{what:?}: {ours} {reference}"
    );
}

#[test]
fn three_j_symbols_match_sympy() {
    let table = rows(include_str!("reference/one_electron/three_j.csv"));
    assert_eq!(table.len(), 83);
    for (n, reference) in table {
        let m = [n[3], n[4], n[5]].map(|m| i32::try_from(m).unwrap());
        let ours = three_j([half(n[0]), half(n[1]), half(n[2])], m);
        assert_same(ours, reference, &n);
    }
}

#[test]
fn six_j_symbols_match_sympy() {
    let table = rows(include_str!("reference/one_electron/six_j.csv"));
    assert_eq!(table.len(), 75);
    for (n, reference) in table {
        let ours = six_j([0, 1, 2, 3, 4, 5].map(|i| half(n[i])));
        assert_same(ours, reference, &n);
    }
}

#[test]
fn symbols_vanish_where_the_rules_forbid_them() {
    assert_eq!(three_j([half(2), half(2), half(6)], [0, 0, 0]), 0.0);
    assert_eq!(three_j([half(2), half(2), half(2)], [2, 2, 2]), 0.0);
    assert_eq!(three_j([half(2), half(2), half(2)], [1, -1, 0]), 0.0);
    assert_eq!(three_j([half(2), half(2), half(2)], [0, 0, 0]), 0.0);
    assert_eq!(
        six_j([half(2), half(2), half(6), half(2), half(2), half(2)]),
        0.0
    );
}

/// Orthogonality of the 3j symbols: Σ (3j)² over all projections = 1 (Edmonds 1957, 3.7.8), at large j too.
#[test]
fn three_j_symbols_are_normalised() {
    for (a, b, c) in [(1, 2, 3), (6, 8, 4), (40, 31, 27), (120, 60, 100)] {
        let mut sum = 0.0;
        for m1 in (-a..=a).step_by(2) {
            for m2 in (-b..=b).step_by(2) {
                let symbol = three_j(
                    [half(a.into()), half(b.into()), half(c.into())],
                    [m1, m2, -m1 - m2],
                );
                sum += symbol * symbol;
            }
        }
        assert!((sum - 1.0).abs() < 1e-12, "{a} {b} {c}: {sum}");
    }
}

/// Relative strengths inside a multiplet: ²P–²D 9 : 5 : 1, ³S–³P 5 : 3 : 1, ³P–³D 84 : 45 : 15 : 20 (J′ = 1–1) …
/// (White & Eliason 1933, Phys. Rev. 44, 753; Condon & Shortley 1935, table 1⁹).
#[test]
fn multiplet_shares_match_the_published_tables() {
    let p = half(2);
    let d = half(4);
    let doublet = |j: i64, k: i64| multiplet_share(half(1), (p, half(j)), (d, half(k)));
    assert!((doublet(3, 5) - 9.0 / 15.0).abs() < 1e-15);
    assert!((doublet(1, 3) - 5.0 / 15.0).abs() < 1e-15);
    assert!((doublet(3, 3) - 1.0 / 15.0).abs() < 1e-15);
    let triplet = |j: i64| multiplet_share(half(2), (half(0), half(2)), (p, half(j)));
    for (j, share) in [(4, 5.0), (2, 3.0), (0, 1.0)] {
        assert!((triplet(j) - share / 9.0).abs() < 1e-15, "J = {j}");
    }
}

/// Shares of a multiplet and of a hyperfine pattern add up to one, whatever the spins.
#[test]
fn shares_add_up_to_one() {
    for spin in 0..=9 {
        for (lower, upper) in [(0, 2), (2, 2), (2, 4), (1, 3), (5, 7), (9, 9)] {
            let mut sum = 0.0;
            for j in (i64::abs(lower - spin)..=lower + spin).step_by(2) {
                for k in (i64::abs(upper - spin)..=upper + spin).step_by(2) {
                    sum +=
                        hyperfine_share(half(spin), (half(lower), half(j)), (half(upper), half(k)));
                }
            }
            assert!((sum - 1.0).abs() < 1e-13, "{spin} {lower} {upper}: {sum}");
        }
    }
}

/// Sodium D2 (J = 1/2 → 3/2, I = 3/2), from F = 2: 1/20, 1/4 and 7/10 of its strength go to F′ = 1, 2, 3
/// (common practice). Relative to the lower F: share × (2I+1)(2J+1)/(2F+1) with J = 1/2.
#[test]
fn hyperfine_shares_of_the_sodium_line() {
    let share = |k: i64| hyperfine_share(half(3), (half(1), half(4)), (half(3), half(k)));
    let total: f64 = [2, 4, 6].iter().map(|k| share(*k)).sum();
    for (k, fraction) in [(2, 0.05), (4, 0.25), (6, 0.7)] {
        assert!((share(k) / total - fraction).abs() < 1e-14, "F′ = {k}/2");
    }
}
