//! Raviart–Thomas vector fields on the triangle: normal components continuous across sides.

use crate::dense::inverse;
use crate::orthonormal::{orthonormal, polynomial_count, unit_legendre};
use crate::{ElementError, Lagrange, Rule, Shape};

/// The space RT_q = [P_q]² + x P̃_q on the reference triangle, with moments as degrees of freedom.
///
/// The (q + 1)(q + 3) moments of a field s come in this order:
/// 1. side 0, side 1, side 2, for each the q + 1 numbers ∫₀¹ (s·N) ℓⱼ dt, with N the outward normal of the length of
///    the side, t the walk along the side and ℓⱼ the orthonormal Legendre polynomials: number 0 is the flow
///    out through the side;
/// 2. inside, ∫ s·e₁ vᵢ and then ∫ s·e₂ vᵢ with vᵢ the orthonormal polynomials of degree q − 1.
///
/// Fields move to a cell by the Piola map s(x) = J ŝ / det J, which keeps the moments of sides and of the divergence.
///
/// Source: P.-A. Raviart, J.-M. Thomas, Lecture Notes in Mathematics 606 (1977).
///
/// ```
/// use hypercircle_element::RaviartThomas;
/// let lowest = RaviartThomas::new(0)?;
/// // The field of unit flow out of side 0 (along y = 0) is (x, y − 1).
/// let fields = lowest.fields(&[0.25, 0.5]);
/// assert!((fields[0][0] - 0.25).abs() < 1e-15 && (fields[0][1] + 0.5).abs() < 1e-15);
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
#[derive(Debug, Clone)]
pub struct RaviartThomas {
    order: usize,
    /// Field j is Σᵢ coefficients[i·n + j] times the i-th raw field.
    coefficients: Vec<f64>,
}

impl RaviartThomas {
    /// Highest order offered.
    pub const HIGHEST_ORDER: usize = 12;

    /// The space of an order q ≥ 0.
    ///
    /// # Errors
    /// [`ElementError::OutOfRange`] above [`RaviartThomas::HIGHEST_ORDER`].
    pub fn new(order: usize) -> Result<Self, ElementError> {
        if order > Self::HIGHEST_ORDER {
            let limit = Self::HIGHEST_ORDER;
            return Err(ElementError::OutOfRange { what: "order of a Raviart–Thomas space", value: order, limit });
        }
        let n = (order + 1) * (order + 3);
        let raw = moments_of(order, |at| raw_fields(order, at).into_iter().map(|f| f.0).collect())?;
        Ok(Self { order, coefficients: inverse(raw, n)? })
    }

    /// Order q.
    #[must_use]
    pub fn order(&self) -> usize {
        self.order
    }

    /// Number of moments, (q + 1)(q + 3).
    #[must_use]
    pub fn moment_count(&self) -> usize {
        (self.order + 1) * (self.order + 3)
    }

    /// Number of moments on each side, q + 1.
    #[must_use]
    pub fn side_moment_count(&self) -> usize {
        self.order + 1
    }

    /// All fields of the basis at a reference point.
    #[must_use]
    pub fn fields(&self, at: &[f64; 2]) -> Vec<[f64; 2]> {
        let n = self.moment_count();
        let mut fields = vec![[0.0; 2]; n];
        for (i, (raw, _)) in raw_fields(self.order, at).into_iter().enumerate() {
            for (j, field) in fields.iter_mut().enumerate() {
                let c = self.coefficients[i * n + j];
                field[0] += c * raw[0];
                field[1] += c * raw[1];
            }
        }
        fields
    }

    /// Divergences of all fields of the basis at a reference point.
    #[must_use]
    pub fn divergences(&self, at: &[f64; 2]) -> Vec<f64> {
        let n = self.moment_count();
        let mut divergences = vec![0.0; n];
        for (i, (_, raw)) in raw_fields(self.order, at).into_iter().enumerate() {
            for (j, divergence) in divergences.iter_mut().enumerate() {
                *divergence += self.coefficients[i * n + j] * raw;
            }
        }
        divergences
    }

    /// The matrix of ∫ (div sⱼ) vᵢ, row-major: one row for each orthonormal polynomial vᵢ of degree q, one column for
    /// each moment.
    ///
    /// # Errors
    /// As [`Rule::of_degree`].
    pub fn divergence_moments(&self) -> Result<Vec<f64>, ElementError> {
        let n = self.moment_count();
        let rule = Rule::of_degree(Shape::Triangle, 2 * self.order)?;
        let mut matrix = vec![0.0; polynomial_count(Shape::Triangle, self.order) * n];
        for (at, w) in rule.points().iter().zip(rule.weights()) {
            let divergences = self.divergences(at);
            for (i, v) in orthonormal(Shape::Triangle, self.order, at).iter().enumerate() {
                for j in 0..n {
                    matrix[i * n + j] += w * v[0] * divergences[j];
                }
            }
        }
        Ok(matrix)
    }

    /// Moments of the curls (∂φ/∂y, −∂φ/∂x) of the Lagrange functions of order q + 1, row-major: one row for each
    /// moment, one column for each Lagrange function.
    ///
    /// # Errors
    /// As [`Lagrange::new`].
    pub fn curl_moments(&self) -> Result<Vec<f64>, ElementError> {
        let stream = Lagrange::new(Shape::Triangle, self.order + 1)?;
        let columns = stream.nodes().len();
        let by_field =
            moments_of(self.order, |at| stream.table(&[*at]).gradients_at(0).iter().map(|g| [g[1], -g[0]]).collect())?;
        debug_assert_eq!(by_field.len(), self.moment_count() * columns);
        Ok(by_field)
    }
}

