//! Vectors as arrows on a regular grid.

use hypercircle_mesh::Mesh;

use super::axes::round_step;
use super::layout::{Layout, TEXT};
use super::pieces::corners;
use super::scan;
use super::svg::{Anchor, INK, Pixel, Svg, polyline, text_width};
use crate::table::significant;

/// Distance of neighboring arrows in pixels; smaller in narrow domains.
const SPACING: f64 = 26.0;
/// Shorter arrows become dots.
const SHORTEST: f64 = 2.0;

/// An arrow of the picture: where it begins and the vector in the user's unit.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Sample {
    at: Pixel,
    vector: [f64; 2],
}

impl Sample {
    /// Tail and tip of the arrow, whose middle is the grid point.
    fn ends(&self, scale: f64) -> [Pixel; 2] {
        // y of the page points downwards.
        let half = [0.5 * scale * self.vector[0], -0.5 * scale * self.vector[1]];
        [[self.at[0] - half[0], self.at[1] - half[1]], [self.at[0] + half[0], self.at[1] + half[1]]]
    }
}

/// Draws one vector for each cell, sampled on a grid, and a legend with a round length.
pub(crate) fn draw(svg: &mut Svg, layout: &Layout, mesh: &Mesh<2>, vectors: &[[f64; 2]], unit: &str) {
    let (corner, size) = layout.domain();
    let samples = samples(mesh, vectors, &|x| layout.to_pixel(x), corner, size);
    let spacing = spacing(size);
    let scale = pixels_per_unit(&samples, spacing);
    let (mut shafts, mut heads, mut dots) = (String::new(), String::new(), String::new());
    for sample in &samples {
        let [from, to] = sample.ends(scale);
        if (to[0] - from[0]).hypot(to[1] - from[1]) < SHORTEST {
            dots += &polyline(&[sample.at, [sample.at[0] + 0.01, sample.at[1]]], false);
        } else {
            shafts += &polyline(&[from, to], false);
            heads += &head(from, to);
        }
    }
    for (width, color) in [(2.8, "#fff\" stroke-opacity=\".75"), (1.1, INK)] {
        let line = format!("fill=\"none\" stroke=\"{color}\" stroke-width=\"{width}\" stroke-linecap=\"round\"");
        svg.path(&shafts, &line);
        svg.path(&dots, &line);
        let fill = if width > 2.0 { "#fff" } else { INK };
        svg.path(&heads, &format!("fill=\"{fill}\" stroke=\"{color}\" stroke-width=\"{}\"", 0.6 * width));
    }
    legend(svg, layout, scale, unit);
}

/// Distance of arrows in a domain of this size: at least three rows fit.
fn spacing(size: [f64; 2]) -> f64 {
    (size[0].min(size[1]) / 3.0).clamp(12.0, SPACING)
}

/// The vector of the cell at each grid point of the domain, row by row.
fn samples(
    mesh: &Mesh<2>,
    vectors: &[[f64; 2]],
    to_pixel: &dyn Fn([f64; 2]) -> Pixel,
    corner: Pixel,
    size: [f64; 2],
) -> Vec<Sample> {
    let spacing = spacing(size);
    let [columns, rows] = size.map(|s| ((s / spacing).round() as usize).max(1));
    let step = [size[0] / columns as f64, size[1] / rows as f64];
    let place = |i: usize, j: usize| [corner[0] + (i as f64 + 0.5) * step[0], corner[1] + (j as f64 + 0.5) * step[1]];
    let mut grid = vec![None; columns * rows];
    for cell in mesh.cells() {
        let triangle = corners(mesh, cell).map(to_pixel).map(|p| [0, 1].map(|d| (p[d] - corner[d]) / step[d] - 0.5));
        scan::inside(&triangle, columns, rows, |i, j, _| {
            // A point on a side belongs to the first of its cells.
            grid[j * columns + i].get_or_insert(Sample { at: place(i, j), vector: vectors[cell.index()] });
        });
    }
    grid.into_iter().flatten().collect()
}

