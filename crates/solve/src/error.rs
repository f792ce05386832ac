//! Why a system was not solved.

/// An error of a linear solver. Each names the place and ends with the mend.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum SolveError {
    /// Sizes that do not fit together.
    #[error("{what} has {given} entries where {expected} are needed: give one for each row")]
    SizeMismatch {
        /// What has the wrong size.
        what: &'static str,
        /// Its size.
        given: usize,
        /// The size it should have.
        expected: usize,
    },
    /// Offsets or columns that make no matrix.
    #[error("row {row} of the matrix is malformed: offsets must not fall, columns must rise and stay below {columns}")]
    MalformedRow {
        /// Which row.
        row: usize,
        /// Number of columns.
        columns: usize,
    },
    /// An entry of the matrix is NaN or infinite.
    #[error("the matrix entry ({row}, {column}) is {value}: look for the coefficient that makes it")]
    MatrixNotFinite {
        /// Its row.
        row: usize,
        /// Its column.
        column: usize,
        /// Its value.
        value: f64,
    },
    /// An entry of the load is NaN or infinite.
    #[error("the load of unknown {unknown} is {value}: look for the source or condition that makes it")]
    LoadNotFinite {
        /// Which unknown.
        unknown: usize,
        /// Its value.
        value: f64,
    },
    /// An entry of the start value is NaN or infinite.
    #[error("the start value of unknown {unknown} is {value}: start from zero or from finite numbers")]
    StartNotFinite {
        /// Which unknown.
        unknown: usize,
        /// Its value.
        value: f64,
    },
    /// A tolerance that nothing can meet.
    #[error("the relative tolerance is {value}: give a positive number")]
    Tolerance {
        /// What was given.
        value: f64,
    },
    /// A pair of entries that differ.
    #[error(
        "the matrix is not symmetric: entry ({row}, {column}) is {value}, its mirror image is {mirrored}; use a method for general matrices"
    )]
    NotSymmetric {
        /// Row of the first such entry.
        row: usize,
        /// Its column.
        column: usize,
        /// Its value.
        value: f64,
        /// The value at (column, row).
        mirrored: f64,
    },
    /// The matrix is not positive definite.
    #[error(
        "the matrix is not positive definite, seen at unknown {unknown}: look for a part that nothing holds or a negative coefficient"
    )]
    NotPositiveDefinite {
        /// Where it was found out, or a neighbor eliminated together with it.
        unknown: usize,
    },
    /// An iteration did not come to its end.
    #[error("no convergence in {iterations} iterations: residual {residual:e} of the wanted {wanted:e}; {advice}")]
    NotConverged {
        /// How many were made.
        iterations: usize,
        /// Relative residual reached.
        residual: f64,
        /// Relative residual wanted.
        wanted: f64,
        /// Relative residuals of all iterations.
        history: Vec<f64>,
        /// The best iterate.
        best: Vec<f64>,
        /// Likely cause and mend.
        advice: &'static str,
    },
    /// The factor would take more memory than allowed.
    #[error("the factor needs {needed} bytes, {allowed} are allowed: raise the budget or use an iterative method")]
    OverBudget {
        /// Bytes needed.
        needed: usize,
        /// Bytes allowed.
        allowed: usize,
    },
    /// The system is too large for 32-bit factorization indices, or memory ran out.
    #[error("the factorization failed ({reason}): use an iterative method")]
    Factorization {
        /// What the factorization says.
        reason: &'static str,
    },
    /// The matrix couples unknowns that are no neighbors on a line.
    #[error("row {row} of the matrix couples more than its neighbors on the line: use the direct solver")]
    NotTridiagonal {
        /// The first such row.
        row: usize,
    },
    /// The caller asked to stop.
    #[error("cancelled after {iterations} iterations: call again to go on")]
    Cancelled {
        /// How many were made.
        iterations: usize,
        /// The iterate then.
        best: Vec<f64>,
    },
}
