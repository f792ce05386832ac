//! Integration of rough functions: cells are halved where the error estimate is largest.

use super::pieces::{Cell, Patch, Pieces, Segment, Tables};
use super::{Kronrod, Rule};
use crate::{ElementError, Shape};

/// Adaptive integration over an interval or a triangle.
///
/// The piece with the largest error estimate is halved until the sum of the estimates is at most
/// max(`absolute`, `relative` · |value|). On an interval the estimate of a piece is the difference of the two rules of a
/// Gauss–Kronrod pair, which share their points; on a triangle, halved across its longest side, the difference of the
/// symmetric rules of degrees 8 and 5 (16 and 7 points). A half keeps at least a small part of the estimate of the whole
/// (1/4096 on intervals, 1/64 on triangles), lest a jump that its points miss be forgotten. The better rule gives the
/// value, so that the estimate, which is of the worse one, is on the safe side for smooth functions; it is no proof: a
/// spike between all points stays unseen.
///
/// ```
/// use hypercircle_element::{Adaptive, IntegralEnd};
/// let root = Adaptive::default().interval(0.0, 1.0, f64::sqrt)?;
/// assert_eq!(root.end, IntegralEnd::Reached);
/// assert!((root.value - 2.0 / 3.0).abs() <= root.error);
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
///
/// # Source
/// P. J. Davis, P. Rabinowitz, Methods of Numerical Integration, 1984 (halving where the estimate is largest); D. P. Laurie,
/// Math. Comp. 66, 1997 (the pairs); M.-C. Rivara, Int. J. Numer. Methods Eng. 20, 1984 (longest sides).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Adaptive {
    /// Error allowed, in the unit of the integral.
    pub absolute: f64,
    /// Error allowed, as a part of the integral.
    pub relative: f64,
    /// Most evaluations of the function.
    pub most_evaluations: usize,
    /// The pair used on intervals.
    pub pair: Kronrod,
}

impl Default for Adaptive {
    /// Relative error 1e-10, at most a million evaluations, 7 and 15 points.
    fn default() -> Self {
        Self { absolute: 0.0, relative: 1e-10, most_evaluations: 1_000_000, pair: Kronrod::Points15 }
    }
}

/// What an adaptive integration ends with.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Integral {
    /// The integral, as far as it is known.
    pub value: f64,
    /// Estimate of its error; infinite if the function is not finite somewhere.
    pub error: f64,
    /// Number of evaluations of the function.
    pub evaluations: usize,
    /// Number of pieces.
    pub pieces: usize,
    /// Why it ended.
    pub end: IntegralEnd,
}

/// Why an adaptive integration ended.
#[derive(Debug, Clone, Copy, PartialEq)]
#[non_exhaustive]
pub enum IntegralEnd {
    /// The error estimate is within what was allowed.
    Reached,
    /// One more halving would pass the limit of evaluations: allow more, or a larger error.
    Limit,
    /// Rounding outweighs what was allowed, or the worst piece cannot be halved any more: allow a larger error.
    Rounding,
    /// The function is not finite at a point (second coordinate 0 on an interval): split the cell there, or subtract the
    /// singular part.
    NotFinite {
        /// The point.
        at: [f64; 2],
    },
}

impl Adaptive {
    /// Integral of a function from `a` to `b`; b < a changes the sign.
    ///
    /// # Errors
    /// [`ElementError::BadSetting`] for ends that are not finite and for errors allowed that are negative or not numbers.
    pub fn interval(&self, a: f64, b: f64, mut function: impl FnMut(f64) -> f64) -> Result<Integral, ElementError> {
        if let Some(value) = [a, b, b - a].into_iter().find(|x| !x.is_finite()) {
            return Err(ElementError::BadSetting { what: "end or length of an interval of integration", value });
        }
        let (points, weights) = self.pair.extended();
        let tables = Tables { points, better: weights, worse: self.pair.gauss_weights() };
        self.run(&tables, Segment { a, b }, |at| function(at[0]))
    }

