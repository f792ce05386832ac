//! Symmetric tensors: the values of a conductivity.

/// A symmetric D × D tensor, for instance a conductivity A in W/(m K).
///
/// ```
/// use hypercircle_assembly::Tensor;
/// let wood = Tensor::<2>::diagonal([0.3, 0.12]); // along and across the grain
/// assert_eq!(wood.apply(&[1.0, 1.0]), [0.3, 0.12]);
/// assert!((wood.smallest_eigenvalue() - 0.12).abs() < 1e-15);
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Tensor<const D: usize>([[f64; D]; D]);

impl<const D: usize> Tensor<D> {
    /// From all entries; only the part on and above the diagonal is read.
    #[must_use]
    pub fn symmetric(entries: [[f64; D]; D]) -> Self {
        let mut full = entries;
        for i in 0..D {
            for j in 0..i {
                full[i][j] = entries[j][i];
            }
        }
        Self(full)
    }

    /// With principal values along the coordinate axes.
    #[must_use]
    pub fn diagonal(principal: [f64; D]) -> Self {
        let mut full = [[0.0; D]; D];
        for i in 0..D {
            full[i][i] = principal[i];
        }
        Self(full)
    }

    /// All entries.
    #[must_use]
    #[inline]
    pub fn entries(&self) -> &[[f64; D]; D] {
        &self.0
    }

    /// The product A v.
    #[must_use]
    #[inline]
    pub fn apply(&self, v: &[f64; D]) -> [f64; D] {
        let mut result = [0.0; D];
        for i in 0..D {
            for j in 0..D {
                result[i] += self.0[i][j] * v[j];
            }
        }
        result
    }

    /// Whether all entries are finite.
    #[must_use]
    pub fn is_finite(&self) -> bool {
        self.0.iter().flatten().all(|v| v.is_finite())
    }

    /// The smaller principal value.
    #[must_use]
    pub fn smallest_eigenvalue(&self) -> f64 {
        let a = &self.0;
        if D == 1 {
            return a[0][0];
        }
        let mean = 0.5 * (a[0][0] + a[1][1]);
        let radius = (0.25 * (a[0][0] - a[1][1]).powi(2) + a[0][1] * a[0][1]).sqrt();
        // The product of the two is the determinant: free of cancellation.
        if mean > 0.0 { (a[0][0] * a[1][1] - a[0][1] * a[0][1]) / (mean + radius) } else { mean - radius }
    }

    /// The inverse; infinite entries for a singular tensor.
    #[must_use]
    #[inline]
    pub fn inverse(&self) -> Self {
        let a = &self.0;
        let mut inverse = [[0.0; D]; D];
        if D == 1 {
            inverse[0][0] = 1.0 / a[0][0];
        } else {
            let determinant = a[0][0] * a[1][1] - a[0][1] * a[1][0];
            inverse[0][0] = a[1][1] / determinant;
            inverse[1][1] = a[0][0] / determinant;
            inverse[0][1] = -a[0][1] / determinant;
            inverse[1][0] = -a[1][0] / determinant;
        }
        Self(inverse)
    }
}

impl<const D: usize> From<f64> for Tensor<D> {
    fn from(scalar: f64) -> Self {
        Self::diagonal([scalar; D])
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn inverse_and_smallest_eigenvalue_of_a_known_tensor() {
        let a = Tensor::symmetric([[2.0, 1.0], [0.0, 2.0]]); // principal values 1 and 3
        assert!((a.smallest_eigenvalue() - 1.0).abs() < 1e-15);
        let back = a.apply(&a.inverse().apply(&[3.0, -1.0]));
        assert!((back[0] - 3.0).abs() + (back[1] + 1.0).abs() < 1e-14);
        assert!(Tensor::symmetric([[1.0, 2.0], [0.0, 1.0]]).smallest_eigenvalue() < 0.0);
        assert!(Tensor::<2>::from(-3.0).smallest_eigenvalue() < 0.0);
    }
}
