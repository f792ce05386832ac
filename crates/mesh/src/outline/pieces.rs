//! Borders cut into pieces of the wanted size, and the number of cells foretold.

use super::insert::Cavity;
use super::regions::Border;
use super::sizes::SizeField;
use super::triangulation::{NONE, Triangulation};
use crate::MeshError;

/// Cuts borders so that the pieces have the wanted size, ∫ ds / h the same on each. The border of each vertex, [`NONE`]
/// for the ends of borders.
pub(super) fn cut(
    mesh: &mut Triangulation,
    cavity: &mut Cavity,
    borders: &[Border],
    sizes: &SizeField,
    limit: usize,
) -> Result<Vec<u32>, MeshError> {
    let mut border_of = vec![NONE; mesh.points.len()];
    for (number, border) in borders.iter().enumerate() {
        let [a, b] = border.ends.map(|p| mesh.place(p));
        let base = sizes.of_region(border.left).min(sizes.of_region(border.right));
        let stations = stations(a, b, base, sizes, limit)?;
        if mesh.triangle_count() + 2 * stations.len() > limit {
            return Err(too_many((mesh.triangle_count() + 2 * stations.len()) as f64, limit));
        }
        // The middle one first, so that triangles stay shapely on the way.
        let mut spans = vec![(&stations[..], border.ends)];
        while let Some((stations, ends)) = spans.pop() {
            let Some(t) = stations.get(stations.len() / 2) else { continue };
            let [from, to] = ends;
            let Some(h) = mesh.edge(from, to).or_else(|| mesh.edge(to, from)) else { continue };
            let x = [a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])];
            cavity.dig_at_segment(mesh, x, h);
            if let Some(vertex) = cavity.fill(mesh, x, Some(h)) {
                border_of.push(number as u32);
                let (before, after) = stations.split_at(stations.len() / 2);
                spans.push((before, [from, vertex]));
                spans.push((&after[1..], [vertex, to]));
            }
        }
    }
    Ok(border_of)
}

/// Positions between 0 and 1 at which the segment ab is cut.
fn stations(a: [f64; 2], b: [f64; 2], base: f64, sizes: &SizeField, limit: usize) -> Result<Vec<f64>, MeshError> {
    let length = (b[0] - a[0]).hypot(b[1] - a[1]);
    let place = |t: f64| [a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])];
    let size = |t: f64| base.min(sizes.by_sources(place(t)));
    // March in steps short enough for the trapezoidal rule, noting ∫ ds / h on the way.
    let mut marks = vec![(0.0, 0.0)];
    let (mut t, mut total) = (0.0, 0.0);
    let mut here = size(0.0);
    while t < 1.0 {
        let step = (0.5 * here.min(size((t + 0.5 * here / length).min(1.0))) / length).min(1.0 - t);
        let uniform = here == base && sizes.is_uniform(place(t), length * (1.0 - t), base);
        let step = if uniform { 1.0 - t } else { step };
        let to = if t + step >= 1.0 - 1e-12 { 1.0 } else { t + step };
        let there = size(to);
        total += 0.5 * (to - t) * length * (1.0 / here + 1.0 / there);
        if total > limit as f64 || to == t {
            return Err(too_many(total.max(length / here), limit));
        }
        marks.push((to, total));
        (t, here) = (to, there);
    }
    let count = (total - 1e-9).ceil().max(1.0) as usize;
    let mut at = 0;
    let station = |i: usize| {
        let wanted = total * i as f64 / count as f64;
        while marks[at + 1].1 < wanted {
            at += 1;
        }
        let ((t0, n0), (t1, n1)) = (marks[at], marks[at + 1]);
        t0 + (t1 - t0) * (wanted - n0) / (n1 - n0)
    };
    Ok((1..count).map(station).collect())
}

pub(super) fn too_many(count: f64, limit: usize) -> MeshError {
    MeshError::TooMany { what: "cells", count: count as usize, limit }
}

