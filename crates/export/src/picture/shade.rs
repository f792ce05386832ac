//! Shading: a field as bands of even color with sharp, straight limits inside each piece.

use super::colors::{Scale, hex};
use super::pieces::Piece;
use super::svg::{Pixel, Svg, polyline};

/// Number of bands a color scale is cut into.
pub(crate) const BANDS: usize = 64;

/// More polygons than this are drawn as a raster image instead.
pub(crate) const MOST_POLYGONS: usize = 15_000;

/// Draws pieces as polygons, one path for each band; `false` when that would take too many of them.
pub(crate) fn bands(svg: &mut Svg, pieces: impl Iterator<Item = Piece>, scale: &Scale) -> bool {
    let mut data = vec![String::new(); BANDS];
    let mut polygons = 0;
    for piece in pieces {
        let position = piece.values.map(|v| scale.position(v) * BANDS as f64);
        let lowest = position.iter().fold(f64::INFINITY, |m, p| m.min(*p)).floor() as usize;
        let highest = position.iter().fold(0.0_f64, |m, p| m.max(*p)).ceil() as usize;
        for band in lowest.min(BANDS - 1)..highest.clamp(lowest.min(BANDS - 1) + 1, BANDS) {
            let polygon = slice(&piece.corners, &position, band as f64, (band + 1) as f64);
            if polygon.len() > 2 {
                data[band] += &polyline(&polygon, true);
                polygons += 1;
            }
        }
        if polygons > MOST_POLYGONS {
            return false;
        }
    }
    for (band, data) in data.iter().enumerate() {
        // A hairline of the same color closes the seams that smoothing of edges would leave.
        let color = hex(scale.rgb((band as f64 + 0.5) / BANDS as f64));
        svg.path(data, &format!("fill=\"{color}\" stroke=\"{color}\" stroke-width=\".5\" stroke-linejoin=\"round\""));
    }
    true
}

/// The part of a triangle where a linear function with the given corner values lies between two values.
fn slice(corners: &[Pixel; 3], values: &[f64; 3], low: f64, high: f64) -> Vec<Pixel> {
    let start: Vec<(Pixel, f64)> = corners.iter().copied().zip(values.iter().copied()).collect();
    let above = keep(&start, |v| v - low);
    keep(&above, |v| high - v).into_iter().map(|(p, _)| p).collect()
}

/// The part of a convex polygon where `side` of its value is not negative.
///
/// # Source
/// I. Sutherland, G. Hodgman, Reentrant polygon clipping, Comm. ACM 17 (1974).
fn keep(polygon: &[(Pixel, f64)], side: impl Fn(f64) -> f64) -> Vec<(Pixel, f64)> {
    let mut kept = Vec::with_capacity(polygon.len() + 1);
    for (i, &(p, u)) in polygon.iter().enumerate() {
        let (q, v) = polygon[(i + 1) % polygon.len()];
        let (s, t) = (side(u), side(v));
        if s >= 0.0 {
            kept.push((p, u));
        }
        if (s > 0.0 && t < 0.0) || (s < 0.0 && t > 0.0) {
            let share = s / (s - t);
            let cut = [p[0] + share * (q[0] - p[0]), p[1] + share * (q[1] - p[1])];
            kept.push((cut, u + share * (v - u)));
        }
    }
    kept
}

#[cfg(test)]
mod tests {
    use super::super::colors::Colors;
    use super::*;

    #[test]
    fn slices_share_out_the_triangle() {
        let corners = [[0.0, 0.0], [4.0, 0.0], [0.0, 2.0]];
        let area = |p: &[Pixel]| {
            let n = p.len();
            0.5 * (0..n).map(|i| p[i][0] * p[(i + 1) % n][1] - p[(i + 1) % n][0] * p[i][1]).sum::<f64>()
        };
        let total: f64 = (0..5).map(|b| area(&slice(&corners, &[0.0, 5.0, 2.5], b.into(), (b + 1).into()))).sum();
        assert!((total - 4.0).abs() < 1e-12);
        let middle = slice(&corners, &[0.0, 4.0, 0.0], 1.0, 2.0);
        assert!(middle.iter().all(|p| p[0] >= 1.0 && p[0] <= 2.0));
    }

    #[test]
    fn a_constant_is_one_polygon_of_the_middle_color() {
        let mut svg = Svg::default();
        let piece = Piece { corners: [[0.0, 0.0], [9.0, 0.0], [0.0, 9.0]], values: [20.0; 3] };
        let scale = Scale::new(20.0, 20.0, Colors::Sequential);
        assert!(bands(&mut svg, std::iter::once(piece), &scale));
        let text = svg.finish(9.0, 9.0);
        assert_eq!(text.matches("<path").count(), 1);
        assert!(text.contains("M0 0L9 0L0 9Z"));
    }

    #[test]
    fn too_many_polygons_are_refused() {
        let piece = Piece { corners: [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]], values: [0.0; 3] };
        let scale = Scale::new(0.0, 1.0, Colors::Sequential);
        assert!(!bands(&mut Svg::default(), std::iter::repeat_n(piece, MOST_POLYGONS + 1), &scale));
    }
}
