//! Angular factors: 3j and 6j symbols, and the shares of line components that follow from them.
//!
//! The symbols are exact: Racah's sums (Edmonds 1957, *Angular Momentum in Quantum Mechanics*, equations
//! 3.6.10 and 6.3.7) are formed in whole numbers of any size and rounded once, so the result is the nearest
//! floating-point numbers to within two units of the last place however large the arguments.

use num_bigint::{BigInt, BigUint, Sign};
use vocabulary::atom::HalfInteger;

/// Whether three angular momenta close a triangle.
pub fn is_triangle(a: HalfInteger, b: HalfInteger, c: HalfInteger) -> bool {
    let (a, b, c) = (wide(a), wide(b), wide(c));
    (a + b + c) % 2 == 0 && c <= a + b && c >= (a - b).abs()
}

/// The 3j symbol (j1 j2 j3; m1 m2 m3); `twice_m` are twice the projections. 0 where the rules forbid it.
pub fn three_j(j: [HalfInteger; 3], twice_m: [i32; 3]) -> f64 {
    let m = twice_m.map(i64::from);
    let [j1, j2, j3] = j.map(wide);
    let projected = [j1, j2, j3]
        .iter()
        .zip(m)
        .all(|(j, m)| m.abs() <= *j && (j + m) % 2 == 0);
    if !projected || m.iter().sum::<i64>() != 0 || !is_triangle(j[0], j[1], j[2]) {
        return 0.0;
    }
    // Terms (−1)^k / [k! (a−k)! (b−k)! (c−k)! (k−d)! (k−e)!], all arguments whole.
    let a = (j1 + j2 - j3) / 2;
    let b = (j1 - m[0]) / 2;
    let c = (j2 + m[1]) / 2;
    let d = (j2 - j3 - m[0]) / 2;
    let e = (j1 - j3 + m[1]) / 2;
    let first = d.max(e).max(0);
    let last = a.min(b).min(c);
    let sum = alternating_sum(first, last, |k| {
        (
            (a - k) * (b - k) * (c - k),
            (k + 1) * (k + 1 - d) * (k + 1 - e),
        )
    });
    let mut square = triangle(j1, j2, j3);
    for (j, m) in [j1, j2, j3].iter().zip(m) {
        square.0 *= factorial((j + m) / 2) * factorial((j - m) / 2);
    }
    let lead = [first, a - first, b - first, c - first, first - d, first - e];
    let denominator: BigUint = lead.into_iter().map(factorial).product();
    let odd = first + (j1 - j2 - m[2]) / 2;
    rounded(square, (BigUint::from(1_u8), denominator), sum, odd)
}

/// The 6j symbol {j1 j2 j3; j4 j5 j6}. 0 where a triangle does not close.
pub fn six_j(j: [HalfInteger; 6]) -> f64 {
    let triads = [[0, 1, 2], [0, 4, 5], [3, 1, 5], [3, 4, 2]];
    if !triads
        .iter()
        .all(|t| is_triangle(j[t[0]], j[t[1]], j[t[2]]))
    {
        return 0.0;
    }
    let w = j.map(wide);
    let low = triads.map(|t| (w[t[0]] + w[t[1]] + w[t[2]]) / 2);
    let high = [
        (w[0] + w[1] + w[3] + w[4]) / 2,
        (w[1] + w[2] + w[4] + w[5]) / 2,
        (w[2] + w[0] + w[5] + w[3]) / 2,
    ];
    let first = low.into_iter().max().unwrap_or(0);
    let last = high.into_iter().min().unwrap_or(0);
    let sum = alternating_sum(first, last, |k| {
        let up = (k + 2) * high.iter().map(|h| h - k).product::<i64>();
        (up, low.iter().map(|l| k + 1 - l).product())
    });
    let mut square = (BigUint::from(1_u8), BigUint::from(1_u8));
    for t in triads {
        let part = triangle(w[t[0]], w[t[1]], w[t[2]]);
        square.0 *= part.0;
        square.1 *= part.1;
    }
    let below: BigUint = low.iter().map(|l| factorial(first - l)).product();
    let above: BigUint = high.iter().map(|h| factorial(h - first)).product();
    rounded(square, (factorial(first + 1), below * above), sum, first)
}

