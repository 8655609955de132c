//! Small dense symmetric systems: the normal equations of a fit with a handful of parameters.

/// A symmetric matrix, row by row.
pub(super) type Matrix = Vec<Vec<f64>>;

/// Largest system: four Ritz terms and a limit, with room. Factors stay off the heap.
const LARGEST: usize = 6;

type Factor = [[f64; LARGEST]; LARGEST];

/// Inverse of a positive definite matrix by Cholesky decomposition, after scaling its diagonal
/// to one; `None` when it is not positive definite to working accuracy, or larger than any fit's.
pub(super) fn inverse(matrix: &Matrix) -> Option<Matrix> {
    let size = matrix.len();
    if size > LARGEST {
        return None;
    }
    let mut scale = [0.0; LARGEST];
    for (i, s) in scale.iter_mut().enumerate().take(size) {
        *s = matrix[i][i].sqrt();
        if !s.is_finite() || *s <= 0.0 {
            return None;
        }
    }
    let factor = cholesky(matrix, &scale)?;
    let mut result = vec![vec![0.0; size]; size];
    for column in 0..size {
        let mut unit = [0.0; LARGEST];
        unit[column] = 1.0;
        solve(&factor, &mut unit[..size]);
        for row in 0..size {
            result[row][column] = unit[row] / (scale[row] * scale[column]);
        }
    }
    Some(result)
}

fn cholesky(matrix: &Matrix, scale: &[f64; LARGEST]) -> Option<Factor> {
    let size = matrix.len();
    let mut factor = [[0.0; LARGEST]; LARGEST];
    for i in 0..size {
        for j in 0..=i {
            let known: f64 = (0..j).map(|k| factor[i][k] * factor[j][k]).sum();
            let rest = matrix[i][j] / (scale[i] * scale[j]) - known;
            if i == j {
                // Below this the parameters cannot be told apart in double precision.
                if rest.is_nan() || rest <= 1e-14 {
                    return None;
                }
                factor[i][i] = rest.sqrt();
            } else {
                factor[i][j] = rest / factor[j][j];
            }
        }
    }
    Some(factor)
}

fn solve(factor: &Factor, vector: &mut [f64]) {
    let size = vector.len();
    for i in 0..size {
        let known: f64 = (0..i).map(|k| factor[i][k] * vector[k]).sum();
        vector[i] = (vector[i] - known) / factor[i][i];
    }
    for i in (0..size).rev() {
        let known: f64 = (i + 1..size).map(|k| factor[k][i] * vector[k]).sum();
        vector[i] = (vector[i] - known) / factor[i][i];
    }
}

/// Product of a matrix and a vector.
pub(super) fn times(matrix: &Matrix, vector: &[f64]) -> Vec<f64> {
    matrix.iter().map(|row| dot(row, vector)).collect()
}

/// Scalar product.
pub(super) fn dot(left: &[f64], right: &[f64]) -> f64 {
    left.iter().zip(right).map(|(a, b)| a * b).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn inverse_of_a_hilbert_block() {
        // Inverse of the 3 × 3 Hilbert matrix: whole numbers (Hilbert 1894, Acta Math. 18, 155).
        let hilbert: Matrix = (0..3)
            .map(|i| (0..3).map(|j| 1.0 / f64::from(i + j + 1)).collect())
            .collect();
        let found = inverse(&hilbert).unwrap();
        let expected = [
            [9.0, -36.0, 30.0],
            [-36.0, 192.0, -180.0],
            [30.0, -180.0, 180.0],
        ];
        for (row, wanted) in found.iter().zip(expected) {
            for (value, want) in row.iter().zip(wanted) {
                // Condition number 524: eleven digits are left of sixteen, with room.
                assert!((value - want).abs() < 1e-9 * want.abs(), "{value} {want}");
            }
        }
    }

    #[test]
    fn a_singular_matrix_is_refused() {
        assert_eq!(inverse(&vec![vec![1.0, 1.0], vec![1.0, 1.0]]), None);
        assert_eq!(inverse(&vec![vec![f64::NAN]]), None);
    }
}
