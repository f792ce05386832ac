//! What a refined mesh has to do with the mesh it was made from.

use std::ops::Range;

use crate::{CellId, MeshError, VertexId};

/// The relation of a refined mesh (new) to the mesh it was made from (old).
///
/// Old vertices keep their numbers. Each new vertex is the middle of an edge of the old mesh. The children of a cell
/// have consecutive numbers, in the order of their parents; a cell that was not cut has itself as its only child.
///
/// ```
/// use hypercircle_mesh::{CellId, Interval, VertexId};
/// let coarse = Interval::uniform(0.0, 1.0, 2).mesh()?;
/// let (fine, relation) = coarse.bisect(&[CellId(1)])?;
/// assert_eq!(relation.children(CellId(1)), 1..3);
/// assert_eq!(relation.parent(CellId(2)), CellId(1));
/// assert_eq!(relation.halved_edges(), &[[VertexId(1), VertexId(2)]]);
/// // The straight line stays one.
/// assert_eq!(relation.carry(&[0.0, 1.0, 2.0])?, [0.0, 1.0, 2.0, 1.5]);
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Relation {
    old_vertices: usize,
    halved: Vec<[VertexId; 2]>,
    parents: Vec<CellId>,
    first_child: Vec<u32>,
}

impl Relation {
    /// Takes the edges that were halved and, for each old cell and one more, the number of its first child.
    pub(crate) fn new(old_vertices: usize, halved: Vec<[VertexId; 2]>, first_child: Vec<u32>) -> Self {
        let mut parents = Vec::with_capacity(first_child.last().map_or(0, |n| *n as usize));
        for (parent, range) in first_child.windows(2).enumerate() {
            parents.resize(range[1] as usize, CellId(parent as u32));
        }
        Self { old_vertices, halved, parents, first_child }
    }

    /// Number of vertices of the old mesh.
    #[must_use]
    pub fn old_vertex_count(&self) -> usize {
        self.old_vertices
    }

    /// Number of vertices of the new mesh.
    #[must_use]
    pub fn new_vertex_count(&self) -> usize {
        self.old_vertices + self.halved.len()
    }

    /// Number of cells of the old mesh.
    #[must_use]
    pub fn old_cell_count(&self) -> usize {
        self.first_child.len() - 1
    }

    /// Number of cells of the new mesh.
    #[must_use]
    pub fn new_cell_count(&self) -> usize {
        self.parents.len()
    }

    /// For each vertex that is new, the two old vertices whose edge it halves: entry `i` belongs to the new mesh's
    /// vertex `old_vertex_count() + i`.
    #[must_use]
    pub fn halved_edges(&self) -> &[[VertexId; 2]] {
        &self.halved
    }

    /// The two old vertices between which a vertex of the new mesh lies; `None` if it is an old one itself.
    #[must_use]
    pub fn halves(&self, vertex: VertexId) -> Option<[VertexId; 2]> {
        vertex.index().checked_sub(self.old_vertices).and_then(|i| self.halved.get(i)).copied()
    }

    /// The old cell that a cell of the new mesh is a part of.
    #[must_use]
    #[inline]
    pub fn parent(&self, new: CellId) -> CellId {
        self.parents[new.index()]
    }

    /// The parents of all cells of the new mesh.
    #[must_use]
    pub fn parents(&self) -> &[CellId] {
        &self.parents
    }

    /// The numbers in the new mesh of the parts of an old cell.
    #[must_use]
    #[inline]
    pub fn children(&self, old: CellId) -> Range<u32> {
        self.first_child[old.index()]..self.first_child[old.index() + 1]
    }

    /// Whether an old cell was cut.
    #[must_use]
    #[inline]
    pub fn is_cut(&self, old: CellId) -> bool {
        self.children(old).len() > 1
    }

    /// Carries a continuous function that is linear in each cell over to the new mesh, where it is the same function:
    /// from its values at the old vertices to its values at the new ones, v(m) = (v(a) + v(b)) / 2.
    ///
    /// # Errors
    /// [`MeshError::WrongLength`] unless there is one value for each old vertex.
    pub fn carry(&self, values: &[f64]) -> Result<Vec<f64>, MeshError> {
        if values.len() != self.old_vertices {
            return Err(MeshError::WrongLength {
                what: "the list of values at the old vertices",
                given: values.len(),
                expected: self.old_vertices,
            });
        }
        let mut carried = Vec::with_capacity(self.new_vertex_count());
        carried.extend_from_slice(values);
        carried.extend(self.halved.iter().map(|[a, b]| f64::midpoint(values[a.index()], values[b.index()])));
        Ok(carried)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::Rectangle;

    #[test]
    fn parents_and_children_agree_and_fill_their_parents() {
        let old = Rectangle::new([0.0; 2], [2.0, 1.0], [5, 4]).mesh().unwrap();
        let (new, relation) = old.bisect(&[CellId(3), CellId(17), CellId(30)]).unwrap();
        assert_eq!((relation.old_cell_count(), relation.new_cell_count()), (old.cell_count(), new.cell_count()));
        assert_eq!((relation.old_vertex_count(), relation.new_vertex_count()), (30, new.vertex_count()));
        for cell in old.cells() {
            let children = relation.children(cell).map(CellId);
            assert_eq!(relation.is_cut(cell), children.len() > 1);
            assert!(children.clone().all(|child| relation.parent(child) == cell));
            let measure: f64 = children.map(|child| new.cell_measure(child)).sum();
            assert!((measure - old.cell_measure(cell)).abs() < 1e-15);
        }
        assert_eq!(relation.parents().len(), new.cell_count());
    }

    #[test]
    fn a_linear_function_is_carried_exactly() {
        let old = Rectangle::new([0.0; 2], [2.0, 1.0], [3, 2]).mesh().unwrap();
        let (new, relation) = old.refine_uniformly().unwrap();
        let line = |p: &[f64; 2]| 3.0 + 2.0 * p[0] - p[1];
        let carried = relation.carry(&old.points().iter().map(line).collect::<Vec<_>>()).unwrap();
        for (value, point) in carried.iter().zip(new.points()) {
            assert!((value - line(point)).abs() < 1e-14);
        }
        assert_eq!(relation.halves(VertexId(0)), None);
        assert_eq!(relation.halves(VertexId(12)), Some(relation.halved_edges()[0]));
    }

    #[test]
    fn a_wrong_number_of_values_is_told() {
        let (_, relation) = Rectangle::new([0.0; 2], [1.0; 2], [1, 1]).mesh().unwrap().bisect(&[]).unwrap();
        assert!(matches!(relation.carry(&[1.0]), Err(MeshError::WrongLength { given: 1, expected: 4, .. })));
    }
}
