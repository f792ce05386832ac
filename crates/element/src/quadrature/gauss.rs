//! Gauss rules on the interval [0, 1]: with free points, with one end or with both ends among them.

use crate::orthonormal::legendre;

type Lists = (Vec<[f64; 2]>, Vec<f64>);

/// The Gauss–Legendre rule with `n` points, exact up to the degree 2n − 1; points ascending.
///
/// Zeros of the Legendre polynomial by Newton's method from Tricomi's start values; weights
/// 2 / ((1 − z²) P′ₙ(z)²) on [−1, 1] (NIST DLMF 3.5(v)).
pub(super) fn interval(n: usize) -> Lists {
    let mut points = Vec::with_capacity(n);
    let mut weights = Vec::with_capacity(n);
    for k in (0..n).rev() {
        let start = (std::f64::consts::PI * (k as f64 + 0.75) / (n as f64 + 0.5)).cos();
        let z = newton(start, |z| legendre(n, z));
        let (value, slope) = legendre(n, z);
        // What rounding z has cost: without it the weights next to the ends lose two digits.
        let rest = -value / slope;
        points.push([0.5 * ((1.0 + z) + rest), 0.0]);
        weights.push(1.0 / (((1.0 - z) * (1.0 + z) + 2.0 * z * rest) * slope * slope));
    }
    (points, weights)
}

/// The Gauss–Lobatto rule with `n` ≥ 2 points, both ends among them, exact up to the degree 2n − 3; points ascending.
///
/// Inner points are the zeros of P′ₙ₋₁; weights 2 / (n (n − 1) Pₙ₋₁(z)²) on [−1, 1] (M. Abramowitz, I. A. Stegun,
/// Handbook of Mathematical Functions, 1964, 25.4.32).
pub(crate) fn lobatto(n: usize) -> Lists {
    let m = n - 1;
    let scale = (n * m) as f64;
    let mut points = vec![[0.0; 2]];
    for k in 1..m {
        let start = -(std::f64::consts::PI * k as f64 / m as f64).cos();
        let z = newton(start, |z| {
            let (value, slope) = legendre(m, z);
            // Legendre's equation gives the second derivative.
            (slope, (2.0 * z * slope - scale * value) / (1.0 - z * z))
        });
        points.push([0.5 * (1.0 + z), 0.0]);
    }
    points.push([1.0, 0.0]);
    let weights = points.iter().map(|x| 1.0 / (scale * legendre(m, 2.0 * x[0] - 1.0).0.powi(2))).collect();
    (points, weights)
}

/// The Gauss–Radau rule with `n` ≥ 1 points, the left end among them, exact up to the degree 2n − 2; points ascending.
///
/// The other points are the zeros of (Pₙ₋₁ + Pₙ) / (1 + z); weights (1 − z) / (n Pₙ₋₁(z))² on [−1, 1] (M. Abramowitz,
/// I. A. Stegun, Handbook of Mathematical Functions, 1964, 25.4.31).
pub(super) fn radau(n: usize) -> Lists {
    let sum = |z: f64| {
        let (before, last) = (legendre(n - 1, z), legendre(n, z));
        (before.0 + last.0, before.1 + last.1)
    };
    let (mut points, mut weights) = (vec![[0.0; 2]], vec![1.0 / (n * n) as f64]);
    for k in (0..n - 1).rev() {
        let start = (std::f64::consts::PI * (2 * k + 1) as f64 / (2 * n - 1) as f64).cos();
        let z = newton(start, sum);
        let (value, slope) = sum(z);
        let rest = -value / slope;
        points.push([0.5 * ((1.0 + z) + rest), 0.0]);
        let (p, dp) = legendre(n - 1, z);
        weights.push(0.5 * ((1.0 - z) - rest) / (n as f64 * (p + dp * rest)).powi(2));
    }
    (points, weights)
}

