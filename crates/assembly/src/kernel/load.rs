//! The load ∫ f v over cells or sides.

use hypercircle_mesh::Mesh;

use super::VectorKernel;
use crate::{AssemblyError, CellView, Coefficient, check};

/// ∫ f v, over cells (a source) or sides (an inflow).
#[derive(Clone, Copy)]
pub struct Load<'a, const D: usize> {
    mesh: &'a Mesh<D>,
    what: &'static str,
    density: &'a dyn Coefficient<D, Value = f64>,
}

impl<const D: usize> std::fmt::Debug for Load<'_, D> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "Load of {}", self.what)
    }
}

impl<'a, const D: usize> Load<'a, D> {
    /// The load of a density, `what` it is in errors ("source").
    #[must_use]
    pub fn new(mesh: &'a Mesh<D>, what: &'static str, density: &'a dyn Coefficient<D, Value = f64>) -> Self {
        Self { mesh, what, density }
    }
}

impl<const D: usize> VectorKernel<D> for Load<'_, D> {
    fn cell(&self, cell: &CellView<'_, '_, D>, vector: &mut [f64]) -> Result<(), AssemblyError> {
        for q in 0..cell.point_count() {
            let f = self.density.at(cell.place(q));
            check::finite(self.mesh, self.what, cell.place(q), f)?;
            for (entry, value) in vector.iter_mut().zip(cell.values(q)) {
                *entry += cell.weight(q) * f * value;
            }
        }
        Ok(())
    }
}
