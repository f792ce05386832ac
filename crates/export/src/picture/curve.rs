//! Curves over an interval.

use std::fmt::Write as _;
use std::path::Path;

use hypercircle_mesh::{CellId, Mesh, RegionId};

use super::axes::Ticks;
use super::frame::{self, Axis, label_room};
use super::layout::{MARGIN, TEXT, draw_title, horizontal_ticks, title_height, title_lines};
use super::markers::{self, Mark};
use super::parabola::Parabola;
use super::svg::{Anchor, Pixel, Svg, number, polyline, text_width};
use crate::table::significant;
use crate::{ExportError, Field};

/// Size of the frame in pixels.
const SIZE: [f64; 2] = [540.0, 300.0];
/// More cells than this are drawn by what shows in each column of pixels.
const MOST_CELLS: usize = 4_000;

/// A picture of a field over an interval: the curve, the values at its ends and its extremes, the regions behind it.
///
/// ```
/// use hypercircle_export::{CurvePicture, Field};
/// use hypercircle_mesh::Interval;
/// let wall = Interval::pieces(&[("brick", 0.0, 0.24, 8), ("foam", 0.24, 0.36, 4)]).mesh()?;
/// let field = Field::of_function(&wall, "temperature", "°C", 2, |x| 20.0 - 80.0 * x[0] * x[0]);
/// let svg = CurvePicture::of(&wall, &field).title("Through the wall").length_unit("m").to_svg()?;
/// assert!(svg.contains("foam"));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
#[must_use]
pub struct CurvePicture<'a> {
    mesh: &'a Mesh<1>,
    field: &'a Field,
    title: String,
    length_unit: String,
    minimum: bool,
}

impl<'a> CurvePicture<'a> {
    /// A picture of a field over a mesh of intervals.
    pub fn of(mesh: &'a Mesh<1>, field: &'a Field) -> Self {
        Self { mesh, field, title: String::new(), length_unit: String::new(), minimum: false }
    }

    /// The title above the picture.
    pub fn title(mut self, title: &str) -> Self {
        self.title = title.into();
        self
    }

    /// The unit of the coordinate.
    pub fn length_unit(mut self, unit: &str) -> Self {
        self.length_unit = unit.into();
        self
    }

    /// Whether to mark the smallest value too.
    pub fn minimum(mut self, wanted: bool) -> Self {
        self.minimum = wanted;
        self
    }

    /// The text of the SVG file.
    ///
    /// # Errors
    /// For a field that does not fit the mesh, values that are not finite or too large, and a mesh that cannot be
    /// drawn to scale.
    pub fn to_svg(&self) -> Result<String, ExportError> {
        let plot = Plot::new(self)?;
        let mut svg = Svg::default();
        let mut notes = plot.draw_regions(&mut svg, self.mesh);
        plot.draw_grid(&mut svg);
        let style = "fill=\"none\" stroke=\"#0b5394\" stroke-width=\"2\" stroke-linejoin=\"round\"";
        svg.path(&plot.curve_data(), style);
        let x_axis = Axis {
            ticks: &plot.ticks[0],
            title: plot.ticks[0].title("x", &self.length_unit),
            place: &|x| plot.to_pixel([x, 0.0])[0],
        };
        let y_axis = Axis {
            ticks: &plot.ticks[1],
            title: plot.ticks[1].title(self.field.name(), self.field.unit()),
            place: &|u| plot.to_pixel([0.0, u])[1],
        };
        frame::draw(&mut svg, plot.frame, &x_axis, &y_axis);
        notes.extend(self.draw_marks(&mut svg, &plot));
        draw_title(&mut svg, &plot.title, plot.frame[0], plot.width());
        let height = svg.notes(&notes, plot.frame[0], plot.frame[3] + 44.0, plot.width());
        Ok(svg.finish(plot.width(), height))
    }

    /// Writes the SVG file.
    ///
    /// # Errors
    /// Those of [`Self::to_svg`], and [`ExportError::Io`] when the file cannot be written.
    pub fn save(&self, path: impl AsRef<Path>) -> Result<(), ExportError> {
        ExportError::write(path.as_ref(), self.to_svg()?.as_bytes())
    }

