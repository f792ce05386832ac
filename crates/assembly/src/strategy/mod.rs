//! Strategies: how contributions of cells become a matrix or a load.

mod scatter;

pub use scatter::Scatter;

use hypercircle_element::Rule;

use crate::{AssemblyError, MatrixKernel, Pattern, Space, VectorKernel};

/// How the contributions of cells are computed and summed. All strategies give the same sums and each gives the
/// same bits on any number of threads.
pub trait Strategy<const D: usize>: Sync {
    /// Adds the matrices of all cells to the values of a matrix with the pattern of the space.
    ///
    /// # Errors
    /// What the kernel finds wrong; of several finds, that of the lowest cells.
    fn add_matrices(
        &self,
        space: &Space<D>,
        pattern: &Pattern,
        rule: &Rule,
        kernel: &dyn MatrixKernel<D>,
        values: &mut [f64],
    ) -> Result<(), AssemblyError>;

    /// Adds the vectors of all cells to a vector of the unknowns.
    ///
    /// # Errors
    /// As for [`Strategy::add_matrices`].
    fn add_vectors(
        &self,
        space: &Space<D>,
        rule: &Rule,
        kernel: &dyn VectorKernel<D>,
        vector: &mut [f64],
    ) -> Result<(), AssemblyError>;
}
