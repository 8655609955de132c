//! The Faddeeva function w(z) = e^(−z²) erfc(−i z) of the upper half plane, whose real part is the
//! Voigt function.
//!
//! Near the origin: the trapezoidal rule for w(z) = (i/π) ∫ e^(−t²)/(z − t) dt with the residue of
//! the pole added, on whichever of two interleaved grids keeps its nodes away from z (M. Al Azah &
//! S. N. Chandler-Wilde 2021, SIAM J. Numer. Anal. 59, 2346; the idea is that of C. Chiarella & A.
//! Reichel 1968, Math. Comp. 22, 137). Far away: the n-point Gauss–Hermite rule of the same
//! integral, which is the n-th convergent of the Laplace continued fraction (W. Gautschi 1970, SIAM
//! J. Numer. Anal. 7, 187). All terms of the real part have one sign, so that it keeps its
//! *relative* accuracy down to y → 0, where w becomes the Gaussian e^(−x²).
//!
//! Relative error of the real part, and of |w|: below 2e-10 for all x and y ≥ 0
//! (`tests/shape_faddeeva.rs` compares with a reference library).

use std::f64::consts::{PI, TAU};

/// 1/√π.
const INVERSE_SQRT_PI: f64 = 0.564_189_583_547_756_3;
/// Step of the trapezoidal rule. Its error is about e^(−(π/h)²), that of ending it e^(−(N h)²).
const STEP: f64 = 0.56;
/// Node pairs ±t of each grid.
const PAIRS: usize = 10;
/// |z|² from which 10, 4, 2 and 1 Gauss–Hermite points leave less than 2e-10.
const FAR: [f64; 4] = [46.0, 1.2e3, 2.0e5, 1.0e10];
/// Beyond e^(−46) the residue is below 2e-10 of y/(46 √π), the least that the sum can be for y ≥
/// 1e-8.
const RESIDUE_SEEN: f64 = 46.0;

/// A quadrature grid of node pairs ±t: t² and the weight of both nodes together over π.
struct Grid<const N: usize> {
    t2: [f64; N],
    weight: [f64; N],
}

/// e^(−t²) · 2 h/π at t = (k + ½) h.
const HALF_NODES: Grid<PAIRS> = Grid {
    t2: squares(0.5),
    weight: [
        0.3296244837306174,
        0.17604754109842133,
        0.050217023283175066,
        0.0076503705030716825,
        0.0006224786667197341,
        2.7050604631857287e-05,
        6.278269909553832e-07,
        7.78239892987659e-09,
        5.152256749053264e-11,
        1.821763537131952e-13,
    ],
};
/// e^(−t²) · 2 h/π at t = (k + 1) h; the node at t = 0 is added apart.
const WHOLE_NODES: Grid<PAIRS> = Grid {
    t2: squares(1.0),
    weight: [
        0.260539395071198,
        0.10169255332932059,
        0.021199001434867602,
        0.0023602182142770677,
        0.000140345797228,
        4.4571491491254e-06,
        7.560063150595818e-08,
        6.848637513818221e-10,
        3.3135493146573324e-12,
        8.562354359791893e-15,
    ],
};
/// Ten-point Gauss–Hermite rule (Abramowitz & Stegun 1964, table 25.10), weights over π/2.
const HERMITE_10: Grid<5> = Grid {
    t2: [
        0.11758132021177814,
        1.074562012436904,
        3.08593744371755,
        6.41472973366203,
        11.807189489971737,
    ],
    weight: [
        0.38888723083644433,
        0.15287698792389032,
        0.021565109287338013,
        0.0008553914494585372,
        4.86405062508798e-06,
    ],
};
/// Four-point Gauss–Hermite rule: t² = (3 ∓ √6)/2, w = √π/(4 (3 ∓ √6)).
const HERMITE_4: Grid<2> = Grid {
    t2: [0.27525512860841095, 2.724744871391589],
    weight: [0.5124242247547685, 0.051765358792987826],
};
/// Two-point Gauss–Hermite rule: t² = ½, w = √π/2.
const HERMITE_2: Grid<1> = Grid {
    t2: [0.5],
    weight: [INVERSE_SQRT_PI],
};

const fn squares(first: f64) -> [f64; PAIRS] {
    let mut t2 = [0.0; PAIRS];
    let mut k = 0;
    while k < PAIRS {
        let t = (first + k as f64) * STEP;
        t2[k] = t * t;
        k += 1;
    }
    t2
}

impl<const N: usize> Grid<N> {
    /// Σ weight · i z / (z² − t²), as (real, imaginary).
    #[inline(always)]
    fn sum(&self, x: f64, y: f64) -> (f64, f64) {
        let (x2, y2) = (x * x, y * y);
        let (difference, total, cross) = (x2 - y2, x2 + y2, 2.0 * x * y);
        let cross2 = cross * cross;
        let (mut even, mut odd) = (0.0, 0.0);
        for k in 0..N {
            let p = difference - self.t2[k];
            let scaled = self.weight[k] / (p * p + cross2);
            even += scaled * (total + self.t2[k]);
            odd += scaled * (total - self.t2[k]);
        }
        (y * even, x * odd)
    }
}

