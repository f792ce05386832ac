//! Borders cut into pieces of the wanted size, and the number of cells foretold.

use super::regions::Border;
use super::sizes::{GRADING, SizeField};
use super::triangulation::{NONE, Triangulation};
use crate::MeshError;

/// Borders cut into pieces: points (those of the borders first), and for each piece its ends, in the border's
/// direction, and its border.
#[derive(Debug)]
pub(super) struct Pieces {
    pub(super) points: Vec<[f64; 2]>,
    pub(super) ends: Vec<[u32; 2]>,
    pub(super) border: Vec<u32>,
}

/// Cuts borders so that the pieces have the wanted size, ∫ ds / h the same on each.
pub(super) fn cut(
    points: &[[f64; 2]],
    borders: &[Border],
    sizes: &SizeField,
    limit: usize,
) -> Result<Pieces, MeshError> {
    let mut pieces = Pieces { points: points.to_vec(), ends: Vec::new(), border: Vec::new() };
    for (number, border) in borders.iter().enumerate() {
        let [a, b] = border.ends.map(|p| points[p as usize]);
        let base = sizes.of_region(border.left).min(sizes.of_region(border.right));
        let stations = stations(a, b, base, sizes, limit)?;
        if pieces.ends.len() + stations.len() > limit {
            return Err(too_many((pieces.ends.len() + stations.len()) as f64, limit));
        }
        let mut from = border.ends[0];
        for t in stations {
            let to = pieces.points.len() as u32;
            pieces.points.push([a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])]);
            pieces.ends.push([from, to]);
            pieces.border.push(number as u32);
            from = to;
        }
        pieces.ends.push([from, border.ends[1]]);
        pieces.border.push(number as u32);
    }
    Ok(pieces)
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
        let uniform = here == base && sizes.by_sources(place(t)) - GRADING * length * (1.0 - t) >= base;
        let step = if uniform { 1.0 - t } else { step };
        let to = if t + step >= 1.0 - 1e-12 { 1.0 } else { t + step };
        let there = size(to);
        total += 0.5 * (to - t) * length * (1.0 / here + 1.0 / there);
        marks.push((to, total));
        (t, here) = (to, there);
        if total > limit as f64 || marks.len() > 4 * limit {
            return Err(too_many(total.max(length / here), limit));
        }
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
    let mut count = 0.0;
    for t in 0..triangles.triangle_count() as u32 {
        let region = triangles.region[t as usize];
        if region == NONE {
            continue;
        }
        let mut parts = vec![triangles.corners(t)];
        while let Some(corners) = parts.pop() {
            let [a, b, c] = corners;
            let middle = [(a[0] + b[0] + c[0]) / 3.0, (a[1] + b[1] + c[1]) / 3.0];
            let radius = corners.iter().map(|p| (p[0] - middle[0]).hypot(p[1] - middle[1])).fold(0.0, f64::max);
            let (base, source) = (sizes.of_region(region), sizes.by_sources(middle));
            let size = base.min(source);
            if source - GRADING * radius >= base || radius <= 2.0 * size {
                let area = 0.5 * ((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]));
                count += area * 4.0 / (3.0_f64.sqrt() * size * size);
                if count > limit as f64 {
                    return Err(too_many(count, limit));
                }
            } else {
                parts.extend(halves(corners));
            }
        }
    }
    Ok(())
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
