//! Quadrature rules on the reference cells.

mod gauss;
mod triangle;

use crate::{ElementError, Shape};

/// Points and weights on a reference cell: ∫ f ≈ Σ wᵢ f(xᵢ), exact for polynomials up to a degree.
///
/// ```
/// use hypercircle_element::{Rule, Shape};
/// let rule = Rule::of_degree(Shape::Triangle, 4)?;
/// let integral: f64 = rule.points().iter().zip(rule.weights()).map(|(x, w)| w * x[0].powi(3) * x[1]).sum();
/// assert!((integral - 1.0 / 120.0).abs() < 1e-16); // a! b! / (a + b + 2)!
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
#[derive(Debug, Clone, PartialEq)]
pub struct Rule {
    points: Vec<[f64; 2]>,
    weights: Vec<f64>,
    degree: usize,
}

impl Rule {
    /// Highest degree offered by [`Rule::of_degree`].
    pub const HIGHEST_DEGREE: usize = 100;

    /// A rule with positive weights and inner points, exact for all polynomials up to `degree`.
    ///
    /// Gauss–Legendre on the interval; on the triangle symmetric rules of 1, 6 and 12 points up to the degrees 1, 4
    /// and 6 and collapsed Gauss rules above.
    ///
    /// # Errors
    /// [`ElementError::OutOfRange`] above [`Rule::HIGHEST_DEGREE`].
    pub fn of_degree(shape: Shape, degree: usize) -> Result<Self, ElementError> {
        if degree > Self::HIGHEST_DEGREE {
            let limit = Self::HIGHEST_DEGREE;
            return Err(ElementError::OutOfRange { what: "degree of a quadrature rule", value: degree, limit });
        }
        let (points, weights) = match shape {
            Shape::Interval => gauss::interval(degree / 2 + 1),
            Shape::Triangle => triangle::of_degree(degree),
        };
        Ok(Self { points, weights, degree })
    }

    /// Reference coordinates of the points; the second coordinate is 0 on the interval.
    #[must_use]
    pub fn points(&self) -> &[[f64; 2]] {
        &self.points
    }

    /// Weights; their sum is the measure of the reference cell.
    #[must_use]
    pub fn weights(&self) -> &[f64] {
        &self.weights
    }

    /// Number of points.
    #[must_use]
    pub fn len(&self) -> usize {
        self.weights.len()
    }

    /// Whether the rule has no points: never, for rules made here.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.weights.is_empty()
    }

    /// Polynomials up to this degree are integrated exactly.
    #[must_use]
    pub fn degree(&self) -> usize {
        self.degree
    }
}