/// A zero near `start` of a function given with its slope.
fn newton(start: f64, function: impl Fn(f64) -> (f64, f64)) -> f64 {
    let mut z = start;
    for _ in 0..50 {
        let (value, slope) = function(z);
        let step = value / slope;
        z -= step;
        if step.abs() < 1e-16 {
            break;
        }
    }
    z
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Holds the last points and weights to values on [−1, 1].
    fn agree(lists: &Lists, published: &[(f64, f64)]) {
        let n = lists.1.len();
        for (i, (z, w)) in published.iter().enumerate() {
            let k = n - published.len() + i;
            assert!(
                (2.0 * lists.0[k][0] - 1.0 - z).abs() < 1e-15,
                "{n} points, node {z}: {}",
                2.0 * lists.0[k][0] - 1.0
            );
            assert!((2.0 * lists.1[k] - w).abs() < 1e-15, "{n} points, weight {w}: {}", 2.0 * lists.1[k]);
        }
    }

    /// NIST DLMF Tables 3.5.1 and 3.5.2; M. Abramowitz, I. A. Stegun, 1964, Table 25.4 (nodes not negative).
    #[test]
    fn free_points_agree_with_the_published_tables() {
        agree(&interval(2), &[(0.577_350_269_189_625_8, 1.0)]);
        agree(&interval(3), &[(0.0, 8.0 / 9.0), (0.774_596_669_241_483_4, 5.0 / 9.0)]);
        agree(
            &interval(4),
            &[(0.339_981_043_584_856_26, 0.652_145_154_862_546_1), (0.861_136_311_594_052_6, 0.347_854_845_137_453_85)],
        );
        agree(
            &interval(5),
            &[
                (0.0, 0.568_888_888_888_888_9),
                (0.538_469_310_105_683_1, 0.478_628_670_499_366_5),
                (0.906_179_845_938_664, 0.236_926_885_056_189_1),
            ],
        );
        agree(
            &interval(10),
            &[
                (0.148_874_338_981_631_22, 0.295_524_224_714_752_87),
                (0.433_395_394_129_247_2, 0.269_266_719_309_996_4),
                (0.679_409_568_299_024_4, 0.219_086_362_515_982_04),
                (0.865_063_366_688_984_5, 0.149_451_349_150_580_6),
                (0.973_906_528_517_171_7, 0.066_671_344_308_688_14),
            ],
        );
    }

    /// M. Abramowitz, I. A. Stegun, 1964, Table 25.6 (nodes not negative).
    #[test]
    fn points_with_both_ends_agree_with_the_published_table() {
        agree(&lobatto(3), &[(0.0, 4.0 / 3.0), (1.0, 1.0 / 3.0)]);
        agree(&lobatto(4), &[(0.447_213_595_499_957_9, 5.0 / 6.0), (1.0, 1.0 / 6.0)]);
        agree(&lobatto(5), &[(0.0, 32.0 / 45.0), (0.654_653_670_707_977_1, 49.0 / 90.0), (1.0, 0.1)]);
        agree(
            &lobatto(6),
            &[
                (0.285_231_516_480_645_1, 0.554_858_377_035_486_4),
                (0.765_055_323_929_464_7, 0.378_474_956_297_847),
                (1.0, 1.0 / 15.0),
            ],
        );
    }

    /// M. Abramowitz, I. A. Stegun, 1964, 25.4.31; digits of the closed formulas with 40 places.
    #[test]
    fn points_with_one_end_agree_with_their_formulas() {
        agree(
            &radau(3),
            &[
                (-1.0, 2.0 / 9.0),
                (-0.289_897_948_556_635_64, 1.024_971_652_376_843_2),
                (0.689_897_948_556_635_6, 0.752_806_125_400_934_6),
            ],
        );
        agree(
            &radau(5),
            &[
                (-1.0, 0.08),
                (-0.720_480_271_312_438_9, 0.446_207_802_167_141_5),
                (-0.167_180_864_737_833_64, 0.623_653_045_951_482_5),
                (0.446_313_972_723_752_34, 0.562_712_030_298_924_1),
                (0.885_791_607_770_964_6, 0.287_427_121_582_451_9),
            ],
        );
    }
}
