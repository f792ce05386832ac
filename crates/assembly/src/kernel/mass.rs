//! The term ∫ c u v: reaction in a cell, film coefficient on a side.

use hypercircle_mesh::Mesh;

use super::MatrixKernel;
use crate::{AssemblyError, CellView, Coefficient, check};

/// ∫ c u v with a coefficient c ≥ 0, over cells or sides.
#[derive(Clone, Copy)]
pub struct Mass<'a, const D: usize> {
    mesh: &'a Mesh<D>,
    what: &'static str,
    coefficient: &'a dyn Coefficient<D, Value = f64>,
}

impl<const D: usize> std::fmt::Debug for Mass<'_, D> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "Mass with {}", self.what)
    }
}

impl<'a, const D: usize> Mass<'a, D> {
    /// The term with a coefficient, `what` it is in errors ("reaction coefficient").
    #[must_use]
    pub fn new(mesh: &'a Mesh<D>, what: &'static str, coefficient: &'a dyn Coefficient<D, Value = f64>) -> Self {
        Self { mesh, what, coefficient }
    }
}

impl<const D: usize> MatrixKernel<D> for Mass<'_, D> {
    fn cell(&self, cell: &CellView<'_, '_, D>, matrix: &mut [f64]) -> Result<(), AssemblyError> {
        let n = cell.function_count();
        for q in 0..cell.point_count() {
            let c = self.coefficient.at(cell.place(q));
            check::not_negative(self.mesh, self.what, cell.place(q), c)?;
            let values = cell.values(q);
            for i in 0..n {
                let factor = cell.weight(q) * c * values[i];
                for j in 0..n {
                    matrix[i * n + j] += factor * values[j];
                }
            }
        }
        Ok(())
    }
}
