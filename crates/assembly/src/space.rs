//! The finite element space: a mesh, a basis on each cell, and numbers for the unknowns.

use std::sync::Arc;

use hypercircle_element::{Lagrange, Shape};
use hypercircle_mesh::{CellId, Mesh};

use crate::AssemblyError;

/// Continuous piecewise polynomials of a degree on a mesh, with numbered unknowns.
///
/// Unknowns belong to vertices, sides and cells, in this order; the values of a function are its values at the nodes.
///
/// ```
/// use hypercircle_assembly::Space;
/// use hypercircle_mesh::{Locator, Rectangle};
/// let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).mesh()?;
/// let space = Space::new(mesh.into(), 2)?;
/// assert_eq!(space.unknown_count(), 25);
/// let squares: Vec<f64> = space.positions().iter().map(|x| x[0] * x[0]).collect();
/// let (cell, reference) = Locator::new(space.mesh().clone()).find(&[0.3, 0.6])?;
/// assert!((space.value(&squares, cell, &reference) - 0.09).abs() < 1e-15);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
pub struct Space<const D: usize> {
    mesh: Arc<Mesh<D>>,
    basis: Lagrange,
    cell_unknowns: Vec<u32>,
    unknown_count: usize,
}

impl<const D: usize> Space<D> {
    /// The space of polynomials of a degree `order` on each cell of the mesh.
    ///
    /// # Errors
    /// An order out of range, or more unknowns than can be numbered.
    pub fn new(mesh: Arc<Mesh<D>>, order: usize) -> Result<Self, AssemblyError> {
        let shape = mesh.cells().next().map_or(Shape::Interval, |c| mesh.shape(c));
        let basis = Lagrange::new(shape, order)?;
        let local = basis.nodes().len();
        let vertices = shape.vertex_count();
        let per_side = if D == 1 { 0 } else { order - 1 };
        let per_cell = local - vertices - per_side * if D == 1 { 0 } else { vertices };
        let sides = if per_side > 0 { mesh.topology().side_count() } else { 0 };
        let unknown_count = mesh.vertex_count() + sides * per_side + mesh.cell_count() * per_cell;
        if unknown_count >= u32::MAX as usize {
            let limit = u32::MAX as usize;
            return Err(hypercircle_mesh::MeshError::TooMany { what: "unknowns", count: unknown_count, limit }.into());
        }
        let mut cell_unknowns = Vec::with_capacity(mesh.cell_count() * local);
        for cell in mesh.cells() {
            cell_unknowns.extend(mesh.cell_vertices(cell).iter().map(|v| v.0));
            if per_side > 0 {
                for (i, side) in mesh.topology().cell_sides(cell).iter().enumerate() {
                    let first = (mesh.vertex_count() + side.index() * per_side) as u32;
                    let ends = mesh.side_vertices(cell, i as u8);
                    // Nodes of a side are numbered from its lower to its higher vertex.
                    let range = first..first + per_side as u32;
                    if ends[0] < ends[D - 1] {
                        cell_unknowns.extend(range);
                    } else {
                        cell_unknowns.extend(range.rev());
                    }
                }
            }
            let first = (mesh.vertex_count() + sides * per_side + cell.index() * per_cell) as u32;
            cell_unknowns.extend(first..first + per_cell as u32);
        }
        Ok(Self { mesh, basis, cell_unknowns, unknown_count })
    }

    /// The mesh.
    #[must_use]
    pub fn mesh(&self) -> &Arc<Mesh<D>> {
        &self.mesh
    }

    /// The basis on the reference cell.
    #[must_use]
    pub fn basis(&self) -> &Lagrange {
        &self.basis
    }

    /// Polynomial degree.
    #[must_use]
    pub fn order(&self) -> usize {
        self.basis.order()
    }

    /// How many unknowns there are.
    #[must_use]
    pub fn unknown_count(&self) -> usize {
        self.unknown_count
    }

