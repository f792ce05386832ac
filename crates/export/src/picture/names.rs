//! Names of regions inside them and of sides along them; a name without room is lettered and listed below.

use hypercircle_mesh::{Mesh, RegionId, SideNameId};

use super::layout::{Layout, TEXT};
use super::lines::chains;
use super::rooms::{GRID, Rooms};
use super::svg::{INK, Pixel, Svg, number, text_width};

/// Distance of the middle of a name from its side.
const ASIDE: f64 = 9.0;

/// Letters for names without room, the list of these names, and the boxes that texts cover.
#[derive(Debug, Default)]
pub(crate) struct Notes {
    pub(crate) lines: Vec<String>,
    /// Left, top, right and bottom of each text.
    covered: Vec<[f64; 4]>,
}

impl Notes {
    /// Points under the texts, for other texts to keep clear of.
    pub(crate) fn points(&self) -> Vec<Pixel> {
        let across = |[a, _, b, _]: &[f64; 4]| ((b - a) / GRID) as usize;
        let point = |[a, t, _, b]: &[f64; 4], i: usize| [a + i as f64 * GRID, 0.5 * (t + b)];
        self.covered.iter().flat_map(|r| (0..=across(r)).map(|i| point(r, i))).collect()
    }

    /// Writes a rimmed text in italics around a point, turned clockwise by an angle in degrees.
    fn write(&mut self, svg: &mut Svg, at: Pixel, angle: f64, text: &str) {
        let turn = if angle == 0.0 {
            String::new()
        } else {
            format!("transform=\"rotate({} {} {})\" ", number(angle), number(at[0]), number(at[1]))
        };
        svg.rimmed_italics([at[0], at[1] + 0.35 * TEXT], TEXT, text, &turn);
        let (sin, cos) = angle.to_radians().sin_cos();
        let half = [0.5 * text_width(text, TEXT) + 2.0, 0.5 * TEXT + 2.0];
        let [w, h] = [half[0] * cos.abs() + half[1] * sin.abs(), half[0] * sin.abs() + half[1] * cos.abs()];
        self.covered.push([at[0] - w, at[1] - h, at[0] + w, at[1] + h]);
    }

    /// The letter that stands for a name.
    fn letter(&mut self, name: &str) -> String {
        let n = self.lines.len();
        let letter = char::from(b'a' + (n % 26) as u8);
        let round = if n < 26 { String::new() } else { (n / 26).to_string() };
        let short = format!("{letter}{round}");
        self.lines.push(format!("{short}: {name}"));
        short
    }
}

/// Writes the name of each region where there is most room in it.
pub(crate) fn regions(svg: &mut Svg, layout: &Layout, mesh: &Mesh<2>, notes: &mut Notes) {
    let mut rooms = Rooms::new(layout, mesh);
    rooms.cover(&notes.covered);
    rooms.measure();
    let mut largest = vec![(0.0, None); mesh.region_names().len()];
    for cell in mesh.cells() {
        let best = &mut largest[mesh.region(cell).index()];
        if mesh.cell_measure(cell) > best.0 {
            *best = (mesh.cell_measure(cell), Some(cell));
        }
    }
    for (number, (_, cell)) in largest.into_iter().enumerate() {
        let Some(cell) = cell else { continue };
        let region = RegionId(number as u32);
        let name = mesh.region_name(region);
        let [length, height] = [text_width(name, TEXT) + 4.0, TEXT + 4.0];
        if let Some(at) = rooms.middle(region, [length, height]) {
            notes.write(svg, at, 0.0, name);
        } else if let Some(at) = rooms.middle(region, [height, length]) {
            notes.write(svg, at, -90.0, name);
        } else {
            // A region too thin for the grid is shown at its largest cell.
            let boxes = [[height; 2], [0.0, height], [height, 0.0], [0.0; 2]];
            let at = boxes.iter().find_map(|size| rooms.middle(region, *size));
            let at = at.unwrap_or_else(|| layout.to_pixel(mesh.cell_center(cell)));
            let letter = notes.letter(name);
            notes.write(svg, at, 0.0, &letter);
        }
    }
}

/// Writes each name of sides along the middle of its longest line, on the side of the cell that carries it.
pub(crate) fn sides(svg: &mut Svg, layout: &Layout, mesh: &Mesh<2>, notes: &mut Notes) {
    for number in 0..mesh.side_names().len() as u32 {
        let name = SideNameId(number);
        let Some(line) = longest_line(layout, mesh, name) else { continue };
        svg.path(
            &super::svg::polyline(&line.points, false),
            &format!("fill=\"none\" stroke=\"{INK}\" stroke-width=\"2.2\""),
        );
        let text = mesh.side_name(name);
        let fits = text_width(text, TEXT) + 6.0 < line.length;
        let shown = if fits { text.to_string() } else { notes.letter(text) };
        let aside = if fits { ASIDE } else { ASIDE - 1.0 };
        let at = [0, 1].map(|d| line.middle[d] + aside * line.inwards[d]);
        let angle = if fits { line.angle() } else { 0.0 };
        notes.write(svg, at, angle, &shown);
    }
}

