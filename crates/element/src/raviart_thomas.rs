//! Raviart–Thomas vector fields: normal components continuous across sides.

use crate::dense::inverse;
use crate::orthonormal::{orthonormal, polynomial_count, unit_legendre};
use crate::{ElementError, Lagrange, Rule, Shape};

/// The space RT_q with moments as degrees of freedom: (P_q)² + x P̃_q on the reference triangle, its counterpart
/// P_{q+1} on the interval.
///
/// The moments of a field s come in this order:
/// 1. side 0, side 1, …, on the triangle for each the q + 1 numbers ∫₀¹ (s·N) ℓⱼ dt, with N the outward normal of the
///    length of the side, t the walk along the side and ℓⱼ the orthonormal Legendre polynomials: number 0 is the flow
///    out through the side; on the interval just that flow for each end;
/// 2. inside, ∫ s·e₁ vᵢ and then (triangle) ∫ s·e₂ vᵢ with vᵢ the orthonormal polynomials of degree q − 1.
///
/// These are (q + 1)(q + 3) on the triangle and q + 2 on the interval.
///
/// Fields move to a cell by the Piola map s(x) = J ŝ / det J, which keeps the moments of sides and of the divergence.
///
/// Source: P.-A. Raviart, J.-M. Thomas, Lecture Notes in Mathematics 606 (1977).
///
/// ```
/// use hypercircle_element::{RaviartThomas, Shape};
/// let lowest = RaviartThomas::new(Shape::Triangle, 0)?;
/// // The field of unit flow out of side 0 (along y = 0) is (x, y − 1).
/// let fields = lowest.fields(&[0.25, 0.5]);
/// assert!((fields[0][0] - 0.25).abs() < 1e-15 && (fields[0][1] + 0.5).abs() < 1e-15);
/// # Ok::<(), hypercircle_element::ElementError>(())
/// ```
#[derive(Debug, Clone)]
pub struct RaviartThomas {
    shape: Shape,
    order: usize,
    moments: usize,
    /// Field j is Σᵢ coefficients[i·n + j] times the i-th raw field.
    coefficients: Vec<f64>,
}

impl RaviartThomas {
    /// Highest order offered.
    pub const HIGHEST_ORDER: usize = 12;

    /// The space of an order q ≥ 0 on a shape.
    ///
    /// # Errors
    /// [`ElementError::OutOfRange`] above [`RaviartThomas::HIGHEST_ORDER`].
    pub fn new(shape: Shape, order: usize) -> Result<Self, ElementError> {
        if order > Self::HIGHEST_ORDER {
            let limit = Self::HIGHEST_ORDER;
            return Err(ElementError::OutOfRange { what: "order of a Raviart–Thomas space", value: order, limit });
        }
        let raw = moments_of(shape, order, |at| raw_fields(shape, order, at).into_iter().map(|f| f.0).collect())?;
        let moments = raw_fields(shape, order, &[0.0; 2]).len();
        Ok(Self { shape, order, moments, coefficients: inverse(raw, moments)? })
    }

    /// Order q.
    #[must_use]
    pub fn order(&self) -> usize {
        self.order
    }

    /// The shape of the reference cell.
    #[must_use]
    pub fn shape(&self) -> Shape {
        self.shape
    }

    /// Number of moments.
    #[must_use]
    pub fn moment_count(&self) -> usize {
        self.moments
    }

    /// Number of moments on each side: q + 1 on the triangle, one on the interval.
    #[must_use]
    pub fn side_moment_count(&self) -> usize {
        match self.shape {
            Shape::Interval => 1,
            Shape::Triangle => self.order + 1,
        }
    }

