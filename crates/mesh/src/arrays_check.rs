//! The checks of a mesh that comes from elsewhere.

use rayon::prelude::*;

use crate::mesh::distance;
use crate::{CellId, Mesh, MeshError, VertexId};

/// Points closer than this share of the mesh's diameter are the same.
const SAME_POINT: f64 = 1e-13;
/// A triangle of less area than this share of its diameter squared is degenerate.
const FLAT: f64 = 1e-14;

/// Coordinates are finite and no two points are at the same place.
pub(crate) fn check_points<const D: usize>(points: &[[f64; D]]) -> Result<(), MeshError> {
    if let Some(index) = points.iter().position(|p| !p.iter().all(|c| c.is_finite())) {
        return Err(MeshError::NotFinite { what: "point", index, at: points[index].to_vec() });
    }
    let (mut low, mut high) = ([f64::INFINITY; D], [f64::NEG_INFINITY; D]);
    for p in points {
        for i in 0..D {
            low[i] = low[i].min(p[i]);
            high[i] = high[i].max(p[i]);
        }
    }
    let diameter = distance(&low, &high);
    if points.len() > 1 && !(diameter > 0.0 && diameter.is_finite()) {
        return Err(MeshError::NotPositive { what: "the diameter of the set of points".to_owned(), value: diameter });
    }
    match repeated_point(points, &low, SAME_POINT * diameter) {
        Some((first, second)) => {
            Err(MeshError::RepeatedPoint { what: "point", first, second, at: points[second].to_vec() })
        }
        None => Ok(()),
    }
}

/// Two points no farther apart than `reach`, if there are any.
///
/// The points are thrown into boxes of width 2·`reach`. Two points that close share a box in at least one of the 2ᴰ
/// grids that are shifted by half a box or not along each axis, so that it suffices to compare within boxes.
fn repeated_point<const D: usize>(points: &[[f64; D]], low: &[f64; D], reach: f64) -> Option<(usize, usize)> {
    let mut boxes: Vec<([i64; D], u32)> = Vec::with_capacity(points.len());
    for grid in 0..1_usize << D {
        boxes.clear();
        boxes.extend(points.iter().enumerate().map(|(number, p)| {
            let along =
                |i: usize| ((p[i] - low[i]) / (2.0 * reach) + if grid >> i & 1 == 1 { 0.5 } else { 0.0 }) as i64;
            (std::array::from_fn(along), number as u32)
        }));
        boxes.par_sort_unstable();
        for same_box in boxes.chunk_by(|a, b| a.0 == b.0) {
            for (i, (_, first)) in same_box.iter().enumerate() {
                for (_, second) in &same_box[i + 1..] {
                    let (first, second) = (*first as usize, *second as usize);
                    if distance(&points[first], &points[second]) <= reach {
                        return Some((first, second));
                    }
                }
            }
        }
    }
    None
}

/// Vertex numbers are in range, all vertices are used, and cells are neither inverted nor degenerate.
pub(crate) fn check_cells<const D: usize>(
    points: &[[f64; D]],
    vertices: &[VertexId],
    per_cell: usize,
) -> Result<(), MeshError> {
    let mut used = vec![false; points.len()];
    for (number, v) in vertices.chunks_exact(per_cell).enumerate() {
        let cell = CellId(number as u32);
        if let Some(bad) = v.iter().find(|v| v.index() >= points.len()) {
            return Err(MeshError::VertexOutOfRange { cell, index: bad.index(), count: points.len() });
        }
        v.iter().for_each(|v| used[v.index()] = true);
        let corners: [[f64; D]; 3] = std::array::from_fn(|i| points[v[i.min(per_cell - 1)].index()]);
        let (measure, least) = measure_and_least(&corners);
        let at = || {
            let mean = |i: usize| v.iter().map(|v| points[v.index()][i] / per_cell as f64).sum();
            (0..D).map(mean).collect()
        };
        if measure.abs() <= least {
            return Err(MeshError::DegenerateCell { cell, at: at(), measure });
        }
        if measure < 0.0 {
            return Err(MeshError::InvertedCell { cell, at: at(), measure });
        }
    }
    match used.iter().position(|used| !used) {
        Some(i) => Err(MeshError::UnusedVertex { vertex: VertexId(i as u32), at: points[i].to_vec() }),
        None => Ok(()),
    }
}