/// A line of sides of one name.
struct Line {
    points: Vec<Pixel>,
    length: f64,
    middle: Pixel,
    /// Direction towards the cell, of length one.
    inwards: Pixel,
}

impl Line {
    /// The angle in degrees at which a text along the middle of the line reads from the left or from below.
    fn angle(&self) -> f64 {
        let [x, y] = self.inwards;
        let angle = (-x).atan2(y).to_degrees();
        if angle > 89.0 {
            angle - 180.0
        } else if angle <= -91.0 {
            angle + 180.0
        } else {
            angle
        }
    }
}

fn longest_line(layout: &Layout, mesh: &Mesh<2>, name: SideNameId) -> Option<Line> {
    let named: Vec<_> = mesh.named_sides().iter().filter(|s| s.name == name).collect();
    let ends =
        |s: &&hypercircle_mesh::NamedSide| mesh.side_vertices(s.cell, s.local).map(|v| layout.to_pixel(mesh.point(v)));
    let segments: Vec<[Pixel; 2]> = named.iter().map(ends).collect();
    let length = |points: &[Pixel]| points.windows(2).map(|p| distance(p[0], p[1])).sum::<f64>();
    let points = chains(&segments).into_iter().max_by(|a, b| length(a).total_cmp(&length(b)))?;
    let total = length(&points);
    let middle = along(&points, 0.5 * total)?;
    // The side nearest to the middle knows where its cell is.
    let off = |s: &[Pixel; 2]| distance(s[0], middle) + distance(s[1], middle) - distance(s[0], s[1]);
    let nearest = (0..segments.len()).min_by(|a, b| off(&segments[*a]).total_cmp(&off(&segments[*b])))?;
    let [a, b] = segments[nearest];
    let size = distance(a, b);
    if size <= 0.0 {
        return None;
    }
    // In walking order the cell lies on the left, which a page with y downwards shows at (dy, −dx).
    let inwards = [(b[1] - a[1]) / size, (a[0] - b[0]) / size];
    Some(Line { points, length: total, middle, inwards })
}

fn distance(a: Pixel, b: Pixel) -> f64 {
    (a[0] - b[0]).hypot(a[1] - b[1])
}

/// The point of a line at a distance from its start.
fn along(points: &[Pixel], wanted: f64) -> Option<Pixel> {
    let mut rest = wanted;
    for pair in points.windows(2) {
        let step = distance(pair[0], pair[1]);
        if step > 0.0 && rest <= step {
            return Some([0, 1].map(|d| pair[0][d] + rest / step * (pair[1][d] - pair[0][d])));
        }
        rest -= step;
    }
    points.last().copied()
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::{Outline, Rectangle, rectangle};

    use super::super::layout::Wishes;
    use super::*;

    fn layout(mesh: &Mesh<2>) -> Layout {
        let (low, high) = mesh.bounding_box();
        Layout::new(low, high, Wishes::default()).unwrap()
    }

    #[test]
    fn sides_are_named_along_them_and_inside() {
        let mesh = Rectangle::new([0.0, 0.0], [4.0, 3.0], [4, 3]).mesh().unwrap();
        let layout = layout(&mesh);
        for (name, inwards, angle) in [
            ("left", [1.0, 0.0], -90.0),
            ("right", [-1.0, 0.0], -90.0),
            ("bottom", [0.0, -1.0], 0.0),
            ("top", [0.0, 1.0], 0.0),
        ] {
            let line = longest_line(&layout, &mesh, mesh.find_side(name).unwrap()).unwrap();
            assert!(distance(line.inwards, inwards) < 1e-12, "{name}");
            assert!((line.angle() - angle).abs() < 1e-9, "{name}: {}", line.angle());
            let at = [0, 1].map(|d| line.middle[d] + 20.0 * inwards[d]);
            assert!(distance(at, layout.to_pixel([2.0, 1.5])) < distance(line.middle, layout.to_pixel([2.0, 1.5])));
        }
    }

    #[test]
    fn names_without_room_are_listed() {
        let mut outline = Outline::new();
        outline.region("body", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
        outline.region("a thin sheet", rectangle((0.0, 1.0), (1.0, 1.02))).unwrap();
        outline.region("a foil", rectangle((1.0, 0.0), (1.001, 1.0))).unwrap();
        outline.region("an upright layer", rectangle((1.001, 0.0), (1.06, 1.0))).unwrap();
        let mesh = outline.mesh(0.2).unwrap();
        let (mut svg, mut notes) = (Svg::default(), Notes::default());
        regions(&mut svg, &layout(&mesh), &mesh, &mut notes);
        assert_eq!(notes.lines, ["a: a thin sheet", "b: a foil"]);
        assert_eq!(notes.covered.len(), 4);
        assert!(notes.points().len() > 10);
        let text = svg.finish(9.0, 9.0);
        assert!(text.contains(">body<"));
        assert!(text.lines().any(|l| l.contains(">an upright layer<") && l.contains("rotate(-90")));
    }
}