/// Length of arrows: most are shorter than the spacing, and the longest never reach much further, so that a singular
/// corner neither hides its surroundings nor makes all other arrows vanish.
fn pixels_per_unit(samples: &[Sample], spacing: f64) -> f64 {
    let mut lengths: Vec<f64> = samples.iter().map(|s| s.vector[0].hypot(s.vector[1])).collect();
    lengths.sort_by(f64::total_cmp);
    let (Some(&longest), Some(&usual)) = (lengths.last(), lengths.get(lengths.len() * 9 / 10)) else { return 0.0 };
    let scale =
        if usual > 0.0 { (0.9 * spacing / usual).min(1.6 * spacing / longest) } else { 1.6 * spacing / longest };
    if scale.is_finite() { scale } else { 0.0 }
}

/// A filled head at the end of an arrow.
fn head(from: Pixel, to: Pixel) -> String {
    let (dx, dy) = (to[0] - from[0], to[1] - from[1]);
    let length = dx.hypot(dy);
    let size = (0.4 * length).min(6.0);
    let (ux, uy) = (dx / length * size, dy / length * size);
    let (left, right) =
        ([to[0] - ux - 0.4 * uy, to[1] - uy + 0.4 * ux], [to[0] - ux + 0.4 * uy, to[1] - uy - 0.4 * ux]);
    polyline(&[to, left, right], true)
}

/// An arrow of round length above the frame.
fn legend(svg: &mut Svg, layout: &Layout, scale: f64, unit: &str) {
    if scale <= 0.0 {
        return;
    }
    let value = round_step(22.0 / scale);
    let text = format!("{} {unit}", significant(value, 1));
    let end = layout.legend_end();
    let start = end[0] - text_width(&text, TEXT) - 12.0;
    svg.text([end[0], end[1]], TEXT, Anchor::End, text.trim_end());
    let (from, to) = ([start - value * scale, end[1] - 4.0], [start, end[1] - 4.0]);
    svg.line(from, to, &format!("stroke=\"{INK}\" stroke-width=\"1.1\""));
    svg.path(&head(from, to), &format!("fill=\"{INK}\""));
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::Rectangle;

    use super::*;

    #[test]
    fn each_grid_point_of_the_domain_has_the_vector_of_its_cell() {
        let mesh = Rectangle::new([0.0, 0.0], [300.0, 150.0], [7, 5]).mesh().unwrap();
        let vectors: Vec<[f64; 2]> = mesh.cells().map(|c| mesh.cell_center(c)).collect();
        let found = samples(&mesh, &vectors, &|x| x, [0.0, 0.0], [300.0, 150.0]);
        assert_eq!(found.len(), 12 * 6);
        for s in found {
            assert!((s.at[0] - s.vector[0]).abs() < 50.0 && (s.at[1] - s.vector[1]).abs() < 35.0);
        }
    }

    #[test]
    fn a_vector_upwards_points_to_the_top_of_the_page() {
        let sample = Sample { at: [50.0, 50.0], vector: [3.0, 4.0] };
        assert_eq!(sample.ends(2.0), [[47.0, 54.0], [53.0, 46.0]]);
    }

    #[test]
    fn one_huge_vector_does_not_hide_the_others() {
        let mut samples = vec![Sample { at: [0.0; 2], vector: [1.0, 0.0] }; 99];
        samples.push(Sample { at: [0.0; 2], vector: [0.0, 1000.0] });
        let scale = pixels_per_unit(&samples, 26.0);
        assert!(1000.0 * scale <= 1.6 * 26.0 + 1e-9);
        samples.pop();
        assert!((pixels_per_unit(&samples, 26.0) - 0.9 * 26.0).abs() < 1e-12);
    }

    #[test]
    fn no_flow_has_no_length() {
        assert_eq!(pixels_per_unit(&[Sample { at: [0.0; 2], vector: [0.0; 2] }], 26.0), 0.0);
        assert_eq!(pixels_per_unit(&[], 26.0), 0.0);
    }
}
