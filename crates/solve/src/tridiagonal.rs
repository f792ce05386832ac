//! Chains of unknowns: elimination from one end to the other.

use crate::{LinearSolver, LinearSystem, Outcome, SolveError};

/// Elimination for matrices that couple neighbors on a line only, in time and memory proportional to the unknowns. Unknowns
/// are taken in the order of their first coordinate where coordinates are known, else in their own order.
///
/// ```
/// use hypercircle_solve::{CsrView, LinearSolver, LinearSystem, Tridiagonal};
/// let matrix = CsrView::new(&[0, 2, 4], &[0, 1, 0, 1], &[2.0, -1.0, -1.0, 2.0])?;
/// let mut x = [0.0; 2];
/// let _ = Tridiagonal.solve(&LinearSystem { matrix, load: &[0.0, 3.0], coordinates: None }, &mut x)?;
/// assert!((x[0] - 1.0).abs() < 1e-15 && (x[1] - 2.0).abs() < 1e-15);
/// # Ok::<(), hypercircle_solve::SolveError>(())
/// ```
#[derive(Debug, Clone, Copy, Default)]
pub struct Tridiagonal;

impl Tridiagonal {
    /// The order along the line, or the first row that couples others than neighbors.
    pub(crate) fn order(system: &LinearSystem<'_>) -> Result<Vec<u32>, SolveError> {
        let n = system.matrix.len();
        let mut order: Vec<u32> = (0..n as u32).collect();
        if let Some(places) = system.coordinates {
            order.sort_by(|a, b| places.get(*a as usize, 0).total_cmp(&places.get(*b as usize, 0)));
        }
        let mut position = vec![0; n];
        order.iter().enumerate().for_each(|(k, u)| position[*u as usize] = k);
        for row in 0..n {
            let (columns, _) = system.matrix.row(row);
            if columns.iter().any(|c| position[*c as usize].abs_diff(position[row]) > 1) {
                return Err(SolveError::NotTridiagonal { row });
            }
        }
        Ok(order)
    }

    fn eliminate(system: &LinearSystem<'_>, order: &[u32], solution: &mut [f64]) -> Result<(), SolveError> {
        let n = order.len();
        let mut pivots = vec![0.0; n];
        let mut right = vec![0.0; n];
        let mut couplings = vec![0.0; n];
        for k in 0..n {
            let unknown = order[k] as usize;
            (pivots[k], right[k]) = (system.matrix.get(unknown, unknown), system.load[unknown]);
            if k > 0 {
                couplings[k] = system.matrix.get(unknown, order[k - 1] as usize);
                let factor = couplings[k] / pivots[k - 1];
                pivots[k] -= factor * couplings[k];
                right[k] -= factor * right[k - 1];
            }
            if !(pivots[k] > 0.0) {
                return Err(SolveError::NotPositiveDefinite { unknown });
            }
        }
        for k in (0..n).rev() {
            let above = if k + 1 < n { couplings[k + 1] * solution[order[k + 1] as usize] } else { 0.0 };
            solution[order[k] as usize] = (right[k] - above) / pivots[k];
        }
        Ok(())
    }
}

impl LinearSolver for Tridiagonal {
    fn solve(&mut self, system: &LinearSystem<'_>, solution: &mut [f64]) -> Result<Outcome, SolveError> {
        system.check(solution)?;
        let order = Self::order(system)?;
        Self::eliminate(system, &order, solution)?;
        Ok(Outcome {
            method: "tridiagonal elimination",
            why: String::new(),
            iterations: 0,
            history: Vec::new(),
            bytes: 3 * order.len() * size_of::<f64>(),
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Coordinates, CsrView};

    #[test]
    fn unknowns_are_sorted_by_place() {
        // The chain 2 – 0 – 1.
        let (columns, values) = ([0, 1, 2, 0, 1, 0, 2], [2.0, -1.0, -1.0, -1.0, 2.0, -1.0, 2.0]);
        let matrix = CsrView::new(&[0, 3, 5, 7], &columns, &values).unwrap();
        let places = Coordinates::new(1, &[0.5, 0.75, 0.25]).unwrap();
        let mut x = [0.0; 3];
        let _ = Tridiagonal.solve(&LinearSystem { matrix, load: &[0.0, 0.0, 4.0], coordinates: Some(places) }, &mut x);
        assert!((x[2] - 3.0).abs() + (x[0] - 2.0).abs() + (x[1] - 1.0).abs() < 1e-14);
        let told = Tridiagonal.solve(&LinearSystem { matrix, load: &[0.0; 3], coordinates: None }, &mut x).unwrap_err();
        assert!(matches!(told, SolveError::NotTridiagonal { row: 0 }));
    }

    #[test]
    fn a_pivot_that_is_not_positive_is_told() {
        let matrix = CsrView::new(&[0, 1, 2], &[0, 1], &[1.0, -1.0]).unwrap();
        let told = Tridiagonal.solve(&LinearSystem { matrix, load: &[0.0; 2], coordinates: None }, &mut [0.0; 2]);
        assert!(matches!(told, Err(SolveError::NotPositiveDefinite { unknown: 1 })));
    }
}