    /// Marks both ends and the extremes; gives what found no room in the frame.
    fn draw_marks(&self, svg: &mut Svg, plot: &Plot) -> Vec<String> {
        let (Some(first), Some(last)) = (plot.cells.first(), plot.cells.last()) else { return Vec::new() };
        let ends = [first.start(), last.end()];
        let value = |u: f64| with_unit(&plot.printed(u), self.field.unit());
        let mut texts: Vec<([f64; 2], String)> = ends.iter().map(|p| (*p, value(p[1]))).collect();
        let extremes = [("largest", plot.largest, true), ("smallest", plot.smallest, self.minimum)];
        for (word, [x, u], wanted) in extremes {
            if !wanted || plot.largest[1] <= plot.smallest[1] {
                continue;
            }
            match ends.iter().position(|end| end[1] == u) {
                Some(i) => texts[i].1 = format!("{word} {}", value(u)),
                None => {
                    let place = with_unit(&significant(x, 3), &self.length_unit);
                    texts.push(([x, u], format!("{word} {} at x = {place}", value(u))));
                }
            }
        }
        let marks: Vec<Mark<'_>> = texts.iter().map(|(p, text)| Mark { at: plot.to_pixel(*p), text }).collect();
        markers::draw(svg, plot.frame, &marks, &plot.sampled())
    }
}

/// A number with its unit, if it has one.
fn with_unit(number: &str, unit: &str) -> String {
    if unit.is_empty() { number.into() } else { format!("{number} {unit}") }
}

/// The curve and the map from its coordinates to the page.
#[derive(Debug)]
struct Plot {
    /// The curve in each cell, from left to right.
    cells: Vec<Parabola>,
    low: [f64; 2],
    high: [f64; 2],
    largest: [f64; 2],
    smallest: [f64; 2],
    frame: [f64; 4],
    ticks: [Ticks; 2],
    title: Vec<String>,
}

impl Plot {
    fn new(picture: &CurvePicture<'_>) -> Result<Self, ExportError> {
        let mut cells = parabolas(picture.mesh, picture.field)?;
        cells.sort_by(|a, b| a.start()[0].total_cmp(&b.start()[0]));
        let start = cells.first().map_or([0.0; 2], Parabola::start);
        let (mut smallest, mut largest) = (start, start);
        for point in cells.iter().flat_map(Parabola::candidates) {
            if point[1] > largest[1] {
                largest = point;
            }
            if point[1] < smallest[1] {
                smallest = point;
            }
        }
        let ([x_low], [x_high]) = picture.mesh.bounding_box();
        let span = largest[1] - smallest[1];
        // Head room for texts; a constant stands in the middle.
        let size = largest[1].abs().max(smallest[1].abs());
        let room = if span > 1e-12 * size { 0.14 * span } else { (0.1 * size).max(1e-290) };
        let (low, high) = ([x_low, smallest[1] - room], [x_high, largest[1] + room]);
        if !(x_high > x_low && (x_high - x_low).is_finite() && (high[1] - low[1]).is_finite()) {
            return Err(ExportError::Extent { what: "the curve".into(), low: low.to_vec(), high: high.to_vec() });
        }
        let ticks = [horizontal_ticks(x_low, x_high, SIZE[0]), Ticks::new(low[1], high[1], 8)];
        let left = MARGIN + 34.0 + label_room(&ticks[1]);
        let title = title_lines(&picture.title, left + SIZE[0]);
        let top = MARGIN + title_height(&title) + if title.is_empty() { 0.0 } else { 6.0 };
        let frame = [left, top, left + SIZE[0], top + SIZE[1]];
        Ok(Self { cells, low, high, largest, smallest, frame, ticks, title })
    }

    fn width(&self) -> f64 {
        self.frame[2] + MARGIN + 14.0
    }

    fn to_pixel(&self, [x, u]: [f64; 2]) -> Pixel {
        let share =
            [(x - self.low[0]) / (self.high[0] - self.low[0]), (u - self.low[1]) / (self.high[1] - self.low[1])];
        [self.frame[0] + share[0] * SIZE[0], self.frame[3] - share[1] * SIZE[1]]
    }

    /// A value to a thousandth of the range of the curve.
    fn printed(&self, u: f64) -> String {
        let span = self.largest[1] - self.smallest[1];
        let reference = if span > 0.0 { span } else { u.abs() };
        if u.abs() < 5e-4 * reference || reference == 0.0 {
            return "0".into();
        }
        let digits = u.abs().log10().floor() - reference.log10().floor() + 3.0;
        significant(u, digits.clamp(1.0, 12.0) as usize).replace('-', "−")
    }

