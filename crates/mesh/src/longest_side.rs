//! The side a new triangle is bisected at first: its longest.

use crate::VertexId;
use crate::mesh::distance;

/// Sides that differ by less than this share of their length count as equally long, so that rounding does not decide.
const TIE: f64 = 1e-10;

/// The vertices of a triangle rotated so that side 0 is the longest; among equally long sides it is the one with the
/// smaller vertex numbers.
pub(crate) fn longest_side_first<const D: usize>(points: &[[f64; D]], v: [VertexId; 3]) -> [VertexId; 3] {
    let turned = |i: usize| [v[i], v[(i + 1) % 3], v[(i + 2) % 3]];
    let length = |i: usize| distance(&points[v[i].index()], &points[v[(i + 1) % 3].index()]);
    let lengths = [length(0), length(1), length(2)];
    let longest = lengths.iter().copied().fold(0.0, f64::max);
    let numbers = |i: usize| {
        let t = turned(i);
        (t[0].min(t[1]), t[0].max(t[1]))
    };
    (0..3).filter(|i| lengths[*i] >= longest * (1.0 - TIE)).min_by_key(|i| numbers(*i)).map_or(v, turned)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_longest_side_comes_first_and_ties_go_to_the_smaller_numbers() {
        let points = [[0.0, 0.0], [3.0, 0.0], [0.0, 4.0], [3.0, 4.0 - 1e-15]];
        let v = |a, b, c| [VertexId(a), VertexId(b), VertexId(c)];
        assert_eq!(longest_side_first(&points, v(0, 1, 2)), v(1, 2, 0));
        for rounding in [0.0, 1e-15, -1e-15] {
            let isosceles = [[0.0, 0.0], [1.0, 0.0], [0.5 + rounding, 2.0]];
            for start in [v(0, 1, 2), v(1, 2, 0), v(2, 0, 1)] {
                assert_eq!(longest_side_first(&isosceles, start), v(2, 0, 1));
            }
        }
    }
}
