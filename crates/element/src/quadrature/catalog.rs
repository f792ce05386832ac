//! Rules by name, and the trait by which users bring their own.

use super::{Kronrod, Rule, gauss, triangle};
use crate::{ElementError, Shape};

/// A way to integrate over reference cells: it makes a [`Rule`] for a shape.
///
/// Contract: the same rule every time; [`ElementError::WrongShape`] on a shape it does not know; the rule is exact up to
/// the degree it claims, which [`Quadrature::verified`] checks. Closures from a shape to a rule and rules themselves
/// are quadratures too.
///
/// ```
/// use hypercircle_element::{ElementError, Quadrature, Rule, Shape};
/// /// Corners and centroid of the triangle (A. H. Stroud, 1971).
/// #[derive(Debug)]
/// struct CornersAndMiddle;
/// impl Quadrature for CornersAndMiddle {
///     fn rule(&self, shape: Shape) -> Result<Rule, ElementError> {
///         if shape != Shape::Triangle {
///             return Err(ElementError::WrongShape { what: "the rule of corners and centroid", shape });
///         }
///         let points = vec![[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [1.0 / 3.0, 1.0 / 3.0]];
///         Rule::new(shape, points, vec![1.0 / 24.0, 1.0 / 24.0, 1.0 / 24.0, 3.0 / 8.0], 2)
///     }
/// }
/// assert_eq!(CornersAndMiddle.verified(Shape::Triangle)?.len(), 4);
/// # Ok::<(), ElementError>(())
/// ```
#[diagnostic::on_unimplemented(
    message = "`{Self}` cannot integrate over a reference cell",
    label = "not a quadrature",
    note = "take an `IntervalRule`, a `TriangleRule`, a `Rule`, a closure from `Shape` to `Result<Rule, ElementError>`, \
            or implement `Quadrature` with its one method `rule`"
)]
pub trait Quadrature {
    /// The rule on a shape.
    ///
    /// # Errors
    /// [`ElementError::WrongShape`] for a shape without such a rule, or what else is wrong with it.
    fn rule(&self, shape: Shape) -> Result<Rule, ElementError>;

    /// The rule on a shape, its claimed degree checked.
    ///
    /// # Errors
    /// As [`Quadrature::rule`]; [`ElementError::Inexact`] from [`Rule::verify`].
    fn verified(&self, shape: Shape) -> Result<Rule, ElementError> {
        let rule = self.rule(shape)?;
        rule.verify()?;
        Ok(rule)
    }
}

impl<F: Fn(Shape) -> Result<Rule, ElementError>> Quadrature for F {
    fn rule(&self, shape: Shape) -> Result<Rule, ElementError> {
        self(shape)
    }
}

impl Quadrature for Rule {
    fn rule(&self, shape: Shape) -> Result<Rule, ElementError> {
        if shape == self.shape() {
            Ok(self.clone())
        } else {
            Err(ElementError::WrongShape { what: "this tabulated rule", shape })
        }
    }
}

/// Named rules on the interval [0, 1].
///
/// ```
/// use hypercircle_element::{IntervalRule, Quadrature, Shape};
/// let simpson = IntervalRule::Simpson.rule(Shape::Interval)?;
/// assert_eq!(simpson.weights(), [1.0 / 6.0, 4.0 / 6.0, 1.0 / 6.0]);
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum IntervalRule {
    /// f(0): degree 0.
    LeftEndpoint,
    /// f(1): degree 0.
    RightEndpoint,
    /// f(½): degree 1.
    Midpoint,
    /// (f(0) + f(1)) / 2: degree 1.
    Trapezoid,
    /// (f(0) + 4 f(½) + f(1)) / 6: degree 3.
    Simpson,
    /// n ≥ 1 free points: degree 2n − 1, the highest for n points.
    GaussLegendre(usize),
    /// n ≥ 2 points, both ends among them: degree 2n − 3.
    GaussLobatto(usize),
    /// n ≥ 1 points, the left end among them: degree 2n − 2.
    GaussRadau(usize),
    /// n ≥ 1 points, the right end among them: degree 2n − 2.
    GaussRadauRight(usize),
    /// The extended rule of a Gauss–Kronrod pair: degree 23, 31 or 47.
    GaussKronrod(Kronrod),
}

