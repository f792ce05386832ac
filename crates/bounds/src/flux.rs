//! The equilibrated flux as a value.

use std::sync::Arc;

use hypercircle_element::{RaviartThomas, orthonormal_values, polynomial_count};
use hypercircle_mesh::{CellId, Mesh};

use hypercircle_assembly::AssemblyError;

/// A flux σ ≈ −A∇u with continuous normal component, by its Raviart–Thomas moments in each cell.
///
/// The moments of a common side are the same numbers in both cells but for their sign, so that nothing is lost
/// between cells, to the last bit.
#[derive(Debug, Clone)]
pub struct Flux<const D: usize> {
    mesh: Arc<Mesh<D>>,
    fields: RaviartThomas,
    moments: Vec<f64>,
}

impl<const D: usize> Flux<D> {
    pub(crate) fn new(mesh: Arc<Mesh<D>>, fields: RaviartThomas, moments: Vec<f64>) -> Self {
        debug_assert_eq!(moments.len(), mesh.cell_count() * fields.moment_count());
        Self { mesh, fields, moments }
    }

    /// The moments of a cell, in the order of [`RaviartThomas`].
    #[must_use]
    pub fn moments(&self, cell: CellId) -> &[f64] {
        let n = self.fields.moment_count();
        &self.moments[cell.index() * n..(cell.index() + 1) * n]
    }

    /// The space the moments belong to.
    #[must_use]
    pub fn fields(&self) -> &RaviartThomas {
        &self.fields
    }

    /// Flow out of a cell through one of its sides, ∫ σ·n.
    #[must_use]
    pub fn outflow(&self, cell: CellId, local: u8) -> f64 {
        self.moments(cell)[usize::from(local) * self.fields.side_moment_count()]
    }

    /// The flux at a reference point of a cell.
    #[must_use]
    pub fn at(&self, cell: CellId, reference: &[f64; D]) -> [f64; D] {
        let (jacobian, determinant) = (self.mesh.jacobian(cell), self.determinant(cell));
        let mut mapped = [0.0; D];
        for (moment, field) in self.moments(cell).iter().zip(self.fields.fields(&pad(reference))) {
            for i in 0..D {
                mapped[i] += moment * field[i];
            }
        }
        std::array::from_fn(|i| (0..D).map(|j| jacobian[i][j] * mapped[j]).sum::<f64>() / determinant)
    }

    /// Moments ∫ (div σ) v of the divergence in a cell, against the orthonormal polynomials v of the reference cell.
    ///
    /// # Errors
    /// As [`RaviartThomas::divergence_moments`].
    pub fn divergence_moments(&self, cell: CellId) -> Result<Vec<f64>, AssemblyError> {
        let matrix = self.fields.divergence_moments()?;
        let moments = self.moments(cell);
        Ok(matrix.chunks_exact(moments.len()).map(|row| row.iter().zip(moments).map(|(a, b)| a * b).sum()).collect())
    }

    /// div σ at a reference point of a cell.
    #[must_use]
    pub fn divergence(&self, cell: CellId, reference: &[f64; D]) -> f64 {
        let divergences = self.fields.divergences(&pad(reference));
        let sum: f64 = self.moments(cell).iter().zip(divergences).map(|(a, b)| a * b).sum();
        sum / self.determinant(cell)
    }

    /// The largest defect of the balance over all cells: moments of div σ against those of a source given by
    /// its values at the points of a rule, relative to the largest of either anywhere.
    ///
    /// # Errors
    /// As [`RaviartThomas::divergence_moments`].
    pub fn balance_defect(
        &self,
        rule: &hypercircle_element::Rule,
        source: impl Fn(CellId, usize) -> f64,
    ) -> Result<f64, AssemblyError> {
        let (shape, order) = (self.fields.shape(), self.fields.order());
        let tests: Vec<_> = rule.points().iter().map(|at| orthonormal_values(shape, order, at)).collect();
        let matrix = self.fields.divergence_moments()?;
        let (mut defect, mut size) = (0.0_f64, 0.0_f64);
        for cell in self.mesh.cells() {
            let determinant = self.determinant(cell);
            let mut wanted = vec![0.0; polynomial_count(shape, order)];
            for (q, w) in rule.weights().iter().enumerate() {
                let f = w * determinant * source(cell, q);
                wanted.iter_mut().zip(&tests[q]).for_each(|(m, v)| *m += f * v);
            }
            let moments = self.moments(cell);
            for (row, wanted) in matrix.chunks_exact(moments.len()).zip(wanted) {
                let terms = row.iter().zip(moments).map(|(a, b)| a * b);
                defect = defect.max((terms.clone().sum::<f64>() - wanted).abs());
                size = size.max(wanted.abs()).max(terms.map(f64::abs).sum());
            }
        }
        Ok(if size > 0.0 { defect / size } else { 0.0 })
    }

    fn determinant(&self, cell: CellId) -> f64 {
        self.mesh.cell_measure(cell) / self.fields.shape().measure()
    }
}

fn pad<const D: usize>(at: &[f64; D]) -> [f64; 2] {
    [at[0], if D == 1 { 0.0 } else { at[D - 1] }]
}
