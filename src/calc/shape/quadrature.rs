//! Adaptive Gauss–Legendre quadrature.

/// Positive nodes of the ten-point rule on (−1, 1), Abramowitz & Stegun 1964, table 25.4.
const NODES: [f64; 5] = [
    0.14887433898163122,
    0.4333953941292472,
    0.6794095682990244,
    0.8650633666889845,
    0.9739065285171717,
];
const WEIGHTS: [f64; 5] = [
    0.29552422471475287,
    0.26926671930999635,
    0.21908636251598204,
    0.1494513491505806,
    0.06667134430868814,
];
/// Halvings of one interval before the best value so far is taken.
const DEEPEST: u32 = 24;

/// ∫ f from `from` to `to`, to `tolerance` (absolute), for f smooth inside.
pub(crate) fn integrate(f: &impl Fn(f64) -> f64, from: f64, to: f64, tolerance: f64) -> f64 {
    refine(f, (from, to), panel(f, from, to), tolerance, DEEPEST)
}

fn refine(
    f: &impl Fn(f64) -> f64,
    (from, to): (f64, f64),
    whole: f64,
    tolerance: f64,
    depth: u32,
) -> f64 {
    let middle = f64::midpoint(from, to);
    let (left, right) = (panel(f, from, middle), panel(f, middle, to));
    // The halves are better than the whole by about 2^20; asking the whole to agree is ample.
    if depth == 0 || (left + right - whole).abs() <= tolerance {
        return left + right;
    }
    refine(f, (from, middle), left, tolerance / 2.0, depth - 1)
        + refine(f, (middle, to), right, tolerance / 2.0, depth - 1)
}

fn panel(f: &impl Fn(f64) -> f64, from: f64, to: f64) -> f64 {
    let (centre, half) = (f64::midpoint(from, to), (to - from) / 2.0);
    half * NODES
        .iter()
        .zip(WEIGHTS)
        .map(|(node, weight)| weight * (f(centre - half * node) + f(centre + half * node)))
        .sum::<f64>()
}
