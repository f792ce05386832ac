//! The trait of all solvers, and what they are given.

use crate::{CsrView, SolveError};

/// Where unknowns lie, for methods that order them by place: `dimension` numbers for each unknown, laid end to end.
#[derive(Debug, Clone, Copy)]
pub struct Coordinates<'a> {
    dimension: usize,
    flat: &'a [f64],
}

impl<'a> Coordinates<'a> {
    /// From a flat array.
    ///
    /// # Errors
    /// A length that is no multiple of the dimension, or a dimension of zero.
    pub fn new(dimension: usize, flat: &'a [f64]) -> Result<Self, SolveError> {
        if dimension == 0 || !flat.len().is_multiple_of(dimension) {
            let expected = flat.len().next_multiple_of(dimension.max(1));
            return Err(SolveError::SizeMismatch { what: "array of coordinates", given: flat.len(), expected });
        }
        Ok(Self { dimension, flat })
    }

    /// Numbers for each unknown.
    #[must_use]
    pub fn dimension(&self) -> usize {
        self.dimension
    }

    /// Number of unknowns.
    #[must_use]
    pub fn len(&self) -> usize {
        self.flat.len() / self.dimension
    }

    /// Whether there are none.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.flat.is_empty()
    }

    /// One coordinate of an unknown.
    #[inline]
    #[must_use]
    pub fn get(&self, unknown: usize, axis: usize) -> f64 {
        self.flat[unknown * self.dimension + axis]
    }
}

/// A symmetric positive definite system A x = b.
#[derive(Debug, Clone, Copy)]
pub struct LinearSystem<'a> {
    /// A.
    pub matrix: CsrView<'a>,
    /// b.
    pub load: &'a [f64],
    /// Where the unknowns lie, if known.
    pub coordinates: Option<Coordinates<'a>>,
}

impl LinearSystem<'_> {
    /// Checks sizes, that every number is finite, and that the matrix is symmetric.
    ///
    /// # Errors
    /// The first misfit, with its place.
    pub fn check(&self, solution: &[f64]) -> Result<(), SolveError> {
        let expected = self.matrix.len();
        for (what, given) in [
            ("load", self.load.len()),
            ("solution", solution.len()),
            ("list of coordinates", self.coordinates.map_or(expected, |c| c.len())),
        ] {
            if given != expected {
                return Err(SolveError::SizeMismatch { what, given, expected });
            }
        }
        if let Some(unknown) = solution.iter().position(|x| !x.is_finite()) {
            return Err(SolveError::StartNotFinite { unknown, value: solution[unknown] });
        }
        if let Some(unknown) = self.load.iter().position(|b| !b.is_finite()) {
            return Err(SolveError::LoadNotFinite { unknown, value: self.load[unknown] });
        }
        if let Some(k) = self.matrix.values().iter().position(|v| !v.is_finite()) {
            let row = self.matrix.offsets().partition_point(|o| *o <= k) - 1;
            let (column, value) = (self.matrix.columns()[k] as usize, self.matrix.values()[k]);
            return Err(SolveError::MatrixNotFinite { row, column, value });
        }
        self.matrix.check_symmetric()
    }
}

/// What a solver reports of a solved system.
#[derive(Debug, Clone, PartialEq)]
#[must_use]
pub struct Outcome {
    /// Name of the method.
    pub method: &'static str,
    /// Why this method, where it was chosen automatically; empty otherwise.
    pub why: String,
    /// Iterations; zero for direct methods.
    pub iterations: usize,
    /// Relative residuals of the iterations.
    pub history: Vec<f64>,
    /// Memory of the factor or the work vectors, in bytes.
    pub bytes: usize,
}

