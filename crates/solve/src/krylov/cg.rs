//! Conjugate gradients with diagonal scaling.

use crate::reduction::dot;
use crate::{LinearSolver, LinearSystem, Outcome, SolveError};

/// Conjugate gradients, preconditioned by the diagonal (Jacobi).
///
/// Stops when √(rᵀD⁻¹r) has fallen to `relative_tolerance` times that of the load.
///
/// Source: M. R. Hestenes, E. Stiefel, J. Res. Nat. Bur. Stand. 49 (1952).
///
/// ```
/// use hypercircle_solve::{ConjugateGradients, CsrView, LinearSolver, LinearSystem};
/// let matrix = CsrView::new(&[0, 2, 4], &[0, 1, 0, 1], &[2.0, -1.0, -1.0, 2.0])?;
/// let mut x = [0.0; 2];
/// let outcome = ConjugateGradients::default()
///     .solve(&LinearSystem { matrix, load: &[0.0, 3.0], coordinates: None }, &mut x)?;
/// assert!((x[1] - 2.0).abs() < 1e-9 && outcome.iterations <= 2);
/// # Ok::<(), hypercircle_solve::SolveError>(())
/// ```
#[derive(Debug, Clone, Copy)]
pub struct ConjugateGradients {
    /// Wanted reduction of the residual.
    pub relative_tolerance: f64,
    /// Most iterations.
    pub most_iterations: usize,
    /// Asked before every iteration; `true` cancels.
    pub cancel: Option<fn() -> bool>,
}

impl Default for ConjugateGradients {
    fn default() -> Self {
        Self { relative_tolerance: 1e-10, most_iterations: 100_000, cancel: None }
    }
}

impl LinearSolver for ConjugateGradients {
    fn solve(&mut self, system: &LinearSystem<'_>, x: &mut [f64]) -> Result<Outcome, SolveError> {
        system.check(x)?;
        if !(self.relative_tolerance > 0.0) {
            return Err(SolveError::Tolerance { value: self.relative_tolerance });
        }
        let n = x.len();
        let matrix = system.matrix;
        let diagonal = matrix.diagonal();
        if let Some(unknown) = diagonal.iter().position(|d| !(*d > 0.0)) {
            return Err(SolveError::NotPositiveDefinite { unknown });
        }
        let scale = |r: &[f64], z: &mut [f64]| (0..n).for_each(|i| z[i] = r[i] / diagonal[i]);
        let (mut r, mut z, mut ap) = (vec![0.0; n], vec![0.0; n], vec![0.0; n]);
        scale(system.load, &mut z);
        let size = dot(system.load, &z).sqrt();
        matrix.multiply(x, &mut r)?;
        r.iter_mut().zip(system.load).for_each(|(r, b)| *r = b - *r);
        scale(&r, &mut z);
        let mut p = z.clone();
        let mut rz = dot(&r, &z);
        let mut history = Vec::new();
        let reached = |rz: f64| if size > 0.0 { rz.sqrt() / size } else { rz.sqrt() };
        while !(reached(rz) <= self.relative_tolerance) {
            let iterations = history.len();
            if self.cancel.is_some_and(|cancel| cancel()) {
                return Err(SolveError::Cancelled { iterations, best: x.to_vec() });
            }
            if iterations == self.most_iterations {
                return Err(SolveError::NotConverged {
                    iterations,
                    residual: reached(rz),
                    wanted: self.relative_tolerance,
                    history,
                    best: x.to_vec(),
                    advice: "allow more iterations, ask for less, or use the direct solver",
                });
            }
            matrix.multiply(&p, &mut ap)?;
            let curvature = dot(&p, &ap);
            if !(curvature > 0.0) {
                let worst = |a: &usize, b: &usize| (p[*a] * ap[*a]).total_cmp(&(p[*b] * ap[*b]));
                return Err(SolveError::NotPositiveDefinite { unknown: (0..n).min_by(worst).unwrap_or(0) });
            }
            let step = rz / curvature;
            for i in 0..n {
                x[i] += step * p[i];
                r[i] -= step * ap[i];
            }
            scale(&r, &mut z);
            let next = dot(&r, &z);
            let turn = next / rz;
            p.iter_mut().zip(&z).for_each(|(p, z)| *p = z + turn * *p);
            rz = next;
            history.push(reached(rz));
        }
        Ok(Outcome {
            method: "conjugate gradients with diagonal scaling",
            why: String::new(),
            iterations: history.len(),
            history,
            bytes: 5 * n * size_of::<f64>(),
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::CsrView;

    #[test]
    fn faults_and_failure_are_told() {
        let offsets = [0, 2, 4];
        let columns = [0, 1, 0, 1];
        let solve = |values: &[f64], mut cg: ConjugateGradients| {
            let matrix = CsrView::new(&offsets, &columns, values).unwrap();
            cg.solve(&LinearSystem { matrix, load: &[1.0, -1.0], coordinates: None }, &mut [0.0; 2]).unwrap_err()
        };
        let default = ConjugateGradients::default();
        let told = solve(&[1.0, 2.0, 2.0, 1.0], default);
        assert!(matches!(told, SolveError::NotPositiveDefinite { .. }));
        let told = solve(&[-1.0, 0.0, 0.0, 1.0], default);
        assert!(matches!(told, SolveError::NotPositiveDefinite { unknown: 0 }));
        let told = solve(&[2.0, 1.0, 1.0, 3.0], ConjugateGradients { most_iterations: 1, ..default });
        assert!(matches!(told, SolveError::NotConverged { iterations: 1, history, .. } if history.len() == 1));
        let told = solve(&[2.0, 1.0, 1.0, 3.0], ConjugateGradients { relative_tolerance: f64::NAN, ..default });
        assert!(matches!(told, SolveError::Tolerance { .. }));
        let told = solve(&[2.0, 1.0, 1.0, 3.0], ConjugateGradients { cancel: Some(|| true), ..default });
        assert!(matches!(told, SolveError::Cancelled { iterations: 0, .. }));
    }
}