/// Raw fields with their divergences: P_q e₁, P_q e₂, then x times the polynomials of exact degree q.
fn raw_fields(order: usize, at: &[f64; 2]) -> Vec<([f64; 2], f64)> {
    let jets = orthonormal(Shape::Triangle, order, at);
    let first: Vec<_> = jets.iter().map(|p| ([p[0], 0.0], p[1])).collect();
    let second = jets.iter().map(|p| ([0.0, p[0]], p[2]));
    let radial = jets[jets.len() - order - 1..]
        .iter()
        .map(|p| ([at[0] * p[0], at[1] * p[0]], 2.0 * p[0] + at[0] * p[1] + at[1] * p[2]));
    first.into_iter().chain(second).chain(radial).collect()
}

/// The matrix of moments (rows) of a list of fields (columns).
fn moments_of(order: usize, fields: impl Fn(&[f64; 2]) -> Vec<[f64; 2]>) -> Result<Vec<f64>, ElementError> {
    let mut rows: Vec<Vec<f64>> = Vec::new();
    let columns = fields(&[0.0, 0.0]).len();
    let line = Rule::of_degree(Shape::Interval, 2 * order + 1)?;
    for side in 0..3 {
        let ends = Shape::Triangle.side_vertices(side);
        let [a, b] = [Shape::Triangle.vertices()[ends[0]], Shape::Triangle.vertices()[ends[1]]];
        let normal = [b[1] - a[1], a[0] - b[0]];
        let mut moments = vec![vec![0.0; columns]; order + 1];
        for (t, w) in line.points().iter().zip(line.weights()) {
            let at = [0, 1].map(|i| a[i] + t[0] * (b[i] - a[i]));
            let values = fields(&at);
            for (row, l) in moments.iter_mut().zip(unit_legendre(order, t[0])) {
                for (entry, s) in row.iter_mut().zip(&values) {
                    *entry += w * l * (s[0] * normal[0] + s[1] * normal[1]);
                }
            }
        }
        rows.extend(moments);
    }
    if order > 0 {
        let rule = Rule::of_degree(Shape::Triangle, 2 * order)?;
        for component in 0..2 {
            let mut moments = vec![vec![0.0; columns]; polynomial_count(Shape::Triangle, order - 1)];
            for (at, w) in rule.points().iter().zip(rule.weights()) {
                let values = fields(at);
                for (row, v) in moments.iter_mut().zip(orthonormal(Shape::Triangle, order - 1, at)) {
                    for (entry, s) in row.iter_mut().zip(&values) {
                        *entry += w * v[0] * s[component];
                    }
                }
            }
            rows.extend(moments);
        }
    }
    Ok(rows.concat())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn basis_has_unit_moments() {
        for order in 0..=6 {
            let space = RaviartThomas::new(order).unwrap();
            let n = space.moment_count();
            let moments = moments_of(order, |at| space.fields(at)).unwrap();
            for i in 0..n {
                for j in 0..n {
                    assert!((moments[i * n + j] - f64::from(u8::from(i == j))).abs() < 1e-11, "{order} {i} {j}");
                }
            }
        }
    }

    /// Divergence theorem: the integral of the divergence is the sum of the flows out through the sides.
    #[test]
    fn divergence_integral_is_the_flow_through_the_sides() {
        for order in 0..=5 {
            let space = RaviartThomas::new(order).unwrap();
            let n = space.moment_count();
            let matrix = space.divergence_moments().unwrap();
            for j in 0..n {
                let out = f64::from(u8::from(j % (order + 1) == 0 && j < 3 * (order + 1)));
                let integral = matrix[j] / 2.0_f64.sqrt(); // the first orthonormal polynomial is √2
                assert!((integral - out).abs() < 1e-12, "{order} {j}: {integral}");
            }
        }
    }

    #[test]
    fn curls_have_no_divergence_and_lie_in_the_space() {
        for order in 0..=4 {
            let space = RaviartThomas::new(order).unwrap();
            let stream = Lagrange::new(Shape::Triangle, order + 1).unwrap();
            let (n, columns) = (space.moment_count(), stream.nodes().len());
            let (curls, divergence) = (space.curl_moments().unwrap(), space.divergence_moments().unwrap());
            for k in 0..columns {
                for i in 0..polynomial_count(Shape::Triangle, order) {
                    let sum: f64 = (0..n).map(|j| divergence[i * n + j] * curls[j * columns + k]).sum();
                    assert!(sum.abs() < 1e-11);
                }
                let at = [0.31, 0.27];
                let gradient = stream.table(&[at]).gradients_at(0)[k];
                let field = space.fields(&at).iter().enumerate().fold([0.0; 2], |sum, (j, f)| {
                    let c = curls[j * columns + k];
                    [sum[0] + c * f[0], sum[1] + c * f[1]]
                });
                assert!((field[0] - gradient[1]).abs() < 1e-11 && (field[1] + gradient[0]).abs() < 1e-11);
            }
        }
    }
}
