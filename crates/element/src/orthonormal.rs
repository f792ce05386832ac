//! Orthonormal polynomials on the reference cells: Legendre on the interval, Dubiner's on the triangle.

use crate::Shape;

/// Legendre polynomial Pₙ and its derivative at z in [−1, 1], by the three-term recurrence.
pub(crate) fn legendre(n: usize, z: f64) -> (f64, f64) {
    let (mut before, mut now) = ((0.0, 0.0), (1.0, 0.0));
    for k in 0..n {
        let k = k as f64;
        let next = (
            ((2.0 * k + 1.0) * z * now.0 - k * before.0) / (k + 1.0),
            ((2.0 * k + 1.0) * (now.0 + z * now.1) - k * before.1) / (k + 1.0),
        );
        (before, now) = (now, next);
    }
    now
}

/// The orthonormal Legendre polynomials ℓ₀ … ℓₙ on [0, 1] at t.
///
/// ```
/// let l = hypercircle_element::unit_legendre(1, 0.5);
/// assert_eq!(l, vec![1.0, 0.0]);
/// ```
#[must_use]
pub fn unit_legendre(highest: usize, t: f64) -> Vec<f64> {
    (0..=highest).map(|n| (2.0 * n as f64 + 1.0).sqrt() * legendre(n, 2.0 * t - 1.0).0).collect()
}

/// A value with its two derivatives.
pub(crate) type Jet = [f64; 3];

pub(crate) fn times(a: Jet, b: Jet) -> Jet {
    [a[0] * b[0], a[1] * b[0] + a[0] * b[1], a[2] * b[0] + a[0] * b[2]]
}

fn combine(factor_a: f64, a: Jet, factor_b: f64, b: Jet) -> Jet {
    [0, 1, 2].map(|i| factor_a * a[i] + factor_b * b[i])
}

/// Number of polynomials of total degree up to `degree` on a shape.
#[must_use]
pub fn polynomial_count(shape: Shape, degree: usize) -> usize {
    match shape {
        Shape::Interval => degree + 1,
        Shape::Triangle => (degree + 1) * (degree + 2) / 2,
    }
}

/// Values of the orthonormal polynomials up to a degree at a reference point, sorted by degree; the first is constant.
///
/// ```
/// use hypercircle_element::{orthonormal_values, Shape};
/// let v = orthonormal_values(Shape::Triangle, 0, &[0.2, 0.3]);
/// assert!((v[0] - 2.0_f64.sqrt()).abs() < 1e-15); // its square integrates to one over the area 1/2
/// ```
#[must_use]
pub fn orthonormal_values(shape: Shape, degree: usize, at: &[f64; 2]) -> Vec<f64> {
    orthonormal(shape, degree, at).iter().map(|jet| jet[0]).collect()
}

/// The orthonormal polynomials up to a degree at a reference point, each with its derivatives, sorted by degree; the
/// first is constant.
///
/// On the triangle these are Qₘ(x, y) Jₙ(y) with Qₘ the Legendre polynomials scaled by (1 − y)ᵐ, and Jₙ the
/// Jacobi polynomials P⁽²ᵐ⁺¹'⁰⁾ (M. Dubiner, J. Sci. Comput. 6, 1991), evaluated by recurrences that hold at the apex too.
pub(crate) fn orthonormal(shape: Shape, degree: usize, at: &[f64; 2]) -> Vec<Jet> {
    match shape {
        Shape::Interval => (0..=degree)
            .map(|n| {
                let (value, slope) = legendre(n, 2.0 * at[0] - 1.0);
                let norm = (2.0 * n as f64 + 1.0).sqrt();
                [norm * value, 2.0 * norm * slope, 0.0]
            })
            .collect(),
        Shape::Triangle => {
            let [x, y] = *at;
            let along = [2.0 * x + y - 1.0, 2.0, 1.0];
            let height = [1.0 - y, 0.0, -1.0];
            let height_squared = times(height, height);
            let z = [2.0 * y - 1.0, 0.0, 2.0];
            let mut by_degree: Vec<Vec<Jet>> = vec![Vec::new(); degree + 1];
            let (mut before, mut now) = ([0.0; 3], [1.0, 0.0, 0.0]);
            for m in 0..=degree {
                for (n, jacobi) in jacobi_jets((2 * m + 1) as f64, degree - m, z).into_iter().enumerate() {
                    let norm = (2.0 * (2 * m + 1) as f64 * (m + n + 1) as f64).sqrt();
                    by_degree[m + n].push(times(now, jacobi).map(|v| norm * v));
                }
                let k = m as f64;
                let next = combine(
                    (2.0 * k + 1.0) / (k + 1.0),
                    times(along, now),
                    -k / (k + 1.0),
                    times(height_squared, before),
                );
                (before, now) = (now, next);
            }
            by_degree.concat()
        }
    }
}

/// Jacobi polynomials P⁽ᵃ'⁰⁾ of degree 0 … `highest` at z, with derivatives (NIST DLMF 18.9.2).
fn jacobi_jets(a: f64, highest: usize, z: Jet) -> Vec<Jet> {
    let mut list = vec![[1.0, 0.0, 0.0]];
    if highest > 0 {
        list.push(combine(0.5 * (a + 2.0), z, 0.5 * a, [1.0, 0.0, 0.0]));
    }
    for n in 1..highest {
        let k = n as f64;
        let lead = 2.0 * (k + 1.0) * (k + a + 1.0) * (2.0 * k + a);
        let linear = (2.0 * k + a + 1.0) * (2.0 * k + a) * (2.0 * k + a + 2.0) / lead;
        let constant = (2.0 * k + a + 1.0) * a * a / lead;
        let back = 2.0 * (k + a) * k * (2.0 * k + a + 2.0) / lead;
        let inner = combine(linear, times(z, list[n]), constant, list[n]);
        list.push(combine(1.0, inner, -back, list[n - 1]));
    }
    list
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::Rule;

    #[test]
    fn polynomials_are_orthonormal_and_complete_in_number() {
        for shape in [Shape::Interval, Shape::Triangle] {
            let degree = 7;
            let rule = Rule::of_degree(shape, 2 * degree).unwrap();
            let count = polynomial_count(shape, degree);
            let mut gram = vec![0.0; count * count];
            for (x, w) in rule.points().iter().zip(rule.weights()) {
                let values = orthonormal(shape, degree, x);
                assert_eq!(values.len(), count);
                for i in 0..count {
                    for j in 0..count {
                        gram[i * count + j] += w * values[i][0] * values[j][0];
                    }
                }
            }
            for i in 0..count {
                for j in 0..count {
                    let expected = f64::from(u8::from(i == j));
                    assert!((gram[i * count + j] - expected).abs() < 1e-13, "{shape:?} {i} {j}");
                }
            }
        }
    }

    #[test]
    fn derivatives_agree_with_difference_quotients() {
        let (at, step) = ([0.3, 0.2], 1e-6);
        for direction in 0..2 {
            let (mut up, mut down) = (at, at);
            up[direction] += step;
            down[direction] -= step;
            let jets = orthonormal(Shape::Triangle, 5, &at);
            let (above, below) = (orthonormal(Shape::Triangle, 5, &up), orthonormal(Shape::Triangle, 5, &down));
            for i in 0..jets.len() {
                let slope = (above[i][0] - below[i][0]) / (2.0 * step);
                assert!((slope - jets[i][1 + direction]).abs() < 1e-7 * (1.0 + slope.abs()));
            }
        }
    }
}
