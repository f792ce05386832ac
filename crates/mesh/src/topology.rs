//! Sides of a mesh and who meets at them.

use crate::{CellId, Mesh, SideId, VertexId};

/// Sides, numbered, with the cells on either hand, and the cells around each vertex.
///
/// Sides are edges in two dimensions and points in one. Numbers follow the first cell that has the side.
///
/// ```
/// use hypercircle_mesh::Rectangle;
/// let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [1, 1]).mesh()?;
/// assert_eq!(mesh.topology().side_count(), 5);
/// assert_eq!(mesh.topology().boundary_sides().count(), 4);
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone)]
pub struct Topology {
    sides_per_cell: usize,
    cell_sides: Vec<SideId>,
    side_cells: Vec<[(CellId, u8); 2]>,
    around_offsets: Vec<u32>,
    around: Vec<CellId>,
}

const NOBODY: (CellId, u8) = (CellId(u32::MAX), 0);

impl Topology {
    pub(crate) fn new<const D: usize>(mesh: &Mesh<D>) -> Self {
        let sides_per_cell = mesh.cells().next().map_or(0, |c| mesh.shape(c).vertex_count());
        // Cells around each vertex, in ascending order.
        let mut around_offsets = vec![0_u32; mesh.vertex_count() + 1];
        for v in mesh.connectivity() {
            around_offsets[v.index() + 1] += 1;
        }
        for i in 0..mesh.vertex_count() {
            around_offsets[i + 1] += around_offsets[i];
        }
        let mut next = around_offsets.clone();
        let mut around = vec![CellId(0); mesh.connectivity().len()];
        for cell in mesh.cells() {
            for v in mesh.cell_vertices(cell) {
                around[next[v.index()] as usize] = cell;
                next[v.index()] += 1;
            }
        }
        // A side is known by its lowest vertex and the other one; each vertex keeps the sides it is lowest of.
        let mut first_of = vec![u32::MAX; mesh.vertex_count()];
        let mut chain: Vec<(VertexId, u32)> = Vec::new(); // (other vertex, next side with the same lowest vertex)
        let mut cell_sides = Vec::with_capacity(mesh.connectivity().len());
        let mut side_cells: Vec<[(CellId, u8); 2]> = Vec::new();
        for cell in mesh.cells() {
            for local in 0..sides_per_cell as u8 {
                let v = mesh.side_vertices(cell, local);
                let (low, high) = (v[0].min(v[D - 1]), v[0].max(v[D - 1]));
                let mut side = first_of[low.index()];
                while side != u32::MAX && chain[side as usize].0 != high {
                    side = chain[side as usize].1;
                }
                if side == u32::MAX {
                    side = chain.len() as u32;
                    chain.push((high, first_of[low.index()]));
                    first_of[low.index()] = side;
                    side_cells.push([(cell, local), NOBODY]);
                } else {
                    side_cells[side as usize][1] = (cell, local);
                }
                cell_sides.push(SideId(side));
            }
        }
        Self { sides_per_cell, cell_sides, side_cells, around_offsets, around }
    }

    /// Number of sides.
    #[must_use]
    pub fn side_count(&self) -> usize {
        self.side_cells.len()
    }

    /// The sides of a cell, by local number.
    #[must_use]
    #[inline]
    pub fn cell_sides(&self, cell: CellId) -> &[SideId] {
        let n = self.sides_per_cell;
        &self.cell_sides[cell.index() * n..(cell.index() + 1) * n]
    }

    /// The first cell at a side (the lower number) and the side's local number there.
    #[must_use]
    #[inline]
    pub fn first_cell(&self, side: SideId) -> (CellId, u8) {
        self.side_cells[side.index()][0]
    }

    /// The second cell at a side and the side's local number there; `None` on the boundary.
    #[must_use]
    #[inline]
    pub fn second_cell(&self, side: SideId) -> Option<(CellId, u8)> {
        let second = self.side_cells[side.index()][1];
        (second != NOBODY).then_some(second)
    }

    /// The cell on the other hand of a cell's side.
    #[must_use]
    #[inline]
    pub fn neighbor(&self, cell: CellId, local: u8) -> Option<(CellId, u8)> {
        let [first, second] = self.side_cells[self.cell_sides(cell)[usize::from(local)].index()];
        let other = if first == (cell, local) { second } else { first };
        (other != NOBODY).then_some(other)
    }

    /// Whether a side lies on the boundary.
    #[must_use]
    #[inline]
    pub fn is_boundary(&self, side: SideId) -> bool {
        self.side_cells[side.index()][1] == NOBODY
    }

    /// The sides on the boundary, in order.
    pub fn boundary_sides(&self) -> impl Iterator<Item = SideId> + '_ {
        (0..self.side_cells.len() as u32).map(SideId).filter(|s| self.is_boundary(*s))
    }

    /// The cells around a vertex, ascending.
    #[must_use]
    #[inline]
    pub fn cells_around(&self, vertex: VertexId) -> &[CellId] {
        let v = vertex.index();
        &self.around[self.around_offsets[v] as usize..self.around_offsets[v + 1] as usize]
    }

    /// Where the list of [`Topology::cells_around`] of each vertex begins when all are laid end to end; one entry
    /// more than vertices.
    #[must_use]
    pub fn around_offsets(&self) -> &[u32] {
        &self.around_offsets
    }
}