/// w(x + i y) for y ≥ 0, as (real, imaginary) part; (NaN, NaN) for y < 0 or NaN.
///
/// Both arguments are offsets over √2 σ of the Gaussian, hence dimensionless. Relative error 2e-10.
pub fn faddeeva(x: f64, y: f64) -> (f64, f64) {
    if x.is_nan() || y.is_nan() || y < 0.0 {
        return (f64::NAN, f64::NAN);
    }
    let (real, imaginary) = right_half(x.abs(), y);
    (real, if x < 0.0 { -imaginary } else { imaginary })
}

/// Real part of w(x + i y), the Voigt function H(a = y, u = x); NaN for y < 0.
pub fn voigt_function(x: f64, y: f64) -> f64 {
    if x.is_nan() || y.is_nan() || y < 0.0 {
        return f64::NAN;
    }
    right_half(x.abs(), y).0
}

#[inline]
fn right_half(x: f64, y: f64) -> (f64, f64) {
    let r2 = x * x + y * y;
    if r2 < FAR[0] {
        return near(x, y);
    }
    let (mut real, imaginary) = if r2 < FAR[1] {
        HERMITE_10.sum(x, y)
    } else if r2 < FAR[2] {
        HERMITE_4.sum(x, y)
    } else if r2 < FAR[3] {
        HERMITE_2.sum(x, y)
    } else {
        pole(x, y)
    };
    if y < 1e-7 && x < 28.0 {
        real += (-x * x).exp();
    }
    (real, imaginary)
}

/// i/(√π z), with the quotients taken so that nothing overflows.
fn pole(x: f64, y: f64) -> (f64, f64) {
    let r = x.hypot(y);
    if r.is_infinite() {
        return (0.0, 0.0);
    }
    (INVERSE_SQRT_PI * (y / r) / r, INVERSE_SQRT_PI * (x / r) / r)
}

fn near(x: f64, y: f64) -> (f64, f64) {
    let steps = x / STEP;
    let fraction = steps - steps.trunc();
    // Signed distance, in steps, to the middle between the nodes of the *other* grid.
    let (mut real, mut imaginary, from_middle) = if (0.25..=0.75).contains(&fraction) {
        let (real, imaginary) = WHOLE_NODES.sum(x, y);
        let centre = STEP / PI / (x * x + y * y);
        (real + centre * y, imaginary + centre * x, fraction - 0.5)
    } else {
        let (real, imaginary) = HALF_NODES.sum(x, y);
        (
            real,
            imaginary,
            if fraction > 0.5 {
                fraction - 1.0
            } else {
                fraction
            },
        )
    };
    if y < PI / STEP && y * (TAU / STEP - y) + x * x < RESIDUE_SEEN {
        let (more, also) = residue(x, y, from_middle);
        real += more;
        imaginary += also;
    }
    (real, imaginary)
}

/// 2 e^(−z²)/(1 + 1/q) with q = e^(2πi z/h), taken with the real part of z/h counted from the
/// middle between two nodes, which makes it the same for both grids. |q| ≤ 1.
fn residue(x: f64, y: f64, from_middle: f64) -> (f64, f64) {
    let magnitude = 2.0 * (y * y - x * x).exp();
    let (sine, cosine) = sin_cos_turns(x * y / PI);
    let decay = (-TAU / STEP * y).exp();
    let (q_sine, q_cosine) = sin_cos_turns(from_middle);
    let (q_real, q_imaginary) = (decay * q_cosine, decay * q_sine);
    // q/(1 + q) = (|q|² + q)/|1 + q|².
    let scale = magnitude / ((1.0 + q_real) * (1.0 + q_real) + q_imaginary * q_imaginary);
    let (a, b) = (decay * decay + q_real, q_imaginary);
    (
        scale * (cosine * a + sine * b),
        scale * (cosine * b - sine * a),
    )
}

/// 1/n! with alternating sign, of the sine (odd n from 3) and the cosine (even n from 2) series.
const SINE: [f64; 6] = [
    -1.0 / 6.0,
    1.0 / 120.0,
    -1.0 / 5_040.0,
    1.0 / 362_880.0,
    -1.0 / 39_916_800.0,
    1.0 / 6_227_020_800.0,
];
const COSINE: [f64; 6] = [
    -1.0 / 2.0,
    1.0 / 24.0,
    -1.0 / 720.0,
    1.0 / 40_320.0,
    -1.0 / 3_628_800.0,
    1.0 / 479_001_600.0,
];

/// Sine and cosine of 2π t for |t| < 2^40, absolute error 1e-12: Taylor series of a quarter of the
/// angle, which lies within an eighth of a turn, doubled twice. Worth its lines: the library calls
/// took two thirds of the time of a point.
#[inline]
fn sin_cos_turns(t: f64) -> (f64, f64) {
    /// Adding and subtracting it rounds to a whole number.
    const ROUNDER: f64 = 6_755_399_441_055_744.0;
    let r = (t - ((t + ROUNDER) - ROUNDER)) * (TAU / 4.0);
    let r2 = r * r;
    let series = |c: &[f64; 6]| {
        let r4 = r2 * r2;
        r2 * ((c[0] + r2 * c[1]) + r4 * ((c[2] + r2 * c[3]) + r4 * (c[4] + r2 * c[5])))
    };
    let (sine, versine) = (r + r * series(&SINE), series(&COSINE));
    // sin 2a = 2 sin a cos a and 1 − cos 2a = 2 sin² a.
    let (half_sine, half_cosine) = (2.0 * sine * (1.0 + versine), 1.0 - 2.0 * sine * sine);
    (
        2.0 * half_sine * half_cosine,
        1.0 - 2.0 * half_sine * half_sine,
    )
}
