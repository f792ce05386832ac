//! Points of a lattice of equilateral triangles where the wanted size is the same all around: there no refinement
//! could do better.

use super::insert::{Cavity, Spot};
use super::loops::distance_to_segment;
use super::sizes::SizeField;
use super::triangulation::{NONE, Triangulation};

/// Lattice points keep this distance from other vertices, in sizes.
const FROM_VERTICES: f64 = 0.72;
/// Lattice points keep this distance from segments, in sizes.
const FROM_SEGMENTS: f64 = 0.6;

/// Every 64th row and column first, then every 8th, then all: the large triangles at the start soon become many small
/// ones, in which ways are short and cavities small.
const STRIDES: [i64; 3] = [64, 8, 1];

/// A triangle before a round of seeding: it is convex and crossed by no segment, so its seeds can be reached from one another.
struct Field {
    corners: [[f64; 2]; 3],
    vertex: u32,
    region: u32,
}

/// Puts lattice points into all triangles that are large against the wanted size. `low` anchors the lattice.
pub(super) fn seed(mesh: &mut Triangulation, cavity: &mut Cavity, sizes: &SizeField, low: [f64; 2]) {
    for stride in STRIDES {
        let fields: Vec<Field> = (0..mesh.triangle_count() as u32).map(|t| field(mesh, t)).collect();
        for field in fields {
            seed_field(mesh, cavity, sizes, low, stride, &field);
        }
    }
}

fn field(mesh: &Triangulation, t: u32) -> Field {
    Field { corners: mesh.corners(t), vertex: mesh.origin[3 * t as usize], region: mesh.region[t as usize] }
}

fn seed_field(
    mesh: &mut Triangulation,
    cavity: &mut Cavity,
    sizes: &SizeField,
    low: [f64; 2],
    stride: i64,
    field: &Field,
) {
    let size = sizes.of_region(field.region);
    let height = 0.75_f64.sqrt() * size;
    let bottom = field.corners.iter().map(|c| c[1]).fold(f64::INFINITY, f64::min);
    let top = field.corners.iter().map(|c| c[1]).fold(f64::NEG_INFINITY, f64::max);
    let steps = |from: f64, to: f64, step: f64| {
        let step = step * stride as f64;
        ((from / step).ceil() as i64..=(to / step).floor() as i64).map(|i| i * stride)
    };
    let mut from = field.vertex;
    for row in steps(bottom - low[1], top - low[1], height) {
        let y = low[1] + row as f64 * height;
        let Some((left, right)) = chord(&field.corners, y) else { continue };
        let shift = low[0] + if row % 2 == 0 { 0.0 } else { 0.5 * size };
        for column in steps(left - shift, right - shift, size) {
            let x = [shift + column as f64 * size, y];
            if sizes.by_sources(x) >= size {
                from = try_seed(mesh, cavity, x, size, from).unwrap_or(from);
            }
        }
    }
}

/// Where a horizontal line cuts a triangle.
fn chord(corners: &[[f64; 2]; 3], y: f64) -> Option<(f64, f64)> {
    let mut cut = (f64::INFINITY, f64::NEG_INFINITY);
    for i in 0..3 {
        let (a, b) = (corners[i], corners[(i + 1) % 3]);
        if (a[1] <= y) != (b[1] <= y) {
            let x = a[0] + (y - a[1]) / (b[1] - a[1]) * (b[0] - a[0]);
            cut = (cut.0.min(x), cut.1.max(x));
        }
    }
    (cut.0 < cut.1).then_some(cut)
}

/// Inserts a lattice point unless it comes too close to what is there. The way starts at vertex `from`.
fn try_seed(mesh: &mut Triangulation, cavity: &mut Cavity, x: [f64; 2], size: f64, from: u32) -> Option<u32> {
    let Spot::In(t) = mesh.walk(mesh.leaving[from as usize], x) else { return None };
    cavity.dig(mesh, x, t);
    let free = cavity.rim.iter().all(|edge| {
        let (a, b) = (mesh.place(edge.from), mesh.place(edge.to));
        let square = (a[0] - x[0]).powi(2) + (a[1] - x[1]).powi(2);
        square >= (FROM_VERTICES * size).powi(2)
            && (edge.segment == NONE || distance_to_segment(x, a, b) >= FROM_SEGMENTS * size)
    });
    if free { cavity.fill(mesh, x, None) } else { None }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_chord_ends_on_the_sides() {
        let corners = [[0.0, 0.0], [2.0, 0.0], [0.0, 2.0]];
        assert_eq!(chord(&corners, 0.5), Some((0.0, 1.5)));
        assert_eq!(chord(&corners, 2.5), None);
    }

    #[test]
    fn seeds_stand_on_the_lattice_clear_of_the_rim() {
        let square = vec![[0.0, 0.0], [10.0, 0.0], [10.0, 10.0], [0.0, 10.0]];
        let mut mesh = Triangulation::constrained(square, &[[0, 1], [1, 2], [2, 3], [3, 0]]).unwrap();
        mesh.region.fill(0);
        seed(&mut mesh, &mut Cavity::default(), &SizeField::new(vec![1.0], Vec::new(), [0.0; 2], 10.0), [0.0; 2]);
        let height = 0.75_f64.sqrt();
        assert!((85..=95).contains(&(mesh.points.len() - 4)), "{}", mesh.points.len());
        for p in &mesh.points[4..] {
            let row = (p[1] / height).round();
            assert!((p[1] - row * height).abs() < 1e-12);
            assert!(p.iter().all(|x| (0.45..=9.55).contains(x)), "{p:?}");
        }
    }

    #[test]
    fn seeds_keep_clear_of_vertices_and_of_smaller_sizes() {
        use crate::outline::sizes::Source;
        let points = vec![[0.0, 0.0], [10.0, 0.0], [10.0, 10.0], [0.0, 10.0], [5.3, 5.1]];
        let mut mesh = Triangulation::constrained(points, &[[0, 1], [1, 2], [2, 3], [3, 0]]).unwrap();
        mesh.region.fill(0);
        let source = Source { ends: [[0.0, 0.0], [0.0, 10.0]], size: 0.4 }; // reaches 1 at x = 2
        seed(&mut mesh, &mut Cavity::default(), &SizeField::new(vec![1.0], vec![source], [0.0; 2], 10.0), [0.0; 2]);
        assert!(mesh.points.len() > 60);
        for p in &mesh.points[5..] {
            assert!((p[0] - 5.3).hypot(p[1] - 5.1) >= FROM_VERTICES, "{p:?}");
            assert!(p[0] >= 2.0, "{p:?}");
        }
    }
}
