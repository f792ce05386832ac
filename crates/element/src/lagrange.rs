//! Lagrange bases: one at their own node and zero at the others.

use crate::dense::inverse;
use crate::orthonormal::{legendre, orthonormal, polynomial_count};
use crate::{ElementError, Shape, Table};

/// Nodal basis of the polynomials of a degree on a reference cell.
///
/// Nodes come in this order: vertices; then the inner nodes of side 0, side 1, … of a triangle, each in walking order of the
/// side; then inner nodes of the cell. Nodes on sides are Gauss–Lobatto points, inner ones of the triangle the points
/// ⅓(1 + 2vᵢ − vⱼ − vₖ) made from them (M. G. Blyth, C. Pozrikidis, IMA J. Appl. Math. 71, 2006).
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

/// Gauss–Lobatto points on [0, 1]: the ends and the zeros of P′ₙ, by Newton's method.
fn lobatto(n: usize) -> Vec<f64> {
    let mut points = vec![0.0; n + 1];
    points[n] = 1.0;
    for k in 1..n {
        let mut z = -(std::f64::consts::PI * k as f64 / n as f64).cos();
        for _ in 0..50 {
            let (value, slope) = legendre(n, z);
            // Legendre's equation gives the second derivative.
            let curvature = (2.0 * z * slope - (n * (n + 1)) as f64 * value) / (1.0 - z * z);
            let step = slope / curvature;
            z -= step;
            if step.abs() < 1e-16 {
                break;
            }
        }
        points[k] = 0.5 * (1.0 + z);
    }
    points
}

fn nodes(shape: Shape, order: usize) -> Vec<[f64; 2]> {
    let line = lobatto(order);
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
                for i in 1..order - j {
                    let k = order - i - j;
                    let third = |a: usize, b: usize, c: usize| (1.0 + 2.0 * line[a] - line[b] - line[c]) / 3.0;
                    nodes.push([third(i, j, k), third(j, i, k)]);
                }
            }
        }
    }
    nodes
}

#[cfg(test)]
mod tests {
    use super::*;

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

    #[test]
    fn orders_out_of_range_are_told() {
        for order in [0, 13] {
            assert!(matches!(Lagrange::new(Shape::Triangle, order), Err(ElementError::OutOfRange { .. })));
        }
    }
}
