//! Order of points along Hilbert's curve, so that neighbors in the plane are mostly neighbors in memory.

use rayon::prelude::*;

/// Levels of the curve: 16 bits on each axis, so that a key and a point number fit one 64-bit word.
const LEVELS: u32 = 16;

/// Points handed to a thread at a time.
const CHUNK: usize = 1 << 14;

/// The order of points along Hilbert's curve (`D` = 2) or along the line (`D` = 1): `order[k]` is the point that
/// comes `k`-th.
///
/// The curve fills the smallest square around the points. Points with the same key keep their order, so the result
/// does not depend on the number of threads. Coordinates that are not finite do no harm but get an arbitrary place.
///
/// # Source
/// D. Hilbert, Über die stetige Abbildung einer Linie auf ein Flächenstück, Math. Ann. 38 (1891).
pub(crate) fn hilbert_order<const D: usize>(points: &[[f64; D]]) -> Vec<u32> {
    if D == 1 {
        let mut order: Vec<u32> = (0..points.len() as u32).collect();
        order.par_sort_by(|a, b| points[*a as usize][0].total_cmp(&points[*b as usize][0]));
        return order;
    }
    let (low, scale) = square_around(points);
    let mut words = vec![0_u64; points.len()];
    words.par_chunks_mut(CHUNK).enumerate().for_each(|(chunk, words)| {
        for (i, word) in words.iter_mut().enumerate() {
            let number = chunk * CHUNK + i;
            let p = &points[number];
            // Conversion saturates: no coordinate leaves the square.
            let x = ((p[0] - low[0]) * scale) as u16;
            let y = ((p[D - 1] - low[D - 1]) * scale) as u16;
            *word = u64::from(hilbert_key(x, y)) << 32 | number as u64;
        }
    });
    words.par_sort_unstable();
    words.into_iter().map(|word| word as u32).collect()
}

/// Lower corner of the smallest square around the points, and grid steps per length.
fn square_around<const D: usize>(points: &[[f64; D]]) -> ([f64; D], f64) {
    let mut low = [f64::INFINITY; D];
    let mut high = [f64::NEG_INFINITY; D];
    for p in points {
        for i in 0..D {
            low[i] = low[i].min(p[i]);
            high[i] = high[i].max(p[i]);
        }
    }
    let width = (0..D).map(|i| high[i] - low[i]).fold(0.0, f64::max);
    let scale = f64::from(u16::MAX) / width;
    (low, if scale.is_finite() { scale } else { 0.0 })
}

/// Position of a grid point along the curve. Each level looks at one bit of either coordinate, names the quadrant in
/// the order the curve visits it, and turns the plane so that the curve within the quadrant looks like the whole.
fn hilbert_key(mut x: u16, mut y: u16) -> u32 {
    let mut key = 0;
    for level in (0..LEVELS).rev() {
        let right = u32::from(x >> level & 1);
        let upper = u32::from(y >> level & 1);
        key = key << 2 | ((3 * right) ^ upper);
        if upper == 0 {
            if right == 1 {
                (x, y) = (!x, !y);
            }
            (x, y) = (y, x);
        }
    }
    key
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn consecutive_grid_points_on_the_curve_are_neighbors() {
        let n = 32_u16;
        let points: Vec<[f64; 2]> = (0..n * n).map(|i| [f64::from(i % n), f64::from(i / n)]).collect();
        let order = hilbert_order(&points);
        let mut seen = vec![false; points.len()];
        for k in &order {
            assert!(!std::mem::replace(&mut seen[*k as usize], true));
        }
        for pair in order.windows(2) {
            let (a, b) = (points[pair[0] as usize], points[pair[1] as usize]);
            assert_eq!((a[0] - b[0]).abs() + (a[1] - b[1]).abs(), 1.0);
        }
        assert_eq!(points[order[0] as usize], [0.0, 0.0]);
        assert_eq!(points[order[points.len() - 1] as usize], [31.0, 0.0]);
    }

    #[test]
    fn keys_fill_the_grid_once_with_unit_steps() {
        // Along the first 4096 keys of a corner block of 64 × 64 grid points each key occurs once.
        let mut keys: Vec<(u32, u16, u16)> =
            (0..64).flat_map(|x| (0..64).map(move |y| (hilbert_key(x, y), x, y))).collect();
        keys.sort_unstable();
        for (k, pair) in keys.windows(2).enumerate() {
            assert_eq!(pair[0].0 as usize, k);
            assert_eq!(pair[0].1.abs_diff(pair[1].1) + pair[0].2.abs_diff(pair[1].2), 1);
        }
    }

    #[test]
    fn points_on_a_line_are_sorted_and_equal_ones_keep_their_order() {
        assert_eq!(hilbert_order(&[[3.0], [1.0], [2.0], [1.0]]), [1, 3, 2, 0]);
        assert_eq!(hilbert_order(&[[1.0, 1.0], [1.0, 1.0]]), [0, 1]);
        assert_eq!(hilbert_order::<2>(&[]), [] as [u32; 0]);
        assert_eq!(hilbert_order(&[[f64::NAN, 0.0], [0.0, f64::INFINITY]]).len(), 2);
    }
}