    /// Integral of a function over a triangle given by its vertices, in the measure of their coordinates.
    ///
    /// # Errors
    /// [`ElementError::BadSetting`] for vertices that are not finite and for errors allowed that are negative or not
    /// numbers.
    pub fn triangle(
        &self,
        vertices: [[f64; 2]; 3],
        function: impl FnMut([f64; 2]) -> f64,
    ) -> Result<Integral, ElementError> {
        if let Some(value) = vertices.into_iter().flatten().find(|x| !x.is_finite()) {
            return Err(ElementError::BadSetting { what: "coordinate of a triangle of integration", value });
        }
        let (better, worse) = (Rule::of_degree(Shape::Triangle, 8)?, Rule::of_degree(Shape::Triangle, 5)?);
        let tables = Tables {
            points: [better.points(), worse.points()].concat(),
            better: [better.weights(), &vec![0.0; worse.len()]].concat(),
            worse: [&vec![0.0; better.len()], worse.weights()].concat(),
        };
        self.run(&tables, Patch { vertices }, function)
    }

    fn run<C: Cell>(
        &self,
        tables: &Tables,
        whole: C,
        mut function: impl FnMut([f64; 2]) -> f64,
    ) -> Result<Integral, ElementError> {
        for (what, value) in [("absolute error allowed", self.absolute), ("relative error allowed", self.relative)] {
            if !(value >= 0.0 && value.is_finite()) {
                return Err(ElementError::BadSetting { what, value });
            }
        }
        let mut pieces = Pieces::new();
        let mut inherited = 0.0;
        let mut evaluations = 0;
        let mut waiting = vec![whole];
        loop {
            for cell in waiting.drain(..) {
                evaluations += tables.points.len();
                match tables.piece(cell, inherited, &mut function) {
                    Ok(piece) => pieces.push(piece),
                    Err(at) => {
                        pieces.sum_up();
                        let found = result(&pieces, evaluations, IntegralEnd::NotFinite { at });
                        return Ok(Integral { error: f64::INFINITY, ..found });
                    }
                }
            }
            let halves = pieces.halves_of_worst();
            let full = evaluations + 2 * tables.points.len() > self.most_evaluations;
            if full || halves.is_none() || self.reached(&pieces) || pieces.must_recount() {
                pieces.sum_up();
                if self.reached(&pieces) {
                    return Ok(result(&pieces, evaluations, IntegralEnd::Reached));
                }
            }
            if full {
                return Ok(result(&pieces, evaluations, IntegralEnd::Limit));
            }
            let Some(halves) = halves else {
                return Ok(result(&pieces, evaluations, IntegralEnd::Rounding));
            };
            inherited = C::INHERITED * pieces.drop_worst();
            waiting.extend(halves);
        }
    }

    fn reached<C: Cell>(&self, pieces: &Pieces<C>) -> bool {
        pieces.error() <= self.absolute.max(self.relative * pieces.value().abs())
    }
}

fn result<C: Cell>(pieces: &Pieces<C>, evaluations: usize, end: IntegralEnd) -> Integral {
    Integral { value: pieces.value(), error: pieces.error(), evaluations, pieces: pieces.len(), end }
}

#[cfg(test)]
mod tests {
    use super::*;

