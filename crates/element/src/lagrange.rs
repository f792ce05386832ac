//! Lagrange bases: one at their own node and zero at the others.

use crate::dense::inverse;
use crate::orthonormal::{orthonormal, polynomial_count};
use crate::quadrature::lobatto;
use crate::{ElementError, Shape, Table};

/// Nodal basis of the polynomials of a degree on a reference cell.
///
/// Nodes come in this order: vertices; then the inner nodes of side 0, side 1, … of a triangle, each in walking order of the
/// side; then inner nodes of the cell. Nodes on sides are Gauss–Lobatto points, inner ones of the triangle are interpolated
/// from the Gauss–Lobatto points of lower orders on the three sides (T. Isaac, SIAM J. Sci. Comput. 42, 2020).
///
/// ```
/// use hypercircle_element::{Lagrange, Shape};
/// let quadratic = Lagrange::new(Shape::Triangle, 2)?;
/// assert_eq!(quadratic.nodes().len(), 6);
/// let values = quadratic.values(&[0.25, 0.25]);
/// assert!((values.iter().sum::<f64>() - 1.0).abs() < 1e-15);
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
#[derive(Debug, Clone)]
pub struct Lagrange {
    shape: Shape,
    order: usize,
    nodes: Vec<[f64; 2]>,
    /// Basis function j is Σᵢ coefficients[i·n + j] times the i-th orthonormal polynomial.
    coefficients: Vec<f64>,
}

impl Lagrange {
    /// Highest order offered.
    pub const HIGHEST_ORDER: usize = 12;

    /// The basis of an order on a shape.
    ///
    /// # Errors
    /// [`ElementError::OutOfRange`] for order 0 or above [`Lagrange::HIGHEST_ORDER`].
    pub fn new(shape: Shape, order: usize) -> Result<Self, ElementError> {
        if order == 0 || order > Self::HIGHEST_ORDER {
            let limit = Self::HIGHEST_ORDER;
            return Err(ElementError::OutOfRange { what: "order of a Lagrange basis", value: order, limit });
        }
        let nodes = nodes(shape, order);
        let n = polynomial_count(shape, order);
        let mut vandermonde = Vec::with_capacity(n * n);
        for node in &nodes {
            vandermonde.extend(orthonormal(shape, order, node).iter().map(|jet| jet[0]));
        }
        Ok(Self { shape, order, nodes, coefficients: inverse(vandermonde, n)? })
    }

    /// The shape of the reference cell.
    #[must_use]
    pub fn shape(&self) -> Shape {
        self.shape
    }

    /// Polynomial degree.
    #[must_use]
    pub fn order(&self) -> usize {
        self.order
    }

    /// Reference coordinates of the nodes.
    #[must_use]
    pub fn nodes(&self) -> &[[f64; 2]] {
        &self.nodes
    }

    /// Values of all basis functions at a reference point.
    #[must_use]
    pub fn values(&self, at: &[f64; 2]) -> Vec<f64> {
        self.table(&[*at]).values_at(0).to_vec()
    }

    /// Values and reference gradients of all basis functions at points.
    #[must_use]
    pub fn table(&self, points: &[[f64; 2]]) -> Table {
        let n = self.nodes.len();
        let mut values = vec![0.0; points.len() * n];
        let mut gradients = vec![[0.0; 2]; points.len() * n];
        for (p, at) in points.iter().enumerate() {
            for (i, jet) in orthonormal(self.shape, self.order, at).iter().enumerate() {
                for j in 0..n {
                    let c = self.coefficients[i * n + j];
                    values[p * n + j] += c * jet[0];
                    gradients[p * n + j][0] += c * jet[1];
                    gradients[p * n + j][1] += c * jet[2];
                }
            }
        }
        Table::new(n, values, gradients)
    }
}

/// Gauss–Lobatto points of an order on [0, 1]; one half for order 0, which no node uses.
fn line_points(order: usize) -> Vec<f64> {
    if order == 0 { vec![0.5] } else { lobatto(order + 1).0.iter().map(|x| x[0]).collect() }
}

fn nodes(shape: Shape, order: usize) -> Vec<[f64; 2]> {
    let lines: Vec<Vec<f64>> = (0..=order).map(line_points).collect();
    let line = &lines[order];
    let mut nodes = shape.vertices().to_vec();
    match shape {
        Shape::Interval => nodes.extend(line[1..order].iter().map(|t| [*t, 0.0])),
        Shape::Triangle => {
            for side in 0..3 {
                let ends = shape.side_vertices(side);
                let (a, b) = (shape.vertices()[ends[0]], shape.vertices()[ends[1]]);
                nodes.extend(line[1..order].iter().map(|t| [0, 1].map(|i| a[i] + t * (b[i] - a[i]))));
            }
            for j in 1..order {
                nodes.extend((1..order - j).map(|i| inner_node(&lines, [order - i - j, i, j])));
            }
        }
    }
    nodes
}

