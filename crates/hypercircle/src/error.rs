//! What can be wrong with a statement, a solve or a question about the result.

use hypercircle_assembly::AssemblyError;
use hypercircle_mesh::MeshError;
use hypercircle_solve::SolveError;

/// An error of the whole way from statement to result. Each names the place and ends with the mend.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum Error {
    /// Of the mesh, or a name that it does not have.
    #[error(transparent)]
    Mesh(#[from] MeshError),
    /// Of the coefficients, the conditions or the assembly.
    #[error(transparent)]
    Assembly(#[from] AssemblyError),
    /// Of the linear solver.
    #[error(transparent)]
    Solve(#[from] SolveError),
    /// A tolerance that cannot be met by anything.
    #[error("the tolerance is {value}: give a positive, finite number")]
    Tolerance {
        /// What was given.
        value: f64,
    },
    /// A budget that allows nothing.
    #[error("the budget of {what} is {value}: give a positive number, or none for no limit")]
    EmptyBudget {
        /// Unknowns, bytes or seconds.
        what: &'static str,
        /// What was given.
        value: f64,
    },
    /// A share of marked error that is not between 0 and 1.
    #[error("the marked share of the error is {value}: give a number above 0 and at most 1")]
    MarkedShare {
        /// What was given.
        value: f64,
    },
    /// A region or side that was given a coefficient or condition twice.
    #[error("{what} of \"{name}\" is given twice: remove one of the two")]
    GivenTwice {
        /// Conductivity, source, condition, …
        what: &'static str,
        /// Region or side.
        name: String,
    },
    /// A result that has no guaranteed interval for this problem.
    #[error("there is no guaranteed interval for {result}: {why}")]
    NoInterval {
        /// Which result.
        result: &'static str,
        /// Why, and what to do instead.
        why: String,
    },
    /// A question about a side without any mesh side.
    #[error("side \"{name}\" has no cell on the boundary: ask about one of the boundary's names")]
    EmptySide {
        /// The name.
        name: String,
    },
}