    /// The unknowns of a cell, in the order of its basis.
    #[must_use]
    #[inline]
    pub fn unknowns(&self, cell: CellId) -> &[u32] {
        let n = self.basis.nodes().len();
        &self.cell_unknowns[cell.index() * n..(cell.index() + 1) * n]
    }

    /// Places of the nodes, by unknown.
    #[must_use]
    pub fn positions(&self) -> Vec<[f64; D]> {
        let mut positions = vec![[0.0; D]; self.unknown_count];
        for cell in self.mesh.cells() {
            for (unknown, node) in self.unknowns(cell).iter().zip(self.basis.nodes()) {
                positions[*unknown as usize] = self.mesh.place(cell, &clip(node));
            }
        }
        // Vertices exactly, not by way of a map.
        positions[..self.mesh.vertex_count()].copy_from_slice(self.mesh.points());
        positions
    }

    /// Value of a function of the space at a reference point of a cell.
    #[must_use]
    pub fn value(&self, function: &[f64], cell: CellId, at: &[f64; D]) -> f64 {
        let values = self.basis.values(&pad(at));
        self.unknowns(cell).iter().zip(values).map(|(u, v)| function[*u as usize] * v).sum()
    }

    /// Gradient of a function of the space at a reference point of a cell.
    #[must_use]
    pub fn gradient(&self, function: &[f64], cell: CellId, at: &[f64; D]) -> [f64; D] {
        let table = self.basis.table(&[pad(at)]);
        let mut reference = [0.0; D];
        for (u, g) in self.unknowns(cell).iter().zip(table.gradients_at(0)) {
            for i in 0..D {
                reference[i] += function[*u as usize] * g[i];
            }
        }
        self.real_gradient(cell, &reference)
    }

    /// J⁻ᵀ g: a gradient in real coordinates from one in reference coordinates.
    #[must_use]
    pub fn real_gradient(&self, cell: CellId, reference: &[f64; D]) -> [f64; D] {
        crate::block::pull_gradient(&crate::block::inverse(&self.mesh.jacobian(cell)).0, reference)
    }
}

/// Reference coordinates of dimension D from the two of the element crate.
#[inline]
pub(crate) fn clip<const D: usize>(at: &[f64; 2]) -> [f64; D] {
    std::array::from_fn(|i| at[i])
}

/// The two reference coordinates of the element crate from D of them.
#[inline]
pub(crate) fn pad<const D: usize>(at: &[f64; D]) -> [f64; 2] {
    [at[0], if D == 1 { 0.0 } else { at[D - 1] }]
}

#[cfg(test)]
mod tests {
    use super::*;
    use hypercircle_mesh::{Interval, Rectangle};

    #[test]
    fn neighbors_agree_on_the_nodes_of_their_common_side() {
        for order in 1..=5 {
            let mesh = Rectangle::new([0.0, 0.0], [1.0, 2.0], [3, 2]).mesh().unwrap();
            let space = Space::new(mesh.into(), order).unwrap();
            assert_eq!(space.unknown_count(), (3 * order + 1) * (2 * order + 1));
            let positions = space.positions();
            for cell in space.mesh().cells() {
                for (unknown, node) in space.unknowns(cell).iter().zip(space.basis().nodes()) {
                    let x = space.mesh().place(cell, &clip::<2>(node));
                    let y = positions[*unknown as usize];
                    assert!((x[0] - y[0]).abs() + (x[1] - y[1]).abs() < 1e-14);
                }
            }
        }
    }

    #[test]
    fn gradients_of_a_polynomial_are_exact_in_one_dimension() {
        let space = Space::new(Interval::uniform(1.0, 3.0, 5).mesh().unwrap().into(), 3).unwrap();
        let cubes: Vec<f64> = space.positions().iter().map(|x| x[0].powi(3)).collect();
        let (cell, at) = (CellId(2), [0.75]); // x = 2.1
        assert!((space.gradient(&cubes, cell, &at)[0] - 3.0 * 2.1 * 2.1).abs() < 1e-12);
    }
}
