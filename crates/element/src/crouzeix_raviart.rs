//! The linear basis of side midpoints.

use crate::{Shape, Table};

/// The linear functions on the triangle that are one at the midpoint of one side and zero at the midpoints of the others:
/// φᵢ = 1 − 2λ with λ the hat of the vertex that side i does not touch.
///
/// Neighbors that share the value at a midpoint agree there only, so that the mean over a side is continuous and the
/// function is not.
///
/// Source: M. Crouzeix, P.-A. Raviart, RAIRO 7 (R3), 1973.
///
/// ```
/// use hypercircle_element::CrouzeixRaviart;
/// let basis = CrouzeixRaviart;
/// assert_eq!(basis.values(&[0.5, 0.5]), [0.0, 1.0, 0.0]); // the midpoint of side 1
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub struct CrouzeixRaviart;

impl CrouzeixRaviart {
    /// The shape of the reference cell: the triangle.
    #[must_use]
    pub fn shape(&self) -> Shape {
        Shape::Triangle
    }

    /// Polynomial degree: one.
    #[must_use]
    pub fn order(&self) -> usize {
        1
    }

    /// Midpoints of the sides 0, 1, 2.
    #[must_use]
    pub fn nodes(&self) -> &'static [[f64; 2]] {
        &[[0.5, 0.0], [0.5, 0.5], [0.0, 0.5]]
    }

    /// Values of the three functions at a reference point.
    #[must_use]
    pub fn values(&self, at: &[f64; 2]) -> [f64; 3] {
        let hats = Shape::Triangle.hats(at);
        [0, 1, 2].map(|side| 1.0 - 2.0 * hats[(side + 2) % 3])
    }

    /// Values and reference gradients of the three functions at points.
    #[must_use]
    pub fn table(&self, points: &[[f64; 2]]) -> Table {
        let values = points.iter().flat_map(|at| self.values(at)).collect();
        let gradients = points.iter().flat_map(|_| [[0.0, -2.0], [2.0, 2.0], [-2.0, 0.0]]).collect();
        Table::new(3, values, gradients)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::Rule;

    #[test]
    fn functions_are_one_at_their_midpoint_and_span_the_linear_ones() {
        let basis = CrouzeixRaviart;
        for (i, node) in basis.nodes().iter().enumerate() {
            let ends = Shape::Triangle.side_vertices(i).iter().map(|v| Shape::Triangle.vertices()[*v]);
            let middle = ends.fold([0.0; 2], |sum, v| [sum[0] + 0.5 * v[0], sum[1] + 0.5 * v[1]]);
            assert_eq!(*node, middle);
            assert_eq!(basis.values(node), [0, 1, 2].map(|j| f64::from(u8::from(i == j))));
        }
        let at = [0.3, 0.1];
        let linear = |x: &[f64; 2]| 2.0 - 3.0 * x[0] + 5.0 * x[1];
        let table = basis.table(&[at]);
        let sum: f64 = table.values_at(0).iter().zip(basis.nodes()).map(|(v, x)| v * linear(x)).sum();
        assert!((sum - linear(&at)).abs() < 1e-15);
        for (i, slope) in [-3.0, 5.0].into_iter().enumerate() {
            let sum: f64 = table.gradients_at(0).iter().zip(basis.nodes()).map(|(g, x)| g[i] * linear(x)).sum();
            assert!((sum - slope).abs() < 1e-15);
        }
    }

    /// The functions are orthogonal: the mass matrix is |T|/3 times the identity (Crouzeix and Raviart, 1973).
    #[test]
    fn mass_matrix_is_diagonal() {
        let rule = Rule::of_degree(Shape::Triangle, 2).unwrap();
        for (i, j) in (0..9).map(|k| (k / 3, k % 3)) {
            let values = rule.points().iter().map(|x| CrouzeixRaviart.values(x));
            let entry: f64 = values.zip(rule.weights()).map(|(v, w)| w * v[i] * v[j]).sum();
            assert!((entry - f64::from(u8::from(i == j)) / 6.0).abs() < 1e-16);
        }
    }
}