    /// Pale bands behind the regions with their names; gives the names that found no room.
    fn draw_regions(&self, svg: &mut Svg, mesh: &Mesh<1>) -> Vec<String> {
        let runs = regions(mesh);
        let mut notes = Vec::new();
        for (i, (region, from, to)) in runs.iter().enumerate() {
            let (a, b) = (self.to_pixel([*from, 0.0])[0], self.to_pixel([*to, 0.0])[0]);
            let [x, y, w, h] = [a, self.frame[1], b - a, SIZE[1]].map(number);
            let tint = ["#f4f1ea", "#e3eaf0"][i % 2];
            svg.raw(&format!("<rect x=\"{x}\" y=\"{y}\" width=\"{w}\" height=\"{h}\" fill=\"{tint}\"/>"));
            let name = mesh.region_name(*region);
            if runs.len() < 2 || name.is_empty() {
                continue;
            }
            let mut shown = name.to_string();
            if text_width(name, TEXT) + 6.0 > b - a {
                shown = format!("({})", (b'a' + (notes.len() % 26) as u8) as char);
                notes.push(format!("{shown} {name}"));
            }
            let style = "fill-opacity=\".7\" font-style=\"italic\"";
            svg.styled_text([0.5 * (a + b), self.frame[1] + 16.0], TEXT, Anchor::Middle, &shown, style);
        }
        notes
    }

    /// Points of the curve a few pixels apart, for texts to keep clear of.
    fn sampled(&self) -> Vec<Pixel> {
        let pixels = |cell: &Parabola| self.to_pixel(cell.end())[0] - self.to_pixel(cell.start())[0];
        let steps = |cell: &Parabola| (pixels(cell) / 3.0).clamp(1.0, SIZE[0]) as usize;
        let each = |cell: &Parabola| -> Vec<Pixel> {
            let n = steps(cell);
            (0..=n).map(|i| self.to_pixel(cell.at(i as f64 / n as f64))).collect()
        };
        self.cells.iter().flat_map(each).collect()
    }

    fn draw_grid(&self, svg: &mut Svg) {
        let style = "stroke=\"#000\" stroke-opacity=\".12\" stroke-width=\".7\"";
        for u in &self.ticks[1].values {
            let y = self.to_pixel([0.0, *u])[1];
            svg.line([self.frame[0], y], [self.frame[2], y], style);
        }
    }

    /// Path data of the curve: parabolas exactly, or the visible outline of very many cells.
    fn curve_data(&self) -> String {
        if self.cells.len() > MOST_CELLS {
            let points = self.cells.iter().flat_map(Parabola::candidates).map(|p| self.to_pixel(p));
            return polyline(&columns(points), false);
        }
        let mut data = String::new();
        let mut end = None;
        for cell in &self.cells {
            let [a, control, b] = [cell.start(), cell.control(), cell.end()].map(|p| self.to_pixel(p).map(number));
            if end.as_ref() != Some(&a) {
                // Writing to a string cannot fail.
                let _ = write!(data, "M{} {}", a[0], a[1]);
            }
            let _ = write!(data, "Q{} {} {} {}", control[0], control[1], b[0], b[1]);
            end = Some(b);
        }
        data
    }
}

/// The curve of each cell: a parabola where the order is 1 or 2, else so many that the eye sees no difference.
fn parabolas(mesh: &Mesh<1>, field: &Field) -> Result<Vec<Parabola>, ExportError> {
    let nodes = field.check(mesh)?;
    let pieces = if field.order() <= 2 { 1 } else { 4 * field.order() };
    let step = 1.0 / pieces as f64;
    let points: Vec<[f64; 2]> = (0..=2 * pieces).map(|i| [0.5 * step * i as f64, 0.0]).collect();
    let sampler = nodes.sampler(&points);
    let mut all = Vec::new();
    for (cell, values) in mesh.cells().zip(field.values().chunks_exact(nodes.reference().len())) {
        let [a, b] = ends(mesh, cell);
        let x = |i: usize| if i == pieces { b } else { a + (b - a) * (i as f64 * step) };
        let u = |i: usize| sampler.value(i, values);
        all.extend((0..pieces).map(|i| Parabola::new([x(i), x(i + 1)], [u(2 * i), u(2 * i + 2), u(2 * i + 1)])));
    }
    Ok(all)
}

/// The ends of a cell.
fn ends(mesh: &Mesh<1>, cell: CellId) -> [f64; 2] {
    let v = mesh.cell_vertices(cell);
    [mesh.point(v[0])[0], mesh.point(v[1])[0]]
}

