//! Hierarchic bases: raising the order adds functions and changes none.

use std::ops::Range;

use crate::orthonormal::{Jet, legendre, orthonormal, times};
use crate::{ElementError, Shape, Table};

/// Hierarchic basis on a reference cell, with an order of its own for each side.
///
/// On the interval: the two hats, then for k = 2 … p the integrated Legendre functions
/// Nₖ(t) = ∫₀ᵗ ℓₖ₋₁, zero at both ends, whose derivatives are orthonormal.
///
/// On the triangle: the three hats; for side 0, 1, 2 with the ends a, b and k = 2 … pₛ the functions
/// λₐ λ_b Nₖ(t) / (t (1 − t)) at t = (1 + λ_b − λₐ)/2, which are Nₖ on the side and zero on the other two; then the
/// bubbles 27 λ₀ λ₁ λ₂ v with the orthonormal polynomials v of degree p − 3.
///
/// Where cells of different orders meet, give their common side the lower one ([`Hierarchic::common_order`]): then both see
/// the same functions on it. Cells that walk along a side in opposite directions see Nₖ(1 − t) = (−1)ᵏ Nₖ(t):
/// [`Hierarchic::sign_against`].
///
/// Source: B. Szabó, I. Babuška, Finite Element Analysis, 1991 (sides); any independent bubbles complete the space.
///
/// ```
/// use hypercircle_element::{Hierarchic, Shape};
/// let basis = Hierarchic::new(Shape::Triangle, 4)?;
/// assert_eq!(basis.function_count(), 15); // all of P₄
/// let next_to_quadratic = Hierarchic::with_side_orders(4, [4, 2, 4])?;
/// assert_eq!(next_to_quadratic.side_functions(1).len(), 1);
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Hierarchic {
    shape: Shape,
    order: usize,
    /// Orders on the sides of a triangle; all one on the interval.
    sides: [usize; 3],
}

impl Hierarchic {
    /// Highest order offered.
    pub const HIGHEST_ORDER: usize = 12;

    /// The basis of all polynomials of an order.
    ///
    /// # Errors
    /// [`ElementError::TooFew`] for order 0, [`ElementError::OutOfRange`] above [`Hierarchic::HIGHEST_ORDER`].
    pub fn new(shape: Shape, order: usize) -> Result<Self, ElementError> {
        order_within("order of a hierarchic basis", order, Self::HIGHEST_ORDER)?;
        Ok(Self { shape, order, sides: if shape == Shape::Interval { [1; 3] } else { [order; 3] } })
    }

    /// The basis on the triangle of an order inside and possibly lower orders on the sides 0, 1, 2.
    ///
    /// # Errors
    /// [`ElementError::TooFew`] for order 0, [`ElementError::OutOfRange`] for an order above
    /// [`Hierarchic::HIGHEST_ORDER`] and for a side above the order of the cell.
    pub fn with_side_orders(order: usize, sides: [usize; 3]) -> Result<Self, ElementError> {
        order_within("order of a hierarchic basis", order, Self::HIGHEST_ORDER)?;
        for side in sides {
            order_within("order on a side of a hierarchic basis", side, order)?;
        }
        Ok(Self { shape: Shape::Triangle, order, sides })
    }

    /// The order for a side between cells of two orders: the lower one.
    #[must_use]
    pub fn common_order(one: usize, other: usize) -> usize {
        one.min(other)
    }

    /// The factor of the side function of degree k ≥ 2 for a cell that walks along the side against the direction agreed
    /// upon: (−1)ᵏ.
    #[must_use]
    pub fn sign_against(degree: usize) -> f64 {
        if degree.is_multiple_of(2) { 1.0 } else { -1.0 }
    }

    /// The shape of the reference cell.
    #[must_use]
    pub fn shape(&self) -> Shape {
        self.shape
    }

    /// Order inside the cell.
    #[must_use]
    pub fn order(&self) -> usize {
        self.order
    }