/// Refuses when more cells than the limit are to be expected: Σ ∫ 4/(√3 h²) over the triangles.
pub(super) fn forecast(triangles: &Triangulation, sizes: &SizeField, limit: usize) -> Result<(), MeshError> {
    /// Parts of triangles that are looked at even though the limit is passed, for the sake of the message.
    const PATIENCE: usize = 100_000;
    let (mut count, mut seen) = (0.0, 0);
    for t in 0..triangles.triangle_count() as u32 {
        let base = sizes.of_region(triangles.region[t as usize]);
        let mut parts = vec![triangles.corners(t)];
        while let Some(corners) = parts.pop() {
            let [a, b, c] = corners;
            let middle = [(a[0] + b[0] + c[0]) / 3.0, (a[1] + b[1] + c[1]) / 3.0];
            let radius = corners.iter().map(|p| (p[0] - middle[0]).hypot(p[1] - middle[1])).fold(0.0, f64::max);
            let source = sizes.by_sources(middle);
            let size = base.min(source);
            if radius <= 2.0 * size || (source > base && sizes.is_uniform(middle, radius, base)) {
                let area = 0.5 * ((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]));
                count += area * 4.0 / (3.0_f64.sqrt() * size * size);
            } else {
                parts.extend(halves(corners));
            }
            seen += 1;
            if count > limit as f64 && seen > PATIENCE {
                return Err(too_many(count, limit));
            }
        }
    }
    if count > limit as f64 { Err(too_many(count, limit)) } else { Ok(()) }
}

/// A triangle halved across its longest side.
fn halves(corners: [[f64; 2]; 3]) -> [[[f64; 2]; 3]; 2] {
    let length = |i: usize| {
        let (p, q) = (corners[i], corners[(i + 1) % 3]);
        (p[0] - q[0]).powi(2) + (p[1] - q[1]).powi(2)
    };
    let longest = (0..3).fold(0, |best, i| if length(i) > length(best) { i } else { best });
    let [a, b, c] = [0, 1, 2].map(|i| corners[(longest + i) % 3]);
    let middle = [0.5 * (a[0] + b[0]), 0.5 * (a[1] + b[1])];
    [[a, middle, c], [middle, b, c]]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::outline::sizes::Source;

    const FROM: [f64; 2] = [0.0, 0.0];
    const TO: [f64; 2] = [2.0, 0.0];

    #[test]
    fn a_uniform_border_is_cut_evenly() {
        let sizes = SizeField::new(vec![0.5], Vec::new(), FROM, 2.0);
        assert_eq!(stations(FROM, TO, 0.5, &sizes, 100).unwrap(), vec![0.25, 0.5, 0.75]);
        assert_eq!(stations(FROM, TO, 3.0, &sizes, 100).unwrap(), Vec::<f64>::new());
        assert_eq!(stations(FROM, TO, 0.49, &sizes, 100).unwrap().len(), 4);
    }

    #[test]
    fn pieces_follow_the_size_wanted() {
        let source = Source { ends: [[1.0, 0.0]; 2], size: 0.001 };
        let sizes = SizeField::new(vec![0.5], vec![source], FROM, 2.0);
        let cut = stations(FROM, TO, 0.5, &sizes, 1000).unwrap();
        // ∫ ds / h over both halves: 2/0.3 · ln(1 + 0.3 · 1/0.001)
        let expected = (2.0 / 0.3 * 301.0_f64.ln()).ceil();
        assert!((cut.len() as f64 + 1.0 - expected).abs() <= 1.0, "{} instead of {expected}", cut.len());
        for pair in cut.windows(2) {
            let (length, middle) = (2.0 * (pair[1] - pair[0]), pair[0] + pair[1]);
            assert!((length / sizes.at([middle, 0.0], 0) - 1.0).abs() < 0.2, "{pair:?}");
        }
    }

    #[test]
    fn too_many_pieces_are_refused_before_they_are_made() {
        let sizes = SizeField::new(vec![1e-9], Vec::new(), FROM, 2.0);
        assert!(matches!(stations(FROM, TO, 1e-9, &sizes, 1000), Err(MeshError::TooMany { limit: 1000, .. })));
    }

    #[test]
    fn the_forecast_integrates_graded_sizes() {
        let square = vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
        let mut mesh = Triangulation::constrained(square, &[]).unwrap();
        mesh.region.fill(0);
        // h = 0.01 + 0.3 x: ∫ 4/(√3 h²) = 4/√3 · 1/0.3 · (1/0.01 − 1/0.31) ≈ 745
        let source = Source { ends: [[0.0, 0.0], [0.0, 1.0]], size: 0.01 };
        let sizes = SizeField::new(vec![9.0], vec![source], [0.0; 2], 1.0);
        assert!(forecast(&mesh, &sizes, 850).is_ok());
        assert!(forecast(&mesh, &sizes, 640).is_err());
    }
}