/// Signed length or area of a cell, and what it must exceed to be told from nothing: the coordinates carry a rounding
/// of 2⁻⁵³ of their size. An interval has its last corner twice.
fn measure_and_least<const D: usize>(corners: &[[f64; D]; 3]) -> (f64, f64) {
    let [a, b, c] = corners;
    let diameter = distance(a, b).max(distance(b, c)).max(distance(c, a));
    let largest = corners.iter().flatten().fold(0.0_f64, |m, x| m.max(x.abs()));
    let rounding = 2.0 * f64::EPSILON * largest;
    if D == 1 {
        return (b[0] - a[0], rounding);
    }
    let measure = 0.5 * ((b[0] - a[0]) * (c[1] - a[1]) - (c[0] - a[0]) * (b[1] - a[1]));
    (measure, diameter * (FLAT * diameter + rounding))
}

/// No side has two cells on the same hand. (A side with more than two cells always has.)
pub(crate) fn check_sides<const D: usize>(
    points: &[[f64; D]],
    vertices: &[VertexId],
    per_cell: usize,
) -> Result<(), MeshError> {
    // A side as its cell walks along it: from vertex to vertex, or the vertex and which end of the interval it is.
    let mut walks: Vec<((VertexId, u32), u32)> = Vec::with_capacity(vertices.len());
    for (cell, v) in vertices.chunks_exact(per_cell).enumerate() {
        for local in 0..per_cell {
            let to = if D == 1 { local as u32 } else { v[(local + 1) % per_cell].0 };
            walks.push(((v[local], to), cell as u32));
        }
    }
    walks.par_sort_unstable();
    let Some(pair) = walks.windows(2).find(|pair| pair[0].0 == pair[1].0) else { return Ok(()) };
    let ((from, to), first) = pair[0];
    let to = if D == 1 { from.index() } else { to as usize };
    let at = (0..D).map(|i| f64::midpoint(points[from.index()][i], points[to][i])).collect();
    Err(MeshError::OverlappingCells { first: CellId(first), second: CellId(pair[1].1), at })
}

