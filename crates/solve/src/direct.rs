//! Direct solution by sparse Cholesky factorization. The only room that knows `faer`.

use faer::dyn_stack::{MemBuffer, MemStack};
use faer::perm::PermRef;
use faer::sparse::linalg::SupernodalThreshold;
use faer::sparse::linalg::cholesky::{
    CholeskySymbolicParams, LltRef, SymbolicCholesky, SymmetricOrdering, factorize_symbolic_cholesky,
};
use faer::sparse::{FaerError, SparseColMatRef, SymbolicSparseColMatRef};
use faer::{Conj, MatMut, Par, Side};

use crate::{LinearSolver, LinearSystem, Outcome, SolveError, nested_dissection};

/// Rounds of iterative refinement after the first solve: one brings the backward error down to rounding.
const REFINEMENTS: usize = 1;

/// Sparse Cholesky factorization A = L Lᵀ with nested dissection by place where coordinates are known, else with a
/// minimum degree order. The symbolic part is kept and used again while the pattern stays the same, the factor while the values do.
///
/// ```
/// use hypercircle_solve::{CsrView, Direct, LinearSolver, LinearSystem};
/// let matrix = CsrView::new(&[0, 2, 4], &[0, 1, 0, 1], &[2.0, -1.0, -1.0, 2.0])?;
/// let mut x = [0.0; 2];
/// let system = LinearSystem { matrix, load: &[0.0, 3.0], coordinates: None };
/// let _ = Direct::default().solve(&system, &mut x)?;
/// assert!((x[0] - 1.0).abs() < 1e-15 && (x[1] - 2.0).abs() < 1e-15);
/// # Ok::<(), hypercircle_solve::SolveError>(())
/// ```
#[derive(Debug, Default)]
pub struct Direct {
    budget: Option<usize>,
    kept: Option<Kept>,
}

/// Pattern, symbolic factorization and factor of the last system.
struct Kept {
    offsets: Vec<u32>,
    columns: Vec<u32>,
    values: Vec<f64>,
    symbolic: SymbolicCholesky<u32>,
    factor: Vec<f64>,
}

impl std::fmt::Debug for Kept {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Kept").field("rows", &(self.offsets.len() - 1)).field("factor", &self.factor.len()).finish()
    }
}

impl Direct {
    /// With a limit for the bytes of the factor, checked before it is made.
    #[must_use]
    pub fn within(bytes: usize) -> Self {
        Self { budget: Some(bytes), kept: None }
    }

    /// Makes sure that the kept factor is that of a system.
    fn factorize(&mut self, system: &LinearSystem<'_>) -> Result<&Kept, SolveError> {
        let matrix = system.matrix;
        let same_pattern = |kept: &Kept| {
            kept.offsets.len() == matrix.offsets().len()
                && kept.columns == matrix.columns()
                && kept.offsets.iter().zip(matrix.offsets()).all(|(a, b)| *a as usize == *b)
        };
        let mut kept = match self.kept.take().filter(same_pattern) {
            Some(kept) => kept,
            None => analyze(system)?,
        };
        if kept.factor.is_empty() || kept.values != matrix.values() {
            let needed = kept.symbolic.len_val() * size_of::<f64>();
            if let Some(allowed) = self.budget.filter(|allowed| needed > *allowed) {
                self.kept = Some(kept);
                return Err(SolveError::OverBudget { needed, allowed });
            }
            kept.factor.resize(kept.symbolic.len_val(), 0.0);
            kept.values = matrix.values().to_vec();
            numeric(&mut kept)?;
        }
        Ok(self.kept.insert(kept))
    }
}

fn failed(error: FaerError) -> SolveError {
    let reason = match error {
        FaerError::IndexOverflow => "too many entries for 32-bit indices",
        FaerError::OutOfMemory => "out of memory",
        _ => "unknown reason",
    };
    SolveError::Factorization { reason }
}

/// Order and symbolic factorization.
fn analyze(system: &LinearSystem<'_>) -> Result<Kept, SolveError> {
    let matrix = system.matrix;
    let n = matrix.len();
    if matrix.columns().len() > i32::MAX as usize {
        return Err(failed(FaerError::IndexOverflow));
    }
    let offsets: Vec<u32> = matrix.offsets().iter().map(|o| *o as u32).collect();
    let columns = matrix.columns().to_vec();
    // Rows of a symmetric matrix are its columns; the view was checked when it was made.
    let pattern = SymbolicSparseColMatRef::new_checked(n, n, &offsets, None, &columns);
    // One kind of factor for all sizes, so that pivots are counted in one way.
    let params = CholeskySymbolicParams {
        supernodal_flop_ratio_threshold: SupernodalThreshold::FORCE_SUPERNODAL,
        ..Default::default()
    };
    let symbolic = match system.coordinates {
        Some(places) => {
            let forward = nested_dissection(matrix, places)?;
            let mut inverse = vec![0; n];
            forward.iter().enumerate().for_each(|(k, u)| inverse[*u as usize] = k as u32);
            let order = SymmetricOrdering::Custom(PermRef::new_checked(&forward, &inverse, n));
            factorize_symbolic_cholesky(pattern, Side::Lower, order, params)
        }
        None => factorize_symbolic_cholesky(pattern, Side::Lower, SymmetricOrdering::Amd, params),
    };
    Ok(Kept { offsets, columns, values: Vec::new(), symbolic: symbolic.map_err(failed)?, factor: Vec::new() })
}

