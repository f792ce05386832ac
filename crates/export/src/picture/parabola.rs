//! A polynomial of degree two at most over an interval.

/// The curve of a field in one cell.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Parabola {
    x: [f64; 2],
    /// Values at both ends and in the middle.
    u: [f64; 3],
}

impl Parabola {
    /// From both ends and the values at both ends and in the middle.
    pub(crate) fn new(x: [f64; 2], u: [f64; 3]) -> Self {
        Self { x, u }
    }

    /// The left end.
    pub(crate) fn start(&self) -> [f64; 2] {
        [self.x[0], self.u[0]]
    }

    /// The right end.
    pub(crate) fn end(&self) -> [f64; 2] {
        [self.x[1], self.u[1]]
    }

    /// The point at a share t of the way from the left to the right end.
    pub(crate) fn at(&self, t: f64) -> [f64; 2] {
        let [u, w, v] = self.u;
        let s = 1.0 - t;
        [s * self.x[0] + t * self.x[1], s * (s - t) * u + t * (t - s) * w + 4.0 * s * t * v]
    }

    /// The point where the tangents of both ends meet: with the ends it describes the parabola exactly.
    pub(crate) fn control(&self) -> [f64; 2] {
        [0.5 * (self.x[0] + self.x[1]), 2.0 * self.u[2] - 0.5 * (self.u[0] + self.u[1])]
    }

    /// Both ends and, in between, the top or bottom if it lies inside.
    pub(crate) fn candidates(&self) -> impl Iterator<Item = [f64; 2]> + use<> {
        let [u, w, v] = self.u;
        // u(t) = a t² + b t + u₀ for t from 0 to 1.
        let (a, b) = (2.0 * u - 4.0 * v + 2.0 * w, 4.0 * v - 3.0 * u - w);
        let t = -b / (2.0 * a);
        // Below the rounding of the coefficients the curve is straight.
        let bent = a.abs() > 1e-12 * (u.abs() + v.abs() + w.abs());
        let top = (bent && t > 0.0 && t < 1.0).then(|| [self.x[0] + t * (self.x[1] - self.x[0]), (a * t + b) * t + u]);
        [Some(self.start()), top, Some(self.end())].into_iter().flatten()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_top_lies_where_the_slope_is_zero() {
        let f = |x: f64| 3.0 - (x - 1.2) * (x - 1.2);
        let curve = Parabola::new([1.0, 2.0], [f(1.0), f(2.0), f(1.5)]);
        let all: Vec<[f64; 2]> = curve.candidates().collect();
        assert_eq!(all.len(), 3);
        assert!((all[1][0] - 1.2).abs() < 1e-13 && (all[1][1] - 3.0).abs() < 1e-13);
    }

    #[test]
    fn the_tangents_of_both_ends_meet_in_the_control_point() {
        let (f, slope) = (|x: f64| x * x - x, |x: f64| 2.0 * x - 1.0);
        let curve = Parabola::new([0.0, 4.0], [f(0.0), f(4.0), f(2.0)]);
        let [x, u] = curve.control();
        assert_eq!(u, f(0.0) + slope(0.0) * x);
        assert_eq!(u, f(4.0) + slope(4.0) * (x - 4.0));
    }

    #[test]
    fn points_of_the_curve_interpolate() {
        let curve = Parabola::new([0.0, 4.0], [0.0, 16.0, 4.0]);
        assert_eq!(curve.at(0.75), [3.0, 9.0]);
    }

    #[test]
    fn a_straight_curve_has_no_top() {
        assert_eq!(Parabola::new([0.0, 1.0], [0.1, 0.3, 0.2]).candidates().count(), 2);
    }
}
