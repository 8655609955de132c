//! Weighted least squares with polynomials, on a scaled variable.

/// Why a polynomial cannot be fitted.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum PolynomialError {
    /// Fewer points than coefficients.
    #[error("{points} points do not fix the {coefficients} coefficients of the polynomial")]
    FewPoints {
        /// Points there.
        points: usize,
        /// Coefficients asked for.
        coefficients: usize,
    },
    /// Points lie on too few places.
    #[error("the points lie on too few different places to fix the polynomial")]
    Degenerate,
}

/// A polynomial Σ cₖ Tₖ(u), u = (x − centre)/half, Tₖ being Chebyshev polynomials (well conditioned
/// on the range of the points), with the covariance of its coefficients for unit weights.
#[derive(Clone, Debug, PartialEq)]
pub struct Polynomial {
    centre: f64,
    half: f64,
    coefficients: Vec<f64>,
    covariance: Vec<Vec<f64>>,
}

impl Polynomial {
    /// Its value.
    pub fn at(&self, x: f64) -> f64 {
        let basis = basis((x - self.centre) / self.half, self.coefficients.len());
        basis
            .iter()
            .zip(&self.coefficients)
            .map(|(b, c)| b * c)
            .sum()
    }

    /// Variance of its value by the covariance for unit weights; times the variance of a point of
    /// unit weight it is that of the prediction.
    pub fn variance_at(&self, x: f64) -> f64 {
        let basis = basis((x - self.centre) / self.half, self.coefficients.len());
        let row = |r: &Vec<f64>| r.iter().zip(&basis).map(|(c, b)| c * b).sum::<f64>();
        self.covariance
            .iter()
            .zip(&basis)
            .map(|(r, b)| b * row(r))
            .sum()
    }

    /// Slope, per unit of x, by central differences on a millionth of the range (a polynomial: the
    /// error is below 1e-9 of the slope).
    pub fn slope_at(&self, x: f64) -> f64 {
        let step = 1e-4 * self.half;
        (self.at(x + step) - self.at(x - step)) / (2.0 * step)
    }

    /// Coefficients of 1, x, x² …
    pub fn powers(&self) -> Vec<f64> {
        let mut scaled = vec![0.0; self.coefficients.len()];
        let (mut before, mut this) = (vec![1.0], vec![0.0, 1.0]);
        for &c in &self.coefficients {
            for (power, value) in before.iter().enumerate() {
                scaled[power] += c * value;
            }
            let mut next = vec![0.0; this.len() + 1];
            for (power, value) in this.iter().enumerate() {
                next[power + 1] += 2.0 * value;
            }
            for (power, value) in before.iter().enumerate() {
                next[power] -= value;
            }
            before = std::mem::replace(&mut this, next);
        }
        // u = a + b x, Horner.
        let (a, b) = (-self.centre / self.half, 1.0 / self.half);
        let mut out = vec![0.0; scaled.len()];
        for &c in scaled.iter().rev() {
            let mut next = vec![0.0; out.len()];
            for (power, value) in out.iter().enumerate() {
                next[power] += a * value;
                if power + 1 < next.len() {
                    next[power + 1] += b * value;
                }
            }
            next[0] += c;
            out = next;
        }
        out
    }
}

fn basis(u: f64, count: usize) -> Vec<f64> {
    let mut out = vec![1.0, u];
    for k in 2..count {
        out.push(2.0 * u * out[k - 1] - out[k - 2]);
    }
    out.truncate(count);
    out
}

/// Least squares over (x, y, weight), weights above zero.
///
/// # Errors
/// Too few points, or too few places.
pub fn weighted(points: &[(f64, f64, f64)], order: usize) -> Result<Polynomial, PolynomialError> {
    let count = order + 1;
    if points.len() < count {
        return Err(PolynomialError::FewPoints {
            points: points.len(),
            coefficients: count,
        });
    }
    let low = points.iter().map(|p| p.0).fold(f64::INFINITY, f64::min);
    let high = points.iter().map(|p| p.0).fold(f64::NEG_INFINITY, f64::max);
    let (centre, half) = (
        f64::midpoint(low, high),
        ((high - low) / 2.0).max(f64::MIN_POSITIVE),
    );
    let mut normal = vec![vec![0.0; count]; count];
    let mut right = vec![0.0; count];
    for &(x, y, weight) in points {
        let b = basis((x - centre) / half, count);
        for i in 0..count {
            right[i] += weight * b[i] * y;
            for j in 0..count {
                normal[i][j] += weight * b[i] * b[j];
            }
        }
    }
    let covariance = inverse(normal).ok_or(PolynomialError::Degenerate)?;
    let coefficients = covariance
        .iter()
        .map(|row| row.iter().zip(&right).map(|(c, r)| c * r).sum())
        .collect();
    Ok(Polynomial {
        centre,
        half,
        coefficients,
        covariance,
    })
}

/// Gauss–Jordan with pivots; `None` where singular to 1e-13 of the largest element.
fn inverse(mut matrix: Vec<Vec<f64>>) -> Option<Vec<Vec<f64>>> {
    let n = matrix.len();
    let largest = matrix
        .iter()
        .flatten()
        .fold(0.0, |m: f64, v| m.max(v.abs()));
    let mut out: Vec<Vec<f64>> = (0..n)
        .map(|i| (0..n).map(|j| f64::from(u8::from(i == j))).collect())
        .collect();
    for column in 0..n {
        let pivot = (column..n)
            .max_by(|&a, &b| matrix[a][column].abs().total_cmp(&matrix[b][column].abs()))?;
        let size = matrix[pivot][column];
        if size.is_nan() || size.abs() <= 1e-13 * largest {
            return None;
        }
        matrix.swap(column, pivot);
        out.swap(column, pivot);
        for j in 0..n {
            matrix[column][j] /= size;
            out[column][j] /= size;
        }
        for row in (0..n).filter(|&r| r != column) {
            let factor = matrix[row][column];
            for j in 0..n {
                matrix[row][j] -= factor * matrix[column][j];
                out[row][j] -= factor * out[column][j];
            }
        }
    }
    Some(out)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_polynomial_is_given_back_in_powers() {
        // Exact: a quadratic through its own points; 1e-9 relative for rounding on x up to 2000.
        let points: Vec<(f64, f64, f64)> = (0..20)
            .map(|i| f64::from(i) * 100.0)
            .map(|x| (x, 575.0 + 0.08 * x - 2.5e-6 * x * x, 1.0))
            .collect();
        let found = weighted(&points, 2).unwrap();
        for (value, expected) in found.powers().iter().zip([575.0, 0.08, -2.5e-6]) {
            assert!((value / expected - 1.0).abs() < 1e-9, "{value} {expected}");
        }
        assert!((found.slope_at(1000.0) - 0.075).abs() < 1e-9);
    }

    #[test]
    fn variance_of_a_mean_is_one_over_n() {
        let points: Vec<(f64, f64, f64)> = (0..5).map(|i| (f64::from(i), 3.0, 2.0)).collect();
        // Weight 2 each: 1/(5·2).
        assert!((weighted(&points, 0).unwrap().variance_at(1.7) - 0.1).abs() < 1e-12);
        assert!(weighted(&points[..1], 1).is_err());
        let one_place = [(1.0, 2.0, 1.0), (1.0, 2.0, 1.0)];
        assert_eq!(weighted(&one_place, 1), Err(PolynomialError::Degenerate));
    }
}
