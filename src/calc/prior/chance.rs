//! The chance that lines of unknown rate add up to more than there is room for.

/// Cells that the room is divided into.
const CELLS: usize = 128;

/// Chance that the sum of independent log-normals exceeds a positive bound. Each is given by its
/// median (in the unit of the bound, zero or positive) and its σ in decades. 1 for a bound of
/// zero or below.
///
/// A single one is exact to 1e-7 (the error integral). For several, the distribution of the sum is
/// convolved on 128 cells up to the bound; what lies below half a cell counts with its mean. The
/// error of the chance is below 0.01.
pub fn chance_above(parts: &[(f64, f64)], bound: f64) -> f64 {
    if bound.is_nan() || bound <= 0.0 {
        return 1.0;
    }
    let parts: Vec<LogNormal> = parts
        .iter()
        .filter(|(median, _)| *median > 0.0)
        .map(|&(median, sigma_dex)| LogNormal {
            ln_median: median.ln(),
            sigma: sigma_dex * std::f64::consts::LN_10,
        })
        .collect();
    match parts.as_slice() {
        [] => 0.0,
        [single] => 1.0 - single.below(bound),
        several => 1.0 - sum_below(several, bound),
    }
}

#[derive(Clone, Copy)]
struct LogNormal {
    ln_median: f64,
    sigma: f64,
}

impl LogNormal {
    /// Chance to lie below x > 0.
    fn below(&self, x: f64) -> f64 {
        let distance = x.ln() - self.ln_median;
        if self.sigma <= 0.0 {
            return if distance < 0.0 { 0.0 } else { 1.0 };
        }
        normal_below(distance / self.sigma)
    }

    /// Mean of what lies below x, times the chance to lie there: e^(μ+s²/2) Φ((ln x − μ)/s − s).
    fn mean_below(&self, x: f64) -> f64 {
        if self.sigma <= 0.0 {
            return self.below(x) * self.ln_median.exp();
        }
        let standard = (x.ln() - self.ln_median) / self.sigma;
        let mean = (self.ln_median + 0.5 * self.sigma * self.sigma).exp();
        let part = mean * normal_below(standard - self.sigma);
        // Never above x: the product of a huge mean and the error of Φ would be.
        part.min(x * self.below(x))
    }
}

/// Chance that the sum of several lies below a bound.
fn sum_below(parts: &[LogNormal], bound: f64) -> f64 {
    let half = 0.5 * bound / CELLS as f64;
    let small: f64 = parts.iter().map(|p| p.mean_below(half)).sum();
    let room = bound - small;
    if room <= 0.0 {
        return 0.0;
    }
    // Cell k holds the chance of k − ½ to k + ½ cells; the last one only its lower half.
    let cell = room / CELLS as f64;
    let mut sum = vec![0.0; CELLS + 1];
    sum[0] = 1.0;
    for part in parts {
        let edges: Vec<f64> = (0..=CELLS)
            .map(|k| part.below((k as f64 + 0.5) * cell))
            .collect();
        if edges[0] == 1.0 {
            continue;
        }
        let chances: Vec<f64> = std::iter::once(edges[0])
            .chain(edges.windows(2).map(|e| e[1] - e[0]))
            .collect();
        for k in (0..=CELLS).rev() {
            sum[k] = (0..=k).map(|i| sum[k - i] * chances[i]).sum();
        }
    }
    let last = 0.5 * sum[CELLS];
    (sum.iter().take(CELLS).sum::<f64>() + last).clamp(0.0, 1.0)
}

/// Φ(x) by the rational approximation of Abramowitz & Stegun 1964, 7.1.26 (error below 1.5e-7).
fn normal_below(x: f64) -> f64 {
    const POLYNOMIAL: [f64; 5] = [
        1.061_405_429,
        -1.453_152_027,
        1.421_413_741,
        -0.284_496_736,
        0.254_829_592,
    ];
    let z = x.abs() / std::f64::consts::SQRT_2;
    let t = 1.0 / (1.0 + 0.327_591_1 * z);
    let erfc = POLYNOMIAL.iter().fold(0.0, |sum, c| (sum + c) * t) * (-z * z).exp();
    if x < 0.0 {
        0.5 * erfc
    } else {
        1.0 - 0.5 * erfc
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_line_goes_by_the_error_integral() {
        // 84.134 % of a normal lies below +1 σ, 97.725 % below +2 σ (common practice).
        for (bound, chance) in [(10.0, 0.158_655), (100.0, 0.022_750), (0.1, 0.841_345)] {
            let found = chance_above(&[(1.0, 1.0)], bound);
            assert!((found - chance).abs() < 1e-6, "{bound}: {found}"); // error of the formula
        }
    }

    #[test]
    fn nothing_exceeds_and_no_room_is_always_exceeded() {
        assert_eq!(chance_above(&[], 0.1), 0.0);
        assert_eq!(chance_above(&[(0.0, 1.0)], 0.1), 0.0);
        assert_eq!(chance_above(&[(1.0, 1.0)], 0.0), 1.0);
        assert_eq!(chance_above(&[(1.0, 1.0)], f64::NAN), 1.0);
    }
}
