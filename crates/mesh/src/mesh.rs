//! The mesh: an immutable value of points, cells, regions and named sides.

use std::sync::OnceLock;

use hypercircle_element::Shape;

use crate::topology::Topology;
use crate::{CellId, MeshError, Names, RegionId, SideNameId, VertexId};

/// One side of one cell that carries a name.
///
/// A named side on the boundary appears once; a named side between two cells appears once, with the lower cell.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct NamedSide {
    /// The cell whose side it is.
    pub cell: CellId,
    /// The number of the side within its cell.
    pub local: u8,
    /// Its name.
    pub name: SideNameId,
}

/// A mesh of intervals (`D` = 1) or triangles (`D` = 2).
///
/// A mesh is a value that never changes: refinement makes a new one together with a [`crate::Relation`] to the old.
/// All cells are positively oriented (det J > 0). The side 0 of a triangle is the one that
/// [`Mesh::bisect`] halves first, so a generator may rotate the vertices of a cell, but never mirrors it.
///
/// Regions partition the cells; names of sides are carried by cell sides ([`NamedSide`]), on the boundary and
/// inside.
///
/// ```
/// use hypercircle_mesh::{Diagonal, Rectangle};
/// let mesh = Rectangle::new([0.0, 0.0], [2.0, 1.0], [4, 2]).diagonal(Diagonal::Rising).mesh()?;
/// assert_eq!(mesh.cell_count(), 16);
/// assert!((mesh.measure() - 2.0).abs() < 1e-14);
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone)]
pub struct Mesh<const D: usize> {
    shape: Shape,
    points: Vec<[f64; D]>,
    connectivity: Vec<VertexId>,
    regions: Vec<RegionId>,
    region_names: Names,
    side_names: Names,
    named_sides: Vec<NamedSide>,
    topology: OnceLock<Topology>,
}

/// Everything a mesh is made of, as the generators of this crate hand it over.
#[derive(Debug, Clone)]
pub(crate) struct Parts<const D: usize> {
    pub(crate) shape: Shape,
    pub(crate) points: Vec<[f64; D]>,
    pub(crate) connectivity: Vec<VertexId>,
    pub(crate) regions: Vec<RegionId>,
    pub(crate) region_names: Names,
    pub(crate) side_names: Names,
    pub(crate) named_sides: Vec<NamedSide>,
}

impl<const D: usize> Mesh<D> {
    /// Takes over parts whose soundness the generator answers for: positively oriented cells, indices in range,
    /// no pinched vertices, `D` the dimension of the shape.
    pub(crate) fn from_parts(parts: Parts<D>) -> Self {
        let Parts { shape, points, connectivity, regions, region_names, side_names, mut named_sides } = parts;
        debug_assert_eq!(shape.dimension(), D);
        debug_assert_eq!(connectivity.len(), regions.len() * shape.vertex_count());
        named_sides.sort_unstable();
        Self { shape, points, connectivity, regions, region_names, side_names, named_sides, topology: OnceLock::new() }
    }

    /// The same mesh with other names for its sides.
    pub(crate) fn with_named_sides(mut self, side_names: Names, mut named_sides: Vec<NamedSide>) -> Self {
        named_sides.sort_unstable();
        (self.side_names, self.named_sides) = (side_names, named_sides);
        self
    }

    /// Number of vertices.
    #[must_use]
    pub fn vertex_count(&self) -> usize {
        self.points.len()
    }

    /// Number of cells.
    #[must_use]
    pub fn cell_count(&self) -> usize {
        self.regions.len()
    }

    /// All cell numbers in order.
    pub fn cells(&self) -> impl ExactSizeIterator<Item = CellId> + use<D> {
        (0..self.regions.len() as u32).map(CellId)
    }

    /// The shape of a cell.
    #[must_use]
    pub fn shape(&self, _cell: CellId) -> Shape {
        self.shape
    }

    /// The vertices of a cell, in the order of the reference cell.
    #[must_use]
    #[inline]
    pub fn cell_vertices(&self, cell: CellId) -> &[VertexId] {
        let n = self.shape.vertex_count();
        &self.connectivity[cell.index() * n..(cell.index() + 1) * n]
    }

    /// Vertex numbers of all cells, cell after cell.
    #[must_use]
    pub fn connectivity(&self) -> &[VertexId] {
        &self.connectivity
    }

    /// Coordinates of all vertices.
    #[must_use]
    pub fn points(&self) -> &[[f64; D]] {
        &self.points
    }

    /// Coordinates of a vertex.
    #[must_use]
    #[inline]
    pub fn point(&self, vertex: VertexId) -> [f64; D] {
        self.points[vertex.index()]
    }

    /// Jacobian of the map from the reference cell, `jacobian[i][j]` = ∂xᵢ/∂ξⱼ (constant on a straight cell).
    #[must_use]
    #[inline]
    pub fn jacobian(&self, cell: CellId) -> [[f64; D]; D] {
        let v = self.cell_vertices(cell);
        let origin = self.point(v[0]);
        let mut jacobian = [[0.0; D]; D];
        for j in 0..D {
            let p = self.point(v[j + 1]);
            for i in 0..D {
                jacobian[i][j] = p[i] - origin[i];
            }
        }
        jacobian
    }

    /// Coordinates of a point given in reference coordinates of a cell.
    #[must_use]
    #[inline]
    pub fn place(&self, cell: CellId, reference: &[f64; D]) -> [f64; D] {
        let jacobian = self.jacobian(cell);
        let mut x = self.point(self.cell_vertices(cell)[0]);
        for i in 0..D {
            for j in 0..D {
                x[i] += jacobian[i][j] * reference[j];
            }
        }
        x
    }