/// Share of one component in the line strength of an LS multiplet, S(J, J′)/S:
/// (2J+1)(2J′+1) {L J S; J′ L′ 1}² / (2S+1); the shares of a multiplet add up to 1.
pub fn multiplet_share(
    spin: HalfInteger,
    lower: (HalfInteger, HalfInteger),
    upper: (HalfInteger, HalfInteger),
) -> f64 {
    let ((l, j), (l_upper, j_upper)) = (lower, upper);
    let one = HalfInteger::from_twice(2);
    let symbol = six_j([l, j, spin, j_upper, l_upper, one]);
    j.weight() * j_upper.weight() * symbol * symbol / spin.weight()
}

/// Share of one hyperfine component F, F′ in the line strength of a line J, J′ of a nucleus of spin I:
/// (2F+1)(2F′+1) {J F I; F′ J′ 1}² / (2I+1); the shares of a line add up to 1.
pub fn hyperfine_share(
    nuclear_spin: HalfInteger,
    lower: (HalfInteger, HalfInteger),
    upper: (HalfInteger, HalfInteger),
) -> f64 {
    multiplet_share(nuclear_spin, lower, upper)
}

fn wide(j: HalfInteger) -> i64 {
    i64::from(j.twice())
}

fn factorial(n: i64) -> BigUint {
    (2..=n.max(0)).fold(BigUint::from(1_u8), |product, i| {
        product * BigUint::from(i.unsigned_abs())
    })
}

/// (a+b−c)! (a−b+c)! (−a+b+c)! over (a+b+c+1)!, arguments doubled.
fn triangle(a: i64, b: i64, c: i64) -> (BigUint, BigUint) {
    let above =
        factorial((a + b - c) / 2) * factorial((a - b + c) / 2) * factorial((b + c - a) / 2);
    (above, factorial((a + b + c) / 2 + 1))
}

/// Σ over k of (−1)^(k−first) t_k/t_first, where `ratio(k)` is t_(k+1)/t_k as (numerator, denominator).
fn alternating_sum(first: i64, last: i64, ratio: impl Fn(i64) -> (i64, i64)) -> (BigInt, BigUint) {
    let mut sum = (BigInt::from(1), BigUint::from(1_u8));
    for k in (first..last).rev() {
        let (up, down) = ratio(k);
        let down = BigUint::from(down.unsigned_abs());
        let whole = BigInt::from_biguint(Sign::Plus, sum.1 * down);
        let next = &whole - sum.0 * up;
        sum = (next, whole.magnitude().clone());
    }
    sum
}

/// (−1)^odd √square · factor · sum.
fn rounded(
    square: (BigUint, BigUint),
    factor: (BigUint, BigUint),
    sum: (BigInt, BigUint),
    odd: i64,
) -> f64 {
    let up = factor.0 * sum.0.magnitude();
    let down = factor.1 * sum.1;
    let size = quotient(square.0 * &up * &up, &(square.1 * &down * &down)).sqrt();
    let negative = (sum.0.sign() == Sign::Minus) != (odd.rem_euclid(2) == 1);
    if negative { -size } else { size }
}

/// A quotient of large whole numbers, rounded to a float; the results here lie between 0 and 1e3.
fn quotient(up: BigUint, down: &BigUint) -> f64 {
    let shift = (down.bits() + 70).saturating_sub(up.bits());
    let whole: BigUint = (up << shift) / down;
    let mut value = 0.0;
    for digit in whole.to_u64_digits().into_iter().rev() {
        value = value * 2.0_f64.powi(64) + digit as f64;
    }
    let half = i32::try_from(shift / 2).unwrap_or(i32::MAX);
    let rest = i32::try_from(shift - shift / 2).unwrap_or(i32::MAX);
    value * 2.0_f64.powi(-half) * 2.0_f64.powi(-rest)
}
