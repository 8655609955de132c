//! The exponential integral E₁(x) = ∫ₓ^∞ e^(−t)/t dt that rates of electron impact are made of.

/// Euler's constant γ.
const EULER: f64 = 0.577_215_664_901_532_9;

/// e^x E₁(x) for x > 0, relative error 1e-13: power series below 1 (Abramowitz & Stegun 1964,
/// 5.1.11), continued fraction above (5.1.22). NaN for x ≤ 0.
pub(super) fn scaled_e1(x: f64) -> f64 {
    if x.is_nan() || x <= 0.0 {
        return f64::NAN;
    }
    if x < 1.0 {
        series(x) * x.exp()
    } else {
        fraction(x)
    }
}

fn series(x: f64) -> f64 {
    let (mut term, mut sum) = (1.0, 0.0);
    for n in 1..40 {
        let n = f64::from(n);
        term *= -x / n;
        sum -= term / n;
        if term.abs() < 1e-18 {
            break;
        }
    }
    sum - EULER - x.ln()
}

/// Lentz's evaluation of 1/(x + 1 − 1²/(x + 3 − 2²/(x + 5 − …))).
fn fraction(x: f64) -> f64 {
    let mut b = x + 1.0;
    let mut c = f64::MAX;
    let mut d = 1.0 / b;
    let mut value = d;
    for n in 1..200 {
        let n = f64::from(n);
        b += 2.0;
        let a = -n * n;
        d = 1.0 / (a * d + b);
        c = b + a / c;
        value *= c * d;
        if (c * d - 1.0).abs() < 1e-15 {
            break;
        }
    }
    value
}

#[cfg(test)]
mod tests {
    use super::scaled_e1;

    /// Abramowitz & Stegun 1964, tables 5.1 and 5.2: E₁(0.5) = 0.559773595, E₁(1) = 0.219383934,
    /// x e^x E₁(x) = 0.852110880 at 5 and 0.915633339 at 10.
    #[test]
    fn tabulated_values() {
        for (x, want) in [
            (0.5, 0.559_773_595 * 0.5_f64.exp()),
            (1.0, 0.219_383_934 * 1_f64.exp()),
            (5.0, 0.852_110_880 / 5.0),
            (10.0, 0.915_633_339 / 10.0),
        ] {
            // Nine printed digits.
            assert!((scaled_e1(x) / want - 1.0).abs() < 3e-9, "{x}");
        }
        assert!((scaled_e1(1.0 - 1e-12) / scaled_e1(1.0) - 1.0).abs() < 1e-11);
        assert!(scaled_e1(0.0).is_nan() && scaled_e1(-1.0).is_nan());
    }
}
