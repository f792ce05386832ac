//! Contour lines at round values.

use super::axes::{SHORTEST, Ticks};
use super::colors::Scale;
use super::lines::joined;
use super::pieces::Piece;
use super::svg::{Pixel, Svg};

/// About `count` round levels strictly inside a range.
pub(crate) fn levels(low: f64, high: f64, count: usize) -> Vec<f64> {
    if count == 0 || high - low <= (1e-12 * low.abs().max(high.abs())).max(SHORTEST) {
        return Vec::new();
    }
    let edge = 1e-6 * (high - low);
    // Of two families of round values, one too small and one too large, the one closer to the wish.
    let inside = |steps: usize| -> Vec<f64> {
        Ticks::new(low, high, steps).values.into_iter().filter(|v| *v > low + edge && *v < high - edge).collect()
    };
    let (few, many) = (inside(count), inside(count.saturating_mul(2)));
    if many.len() * few.len() <= count.saturating_mul(count) { many } else { few }
}

/// The segments of one level in all pieces.
///
/// A piece counts its corners at or above the level, so that a line through corners is drawn once and a plateau at
/// the level has no lines inside.
pub(crate) fn segments<'a>(pieces: impl Iterator<Item = &'a Piece>, level: f64) -> Vec<[Pixel; 2]> {
    pieces.filter_map(|piece| crossing(piece, level)).collect()
}

fn crossing(piece: &Piece, level: f64) -> Option<[Pixel; 2]> {
    let above = piece.values.map(|v| v >= level);
    let alone = (0..3).find(|&i| above[i] != above[(i + 1) % 3] && above[i] != above[(i + 2) % 3])?;
    Some([1, 2].map(|k| {
        let other = (alone + k) % 3;
        // From the higher corner to the lower one, so that both cells of a side find the same bits.
        let (a, b) = if above[alone] { (alone, other) } else { (other, alone) };
        let share = (piece.values[a] - level) / (piece.values[a] - piece.values[b]);
        [0, 1].map(|c| piece.corners[a][c] + share * (piece.corners[b][c] - piece.corners[a][c]))
    }))
}

/// Draws the lines of all levels in a color that shows on the shading.
pub(crate) fn draw(svg: &mut Svg, pieces: &[Piece], scale: &Scale, levels: &[f64]) {
    for &level in levels {
        let color = scale.line_color(scale.position(level));
        let style = format!("fill=\"none\" stroke=\"{color}\" stroke-width=\".9\" stroke-opacity=\".75\"");
        svg.path(&joined(&segments(pieces.iter(), level)), &style);
    }
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::Rectangle;

    use super::super::pieces::pieces;
    use super::*;
    use crate::Field;

    #[test]
    fn contours_of_a_linear_field_are_straight_and_in_place() {
        let mesh = Rectangle::new([0.0, 0.0], [3.0, 1.0], [5, 4]).mesh().unwrap();
        for order in [1, 2] {
            let field = Field::of_function(&mesh, "", "", order, |x| 2.0 * x[0] + x[1]);
            let all = pieces(&mesh, &field, &field.check(&mesh).unwrap(), |x| x);
            for level in levels(0.0, 7.0, 6) {
                let lines = segments(all.iter(), level);
                for p in lines.iter().flatten() {
                    assert!((2.0 * p[0] + p[1] - level).abs() < 1e-12);
                }
                let length: f64 = lines.iter().map(|[a, b]| (a[0] - b[0]).hypot(a[1] - b[1])).sum();
                // The line 2x + y = level cut by 0 ≤ x ≤ 3, 0 ≤ y ≤ 1.
                let height = level.min(1.0).min(7.0 - level);
                assert!((length - height * 1.25_f64.sqrt()).abs() < 1e-12, "{level}: {length}");
            }
        }
    }

    #[test]
    fn levels_are_round_and_about_as_many_as_asked() {
        assert_eq!(levels(0.0, 7.0, 6), [1.0, 2.0, 3.0, 4.0, 5.0, 6.0]);
        for count in 3..30 {
            let n = levels(-0.37, 19.2, count).len();
            assert!(n <= 2 * count + 1 && 2 * n + 2 >= count, "{n} of {count}");
        }
        assert!(levels(20.0, 20.0, 10).is_empty());
        assert!(levels(0.0, 1.0, 0).is_empty());
        assert!(levels(0.0, 5e-324, 10).is_empty());
        assert!(levels(0.0, 1.0, usize::MAX).last() > Some(&0.9));
    }

    #[test]
    fn a_plateau_at_the_level_has_no_lines_inside() {
        let piece = Piece { corners: [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]], values: [1.0; 3] };
        assert!(segments([piece].iter(), 1.0).is_empty());
    }
}