/// The triangles around each vertex can all be reached by turning around it.
pub(crate) fn check_fans<const D: usize>(mesh: &Mesh<D>) -> Result<(), MeshError> {
    if D == 1 {
        return Ok(());
    }
    let topology = mesh.topology();
    for vertex in (0..mesh.vertex_count() as u32).map(VertexId) {
        let around = topology.cells_around(vertex);
        let Some(start) = around.first().copied() else { continue };
        let local_in = |cell: CellId| mesh.cell_vertices(cell).iter().position(|v| *v == vertex).unwrap_or(0) as u8;
        // Turning one way around the vertex, from the start to the boundary or back to the start.
        let turn = |side_after: u8| {
            let step = move |cell: &CellId| topology.neighbor(*cell, (local_in(*cell) + side_after) % 3).map(|n| n.0);
            let mut passed = 0;
            let mut next = step(&start);
            while let Some(cell) = next
                && cell != start
            {
                passed += 1;
                next = step(&cell);
            }
            (passed, next.is_some())
        };
        let (passed, closed) = turn(2);
        let reached = 1 + passed + if closed { 0 } else { turn(0).0 };
        if reached < around.len() {
            return Err(MeshError::PinchedVertex { vertex, at: mesh.point(vertex).to_vec() });
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Arrays, Rectangle};

    fn square() -> Vec<[f64; 2]> {
        vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]
    }

    fn error<const V: usize>(points: Vec<[f64; 2]>, cells: &[[u32; V]]) -> MeshError {
        Arrays::new(points, cells).mesh().unwrap_err()
    }

    #[test]
    fn points_that_are_not_finite_or_coincide_are_told() {
        let mut points = square();
        points[2][1] = f64::NAN;
        assert!(matches!(error(points, &[[0, 1, 2]]), MeshError::NotFinite { what: "point", index: 2, .. }));
        for shift in [0.0, 1e-14, -1e-14] {
            let mut points = square();
            points.push([1.0 + shift, shift]);
            let told = error(points.clone(), &[[0, 1, 2], [0, 2, 3], [0, 2, 4]]);
            assert_eq!(told, MeshError::RepeatedPoint { what: "point", first: 1, second: 4, at: points[4].to_vec() });
        }
        assert!(matches!(error(vec![[1.0, 1.0]; 3], &[[0, 1, 2]]), MeshError::NotPositive { value: 0.0, .. }));
    }

    #[test]
    fn close_points_are_found_wherever_the_grids_lie_and_others_are_not() {
        let grid = Rectangle::new([0.0; 2], [1.0, 2.0], [40, 40]).mesh().unwrap();
        assert_eq!(repeated_point(grid.points(), &[0.0; 2], 1e-13), None);
        for k in 0..200 {
            let mut points = grid.points().to_vec();
            let (p, angle) = (points[7 * k], f64::from(k as u32));
            points.push([p[0] + 0.9e-13 * angle.cos(), p[1] + 0.9e-13 * angle.sin()]);
            let low = [points[1681][0].min(0.0), points[1681][1].min(0.0)];
            assert_eq!(repeated_point(&points, &low, 1e-13), Some((7 * k, 1681)));
            points[1681] = [p[0] + 1.1e-13 * angle.cos(), p[1] + 1.1e-13 * angle.sin()];
            let low = [points[1681][0].min(0.0), points[1681][1].min(0.0)];
            assert_eq!(repeated_point(&points, &low, 1e-13), None);
        }
    }

    #[test]
    fn wrong_cells_are_told_with_their_number() {
        let (one, two) = (CellId(1), CellId(2));
        let told = error(square(), &[[0, 1, 2], [0, 2, 4]]);
        assert_eq!(told, MeshError::VertexOutOfRange { cell: one, index: 4, count: 4 });
        let told = error(square(), &[[0, 1, 2], [0, 3, 2]]);
        assert_eq!(told, MeshError::InvertedCell { cell: one, at: vec![1.0 / 3.0, 2.0 / 3.0], measure: -0.5 });
        let mut points = square();
        points.push([0.5, 1.0]);
        let told = error(points, &[[0, 1, 2], [0, 2, 3], [2, 4, 3]]);
        assert!(matches!(told, MeshError::DegenerateCell { cell, measure: 0.0, .. } if cell == two), "{told:?}");
        let told = error(square(), &[[0, 1, 2], [0, 2, 2]]);
        assert!(matches!(told, MeshError::DegenerateCell { cell, .. } if cell == one), "{told:?}");
        let told = error(square(), &[[0, 1, 2]]);
        assert_eq!(told, MeshError::UnusedVertex { vertex: VertexId(3), at: vec![0.0, 1.0] });
    }

    #[test]
    fn small_cells_far_out_on_a_graded_mesh_are_sound() {
        let mut mesh = Rectangle::new([0.0; 2], [1.0; 2], [2, 2]).mesh().unwrap();
        for _ in 0..60 {
            let corner = mesh.topology().cells_around(VertexId(0)).to_vec();
            mesh = mesh.bisect(&corner).unwrap().0;
        }
        let cells: Vec<[u32; 3]> = mesh.connectivity().chunks_exact(3).map(|v| [v[0].0, v[1].0, v[2].0]).collect();
        let again = Arrays::new(mesh.points().to_vec(), &cells).mesh().unwrap();
        assert!(again.quality().smallest_cell.0 < 1e-8);
        assert_eq!(again.cell_count(), mesh.cell_count());
        // Millimeters in a national grid, given in meters.
        let far = vec![[4_100_000.0, 5_300_000.0], [4_100_000.001, 5_300_000.0], [4_100_000.0, 5_300_000.001]];
        assert!(Arrays::new(far, &[[0, 1, 2]]).mesh().is_ok());
    }

    #[test]
    fn two_cells_on_the_same_hand_of_a_side_overlap() {
        let mut points = square();
        points.push([0.25, 0.75]);
        let told = error(points, &[[0, 1, 2], [0, 2, 3], [0, 2, 4]]);
        let (first, second) = (CellId(1), CellId(2));
        assert_eq!(told, MeshError::OverlappingCells { first, second, at: vec![0.5, 0.5] });
        let line = Arrays::new(vec![[0.0], [1.0], [2.0]], &[[0, 1], [0, 2]]).mesh().unwrap_err();
        assert_eq!(line, MeshError::OverlappingCells { first: CellId(0), second: CellId(1), at: vec![0.0] });
    }

    #[test]
    fn parts_that_touch_in_a_point_are_told() {
        let mut points = square();
        points.extend([[2.0, 1.0], [2.0, 2.0], [1.0, 2.0]]);
        let told = error(points.clone(), &[[0, 1, 2], [0, 2, 3], [2, 4, 5], [2, 5, 6]]);
        assert_eq!(told, MeshError::PinchedVertex { vertex: VertexId(2), at: vec![1.0, 1.0] });
        // A closed ring around the vertex and, on top of it, a single triangle.
        let ring = vec![[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [-1.0, 0.0], [0.0, -1.0], [2.0, 1.0], [1.0, 2.0]];
        let told = error(ring, &[[0, 1, 2], [0, 2, 3], [0, 3, 4], [0, 4, 1], [0, 5, 6]]);
        assert_eq!(told, MeshError::PinchedVertex { vertex: VertexId(0), at: vec![0.0, 0.0] });
    }
}
