//! The solver that suits a system.

use crate::{ConjugateGradients, Direct, LinearSolver, LinearSystem, Outcome, SolveError, Tridiagonal};

/// Chooses by the system: tridiagonal elimination for chains, Cholesky factorization while its factor fits the memory, conjugate
/// gradients beyond. The reason is told in [`Outcome::why`].
///
/// ```
/// use hypercircle_solve::{Automatic, CsrView, LinearSolver, LinearSystem};
/// let matrix = CsrView::new(&[0, 2, 4], &[0, 1, 0, 1], &[2.0, -1.0, -1.0, 2.0])?;
/// let mut x = [0.0; 2];
/// let system = LinearSystem { matrix, load: &[0.0, 3.0], coordinates: None };
/// let outcome = Automatic::default().solve(&system, &mut x)?;
/// assert_eq!(outcome.method, "tridiagonal elimination");
/// # Ok::<(), hypercircle_solve::SolveError>(())
/// ```
#[derive(Debug)]
pub struct Automatic {
    bytes: usize,
    direct: Direct,
}

impl Default for Automatic {
    /// With at most 8 GiB for a factor.
    fn default() -> Self {
        Self::within(8 << 30)
    }
}

impl Automatic {
    /// With a limit for the bytes of a factor.
    #[must_use]
    pub fn within(bytes: usize) -> Self {
        Self { bytes, direct: Direct::within(bytes) }
    }
}

impl LinearSolver for Automatic {
    fn solve(&mut self, system: &LinearSystem<'_>, solution: &mut [f64]) -> Result<Outcome, SolveError> {
        system.check(solution)?;
        // A chain has at most three entries in a row: told before anything is sorted.
        if system.matrix.columns().len() <= 3 * system.matrix.len() && Tridiagonal::order(system).is_ok() {
            let outcome = Tridiagonal.solve(system, solution)?;
            return Ok(Outcome { why: "the unknowns form a chain".to_owned(), ..outcome });
        }
        match self.direct.solve(system, solution) {
            Ok(outcome) => {
                let why = format!("the factor of {} MB fits the {} MB allowed", outcome.bytes >> 20, self.bytes >> 20);
                Ok(Outcome { why, ..outcome })
            }
            Err(SolveError::OverBudget { needed, allowed }) => {
                let outcome = ConjugateGradients::default().solve(system, solution)?;
                let why = format!("a factor would take {} MB, {} MB are allowed", needed >> 20, allowed >> 20);
                Ok(Outcome { why, ..outcome })
            }
            Err(error) => Err(error),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::check_solver;

    #[test]
    fn every_solver_passes_the_same_check() {
        let iterative = ConjugateGradients { relative_tolerance: 1e-12, ..Default::default() };
        let solvers: [Box<dyn LinearSolver>; 4] = [
            Box::new(Direct::default()),
            Box::new(iterative),
            Box::new(Automatic::default()),
            Box::new(Automatic::within(100)),
        ];
        for mut solver in solvers {
            check_solver(solver.as_mut()).unwrap();
        }
    }

    #[test]
    fn a_solver_that_does_nothing_fails_the_check() {
        struct Idle;
        impl LinearSolver for Idle {
            fn solve(&mut self, _: &LinearSystem<'_>, _: &mut [f64]) -> Result<Outcome, SolveError> {
                Ok(Outcome { method: "idle", why: String::new(), iterations: 0, history: vec![], bytes: 0 })
            }
        }
        assert!(matches!(check_solver(&mut Idle), Err(SolveError::NotConverged { .. })));
    }
}