    /// Order on a side of a triangle; 1 for the ends of an interval. Sides are numbered modulo their count.
    #[must_use]
    pub fn side_order(&self, side: usize) -> usize {
        self.sides[side % self.shape.vertex_count()]
    }

    /// Number of functions.
    #[must_use]
    pub fn function_count(&self) -> usize {
        self.inner_functions().end
    }

    /// Numbers of the functions of a side, of the degrees 2, 3, …; none on an interval. Sides are numbered modulo their
    /// count.
    #[must_use]
    pub fn side_functions(&self, side: usize) -> Range<usize> {
        let (count, side) = (self.shape.vertex_count(), side % self.shape.vertex_count());
        let start = count + self.sides[..side].iter().map(|p| p - 1).sum::<usize>();
        start..start + self.sides[side] - 1
    }

    /// Numbers of the functions that vanish on all sides.
    #[must_use]
    pub fn inner_functions(&self) -> Range<usize> {
        let start = self.side_functions(self.shape.vertex_count() - 1).end;
        let count = match self.shape {
            Shape::Interval => self.order - 1,
            Shape::Triangle => (self.order - 1) * self.order.saturating_sub(2) / 2,
        };
        start..start + count
    }

    /// Values of all functions at a reference point.
    #[must_use]
    pub fn values(&self, at: &[f64; 2]) -> Vec<f64> {
        self.jets(at).iter().map(|jet| jet[0]).collect()
    }

    /// Values and reference gradients of all functions at points.
    #[must_use]
    pub fn table(&self, points: &[[f64; 2]]) -> Table {
        let n = self.function_count();
        let (mut values, mut gradients) = (Vec::with_capacity(points.len() * n), Vec::with_capacity(points.len() * n));
        for jet in points.iter().flat_map(|at| self.jets(at)) {
            values.push(jet[0]);
            gradients.push([jet[1], jet[2]]);
        }
        Table::new(n, values, gradients)
    }

    fn jets(&self, at: &[f64; 2]) -> Vec<Jet> {
        let hats = hat_jets(self.shape, at);
        let mut jets = hats[..self.shape.vertex_count()].to_vec();
        match self.shape {
            Shape::Interval => jets.extend(along(hats[0], hats[1], self.order)),
            Shape::Triangle => {
                for side in 0..3 {
                    jets.extend(along(hats[side], hats[(side + 1) % 3], self.sides[side]));
                }
                if self.order >= 3 {
                    let bubble = times(times(hats[0], hats[1]), hats[2]).map(|v| 27.0 * v);
                    jets.extend(orthonormal(self.shape, self.order - 3, at).into_iter().map(|v| times(bubble, v)));
                }
            }
        }
        jets
    }
}

/// The functions λₐ λ_b Nₖ / (t (1 − t)) for k = 2 … `order`.
///
/// Legendre's equation gives Nₖ = −2 √(2k − 1) / (k (k − 1)) · t (1 − t) P′ₖ₋₁(2t − 1), so that the quotient is a polynomial.
fn along(a: Jet, b: Jet, order: usize) -> impl Iterator<Item = Jet> {
    let ends = times(a, b);
    let z = [0, 1, 2].map(|i| b[i] - a[i]);
    (2..=order).map(move |k| {
        let factor = -2.0 * ((2 * k - 1) as f64).sqrt() / (k * (k - 1)) as f64;
        let (slope, curvature) = legendre_slopes(k - 1, z[0]);
        times(ends, [slope, curvature * z[1], curvature * z[2]]).map(|v| factor * v)
    })
}

/// P′ₙ and P″ₙ by P′ₘ₊₁ = P′ₘ₋₁ + (2m + 1) Pₘ (NIST DLMF 18.9.19), which holds at the ends too.
fn legendre_slopes(n: usize, z: f64) -> (f64, f64) {
    let (mut slope, mut curvature) = (0.0, 0.0);
    for m in (0..n).rev().step_by(2) {
        let (value, own) = legendre(m, z);
        let factor = (2 * m + 1) as f64;
        slope += factor * value;
        curvature += factor * own;
    }
    (slope, curvature)
}