/// The inner node with three indices: the mean of the points that its indices have on the three sides, drawn into the cell
/// with the weight of the index that each side leaves out.
fn inner_node(lines: &[Vec<f64>], index: [usize; 3]) -> [f64; 2] {
    let order = index[0] + index[1] + index[2];
    let (mut sum, mut total) = ([0.0; 3], 0.0);
    for left_out in 0..3 {
        let (j, k) = ((left_out + 1) % 3, (left_out + 2) % 3);
        let weight = lines[order][order - index[left_out]];
        let side = &lines[index[j] + index[k]];
        sum[j] += weight * side[index[j]];
        sum[k] += weight * side[index[k]];
        total += weight;
    }
    [sum[1] / total, sum[2] / total]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::Rule;

    #[test]
    fn basis_is_nodal_for_every_order() {
        for shape in [Shape::Interval, Shape::Triangle] {
            for order in 1..=Lagrange::HIGHEST_ORDER {
                let basis = Lagrange::new(shape, order).unwrap();
                assert_eq!(basis.nodes().len(), polynomial_count(shape, order));
                let table = basis.table(basis.nodes());
                for i in 0..basis.nodes().len() {
                    for (j, value) in table.values_at(i).iter().enumerate() {
                        assert!((value - f64::from(u8::from(i == j))).abs() < 1e-12, "{shape:?} {order} {i} {j}");
                    }
                }
            }
        }
    }

    /// Quadratic triangle: N₁ = λ(2λ − 1), N₄ = 4 λ₀ λ₁ (textbook).
    #[test]
    fn quadratic_functions_agree_with_their_closed_forms() {
        let basis = Lagrange::new(Shape::Triangle, 2).unwrap();
        let (x, y) = (0.2, 0.7);
        let hats = [1.0 - x - y, x, y];
        let values = basis.values(&[x, y]);
        for i in 0..3 {
            assert!((values[i] - hats[i] * (2.0 * hats[i] - 1.0)).abs() < 1e-15);
            assert!((values[3 + i] - 4.0 * hats[i] * hats[(i + 1) % 3]).abs() < 1e-15);
        }
    }

    /// Largest Σ|φᵢ| on a fine lattice: what interpolation can lose against the best approximation.
    fn lebesgue(shape: Shape, order: usize) -> f64 {
        let basis = Lagrange::new(shape, order).unwrap();
        let n = 120;
        let lattice: Vec<[f64; 2]> = match shape {
            Shape::Interval => (0..=20 * n).map(|i| [i as f64 / (20 * n) as f64, 0.0]).collect(),
            Shape::Triangle => {
                let point = |i: usize, j: usize| [i as f64 / n as f64, j as f64 / n as f64];
                (0..=n).flat_map(|j| (0..=n - j).map(move |i| point(i, j))).collect()
            }
        };
        let table = basis.table(&lattice);
        (0..lattice.len()).map(|p| table.values_at(p).iter().map(|v| v.abs()).sum()).fold(0.0, f64::max)
    }

    /// Closed forms at orders 2 and 3 of the interval (5/4, 3/2) and 2 of the triangle (5/3); the others as measured on the
    /// lattice, to be held. On the interval they grow like (2/π) ln n.
    #[test]
    fn lebesgue_constants_stay_small() {
        let interval = [1.0, 1.25, 1.5, 1.636, 1.779, 1.874, 1.972, 2.046, 2.121, 2.181, 2.242, 2.292];
        let triangle = [1.0, 5.0 / 3.0, 2.112, 2.678, 3.408, 3.901, 4.479, 5.102, 5.859, 6.766, 8.026, 9.473];
        for order in 1..=Lagrange::HIGHEST_ORDER {
            for (shape, stated) in [(Shape::Interval, interval[order - 1]), (Shape::Triangle, triangle[order - 1])] {
                let found = lebesgue(shape, order);
                assert!((found - stated).abs() < 1e-3, "{shape:?} {order}: {found}");
            }
        }
    }

    /// Element matrices ∫ φᵢ φⱼ and ∫ ∇φᵢ·∇φⱼ on the reference cell, by a rule of exact degree.
    fn matrices(shape: Shape, order: usize) -> (Vec<f64>, Vec<f64>) {
        let basis = Lagrange::new(shape, order).unwrap();
        let rule = Rule::of_degree(shape, 2 * order).unwrap();
        let (table, n) = (basis.table(rule.points()), basis.nodes().len());
        let (mut mass, mut stiffness) = (vec![0.0; n * n], vec![0.0; n * n]);
        for (q, w) in rule.weights().iter().enumerate() {
            let (v, g) = (table.values_at(q), table.gradients_at(q));
            for i in 0..n {
                for j in 0..n {
                    mass[i * n + j] += w * v[i] * v[j];
                    stiffness[i * n + j] += w * (g[i][0] * g[j][0] + g[i][1] * g[j][1]);
                }
            }
        }
        (mass, stiffness)
    }

    fn assert_multiple(matrix: &[f64], whole: f64, expected: &[f64]) {
        assert_eq!(matrix.len(), expected.len());
        for (k, (a, b)) in matrix.iter().zip(expected).enumerate() {
            assert!((a * whole - b).abs() < 1e-12, "entry {k}: {} for {b}", a * whole);
        }
    }

    /// Common textbook matrices of unit length and of the reference triangle; nodes: ends before the middle, vertices
    /// before the midpoints of sides (common practice).
    #[test]
    fn element_matrices_agree_with_the_textbook() {
        let (mass, stiffness) = matrices(Shape::Interval, 1);
        assert_multiple(&mass, 6.0, &[2.0, 1.0, 1.0, 2.0]);
        assert_multiple(&stiffness, 1.0, &[1.0, -1.0, -1.0, 1.0]);
        let (mass, stiffness) = matrices(Shape::Interval, 2);
        assert_multiple(&mass, 30.0, &[4.0, -1.0, 2.0, -1.0, 4.0, 2.0, 2.0, 2.0, 16.0]);
        assert_multiple(&stiffness, 3.0, &[7.0, 1.0, -8.0, 1.0, 7.0, -8.0, -8.0, -8.0, 16.0]);
        let (mass, stiffness) = matrices(Shape::Triangle, 1);
        assert_multiple(&mass, 24.0, &[2.0, 1.0, 1.0, 1.0, 2.0, 1.0, 1.0, 1.0, 2.0]);
        assert_multiple(&stiffness, 2.0, &[2.0, -1.0, -1.0, -1.0, 1.0, 0.0, -1.0, 0.0, 1.0]);
        let (mass, stiffness) = matrices(Shape::Triangle, 2);
        #[rustfmt::skip]
        assert_multiple(&mass, 360.0, &[
            6.0, -1.0, -1.0, 0.0, -4.0, 0.0,
            -1.0, 6.0, -1.0, 0.0, 0.0, -4.0,
            -1.0, -1.0, 6.0, -4.0, 0.0, 0.0,
            0.0, 0.0, -4.0, 32.0, 16.0, 16.0,
            -4.0, 0.0, 0.0, 16.0, 32.0, 16.0,
            0.0, -4.0, 0.0, 16.0, 16.0, 32.0,
        ]);
        #[rustfmt::skip]
        assert_multiple(&stiffness, 6.0, &[
            6.0, 1.0, 1.0, -4.0, 0.0, -4.0,
            1.0, 3.0, 0.0, -4.0, 0.0, 0.0,
            1.0, 0.0, 3.0, 0.0, 0.0, -4.0,
            -4.0, -4.0, 0.0, 16.0, -8.0, 0.0,
            0.0, 0.0, 0.0, -8.0, 16.0, -8.0,
            -4.0, 0.0, -4.0, 0.0, -8.0, 16.0,
        ]);
    }

    /// Linear functions on the triangle (0, 0), (4, 0), (1, 3): stiffness by mapped gradients (textbook).
    #[test]
    fn linear_stiffness_of_a_general_triangle() {
        let (jacobian, determinant) = ([[4.0, 1.0], [0.0, 3.0]], 12.0);
        let table = Lagrange::new(Shape::Triangle, 1).unwrap().table(&[[1.0 / 3.0; 2]]);
        // Gradients move by the inverse transpose.
        let mapped: Vec<[f64; 2]> = table
            .gradients_at(0)
            .iter()
            .map(|g| {
                let [[a, b], [c, d]]: [[f64; 2]; 2] = jacobian;
                [(d * g[0] - c * g[1]) / determinant, (a * g[1] - b * g[0]) / determinant]
            })
            .collect();
        let expected = [[0.75, -0.25, -0.5], [-0.25, 5.0 / 12.0, -1.0 / 6.0], [-0.5, -1.0 / 6.0, 2.0 / 3.0]];
        for i in 0..3 {
            for j in 0..3 {
                let entry = 0.5 * determinant * (mapped[i][0] * mapped[j][0] + mapped[i][1] * mapped[j][1]);
                assert!((entry - expected[i][j]).abs() < 1e-14);
            }
        }
    }

    #[test]
    fn orders_out_of_range_are_told() {
        for order in [0, 13] {
            assert!(matches!(Lagrange::new(Shape::Triangle, order), Err(ElementError::OutOfRange { .. })));
        }
    }
}
