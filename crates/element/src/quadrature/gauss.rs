//! Gauss–Legendre rules on the interval [0, 1].

use crate::orthonormal::legendre;

/// The rule with `n` points, exact up to the degree 2n − 1; points ascending.
///
/// Zeros of the Legendre polynomial by Newton's method from Tricomi's start values; weights
/// 2 / ((1 − z²) P′ₙ(z)²) on [−1, 1] (NIST DLMF 3.5(v)).
pub(super) fn interval(n: usize) -> (Vec<[f64; 2]>, Vec<f64>) {
    let mut points = Vec::with_capacity(n);
    let mut weights = Vec::with_capacity(n);
    for k in (0..n).rev() {
        let mut z = (std::f64::consts::PI * (k as f64 + 0.75) / (n as f64 + 0.5)).cos();
        for _ in 0..20 {
            let (value, slope) = legendre(n, z);
            let step = value / slope;
            z -= step;
            if step.abs() < 1e-16 {
                break;
            }
        }
        let (_, slope) = legendre(n, z);
        points.push([0.5 * (1.0 + z), 0.0]);
        weights.push(1.0 / ((1.0 - z * z) * slope * slope));
    }
    (points, weights)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// NIST DLMF Table 3.5.1 (five points on [−1, 1]).
    #[test]
    fn five_points_agree_with_the_published_table() {
        let (points, weights) = interval(5);
        let published = [
            (-0.906_179_845_938_664, 0.236_926_885_056_189_1),
            (-0.538_469_310_105_683_1, 0.478_628_670_499_366_5),
            (0.0, 0.568_888_888_888_888_9),
        ];
        for (i, (z, w)) in published.into_iter().enumerate() {
            assert!((2.0 * points[i][0] - 1.0 - z).abs() < 1e-15);
            assert!((2.0 * weights[i] - w).abs() < 1e-15);
        }
    }

    #[test]
    fn monomials_up_to_the_degree_are_exact() {
        for n in 1..=20 {
            let (points, weights) = interval(n);
            for k in 0..2 * n {
                let sum: f64 = points.iter().zip(&weights).map(|(x, w)| w * x[0].powi(k as i32)).sum();
                let exact = 1.0 / (k as f64 + 1.0);
                assert!((sum / exact - 1.0).abs() < 1e-13, "{n} points, degree {k}: {sum} for {exact}");
            }
        }
    }
}
