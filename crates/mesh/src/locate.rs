//! Which cell a point lies in.

use std::sync::Arc;

use rstar::RTree;
use rstar::primitives::{GeomWithData, Rectangle};

use crate::{CellId, Mesh, MeshError};

/// A point this share of a cell's diameter outside it still counts as inside.
const REACH: f64 = 1e-10;

type CellBox = GeomWithData<Rectangle<[f64; 2]>, u32>;

/// Finds the cell that a point lies in, in a time that grows with the logarithm of the number of cells, however
/// strongly the mesh is graded.
///
/// It keeps a tree of the boxes around the cells: about 100 bytes a cell.
///
/// ```
/// use std::sync::Arc;
/// use hypercircle_mesh::{CellId, Locator, Rectangle};
/// let mesh = Arc::new(Rectangle::new([0.0, 0.0], [1.0, 1.0], [1, 1]).mesh()?);
/// let locator = Locator::new(mesh.clone());
/// let (cell, reference) = locator.find(&[0.5, 0.25])?;
/// assert_eq!(cell, CellId(0));
/// assert_eq!(mesh.place(cell, &reference), [0.5, 0.25]);
/// assert!(locator.find(&[0.5, 1.25]).is_err());
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone)]
pub struct Locator<const D: usize> {
    mesh: Arc<Mesh<D>>,
    tree: RTree<CellBox>,
}

impl<const D: usize> Locator<D> {
    /// Prepares the search for points of a mesh.
    ///
    /// # Source
    /// A. Guttman, R-trees: a dynamic index structure for spatial searching (1984), packed at once.
    #[must_use]
    pub fn new(mesh: Arc<Mesh<D>>) -> Self {
        let boxes = mesh.cells().map(|cell| {
            let reach = REACH * mesh.cell_diameter(cell);
            let (mut low, mut high) = ([f64::INFINITY; D], [f64::NEG_INFINITY; D]);
            for v in mesh.cell_vertices(cell) {
                let p = mesh.point(*v);
                for i in 0..D {
                    low[i] = low[i].min(p[i] - reach);
                    high[i] = high[i].max(p[i] + reach);
                }
            }
            CellBox::new(Rectangle::from_corners(in_plane(&low), in_plane(&high)), cell.0)
        });
        let tree = RTree::bulk_load(boxes.collect());
        Self { mesh, tree }
    }

    /// The cell in which a point lies, and where: the reference coordinates, which are never outside the reference
    /// cell.
    ///
    /// A point that is farther from a cell than 10⁻¹⁰ of its diameter is outside it; one that is nearer is moved onto
    /// it. Where cells meet, the one with the lowest number is taken.
    ///
    /// # Errors
    /// [`MeshError::NotFinite`] for NaN and infinity, [`MeshError::OutsideMesh`] if there is no such cell.
    pub fn find(&self, point: &[f64; D]) -> Result<(CellId, [f64; D]), MeshError> {
        if !point.iter().all(|c| c.is_finite()) {
            return Err(MeshError::NotFinite { what: "point to be located", index: 0, at: point.to_vec() });
        }
        let mut found: Option<(CellId, [f64; D])> = None;
        for candidate in self.tree.locate_all_at_point(in_plane(point)) {
            let cell = CellId(candidate.data);
            if found.is_none_or(|(lowest, _)| cell < lowest) {
                found = self.reference_in(cell, point).map(|reference| (cell, reference)).or(found);
            }
        }
        found.ok_or_else(|| {
            let (low, high) = self.mesh.bounding_box();
            MeshError::OutsideMesh { at: point.to_vec(), low: low.to_vec(), high: high.to_vec() }
        })
    }

    /// The reference coordinates of a point in a cell, if it lies there.
    fn reference_in(&self, cell: CellId, point: &[f64; D]) -> Option<[f64; D]> {
        let j = self.mesh.jacobian(cell);
        let origin = self.mesh.point(self.mesh.cell_vertices(cell)[0]);
        let mut reference = [0.0; D];
        // Distance to a side = its hat times the height above it.
        let reach = REACH * self.mesh.cell_diameter(cell);
        if D == 1 {
            let t = (point[0] - origin[0]) / j[0][0];
            if t * j[0][0] < -reach || (t - 1.0) * j[0][0] > reach {
                return None;
            }
            reference[0] = t.clamp(0.0, 1.0);
            return Some(reference);
        }
        let determinant = j[0][0] * j[1][1] - j[0][1] * j[1][0];
        let (dx, dy) = (point[0] - origin[0], point[1] - origin[1]);
        let s = (j[1][1] * dx - j[0][1] * dy) / determinant;
        let t = (j[0][0] * dy - j[1][0] * dx) / determinant;
        // The hats of vertices 2, 0, 1 vanish on sides 0, 1, 2.
        let hats = [t, 1.0 - s - t, s];
        let outside = |side: usize| {
            hats[side] < 0.0 && {
                let height = determinant / self.mesh.side_measure(cell, side as u8);
                hats[side] * height < -reach
            }
        };
        if (0..3).any(outside) {
            return None;
        }
        let [t, rest, s] = hats.map(|hat| hat.max(0.0));
        let sum = s + t + rest;
        (reference[0], reference[1]) = (s / sum, t / sum);
        Some(reference)
    }
}

