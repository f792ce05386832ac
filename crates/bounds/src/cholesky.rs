//! Dense Cholesky factorization of the small matrices of patches.

/// Solves A x = b in place: the lower triangle of the row-major `matrix` becomes its factor, `right` the solution. Tells whether
/// the matrix was positive definite.
pub(crate) fn solve(matrix: &mut [f64], right: &mut [f64]) -> bool {
    let n = right.len();
    for i in 0..n {
        let (above, rest) = matrix.split_at_mut(i * n);
        let row = &mut rest[..n];
        for j in 0..i {
            let other = &above[j * n..j * n + j + 1];
            let sum: f64 = row[..j].iter().zip(other).map(|(a, b)| a * b).sum();
            row[j] = (row[j] - sum) / other[j];
        }
        let pivot = row[i] - row[..i].iter().map(|a| a * a).sum::<f64>();
        if !(pivot > 0.0) {
            return false;
        }
        row[i] = pivot.sqrt();
        right[i] = (right[i] - row[..i].iter().zip(right.iter()).map(|(a, b)| a * b).sum::<f64>()) / row[i];
    }
    for i in (0..n).rev() {
        right[i] /= matrix[i * n + i];
        let value = right[i];
        for j in 0..i {
            right[j] -= matrix[i * n + j] * value;
        }
    }
    true
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn solves_a_known_system_and_tells_an_indefinite_one() {
        let mut matrix = vec![4.0, 0.0, 0.0, 2.0, 5.0, 0.0, 0.0, 2.0, 3.0];
        let mut x = vec![8.0, 18.0, 13.0]; // for x = (1, 2, 3)
        assert!(solve(&mut matrix, &mut x));
        for (a, b) in x.iter().zip([1.0, 2.0, 3.0]) {
            assert!((a - b).abs() < 1e-15);
        }
        assert!(!solve(&mut [1.0, 0.0, 2.0, 1.0], &mut [0.0, 0.0]));
    }
}