/// The hats with their derivatives.
fn hat_jets(shape: Shape, at: &[f64; 2]) -> [Jet; 3] {
    let values = shape.hats(at);
    match shape {
        Shape::Interval => [[values[0], -1.0, 0.0], [values[1], 1.0, 0.0], [0.0; 3]],
        Shape::Triangle => [[values[0], -1.0, -1.0], [values[1], 1.0, 0.0], [values[2], 0.0, 1.0]],
    }
}

fn order_within(what: &'static str, value: usize, limit: usize) -> Result<(), ElementError> {
    if value == 0 {
        return Err(ElementError::TooFew { what, value, least: 1 });
    }
    if value > limit {
        return Err(ElementError::OutOfRange { what, value, limit });
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::dense::inverse;
    use crate::{Lagrange, Rule, polynomial_count, unit_legendre};

    const SHAPES: [Shape; 2] = [Shape::Interval, Shape::Triangle];

    /// A point of a side at the walk t.
    fn on_side(side: usize, t: f64) -> [f64; 2] {
        let ends = Shape::Triangle.side_vertices(side);
        let [a, b] = [Shape::Triangle.vertices()[ends[0]], Shape::Triangle.vertices()[ends[1]]];
        [0, 1].map(|i| a[i] + t * (b[i] - a[i]))
    }

    /// Expansions in orthonormal polynomials form a square matrix that has an inverse.
    #[test]
    fn functions_span_all_polynomials_of_the_order() {
        for (shape, order) in SHAPES.into_iter().flat_map(|s| (1..=12).map(move |p| (s, p))) {
            let basis = Hierarchic::new(shape, order).unwrap();
            let n = polynomial_count(shape, order);
            assert_eq!(basis.function_count(), n);
            let rule = Rule::of_degree(shape, 2 * order).unwrap();
            let mut matrix = vec![0.0; n * n];
            let mut norms = vec![0.0; n];
            for (x, w) in rule.points().iter().zip(rule.weights()) {
                let values = basis.values(x);
                for (j, norm) in norms.iter_mut().enumerate() {
                    *norm += w * values[j] * values[j];
                }
                for (i, v) in orthonormal(shape, order, x).iter().enumerate() {
                    for j in 0..n {
                        matrix[i * n + j] += w * v[0] * values[j];
                    }
                }
            }
            // Parseval: the expansion holds all of each function, so that none leaves the space.
            for j in 0..n {
                let sum: f64 = (0..n).map(|i| matrix[i * n + j].powi(2)).sum();
                assert!((sum / norms[j] - 1.0).abs() < 1e-12, "{shape:?} {order} {j}");
            }
            inverse(matrix, n).unwrap();
        }
    }

    /// On the interval the derivatives of the inner functions are the orthonormal Legendre polynomials (Szabó and Babuška).
    #[test]
    fn derivatives_on_the_interval_are_orthonormal() {
        let basis = Hierarchic::new(Shape::Interval, 12).unwrap();
        for t in [0.0, 0.2, 0.77, 1.0] {
            let table = basis.table(&[[t, 0.0]]);
            for (k, l) in unit_legendre(11, t).into_iter().enumerate().skip(1) {
                assert!((table.gradients_at(0)[k + 1][0] - l).abs() < 1e-13, "{k} at {t}");
            }
        }
        assert!(basis.values(&[1.0, 0.0])[2..].iter().all(|v| *v == 0.0));
    }

    #[test]
    fn side_functions_vanish_on_the_other_sides_and_bubbles_on_all() {
        let basis = Hierarchic::new(Shape::Triangle, 12).unwrap();
        let line = Hierarchic::new(Shape::Interval, 12).unwrap();
        for (side, t) in (0..3).flat_map(|s| [0.0, 0.1, 0.5, 0.93, 1.0].map(|t| (s, t))) {
            let values = basis.values(&on_side(side, t));
            assert!(basis.inner_functions().all(|j| values[j].abs() < 1e-13));
            for other in 0..3 {
                for (k, j) in basis.side_functions(other).enumerate() {
                    let expected = if other == side { line.values(&[t, 0.0])[2 + k] } else { 0.0 };
                    assert!((values[j] - expected).abs() < 1e-14, "side {other} seen on {side} at {t}");
                }
            }
        }
    }

    /// Two cells that share a side: each with its own order and vertex numbers, the side walked from opposite ends.
    #[test]
    fn cells_of_different_order_conform_across_a_side() {
        let common = Hierarchic::common_order(7, 4);
        for (mine, theirs) in (0..9).map(|k| (k / 3, k % 3)) {
            let mut sides = [7; 3];
            sides[mine] = common;
            let one = Hierarchic::with_side_orders(7, sides).unwrap();
            let other = Hierarchic::new(Shape::Triangle, 4).unwrap();
            assert_eq!(one.side_functions(mine).len(), other.side_functions(theirs).len());
            for t in [0.15, 0.4, 0.85] {
                let (here, there) = (one.values(&on_side(mine, t)), other.values(&on_side(theirs, 1.0 - t)));
                for (k, (i, j)) in one.side_functions(mine).zip(other.side_functions(theirs)).enumerate() {
                    assert!((here[i] - Hierarchic::sign_against(k + 2) * there[j]).abs() < 1e-14);
                }
            }
        }
    }

    #[test]
    fn lower_orders_are_among_the_higher() {
        for shape in SHAPES {
            let (low, high) = (Hierarchic::new(shape, 5).unwrap(), Hierarchic::new(shape, 9).unwrap());
            let at = [0.21, 0.34];
            let (few, many) = (low.values(&at), high.values(&at));
            let pairs = (0..shape.vertex_count())
                .flat_map(|s| low.side_functions(s).zip(high.side_functions(s)))
                .chain(low.inner_functions().zip(high.inner_functions()));
            for (i, j) in pairs {
                assert!((few[i] - many[j]).abs() < 1e-15);
            }
        }
    }

    /// Gradients against those of the Lagrange interpolant, which is the function itself.
    #[test]
    fn gradients_are_those_of_the_interpolant() {
        for shape in SHAPES {
            let basis = Hierarchic::new(shape, 8).unwrap();
            let nodal = Lagrange::new(shape, 8).unwrap();
            let at = [[0.27, if shape == Shape::Triangle { 0.41 } else { 0.0 }]];
            let (own, nodes, slopes) = (basis.table(&at), basis.table(nodal.nodes()), nodal.table(&at));
            for (j, i) in (0..basis.function_count()).flat_map(|j| [(j, 0), (j, 1)]) {
                let terms = slopes.gradients_at(0).iter().enumerate();
                let sum: f64 = terms.map(|(m, g)| nodes.values_at(m)[j] * g[i]).sum();
                assert!((own.gradients_at(0)[j][i] - sum).abs() < 1e-10);
            }
        }
    }

    #[test]
    fn orders_out_of_range_are_told() {
        assert!(matches!(Hierarchic::new(Shape::Interval, 0), Err(ElementError::TooFew { .. })));
        assert!(matches!(Hierarchic::new(Shape::Triangle, 13), Err(ElementError::OutOfRange { .. })));
        assert!(matches!(Hierarchic::with_side_orders(3, [3, 4, 1]), Err(ElementError::OutOfRange { limit: 3, .. })));
        assert!(matches!(Hierarchic::with_side_orders(3, [3, 0, 1]), Err(ElementError::TooFew { .. })));
        let linear = Hierarchic::new(Shape::Triangle, 1).unwrap();
        assert!(linear.function_count() == 3 && linear.side_functions(2).is_empty());
    }
}