    /// Length (`D` = 1) or area (`D` = 2) of a cell.
    #[must_use]
    #[inline]
    pub fn cell_measure(&self, cell: CellId) -> f64 {
        let j = self.jacobian(cell);
        let determinant = if D == 1 { j[0][0] } else { j[0][0] * j[1][1] - j[0][1] * j[1][0] };
        determinant * self.shape.measure()
    }

    /// Diameter of a cell: the length of its longest side.
    #[must_use]
    pub fn cell_diameter(&self, cell: CellId) -> f64 {
        let v = self.cell_vertices(cell);
        let mut largest = 0.0_f64;
        for (i, a) in v.iter().enumerate() {
            for b in &v[i + 1..] {
                largest = largest.max(distance(&self.point(*a), &self.point(*b)));
            }
        }
        largest
    }

    /// Middle of a cell: the mean of its vertices.
    #[must_use]
    pub fn cell_center(&self, cell: CellId) -> [f64; D] {
        let v = self.cell_vertices(cell);
        let mut center = [0.0; D];
        for a in v {
            let p = self.point(*a);
            for i in 0..D {
                center[i] += p[i] / v.len() as f64;
            }
        }
        center
    }

    /// Length or area of the whole mesh.
    #[must_use]
    pub fn measure(&self) -> f64 {
        self.cells().map(|c| self.cell_measure(c)).sum()
    }

    /// Smallest box around the mesh: lower and upper corner.
    #[must_use]
    pub fn bounding_box(&self) -> ([f64; D], [f64; D]) {
        let mut low = [f64::INFINITY; D];
        let mut high = [f64::NEG_INFINITY; D];
        for p in &self.points {
            for i in 0..D {
                low[i] = low[i].min(p[i]);
                high[i] = high[i].max(p[i]);
            }
        }
        (low, high)
    }

    /// The region of a cell.
    #[must_use]
    #[inline]
    pub fn region(&self, cell: CellId) -> RegionId {
        self.regions[cell.index()]
    }

    /// The regions of all cells.
    #[must_use]
    pub fn regions(&self) -> &[RegionId] {
        &self.regions
    }

    /// Names of the regions, by [`RegionId`].
    #[must_use]
    pub fn region_names(&self) -> &Names {
        &self.region_names
    }

    /// Names of the sides, by [`SideNameId`].
    #[must_use]
    pub fn side_names(&self) -> &Names {
        &self.side_names
    }

    /// The name of a region; empty for a number that is none.
    #[must_use]
    pub fn region_name(&self, region: RegionId) -> &str {
        self.region_names.get(region.0).unwrap_or("")
    }

    /// The name behind a side name's number; empty for a number that is none.
    #[must_use]
    pub fn side_name(&self, name: SideNameId) -> &str {
        self.side_names.get(name.0).unwrap_or("")
    }

    /// The region with a name.
    ///
    /// # Errors
    /// [`MeshError::UnknownName`], which lists the names there are.
    pub fn find_region(&self, name: &str) -> Result<RegionId, MeshError> {
        self.region_names.require("region", name).map(RegionId)
    }

    /// The side name with this text.
    ///
    /// # Errors
    /// [`MeshError::UnknownName`], which lists the names there are.
    pub fn find_side(&self, name: &str) -> Result<SideNameId, MeshError> {
        self.side_names.require("side", name).map(SideNameId)
    }

    /// All sides that carry a name, sorted by cell and local number.
    #[must_use]
    pub fn named_sides(&self) -> &[NamedSide] {
        &self.named_sides
    }

    /// The name of a cell's side, if it has one and this cell is the one that carries it.
    #[must_use]
    pub fn named_side(&self, cell: CellId, local: u8) -> Option<SideNameId> {
        let at = self.named_sides.partition_point(|s| (s.cell, s.local) < (cell, local));
        self.named_sides.get(at).filter(|s| (s.cell, s.local) == (cell, local)).map(|s| s.name)
    }

    /// The vertices of a cell's side, in walking order (the cell lies on the left).
    #[must_use]
    #[inline]
    pub fn side_vertices(&self, cell: CellId, local: u8) -> [VertexId; D] {
        let v = self.cell_vertices(cell);
        let mut vertices = [VertexId(0); D];
        for (slot, i) in vertices.iter_mut().zip(self.shape.side_vertices(usize::from(local))) {
            *slot = v[*i];
        }
        vertices
    }

    /// Length of a cell's side; 1 for the end of an interval.
    #[must_use]
    pub fn side_measure(&self, cell: CellId, local: u8) -> f64 {
        if D == 1 {
            return 1.0;
        }
        let v = self.side_vertices(cell, local);
        distance(&self.point(v[0]), &self.point(v[D - 1]))
    }

    /// Sides and neighbors. Made at the first call and kept.
    #[must_use]
    pub fn topology(&self) -> &Topology {
        self.topology.get_or_init(|| Topology::new(self))
    }

    /// The parts again, for a refinement that inherits names.
    pub(crate) fn names(&self) -> (Names, Names) {
        (self.region_names.clone(), self.side_names.clone())
    }
}

/// Distance of two points.
pub(crate) fn distance<const D: usize>(a: &[f64; D], b: &[f64; D]) -> f64 {
    (0..D).map(|i| (a[i] - b[i]).powi(2)).sum::<f64>().sqrt()
}
