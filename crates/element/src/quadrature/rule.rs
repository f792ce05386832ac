//! Points and weights.

use super::{gauss, triangle};
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
    shape: Shape,
    points: Vec<[f64; 2]>,
    weights: Vec<f64>,
    degree: usize,
}

impl Rule {
    /// Highest degree offered by [`Rule::of_degree`].
    pub const HIGHEST_DEGREE: usize = 100;

    /// Largest relative error of a monomial that [`Rule::verify`] lets pass.
    pub const TOLERANCE: f64 = 1e-12;

    /// A rule with positive weights and inner points, exact for all polynomials up to `degree`.
    ///
    /// Gauss–Legendre on the interval; on the triangle fully symmetric rules of few points up to degree 25 and collapsed
    /// Gauss rules above. It assumes that the integrand is close to a polynomial of that degree on the cell; for kinks and
    /// singularities see [`Adaptive`](crate::Adaptive).
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
        Ok(Self { shape, points, weights, degree })
    }

    /// A rule of your own: points in reference coordinates (the second one 0 on the interval), weights whose sum should
    /// be the measure of the reference cell, and the degree up to which it is exact. The degree is taken at its word:
    /// [`Rule::verify`] checks it.
    ///
    /// ```
    /// use hypercircle_element::{Rule, Shape};
    /// let corners = Rule::new(Shape::Triangle, vec![[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]], vec![1.0 / 6.0; 3], 1)?;
    /// corners.verify()?;
    /// # Ok::<(), hypercircle_element::ElementError>(())
    /// ```
    ///
    /// # Errors
    /// [`ElementError::UnequalLengths`] (also for no points at all), [`ElementError::NotFinite`],
    /// [`ElementError::OutsideCell`] for points outside the closed cell by more than rounding (1e-14), and
    /// [`ElementError::OutOfRange`] for a degree above [`Rule::HIGHEST_DEGREE`].
    pub fn new(shape: Shape, points: Vec<[f64; 2]>, weights: Vec<f64>, degree: usize) -> Result<Self, ElementError> {
        if points.len() != weights.len() || points.is_empty() {
            return Err(ElementError::UnequalLengths { points: points.len(), weights: weights.len() });
        }
        if degree > Self::HIGHEST_DEGREE {
            let limit = Self::HIGHEST_DEGREE;
            return Err(ElementError::OutOfRange { what: "degree of a quadrature rule", value: degree, limit });
        }
        for (index, at) in points.iter().enumerate() {
            if !at.iter().all(|x| x.is_finite()) {
                return Err(ElementError::NotFinite { what: "point", index });
            }
            if !inside(shape, *at) {
                return Err(ElementError::OutsideCell { index, at: *at, shape });
            }
        }
        if let Some(index) = weights.iter().position(|w| !w.is_finite()) {
            return Err(ElementError::NotFinite { what: "weight", index });
        }
        Ok(Self { shape, points, weights, degree })
    }

    /// A rule whose makers in this crate answer for points, weights and degree.
    pub(super) fn trusted(shape: Shape, (points, weights): (Vec<[f64; 2]>, Vec<f64>), degree: usize) -> Self {
        Self { shape, points, weights, degree }
    }

    /// Checks the claimed degree: every monomial xᵃ yᵇ up to it must be integrated to [`Rule::TOLERANCE`] (relative).
    ///
    /// Closed formulas: 1/(k + 1) on the interval, a! b! / (a + b + 2)! on the triangle (A. H. Stroud, Approximate
    /// Calculation of Multiple Integrals, 1971).
    ///
    /// # Errors
    /// [`ElementError::Inexact`] with the first monomial that fails, by ascending degree.
    pub fn verify(&self) -> Result<(), ElementError> {
        for monomial in monomials(self.shape, self.degree) {
            let (value, exact) = (self.monomial(monomial), monomial_integral(self.shape, monomial));
            if !((value / exact - 1.0).abs() <= Self::TOLERANCE) {
                return Err(ElementError::Inexact { degree: self.degree, monomial, value, exact });
            }
        }
        Ok(())
    }

    /// What the rule gives for xᵃ yᵇ.
    fn monomial(&self, [a, b]: [usize; 2]) -> f64 {
        self.points.iter().zip(&self.weights).map(|(x, w)| w * x[0].powi(a as i32) * x[1].powi(b as i32)).sum()
    }

    /// The shape of the reference cell.
    #[must_use]
    pub fn shape(&self) -> Shape {
        self.shape
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

    /// Whether the rule has no points: never.
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

fn inside(shape: Shape, at: [f64; 2]) -> bool {
    let slack = 1e-14;
    let [x, y] = at;
    match shape {
        Shape::Interval => (-slack..=1.0 + slack).contains(&x) && y == 0.0,
        Shape::Triangle => x >= -slack && y >= -slack && x + y <= 1.0 + slack,
    }
}

/// Exponents of all monomials up to a degree, by ascending degree.
fn monomials(shape: Shape, degree: usize) -> Vec<[usize; 2]> {
    match shape {
        Shape::Interval => (0..=degree).map(|k| [k, 0]).collect(),
        Shape::Triangle => (0..=degree).flat_map(|d| (0..=d).map(move |b| [d - b, b])).collect(),
    }
}

/// Integral of a monomial over the reference cell.
fn monomial_integral(shape: Shape, [a, b]: [usize; 2]) -> f64 {
    match shape {
        Shape::Interval => 1.0 / (a as f64 + 1.0),
        // a! b! / (a + b)! factor by factor: factorials lose digits.
        Shape::Triangle => {
            let ratio: f64 = (1..=b).map(|k| k as f64 / (a + k) as f64).product();
            ratio / ((a + b + 1) * (a + b + 2)) as f64
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const SHAPES: [Shape; 2] = [Shape::Interval, Shape::Triangle];

    /// Largest relative error of the monomials up to the claimed degree.
    fn error(rule: &Rule) -> f64 {
        monomials(rule.shape, rule.degree)
            .into_iter()
            .map(|m| (rule.monomial(m) / monomial_integral(rule.shape, m) - 1.0).abs())
            .fold(0.0, f64::max)
    }

    #[test]
    fn rules_of_a_degree_are_exact_to_rounding() {
        for shape in SHAPES {
            for degree in 0..=40 {
                let rule = Rule::of_degree(shape, degree).unwrap();
                assert!(error(&rule) < 1e-14, "{shape:?} {degree}: {:e}", error(&rule));
            }
            for degree in 41..=Rule::HIGHEST_DEGREE {
                Rule::of_degree(shape, degree).unwrap().verify().unwrap();
            }
        }
    }

    /// Some values of a! b! / (a + b + 2)! as fractions (A. H. Stroud, 1971).
    #[test]
    fn monomial_integrals_agree_with_fractions() {
        for ([a, b], whole) in [([0, 0], 2.0), ([1, 1], 24.0), ([3, 2], 420.0), ([4, 4], 6300.0), ([7, 1], 720.0)] {
            for exponents in [[a, b], [b, a]] {
                assert!((monomial_integral(Shape::Triangle, exponents) * whole - 1.0).abs() < 1e-15);
            }
        }
    }

    #[test]
    fn a_claim_too_high_names_degree_and_monomial() {
        let midpoint = Rule::new(Shape::Interval, vec![[0.5, 0.0]], vec![1.0], 2).unwrap();
        let told = midpoint.verify().unwrap_err();
        assert!(matches!(told, ElementError::Inexact { degree: 2, monomial: [2, 0], .. }), "{told}");
        let centroid = Rule::new(Shape::Triangle, vec![[1.0 / 3.0; 2]], vec![0.5], 3).unwrap();
        let told = centroid.verify().unwrap_err();
        assert!(matches!(told, ElementError::Inexact { degree: 3, monomial: [2, 0], .. }), "{told}");
    }

    #[test]
    fn bad_lists_are_told_with_their_place() {
        let make =
            |points: Vec<[f64; 2]>, weights: Vec<f64>| Rule::new(Shape::Triangle, points, weights, 0).unwrap_err();
        assert_eq!(make(vec![], vec![]), ElementError::UnequalLengths { points: 0, weights: 0 });
        assert_eq!(make(vec![[0.1; 2]], vec![0.2; 2]), ElementError::UnequalLengths { points: 1, weights: 2 });
        assert_eq!(
            make(vec![[0.1; 2], [f64::NAN, 0.0]], vec![0.2; 2]),
            ElementError::NotFinite { what: "point", index: 1 }
        );
        assert_eq!(make(vec![[0.1; 2]], vec![f64::INFINITY]), ElementError::NotFinite { what: "weight", index: 0 });
        let outside = ElementError::OutsideCell { index: 0, at: [0.6, 0.6], shape: Shape::Triangle };
        assert_eq!(make(vec![[0.6; 2]], vec![0.5]), outside);
        assert!(Rule::new(Shape::Interval, vec![[0.5, 0.1]], vec![1.0], 0).is_err());
        assert!(Rule::new(Shape::Interval, vec![[0.5, 0.0]], vec![1.0], 101).is_err());
        assert!(matches!(Rule::of_degree(Shape::Interval, 101), Err(ElementError::OutOfRange { .. })));
    }
}
