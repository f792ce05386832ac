//! Rules on the triangle (0, 0), (1, 0), (0, 1).

use super::gauss;

/// One symmetric orbit: weight of each of its points, and the two barycentric numbers that make them.
enum Orbit {
    /// (a, a) and its mirror images: three points.
    Three(f64, f64),
    /// (a, b) and its mirror images: six points.
    Six(f64, f64, f64),
}

// Symmetric rules of D. A. Dunavant (Int. J. Numer. Methods Eng. 21, 1985); the digits solve the moment equations and were
// computed with 40 digits.
const DEGREE_4: [Orbit; 2] = [
    Orbit::Three(0.111_690_794_839_005_73, 0.445_948_490_915_964_9),
    Orbit::Three(0.054_975_871_827_660_934, 0.091_576_213_509_770_74),
];
const DEGREE_6: [Orbit; 3] = [
    Orbit::Three(0.025_422_453_185_103_41, 0.063_089_014_491_502_23),
    Orbit::Three(0.058_393_137_863_189_68, 0.249_286_745_170_910_42),
    Orbit::Six(0.041_425_537_809_186_79, 0.053_145_049_844_816_95, 0.310_352_451_033_784_4),
];

pub(super) fn of_degree(degree: usize) -> (Vec<[f64; 2]>, Vec<f64>) {
    match degree {
        0 | 1 => (vec![[1.0 / 3.0; 2]], vec![0.5]),
        2..=4 => orbits(&DEGREE_4),
        5 | 6 => orbits(&DEGREE_6),
        _ => collapsed(degree),
    }
}

fn orbits(list: &[Orbit]) -> (Vec<[f64; 2]>, Vec<f64>) {
    let mut points = Vec::new();
    let mut weights = Vec::new();
    for orbit in list {
        match *orbit {
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
fn collapsed(degree: usize) -> (Vec<[f64; 2]>, Vec<f64>) {
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

    /// ∫ xᵃ yᵇ = a! b! / (a + b + 2)! (A. H. Stroud, Approximate Calculation of Multiple Integrals, 1971).
    #[test]
    fn monomials_up_to_the_degree_are_exact() {
        let factorial = |n: usize| (1..=n).map(|k| k as f64).product::<f64>();
        for degree in 0..=24 {
            let (points, weights) = of_degree(degree);
            assert!(weights.iter().all(|w| *w > 0.0));
            assert!(points.iter().all(|x| x[0] > 0.0 && x[1] > 0.0 && x[0] + x[1] < 1.0));
            for a in 0..=degree {
                for b in 0..=degree - a {
                    let sum: f64 =
                        points.iter().zip(&weights).map(|(x, w)| w * x[0].powi(a as i32) * x[1].powi(b as i32)).sum();
                    let exact = factorial(a) * factorial(b) / factorial(a + b + 2);
                    assert!((sum / exact - 1.0).abs() < 2e-14, "degree {degree}, x^{a} y^{b}: {sum} for {exact}");
                }
            }
        }
    }
}