    const REFERENCE: [[f64; 2]; 3] = [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]];

    #[test]
    fn rough_functions_on_the_interval() {
        let rough = Adaptive { relative: 1e-11, ..Adaptive::default() };
        for pair in [Kronrod::Points15, Kronrod::Points21, Kronrod::Points31] {
            let rough = Adaptive { pair, ..rough };
            // Closed forms: kink, root, logarithm, narrow peak (atan), oscillation.
            let kink = rough.interval(0.0, 1.0, |x| (x - 0.3).abs()).unwrap();
            let log = rough.interval(0.0, 1.0, f64::ln).unwrap();
            let peak = rough.interval(-1.0, 1.0, |x| 1.0 / (1e-6 + x * x)).unwrap();
            let wave = rough.interval(0.0, 1.0, |x| (200.0 * x).sin()).unwrap();
            let back = rough.interval(1.0, 0.0, f64::exp).unwrap();
            for (result, exact) in [
                (kink, 0.29),
                (log, -1.0),
                (peak, 2e3 * (1e3_f64).atan()),
                (wave, (1.0 - 200.0_f64.cos()) / 200.0),
                (back, 1.0 - std::f64::consts::E),
            ] {
                assert_eq!(result.end, IntegralEnd::Reached, "{exact}");
                assert!((result.value - exact).abs() <= result.error, "{result:?} {exact}");
                assert!((result.value / exact - 1.0).abs() < 1e-11, "{result:?} {exact}");
            }
        }
    }

    #[test]
    fn rough_functions_on_the_triangle() {
        let rough = Adaptive { relative: 1e-7, ..Adaptive::default() };
        // ∫ 1/r over the unit right triangle = √2 ln(1 + √2) by polar coordinates; ∫ |x − y| = 1/6.
        let pole = rough.triangle(REFERENCE, |x| 1.0 / x[0].hypot(x[1])).unwrap();
        let crease = rough.triangle(REFERENCE, |x| (x[0] - x[1]).abs()).unwrap();
        let root = 2.0_f64.sqrt();
        for (result, exact) in [(pole, root * (1.0 + root).ln()), (crease, 1.0 / 6.0)] {
            assert_eq!(result.end, IntegralEnd::Reached);
            assert!((result.value - exact).abs() <= result.error, "{result:?} {exact}");
        }
        // Area of a triangle walked clockwise.
        let area = rough.triangle([[0.0, 0.0], [1.0, 3.0], [4.0, 0.0]], |_| 1.0).unwrap();
        assert!((area.value - 6.0).abs() < 1e-14 && area.pieces == 1 && area.evaluations == 23);
    }

    /// ∫∫ of a step across a circle arc, π/16: half a million evaluations, slow convergence, still no surprise.
    #[test]
    fn many_pieces_end_at_the_limit_with_an_honest_error() {
        let step = |x: [f64; 2]| f64::from(u8::from(x[0].hypot(x[1]) < 0.5));
        let many = Adaptive { relative: 1e-9, most_evaluations: 500_000, ..Adaptive::default() };
        let result = many.triangle(REFERENCE, step).unwrap();
        let exact = std::f64::consts::PI / 16.0;
        assert!(result.end == IntegralEnd::Limit && result.evaluations > 499_900 && result.pieces > 10_000);
        assert!((result.value - exact).abs() < result.error && result.error < 1e-3, "{result:?}");
        assert_eq!(result, many.triangle(REFERENCE, step).unwrap()); // the same bits
    }

    #[test]
    fn ends_without_success_are_values() {
        let few = Adaptive { most_evaluations: 100, relative: 1e-14, ..Adaptive::default() };
        let result = few.interval(0.0, 1.0, f64::sqrt).unwrap();
        assert!(
            result.end == IntegralEnd::Limit
                && result.evaluations <= 100
                && (result.value - 2.0 / 3.0).abs() < result.error
        );
        let exact = Adaptive { relative: 0.0, ..Adaptive::default() };
        assert_eq!(exact.interval(0.0, 1.0, f64::exp).unwrap().end, IntegralEnd::Rounding);
        assert_eq!(exact.triangle(REFERENCE, |x| x[0].exp()).unwrap().end, IntegralEnd::Rounding);
        let result = Adaptive::default().interval(-1.0, 1.0, |x| 1.0 / x).unwrap();
        assert_eq!(result.end, IntegralEnd::NotFinite { at: [0.0, 0.0] });
        assert!(result.error.is_infinite());
    }

    #[test]
    fn bad_settings_are_told() {
        let bad = Adaptive { absolute: f64::NAN, ..Adaptive::default() };
        assert!(matches!(bad.interval(0.0, 1.0, f64::exp), Err(ElementError::BadSetting { .. })));
        let good = Adaptive::default();
        assert!(matches!(good.interval(0.0, f64::INFINITY, f64::exp), Err(ElementError::BadSetting { .. })));
        let vertices = [[0.0, 0.0], [f64::NAN, 0.0], [0.0, 1.0]];
        assert!(matches!(good.triangle(vertices, |_| 1.0), Err(ElementError::BadSetting { .. })));
    }
}
