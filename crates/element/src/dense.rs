//! Inverse of the small matrices that define bases.

use crate::ElementError;

/// Inverse of a row-major n × n matrix by Gauss–Jordan elimination with row pivoting.
pub(crate) fn inverse(mut matrix: Vec<f64>, n: usize) -> Result<Vec<f64>, ElementError> {
    let mut result = vec![0.0; n * n];
    for i in 0..n {
        result[i * n + i] = 1.0;
    }
    for column in 0..n {
        let mut pivot = column;
        for row in column..n {
            if matrix[row * n + column].abs() > matrix[pivot * n + column].abs() {
                pivot = row;
            }
        }
        let value = matrix[pivot * n + column];
        if !(value.abs() > 1e-13) {
            return Err(ElementError::DependentConditions { index: column });
        }
        for k in 0..n {
            matrix.swap(column * n + k, pivot * n + k);
            result.swap(column * n + k, pivot * n + k);
        }
        for k in 0..n {
            matrix[column * n + k] /= value;
            result[column * n + k] /= value;
        }
        for row in (0..n).filter(|r| *r != column) {
            let factor = matrix[row * n + column];
            if factor != 0.0 {
                for k in 0..n {
                    matrix[row * n + k] -= factor * matrix[column * n + k];
                    result[row * n + k] -= factor * result[column * n + k];
                }
            }
        }
    }
    Ok(result)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn inverse_of_a_hilbert_matrix() {
        let hilbert: Vec<f64> = (0..9).map(|k| 1.0 / ((k / 3 + k % 3 + 1) as f64)).collect();
        let expected = [9.0, -36.0, 30.0, -36.0, 192.0, -180.0, 30.0, -180.0, 180.0]; // textbook
        for (a, b) in inverse(hilbert, 3).unwrap().iter().zip(expected) {
            assert!((a - b).abs() < 1e-11);
        }
    }

    #[test]
    fn dependent_rows_are_told() {
        let error = inverse(vec![1.0, 2.0, 2.0, 4.0], 2).unwrap_err();
        assert_eq!(error, ElementError::DependentConditions { index: 1 });
    }
}
