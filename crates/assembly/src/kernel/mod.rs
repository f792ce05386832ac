//! Local kernels: what one cell or side contributes.

mod diffusion;
mod load;
mod mass;

pub use diffusion::Diffusion;
pub use load::Load;
pub use mass::Mass;

use crate::{AssemblyError, Block, CellView};

/// What a cell (or a side of it) contributes to a matrix: implement it for a term of your own.
///
/// Matrices are row-major, row = test function, n × n with n the number of basis functions of the cell. They arrive
/// filled with zeros; add to them.
///
/// ```
/// use hypercircle_assembly::{AssemblyError, CellView, MatrixKernel};
/// /// ∫ (∂u/∂x)(∂v/∂x): conduction along x only.
/// #[derive(Debug)]
/// struct AlongX;
/// impl MatrixKernel<2> for AlongX {
///     fn cell(&self, cell: &CellView<'_, '_, 2>, matrix: &mut [f64]) -> Result<(), AssemblyError> {
///         let n = cell.function_count();
///         for q in 0..cell.point_count() {
///             for i in 0..n {
///                 for j in 0..n {
///                     matrix[i * n + j] += cell.weight(q) * cell.gradient(q, i)[0] * cell.gradient(q, j)[0];
///                 }
///             }
///         }
///         Ok(())
///     }
/// }
/// ```
pub trait MatrixKernel<const D: usize>: Sync {
    /// Adds the matrix of one cell.
    ///
    /// # Errors
    /// Whatever makes the contribution meaningless, for instance a coefficient that is not finite.
    fn cell(&self, cell: &CellView<'_, '_, D>, matrix: &mut [f64]) -> Result<(), AssemblyError>;

    /// Adds the matrices of a block, one after the other. Override where a whole block is faster.
    ///
    /// # Errors
    /// As for [`MatrixKernel::cell`].
    fn block(&self, block: &Block<'_, D>, matrices: &mut [f64]) -> Result<(), AssemblyError> {
        let n = block.table().function_count();
        for (c, matrix) in matrices.chunks_exact_mut(n * n).enumerate() {
            self.cell(&block.cell(c), matrix)?;
        }
        Ok(())
    }
}

/// What a cell (or a side of it) contributes to the load vector: one number for each basis function.
pub trait VectorKernel<const D: usize>: Sync {
    /// Adds the vector of one cell.
    ///
    /// # Errors
    /// As for [`MatrixKernel::cell`].
    fn cell(&self, cell: &CellView<'_, '_, D>, vector: &mut [f64]) -> Result<(), AssemblyError>;

    /// Adds the vectors of a block, one after the other.
    ///
    /// # Errors
    /// As for [`MatrixKernel::cell`].
    fn block(&self, block: &Block<'_, D>, vectors: &mut [f64]) -> Result<(), AssemblyError> {
        for (c, vector) in vectors.chunks_exact_mut(block.table().function_count()).enumerate() {
            self.cell(&block.cell(c), vector)?;
        }
        Ok(())
    }
}