/// The numeric factorization.
fn numeric(kept: &mut Kept) -> Result<(), SolveError> {
    let n = kept.offsets.len() - 1;
    let pattern = SymbolicSparseColMatRef::new_checked(n, n, &kept.offsets, None, &kept.columns);
    let matrix = SparseColMatRef::new(pattern, &kept.values);
    let scratch = kept.symbolic.factorize_numeric_llt_scratch::<f64>(Par::Seq, Default::default());
    let mut memory = MemBuffer::try_new(scratch).map_err(|_| failed(FaerError::OutOfMemory))?;
    let outcome = kept.symbolic.factorize_numeric_llt(
        &mut kept.factor,
        matrix,
        Side::Lower,
        Default::default(),
        Par::Seq,
        MemStack::new(&mut memory),
        Default::default(),
    );
    match outcome {
        Ok(_) => Ok(()),
        Err(faer::linalg::cholesky::llt::factor::LltError::NonPositivePivot { index }) => {
            // A diagonal entry that is not positive is the plain cause; else the pivot, counted in the order of elimination,
            // tells the neighborhood: it is found out for a block of columns at once.
            let at = |i: usize| kept.offsets[i] as usize..kept.offsets[i + 1] as usize;
            let positive = |i: usize| at(i).any(|k| kept.columns[k] as usize == i && kept.values[k] > 0.0);
            let pivot = kept.symbolic.perm().map(|perm| perm.arrays().0[index.min(n - 1)] as usize);
            let unknown = (0..n).find(|i| !positive(*i)).or(pivot).unwrap_or(index);
            Err(SolveError::NotPositiveDefinite { unknown })
        }
    }
}

impl Kept {
    /// x ← A⁻¹ x.
    fn solve_in_place(&self, x: &mut [f64]) -> Result<(), SolveError> {
        let scratch = self.symbolic.solve_in_place_scratch::<f64>(1, Par::Seq);
        let mut memory = MemBuffer::try_new(scratch).map_err(|_| failed(FaerError::OutOfMemory))?;
        let n = x.len();
        let right = MatMut::from_column_major_slice_mut(x, n, 1);
        let factor = LltRef::<'_, u32, f64>::new(&self.symbolic, &self.factor);
        factor.solve_in_place_with_conj(Conj::No, right, Par::Seq, MemStack::new(&mut memory));
        Ok(())
    }
}

impl LinearSolver for Direct {
    fn solve(&mut self, system: &LinearSystem<'_>, solution: &mut [f64]) -> Result<Outcome, SolveError> {
        system.check(solution)?;
        let n = solution.len();
        let mut outcome = Outcome {
            method: "Cholesky factorization",
            why: String::new(),
            iterations: 0,
            history: Vec::new(),
            bytes: 0,
        };
        if n == 0 {
            return Ok(outcome);
        }
        let kept = self.factorize(system)?;
        outcome.bytes = kept.factor.len() * size_of::<f64>();
        solution.copy_from_slice(system.load);
        kept.solve_in_place(solution)?;
        let mut residual = vec![0.0; n];
        for _ in 0..REFINEMENTS {
            system.matrix.multiply(solution, &mut residual)?;
            residual.iter_mut().zip(system.load).for_each(|(r, b)| *r = b - *r);
            kept.solve_in_place(&mut residual)?;
            solution.iter_mut().zip(&residual).for_each(|(x, d)| *x += d);
        }
        match solution.iter().position(|x| !x.is_finite()) {
            Some(unknown) => Err(SolveError::NotPositiveDefinite { unknown }),
            None => Ok(outcome),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Coordinates, CsrView};

    #[test]
    fn indefinite_matrix_and_small_budget_are_told() {
        let matrix = CsrView::new(&[0, 2, 4], &[0, 1, 0, 1], &[1.0, 2.0, 2.0, 1.0]).unwrap();
        let system = LinearSystem { matrix, load: &[1.0, 1.0], coordinates: None };
        let told = Direct::default().solve(&system, &mut [0.0; 2]).unwrap_err();
        assert!(matches!(told, SolveError::NotPositiveDefinite { .. }));
        let diagonal = CsrView::new(&[0, 1, 2, 3], &[0, 1, 2], &[1.0, -1.0, 1.0]).unwrap();
        let told = Direct::default()
            .solve(&LinearSystem { matrix: diagonal, load: &[1.0; 3], coordinates: None }, &mut [0.0; 3]);
        assert_eq!(told.unwrap_err(), SolveError::NotPositiveDefinite { unknown: 1 });
        let told = Direct::within(7).solve(&system, &mut [0.0; 2]).unwrap_err();
        assert!(matches!(told, SolveError::OverBudget { allowed: 7, .. }));
    }

    #[test]
    fn other_values_on_the_same_pattern_are_solved_anew() {
        let mut direct = Direct::default();
        let places = Coordinates::new(1, &[0.0, 1.0]).unwrap();
        for factor in [1.0, 3.0] {
            let values = [2.0 * factor, -factor, -factor, 2.0 * factor];
            let matrix = CsrView::new(&[0, 2, 4], &[0, 1, 0, 1], &values).unwrap();
            let mut x = [0.0; 2];
            let system = LinearSystem { matrix, load: &[0.0, 3.0], coordinates: Some(places) };
            let _ = direct.solve(&system, &mut x).unwrap();
            assert!((x[0] - 1.0 / factor).abs() < 1e-15 && (x[1] - 2.0 / factor).abs() < 1e-15);
        }
    }
}