impl IntervalRule {
    /// Most points offered for Gauss rules.
    pub const MOST_POINTS: usize = 50;
}

impl Quadrature for IntervalRule {
    fn rule(&self, shape: Shape) -> Result<Rule, ElementError> {
        if shape != Shape::Interval {
            return Err(ElementError::WrongShape { what: "a rule of the interval", shape });
        }
        let at =
            |points: &[f64], weights: &[f64]| (points.iter().map(|x| [*x, 0.0]).collect::<Vec<_>>(), weights.to_vec());
        let (lists, degree) = match *self {
            Self::LeftEndpoint => (at(&[0.0], &[1.0]), 0),
            Self::RightEndpoint => (at(&[1.0], &[1.0]), 0),
            Self::Midpoint => (at(&[0.5], &[1.0]), 1),
            Self::Trapezoid => (at(&[0.0, 1.0], &[0.5, 0.5]), 1),
            Self::Simpson => (at(&[0.0, 0.5, 1.0], &[1.0 / 6.0, 4.0 / 6.0, 1.0 / 6.0]), 3),
            Self::GaussLegendre(n) => (gauss::interval(points_within(n, 1)?), 2 * n - 1),
            Self::GaussLobatto(n) => (gauss::lobatto(points_within(n, 2)?), 2 * n - 3),
            Self::GaussRadau(n) => (gauss::radau(points_within(n, 1)?), 2 * n - 2),
            Self::GaussRadauRight(n) => {
                let (points, weights) = gauss::radau(points_within(n, 1)?);
                let mirrored = points.iter().rev().map(|x| [1.0 - x[0], 0.0]).collect();
                ((mirrored, weights.into_iter().rev().collect()), 2 * n - 2)
            }
            Self::GaussKronrod(pair) => (pair.extended(), pair.degree()),
        };
        Ok(Rule::trusted(shape, lists, degree))
    }
}

fn points_within(n: usize, least: usize) -> Result<usize, ElementError> {
    let what = "number of points of a Gauss rule";
    if n < least {
        return Err(ElementError::TooFew { what, value: n, least });
    }
    if n > IntervalRule::MOST_POINTS {
        return Err(ElementError::OutOfRange { what, value: n, limit: IntervalRule::MOST_POINTS });
    }
    Ok(n)
}

/// Named rules on the triangle (0, 0), (1, 0), (0, 1).
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum TriangleRule {
    /// The three vertices: degree 1, the lumping rule of linear functions.
    Vertices,
    /// The three midpoints of sides: degree 2.
    SideMidpoints,
    /// Fully symmetric, positive weights, inner points, exact to the degree asked for: up to degree 25.
    Symmetric(usize),
    /// Gauss × Gauss on the square, collapsed to the triangle: any degree up to [`Rule::HIGHEST_DEGREE`].
    CollapsedGauss(usize),
}

impl TriangleRule {
    /// Highest degree of [`TriangleRule::Symmetric`].
    pub const HIGHEST_SYMMETRIC: usize = triangle::HIGHEST_SYMMETRIC;
}

impl Quadrature for TriangleRule {
    fn rule(&self, shape: Shape) -> Result<Rule, ElementError> {
        if shape != Shape::Triangle {
            return Err(ElementError::WrongShape { what: "a rule of the triangle", shape });
        }
        let (lists, degree) = match *self {
            Self::Vertices => ((shape.vertices().to_vec(), vec![1.0 / 6.0; 3]), 1),
            Self::SideMidpoints => ((vec![[0.5, 0.0], [0.5, 0.5], [0.0, 0.5]], vec![1.0 / 6.0; 3]), 2),
            Self::Symmetric(value) => match triangle::symmetric(value) {
                Some((degree, orbits)) => (triangle::points_of(orbits), degree),
                None => {
                    let limit = Self::HIGHEST_SYMMETRIC;
                    return Err(ElementError::OutOfRange { what: "degree of a symmetric rule", value, limit });
                }
            },
            Self::CollapsedGauss(value) if value > Rule::HIGHEST_DEGREE => {
                let limit = Rule::HIGHEST_DEGREE;
                return Err(ElementError::OutOfRange { what: "degree of a quadrature rule", value, limit });
            }
            Self::CollapsedGauss(degree) => (triangle::collapsed(degree), degree),
        };
        Ok(Rule::trusted(shape, lists, degree))
    }
}