/// A point of the line or of the plane as one of the plane.
fn in_plane<const D: usize>(p: &[f64; D]) -> [f64; 2] {
    [p[0], if D == 1 { 0.0 } else { p[D - 1] }]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Arrays, Diagonal, Interval, Toward, VertexId};

    #[test]
    fn every_vertex_and_middle_is_found_where_it_is() {
        let start = crate::Rectangle::new([-1.0, 0.0], [2.0, 1.0], [7, 3]).diagonal(Diagonal::Crossed);
        let mut mesh = start.mesh().unwrap();
        for _ in 0..40 {
            // Graded by a factor of a million toward one vertex.
            let around = mesh.topology().cells_around(VertexId(0)).to_vec();
            mesh = mesh.bisect(&around).unwrap().0;
        }
        let locator = Locator::new(Arc::new(mesh.clone()));
        for cell in mesh.cells() {
            let (found, at) = locator.find(&mesh.cell_center(cell)).unwrap();
            assert_eq!(found, cell);
            assert!(at.iter().all(|c| (c - 1.0 / 3.0).abs() < 1e-6), "{at:?}");
        }
        for v in (0..mesh.vertex_count() as u32).map(VertexId) {
            let (found, at) = locator.find(&mesh.point(v)).unwrap();
            assert_eq!(found, mesh.topology().cells_around(v)[0], "the lowest of the cells that meet here");
            let place = mesh.place(found, &at);
            assert!((place[0] - mesh.point(v)[0]).abs() + (place[1] - mesh.point(v)[1]).abs() < 1e-15);
        }
    }

    #[test]
    fn nearly_outside_is_moved_in_and_outside_is_told() {
        let mesh = Arrays::new(vec![[0.0, 0.0], [2.0, 0.0], [0.0, 1.0]], &[[0, 1, 2]]).mesh().unwrap();
        let locator = Locator::new(Arc::new(mesh.clone()));
        for near in [[1.0, -1e-11], [-1e-11, 0.5], [1.0 + 1e-11, 0.5 + 1e-11], [2.0 + 1e-11, -1e-11]] {
            let (_, at) = locator.find(&near).unwrap();
            assert!(at[0] >= 0.0 && at[1] >= 0.0 && at[0] + at[1] <= 1.0 + f64::EPSILON, "{at:?}");
        }
        for far in [[1.0, -1e-9], [-1e-9, 0.5], [1.0 + 1e-9, 0.5 + 1e-9], [7.0, 7.0]] {
            let told = locator.find(&far).unwrap_err();
            assert_eq!(told, MeshError::OutsideMesh { at: far.to_vec(), low: vec![0.0; 2], high: vec![2.0, 1.0] });
        }
        for bad in [[f64::NAN, 0.0], [0.0, f64::INFINITY]] {
            assert!(matches!(locator.find(&bad), Err(MeshError::NotFinite { .. })));
        }
    }

    #[test]
    fn points_on_a_graded_line_are_found() {
        let mesh = Interval::graded(0.0, 1.0, 200, Toward::Start, 1e12).mesh().unwrap();
        let locator = Locator::new(Arc::new(mesh.clone()));
        for cell in mesh.cells() {
            let (found, at) = locator.find(&mesh.place(cell, &[0.25])).unwrap();
            assert_eq!(found, cell);
            assert!((at[0] - 0.25).abs() < 1e-9);
        }
        assert_eq!(locator.find(&mesh.points()[7]).unwrap(), (CellId(6), [1.0]));
        assert!(locator.find(&[1.0 + 1e-13]).is_ok());
        assert!(matches!(locator.find(&[1.1]), Err(MeshError::OutsideMesh { .. })));
        assert!(matches!(locator.find(&[-1e-15]), Err(MeshError::OutsideMesh { .. })));
    }
}