/// Runs of neighboring cells of one region, from left to right.
fn regions(mesh: &Mesh<1>) -> Vec<(RegionId, f64, f64)> {
    let mut cells: Vec<(f64, f64, RegionId)> =
        mesh.cells().map(|c| (ends(mesh, c)[0], ends(mesh, c)[1], mesh.region(c))).collect();
    cells.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut runs: Vec<(RegionId, f64, f64)> = Vec::new();
    for (from, to, region) in cells {
        match runs.last_mut() {
            Some(run) if run.0 == region && run.2 == from => run.2 = to,
            _ => runs.push((region, from, to)),
        }
    }
    runs
}

/// First, lowest, highest and last point of each half column of pixels: what shows of a line through many points.
fn columns(points: impl Iterator<Item = Pixel>) -> Vec<Pixel> {
    let mut kept = Vec::new();
    let mut column: Option<(i64, [Pixel; 4])> = None;
    for p in points {
        let number = (2.0 * p[0]).floor() as i64;
        match &mut column {
            Some((n, [_, low, high, last])) if *n == number => {
                *last = p;
                *low = if p[1] < low[1] { p } else { *low };
                *high = if p[1] > high[1] { p } else { *high };
            }
            _ => kept.extend(column.replace((number, [p; 4])).into_iter().flat_map(|(_, four)| four)),
        }
    }
    kept.extend(column.into_iter().flat_map(|(_, four)| four));
    kept.dedup();
    kept
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::Interval;

    use super::*;

    fn wall() -> Mesh<1> {
        Interval::pieces(&[("brick", 0.0, 0.24, 3), ("a very thin layer of plaster", 0.24, 0.25, 1)]).mesh().unwrap()
    }

    #[test]
    fn the_top_of_a_parabola_is_marked_inside_its_cell() {
        let line = Interval::uniform(0.0, 1.0, 1).mesh().unwrap();
        let field = Field::of_function(&line, "u", "K", 2, |x| 5.0 + x[0] * (1.0 - x[0]) * 8.0);
        let svg = CurvePicture::of(&line, &field).length_unit("m").to_svg().unwrap();
        assert!(svg.contains("largest 7.00 K at x = 0.500 m"), "{svg}");
        assert_eq!(svg.matches(">5.00 K<").count(), 4, "both ends, each with its white rim");
        assert!(!svg.contains("smallest"));
    }

    #[test]
    fn a_curve_of_high_order_keeps_its_waves() {
        let line = Interval::uniform(0.0, 1.0, 2).mesh().unwrap();
        let wave = |x: &[f64; 1]| (9.0 * x[0]).sin();
        let field = Field::of_function(&line, "u", "", 9, wave);
        let cells = parabolas(&line, &field).unwrap();
        for t in [0.0, 0.3, 1.0] {
            assert!(cells.iter().map(|c| c.at(t)).all(|[x, u]| (wave(&[x]) - u).abs() < 1e-4));
        }
    }

    #[test]
    fn names_without_room_are_listed() {
        let mesh = wall();
        let field = Field::of_function(&mesh, "u", "K", 1, |x| x[0]);
        let svg = CurvePicture::of(&mesh, &field).minimum(true).to_svg().unwrap();
        assert!(svg.contains(">brick<") && svg.contains(">(a)<") && svg.contains("(a) a very thin layer"));
        assert!(svg.contains("smallest 0 K") && svg.contains("largest 0.250 K"));
    }

    #[test]
    fn a_constant_has_a_picture() {
        let mesh = wall();
        for value in [0.0, -40.0] {
            let field = Field::of_function(&mesh, "u", "", 2, |_| value);
            assert!(CurvePicture::of(&mesh, &field).to_svg().unwrap().contains('Q'));
        }
    }

    #[test]
    fn very_many_cells_make_a_small_file_that_keeps_peaks() {
        let line = Interval::uniform(0.0, 1.0, 100_000).mesh().unwrap();
        let peak = |x: &[f64; 1]| if (x[0] - 0.5).abs() < 1e-7 { 1.0 } else { 0.0 };
        let field = Field::of_function(&line, "u", "", 1, peak);
        let picture = CurvePicture::of(&line, &field);
        let svg = picture.to_svg().unwrap();
        assert!(svg.len() < 200_000, "{}", svg.len());
        let plot = Plot::new(&picture).unwrap();
        let top = number(plot.to_pixel([0.5, 1.0])[1]);
        assert!(plot.curve_data().contains(&top));
    }

    #[test]
    fn values_beyond_any_scale_are_told() {
        let mesh = wall();
        let field = Field::of_function(&mesh, "u", "", 1, |x| if x[0] < 0.1 { -1.7e308 } else { 1.7e308 });
        assert!(matches!(CurvePicture::of(&mesh, &field).to_svg(), Err(ExportError::Extent { .. })));
    }
}