/// A rule repeated on equal pieces of the cell: `pieces` intervals, or `pieces`² congruent triangles.
///
/// ```
/// use hypercircle_element::{Composite, IntervalRule, Quadrature, Shape};
/// let rule = Composite { rule: IntervalRule::Trapezoid, pieces: 4 }.rule(Shape::Interval)?;
/// let sum: f64 = rule.points().iter().zip(rule.weights()).map(|(x, w)| w * x[0] * x[0]).sum();
/// assert!((sum - (1.0 / 3.0 + 1.0 / 96.0)).abs() < 1e-15); // the error is h² (f′(1) − f′(0)) / 12
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Composite<Q> {
    /// The rule on each piece.
    pub rule: Q,
    /// Number of pieces along each side of the cell.
    pub pieces: usize,
}

impl<Q> Composite<Q> {
    /// Most pieces along a side.
    pub const MOST_PIECES: usize = 1000;
}

impl<Q: Quadrature> Quadrature for Composite<Q> {
    fn rule(&self, shape: Shape) -> Result<Rule, ElementError> {
        let (what, value) = ("number of pieces of a composite rule", self.pieces);
        if value == 0 {
            return Err(ElementError::TooFew { what, value, least: 1 });
        }
        if value > Self::MOST_PIECES {
            return Err(ElementError::OutOfRange { what, value, limit: Self::MOST_PIECES });
        }
        let one = self.rule.rule(shape)?;
        let n = value as f64;
        let (mut points, mut weights) = (Vec::new(), Vec::new());
        let mut piece = |corner: [f64; 2], sign: f64| {
            for (x, w) in one.points().iter().zip(one.weights()) {
                points.push([0, 1].map(|i| (corner[i] + sign * x[i]) / n));
                weights.push(w / n.powi(shape.dimension() as i32));
            }
        };
        match shape {
            Shape::Interval => (0..value).for_each(|i| piece([i as f64, 0.0], 1.0)),
            Shape::Triangle => {
                for (i, j) in (0..value).flat_map(|j| (0..value - j).map(move |i| (i, j))) {
                    piece([i as f64, j as f64], 1.0);
                    if i + j + 1 < value {
                        piece([(i + 1) as f64, (j + 1) as f64], -1.0);
                    }
                }
            }
        }
        Rule::new(shape, points, weights, one.degree())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Every named rule of the interval with its textbook degree.
    fn interval_rules() -> Vec<(IntervalRule, usize)> {
        use IntervalRule::*;
        let mut list = vec![(LeftEndpoint, 0), (RightEndpoint, 0), (Midpoint, 1), (Trapezoid, 1), (Simpson, 3)];
        for n in 1..=20 {
            list.extend([(GaussLegendre(n), 2 * n - 1), (GaussRadau(n), 2 * n - 2), (GaussRadauRight(n), 2 * n - 2)]);
            list.extend((n > 1).then(|| (GaussLobatto(n), 2 * n - 3)));
        }
        let pairs = [(Kronrod::Points15, 23), (Kronrod::Points21, 31), (Kronrod::Points31, 47)];
        list.extend(pairs.map(|(pair, degree)| (GaussKronrod(pair), degree)));
        list
    }

    fn triangle_rules() -> Vec<TriangleRule> {
        let mut list = vec![TriangleRule::Vertices, TriangleRule::SideMidpoints];
        for degree in 0..=25 {
            list.extend([TriangleRule::Symmetric(degree), TriangleRule::CollapsedGauss(degree)]);
        }
        list
    }

    /// Sum of w x^a y^b divided by its closed formula, less one.
    fn error(rule: &Rule, [a, b]: [usize; 2]) -> f64 {
        let sum: f64 =
            rule.points().iter().zip(rule.weights()).map(|(x, w)| w * x[0].powi(a as i32) * x[1].powi(b as i32)).sum();
        let factorial = |n: usize| (1..=n).map(|k| k as f64).product::<f64>();
        let exact = match rule.shape() {
            Shape::Interval => 1.0 / (a as f64 + 1.0),
            Shape::Triangle => factorial(a) * factorial(b) / factorial(a + b + 2),
        };
        (sum / exact - 1.0).abs()
    }

    #[test]
    fn interval_rules_are_exact_to_their_degree() {
        for (named, degree) in interval_rules() {
            let rule = named.rule(Shape::Interval).unwrap();
            assert_eq!(rule.degree(), degree, "{named:?}");
            for k in 0..=degree {
                assert!(error(&rule, [k, 0]) < 1e-14, "{named:?} x^{k}: {:e}", error(&rule, [k, 0]));
            }
        }
    }

    /// The error of x^(d + 1) is at least 4^(−d − 1) or so: seen while it stays above rounding.
    #[test]
    fn the_next_degree_is_not_exact() {
        for (named, degree) in interval_rules().into_iter().filter(|r| r.1 < 20) {
            let rule = named.rule(Shape::Interval).unwrap();
            assert!(error(&rule, [degree + 1, 0]) > 1e-13, "{named:?}");
            let claims = Rule::new(rule.shape(), rule.points().to_vec(), rule.weights().to_vec(), degree + 1).unwrap();
            let told = claims.verify();
            assert!(degree > 16 || matches!(told, Err(ElementError::Inexact { .. })), "{named:?}: {told:?}");
        }
        for named in triangle_rules() {
            let rule = named.rule(Shape::Triangle).unwrap();
            let next = rule.degree() + 1;
            let worst = (0..=next).map(|b| error(&rule, [next - b, b])).fold(0.0, f64::max);
            assert!(worst > 1e-13 || matches!(named, TriangleRule::CollapsedGauss(_)), "{named:?}: {worst:e}");
        }
    }

    #[test]
    fn triangle_rules_are_exact_to_their_degree() {
        for named in triangle_rules() {
            let rule = named.rule(Shape::Triangle).unwrap();
            for (a, b) in (0..=rule.degree()).flat_map(|d| (0..=d).map(move |b| (d - b, b))) {
                assert!(error(&rule, [a, b]) < 1e-14, "{named:?} x^{a} y^{b}: {:e}", error(&rule, [a, b]));
            }
        }
    }

    #[test]
    fn composite_rules_keep_the_degree_and_gain_accuracy() {
        let errors: Vec<f64> = [1, 2, 4, 8]
            .iter()
            .map(|pieces| {
                let rule =
                    Composite { rule: TriangleRule::Symmetric(2), pieces: *pieces }.verified(Shape::Triangle).unwrap();
                assert_eq!(rule.len(), 3 * pieces * pieces);
                error(&rule, [3, 1])
            })
            .collect();
        // Degree 2: third order at least, fourth for symmetric pairs of triangles.
        assert!(errors.windows(2).all(|e| e[0] / e[1] > 7.0), "{errors:?}");
        for (named, _) in interval_rules() {
            Composite { rule: named, pieces: 3 }.verified(Shape::Interval).unwrap();
        }
    }

    #[test]
    fn bad_wishes_are_told() {
        let make = |q: &dyn Quadrature, shape| q.rule(shape).unwrap_err();
        assert!(matches!(make(&IntervalRule::Simpson, Shape::Triangle), ElementError::WrongShape { .. }));
        assert!(matches!(make(&TriangleRule::Vertices, Shape::Interval), ElementError::WrongShape { .. }));
        let tabulated = Rule::of_degree(Shape::Interval, 2).unwrap();
        assert!(matches!(make(&tabulated, Shape::Triangle), ElementError::WrongShape { .. }));
        assert!(matches!(make(&IntervalRule::GaussLobatto(1), Shape::Interval), ElementError::TooFew { least: 2, .. }));
        assert!(matches!(make(&IntervalRule::GaussRadau(0), Shape::Interval), ElementError::TooFew { .. }));
        assert!(matches!(make(&IntervalRule::GaussLegendre(51), Shape::Interval), ElementError::OutOfRange { .. }));
        assert!(matches!(make(&TriangleRule::Symmetric(26), Shape::Triangle), ElementError::OutOfRange { .. }));
        assert!(matches!(make(&TriangleRule::CollapsedGauss(101), Shape::Triangle), ElementError::OutOfRange { .. }));
        let none = Composite { rule: IntervalRule::Midpoint, pieces: 0 };
        assert!(matches!(make(&none, Shape::Interval), ElementError::TooFew { .. }));
    }

    #[test]
    fn closures_are_quadratures() {
        let own = |shape| Rule::of_degree(shape, 3);
        assert_eq!(own.verified(Shape::Interval).unwrap().len(), 2);
    }
}