    /// All fields of the basis at a reference point.
    #[must_use]
    pub fn fields(&self, at: &[f64; 2]) -> Vec<[f64; 2]> {
        let n = self.moment_count();
        let mut fields = vec![[0.0; 2]; n];
        for (i, (raw, _)) in raw_fields(self.shape, self.order, at).into_iter().enumerate() {
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
        for (i, (_, raw)) in raw_fields(self.shape, self.order, at).into_iter().enumerate() {
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
        let rule = Rule::of_degree(self.shape, 2 * self.order)?;
        let mut matrix = vec![0.0; polynomial_count(self.shape, self.order) * n];
        for (at, w) in rule.points().iter().zip(rule.weights()) {
            let divergences = self.divergences(at);
            for (i, v) in orthonormal(self.shape, self.order, at).iter().enumerate() {
                for j in 0..n {
                    matrix[i * n + j] += w * v[0] * divergences[j];
                }
            }
        }
        Ok(matrix)
    }

    /// The matrix that completes a field: from the moments of its sides (first) and of its divergence (then), to its inner
    /// moments of least sum of squares, row-major with one row for each inner moment.
    ///
    /// The total flow out through the sides must agree with the integral of the divergence: the first moment of the
    /// divergence is not read.
    ///
    /// # Errors
    /// As [`Rule::of_degree`].
    pub fn completion(&self) -> Result<Vec<f64>, ElementError> {
        let n = self.moment_count();
        let sides = self.shape.vertex_count() * self.side_moment_count();
        let (inner, tests) = (n - sides, polynomial_count(self.shape, self.order));
        let divergence = self.divergence_moments()?;
        // Rows 1.. of the divergence, inner columns: B x = d − D m has the least solution Bᵀ(BBᵀ)⁻¹(d − D m).
        let b = |i: usize, j: usize| divergence[(i + 1) * n + sides + j];
        let mut gram = vec![0.0; (tests - 1) * (tests - 1)];
        for i in 0..tests - 1 {
            for k in 0..tests - 1 {
                gram[i * (tests - 1) + k] = (0..inner).map(|j| b(i, j) * b(k, j)).sum();
            }
        }
        let gram = inverse(gram, tests - 1)?;
        let mut matrix = vec![0.0; inner * (sides + tests)];
        for j in 0..inner {
            for k in 0..tests - 1 {
                let weight: f64 = (0..tests - 1).map(|i| b(i, j) * gram[i * (tests - 1) + k]).sum();
                matrix[j * (sides + tests) + sides + k + 1] += weight;
                for m in 0..sides {
                    matrix[j * (sides + tests) + m] -= weight * divergence[(k + 1) * n + m];
                }
            }
        }
        Ok(matrix)
    }

    /// Moments of the curls (∂φ/∂y, −∂φ/∂x) of the Lagrange functions of order q + 1, row-major: one row for each
    /// moment, one column for each Lagrange function. For the triangle.
    ///
    /// # Errors
    /// As [`Lagrange::new`].
    pub fn curl_moments(&self) -> Result<Vec<f64>, ElementError> {
        let stream = Lagrange::new(self.shape, self.order + 1)?;
        moments_of(self.shape, self.order, |at| {
            stream.table(&[*at]).gradients_at(0).iter().map(|g| [g[1], -g[0]]).collect()
        })
    }
}

/// Raw fields with their divergences: P_q e₁, P_q e₂, then x times the polynomials of exact degree q; on the interval
/// P_{q+1}.
fn raw_fields(shape: Shape, order: usize, at: &[f64; 2]) -> Vec<([f64; 2], f64)> {
    if shape == Shape::Interval {
        return orthonormal(shape, order + 1, at).iter().map(|p| ([p[0], 0.0], p[1])).collect();
    }
    let jets = orthonormal(shape, order, at);
    let first = jets.iter().map(|p| ([p[0], 0.0], p[1]));
    let second = jets.iter().map(|p| ([0.0, p[0]], p[2]));
    let radial = jets[jets.len() - order - 1..]
        .iter()
        .map(|p| ([at[0] * p[0], at[1] * p[0]], 2.0 * p[0] + at[0] * p[1] + at[1] * p[2]));
    first.chain(second).chain(radial).collect()
}

/// The matrix of moments (rows) of a list of fields (columns).
fn moments_of(
    shape: Shape,
    order: usize,
    fields: impl Fn(&[f64; 2]) -> Vec<[f64; 2]>,
) -> Result<Vec<f64>, ElementError> {
    let mut rows: Vec<Vec<f64>> = Vec::new();
    let columns = fields(&[0.0, 0.0]).len();
    let along = if shape == Shape::Interval { 0 } else { order };
    let line = Rule::of_degree(Shape::Interval, 2 * along + 1)?;
    for side in 0..shape.vertex_count() {
        let ends = shape.side_vertices(side);
        let [a, b] = [shape.vertices()[ends[0]], shape.vertices()[ends[ends.len() - 1]]];
        let normal = match shape {
            Shape::Interval => [2.0 * side as f64 - 1.0, 0.0],
            Shape::Triangle => [b[1] - a[1], a[0] - b[0]],
        };
        let mut moments = vec![vec![0.0; columns]; along + 1];
        for (t, w) in line.points().iter().zip(line.weights()) {
            let at = [0, 1].map(|i| a[i] + t[0] * (b[i] - a[i]));
            let values = fields(&at);
            for (row, l) in moments.iter_mut().zip(unit_legendre(along, t[0])) {
                for (entry, s) in row.iter_mut().zip(&values) {
                    *entry += w * l * (s[0] * normal[0] + s[1] * normal[1]);
                }
            }
        }
        rows.extend(moments);
    }
    if order > 0 {
        let rule = Rule::of_degree(shape, 2 * order + 1)?;
        for component in 0..shape.dimension() {
            let mut moments = vec![vec![0.0; columns]; polynomial_count(shape, order - 1)];
            for (at, w) in rule.points().iter().zip(rule.weights()) {
                let values = fields(at);
                for (row, v) in moments.iter_mut().zip(orthonormal(shape, order - 1, at)) {
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

    const SHAPES: [Shape; 2] = [Shape::Interval, Shape::Triangle];

    #[test]
    fn basis_has_unit_moments() {
        for (shape, order) in SHAPES.into_iter().flat_map(|s| (0..=6).map(move |q| (s, q))) {
            let space = RaviartThomas::new(shape, order).unwrap();
            let n = space.moment_count();
            let moments = moments_of(shape, order, |at| space.fields(at)).unwrap();
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
        for (shape, order) in SHAPES.into_iter().flat_map(|s| (0..=5).map(move |q| (s, q))) {
            let space = RaviartThomas::new(shape, order).unwrap();
            let (n, per_side) = (space.moment_count(), space.side_moment_count());
            let matrix = space.divergence_moments().unwrap();
            for j in 0..n {
                let out = f64::from(u8::from(j % per_side == 0 && j < shape.vertex_count() * per_side));
                let integral = matrix[j] * shape.measure().sqrt(); // the first orthonormal polynomial is constant
                assert!((integral - out).abs() < 1e-12, "{order} {j}: {integral}");
            }
        }
    }

    #[test]
    fn completed_fields_have_the_divergence_asked_for() {
        for (shape, order) in SHAPES.into_iter().flat_map(|s| (0..=4).map(move |q| (s, q))) {
            let space = RaviartThomas::new(shape, order).unwrap();
            let (n, sides) = (space.moment_count(), shape.vertex_count() * space.side_moment_count());
            let tests = polynomial_count(shape, order);
            let mut given: Vec<f64> = (0..sides + tests).map(|k| ((7 * k + 3) % 11) as f64 - 5.0).collect();
            let out: f64 = given[..sides].iter().step_by(space.side_moment_count()).sum();
            given[sides] = out / shape.measure().sqrt();
            let completion = space.completion().unwrap();
            let mut moments = given[..sides].to_vec();
            moments.extend(completion.chunks_exact(sides + tests).map(|row| dot(row, &given)));
            for (row, wanted) in space.divergence_moments().unwrap().chunks_exact(n).zip(&given[sides..]) {
                assert!((dot(row, &moments) - wanted).abs() < 1e-10);
            }
        }
    }

    fn dot(a: &[f64], b: &[f64]) -> f64 {
        a.iter().zip(b).map(|(x, y)| x * y).sum()
    }

    #[test]
    fn curls_have_no_divergence_and_lie_in_the_space() {
        for order in 0..=4 {
            let space = RaviartThomas::new(Shape::Triangle, order).unwrap();
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