/// Solves symmetric positive definite systems. Implement it to plug in a solver of your own.
///
/// Contract: the same system gives the same bits, and what comes back with `Ok` solves the system to the accuracy that the solver
/// documents. [`check_solver`] tries an implementation on a few systems.
///
/// ```
/// use hypercircle_solve::{check_solver, LinearSolver, LinearSystem, Outcome, SolveError};
/// /// Gauss–Seidel sweeps: slow, but short.
/// struct Sweeps(usize);
/// impl LinearSolver for Sweeps {
///     fn solve(&mut self, system: &LinearSystem<'_>, x: &mut [f64]) -> Result<Outcome, SolveError> {
///         system.check(x)?;
///         for _ in 0..self.0 {
///             for i in 0..x.len() {
///                 let (columns, values) = system.matrix.row(i);
///                 let sum: f64 = columns.iter().zip(values).map(|(j, a)| a * x[*j as usize]).sum();
///                 x[i] += (system.load[i] - sum) / system.matrix.get(i, i);
///             }
///         }
///         Ok(Outcome { method: "sweeps", why: String::new(), iterations: self.0, history: vec![], bytes: 0 })
///     }
/// }
/// check_solver(&mut Sweeps(10_000))?;
/// # Ok::<(), SolveError>(())
/// ```
#[diagnostic::on_unimplemented(
    note = "implement `LinearSolver::solve`, or use `Direct`, `ConjugateGradients` or `Automatic`"
)]
pub trait LinearSolver {
    /// Solves a system; `solution` comes in as the start value and goes out as the solution.
    ///
    /// # Errors
    /// Sizes that disagree, numbers that are not finite, a matrix that is not positive definite, no convergence.
    fn solve(&mut self, system: &LinearSystem<'_>, solution: &mut [f64]) -> Result<Outcome, SolveError>;
}

/// Tries a solver on small systems with known solutions: a chain of springs, a grid with jumping coefficients, a single unknown, and
/// faulty input.
///
/// # Errors
/// What the solver says, or [`SolveError::NotConverged`] with the residual if its solution is wrong.
pub fn check_solver(solver: &mut dyn LinearSolver) -> Result<(), SolveError> {
    for (side, jump) in [(1, 1.0), (20, 1.0), (6, 1e4)] {
        let (offsets, columns, values) = grid(side, jump);
        let matrix = CsrView::new(&offsets, &columns, &values)?;
        let n = matrix.len();
        let expected: Vec<f64> = (0..n).map(|i| 1.0 + (i % 7) as f64).collect();
        let mut load = vec![0.0; n];
        matrix.multiply(&expected, &mut load)?;
        let mut solution = vec![0.0; n];
        let outcome = solver.solve(&LinearSystem { matrix, load: &load, coordinates: None }, &mut solution)?;
        let wrong = solution.iter().zip(&expected).map(|(a, b)| (a - b).abs()).fold(0.0, f64::max);
        if !(wrong < 1e-5) {
            return Err(SolveError::NotConverged {
                iterations: outcome.iterations,
                residual: wrong,
                wanted: 1e-5,
                history: outcome.history,
                best: solution,
                advice: "the solution of a test system is wrong",
            });
        }
        load[n - 1] = f64::NAN;
        match solver.solve(&LinearSystem { matrix, load: &load, coordinates: None }, &mut solution) {
            Err(SolveError::LoadNotFinite { .. }) => {}
            Err(other) => return Err(other),
            Ok(_) => return Err(SolveError::LoadNotFinite { unknown: n - 1, value: f64::NAN }),
        }
    }
    Ok(())
}

/// The five-point matrix of a square grid whose conductivity jumps half way; a chain if `side` is above 10.
fn grid(side: usize, jump: f64) -> (Vec<usize>, Vec<u32>, Vec<f64>) {
    let rows = if side > 10 { 1 } else { side };
    let (mut offsets, mut columns, mut values) = (vec![0], Vec::new(), Vec::new());
    let strength = |i: usize| if 2 * i < side { 1.0 } else { jump };
    for j in 0..rows {
        for i in 0..side {
            let mut row: Vec<(u32, f64)> = Vec::new();
            let mut diagonal = 0.0;
            let mut couple = |other: Option<(usize, usize)>, k: f64| {
                diagonal += k;
                if let Some((a, b)) = other {
                    row.push(((b * side + a) as u32, -k));
                }
            };
            couple((i > 0).then(|| (i - 1, j)), strength(i));
            couple((i + 1 < side).then(|| (i + 1, j)), strength(i + 1));
            if rows > 1 {
                couple((j > 0).then(|| (i, j - 1)), strength(i));
                couple((j + 1 < rows).then(|| (i, j + 1)), strength(i));
            }
            row.push(((j * side + i) as u32, diagonal));
            row.sort_by_key(|entry| entry.0);
            columns.extend(row.iter().map(|entry| entry.0));
            values.extend(row.iter().map(|entry| entry.1));
            offsets.push(columns.len());
        }
    }
    (offsets, columns, values)
}
