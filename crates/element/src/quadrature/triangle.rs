//! Rules on the triangle (0, 0), (1, 0), (0, 1).

use super::{gauss, symmetric_high as high, symmetric_low as low};

/// One orbit under the symmetries of the triangle: weight of each of its points, and the barycentric numbers that make
/// them.
#[derive(Debug)]
pub(super) enum Orbit {
    /// The centroid.
    One(f64),
    /// (a, a) and its mirror images: three points.
    Three(f64, f64),
    /// (a, b) and its mirror images: six points.
    Six(f64, f64, f64),
}

/// Highest degree of the symmetric rules.
pub(super) const HIGHEST_SYMMETRIC: usize = 25;

/// The rule of fewest points kept here: symmetric up to [`HIGHEST_SYMMETRIC`], collapsed Gauss above.
pub(super) fn of_degree(degree: usize) -> (Vec<[f64; 2]>, Vec<f64>) {
    symmetric(degree).map_or_else(|| collapsed(degree), |(_, orbits)| points_of(orbits))
}

/// The symmetric rule for a degree, with its own degree, which may be higher by one.
pub(super) fn symmetric(degree: usize) -> Option<(usize, &'static [Orbit])> {
    let orbits: &[Orbit] = match degree {
        0 | 1 => return Some((1, &low::DEGREE_1)),
        2 => &low::DEGREE_2,
        3 | 4 => return Some((4, &low::DEGREE_4)),
        5 => &low::DEGREE_5,
        6 => &low::DEGREE_6,
        7 => &low::DEGREE_7,
        8 => &low::DEGREE_8,
        9 => &low::DEGREE_9,
        10 => &low::DEGREE_10,
        11 => &low::DEGREE_11,
        12 => &low::DEGREE_12,
        13 => &low::DEGREE_13,
        14 => &low::DEGREE_14,
        15 => &low::DEGREE_15,
        16 => &low::DEGREE_16,
        17 => &low::DEGREE_17,
        18 => &low::DEGREE_18,
        19 => &high::DEGREE_19,
        20 => &high::DEGREE_20,
        21 => &high::DEGREE_21,
        22 => &high::DEGREE_22,
        23 => &high::DEGREE_23,
        24 => &high::DEGREE_24,
        25 => &high::DEGREE_25,
        _ => return None,
    };
    Some((degree, orbits))
}

/// Points and weights of a list of orbits.
pub(super) fn points_of(orbits: &[Orbit]) -> (Vec<[f64; 2]>, Vec<f64>) {
    let mut points = Vec::new();
    let mut weights = Vec::new();
    for orbit in orbits {
        match *orbit {
            Orbit::One(w) => {
                points.push([1.0 / 3.0; 2]);
                weights.push(w);
            }
            Orbit::Three(w, a) => {
                points.extend([[a, a], [a, 1.0 - 2.0 * a], [1.0 - 2.0 * a, a]]);
                weights.extend([w; 3]);
            }
            Orbit::Six(w, a, b) => {
                let c = 1.0 - a - b;
                points.extend([[a, b], [b, a], [a, c], [c, a], [b, c], [c, b]]);
                weights.extend([w; 6]);
            }
        }
    }
    (points, weights)
}

/// Gauss × Gauss on the square, collapsed by (s, t) → (s (1 − t), t): the factor 1 − t costs one degree in t.
pub(super) fn collapsed(degree: usize) -> (Vec<[f64; 2]>, Vec<f64>) {
    let (along, weights_along) = gauss::interval(degree / 2 + 1);
    let (up, weights_up) = gauss::interval(degree.div_ceil(2) + 1);
    let mut points = Vec::new();
    let mut weights = Vec::new();
    for (t, wt) in up.iter().zip(&weights_up) {
        for (s, ws) in along.iter().zip(&weights_along) {
            points.push([s[0] * (1.0 - t[0]), t[0]]);
            weights.push(ws * wt * (1.0 - t[0]));
        }
    }
    (points, weights)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// J. Radon, Monatsh. Math. Phys. 52, 1948 (T2: 5-1 in A. H. Stroud, Approximate Calculation of Multiple Integrals,
    /// 1971): (155 ∓ √15)/2400 at (6 ∓ √15)/21.
    #[test]
    fn seven_points_are_radons() {
        let root = 15.0_f64.sqrt();
        let (points, weights) = of_degree(5);
        assert!((weights[0] - 0.1125).abs() < 1e-16);
        for (first, sign) in [(1, -1.0), (4, 1.0)] {
            assert!((points[first][0] - (6.0 + sign * root) / 21.0).abs() < 1e-15);
            assert!((weights[first] - (155.0 + sign * root) / 2400.0).abs() < 1e-16);
        }
    }

    /// D. A. Dunavant, Int. J. Numer. Methods Eng. 21, 1985, degrees 4 and 6 (his weights are twice ours).
    #[test]
    fn six_and_twelve_points_are_dunavants() {
        let (points, weights) = of_degree(4);
        assert!(
            (points[0][0] - 0.091_576_213_509_771).abs() < 1e-15
                && (2.0 * weights[0] - 0.109_951_743_655_322).abs() < 1e-15
        );
        assert!(
            (points[3][0] - 0.445_948_490_915_965).abs() < 1e-15
                && (2.0 * weights[3] - 0.223_381_589_678_011).abs() < 1e-15
        );
        let (points, weights) = of_degree(6);
        assert!(
            (points[3][0] - 0.249_286_745_170_910).abs() < 1e-15
                && (2.0 * weights[3] - 0.116_786_275_726_379).abs() < 1e-15
        );
        assert!(
            (points[6][0] - 0.053_145_049_844_817).abs() < 1e-15
                && (2.0 * weights[6] - 0.082_851_075_618_374).abs() < 1e-15
        );
    }

    /// The best counts of symmetric rules of positive weight with inner points in L. Zhang, T. Cui, H. Liu, J. Comput.
    /// Math. 27, 2009, for the degrees 1 to 20.
    #[test]
    fn counts_are_the_best_known() {
        let best = [1, 3, 6, 6, 7, 12, 15, 16, 19, 25, 28, 33, 37, 42, 49, 55, 60, 67, 73, 79];
        for (degree, count) in (1..).zip(best) {
            assert_eq!(of_degree(degree).1.len(), count, "degree {degree}");
        }
    }

    #[test]
    fn weights_are_positive_and_points_inside() {
        for degree in 0..=30 {
            for (points, weights) in [of_degree(degree), collapsed(degree)] {
                assert!(weights.iter().all(|w| *w > 0.0), "degree {degree}");
                assert!(points.iter().all(|x| x[0] > 0.0 && x[1] > 0.0 && x[0] + x[1] < 1.0), "degree {degree}");
            }
        }
    }
}
