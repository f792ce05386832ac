//! A borrowed sparse matrix in compressed rows.

use rayon::prelude::*;
use sprs::CsMatI;

use crate::SolveError;

/// Rows worked on by one task: fixed, so that nothing depends on the number of threads.
const ROWS: usize = 4096;

/// A square sparse matrix in compressed rows: row i has the entries `offsets[i]..offsets[i + 1]`, its columns rise.
///
/// ```
/// use hypercircle_solve::CsrView;
/// let matrix = CsrView::new(&[0, 2, 4], &[0, 1, 0, 1], &[2.0, -1.0, -1.0, 2.0])?;
/// let mut y = [0.0; 2];
/// matrix.multiply(&[1.0, 2.0], &mut y);
/// assert_eq!(y, [0.0, 3.0]);
/// # Ok::<(), hypercircle_solve::SolveError>(())
/// ```
#[derive(Debug, Clone, Copy)]
pub struct CsrView<'a> {
    offsets: &'a [usize],
    columns: &'a [u32],
    values: &'a [f64],
}

impl<'a> CsrView<'a> {
    /// From its arrays.
    ///
    /// # Errors
    /// Sizes that disagree, or a row that is malformed.
    pub fn new(offsets: &'a [usize], columns: &'a [u32], values: &'a [f64]) -> Result<Self, SolveError> {
        let entries = offsets.last().copied().unwrap_or(0);
        for (what, given) in [("array of columns", columns.len()), ("array of values", values.len())] {
            if given != entries {
                return Err(SolveError::SizeMismatch { what, given, expected: entries });
            }
        }
        let rows = offsets.len().saturating_sub(1);
        for row in 0..rows {
            let sound = offsets[row] <= offsets[row + 1]
                && offsets[row + 1] <= entries
                && columns[offsets[row]..offsets[row + 1]].is_sorted_by(|a, b| a < b)
                && columns[offsets[row]..offsets[row + 1]].last().is_none_or(|c| (*c as usize) < rows);
            if !sound {
                return Err(SolveError::MalformedRow { row, columns: rows });
            }
        }
        Ok(Self { offsets, columns, values })
    }

    /// Number of rows.
    #[must_use]
    pub fn len(&self) -> usize {
        self.offsets.len().saturating_sub(1)
    }

    /// Whether there are no rows.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Offsets of the rows.
    #[must_use]
    pub fn offsets(&self) -> &'a [usize] {
        self.offsets
    }

    /// Columns of all entries.
    #[must_use]
    pub fn columns(&self) -> &'a [u32] {
        self.columns
    }

    /// Values of all entries.
    #[must_use]
    pub fn values(&self) -> &'a [f64] {
        self.values
    }

    /// Columns and values of a row.
    #[inline]
    #[must_use]
    pub fn row(&self, row: usize) -> (&'a [u32], &'a [f64]) {
        let range = self.offsets[row]..self.offsets[row + 1];
        (&self.columns[range.clone()], &self.values[range])
    }

    /// The value at (row, column), zero where there is no entry.
    #[must_use]
    pub fn get(&self, row: usize, column: usize) -> f64 {
        let (columns, values) = self.row(row);
        columns.binary_search(&(column as u32)).map_or(0.0, |k| values[k])
    }

    /// y = A x, in parallel. Vectors beyond the size of the matrix are left alone.
    pub fn multiply(&self, x: &[f64], y: &mut [f64]) {
        y.par_chunks_mut(ROWS).enumerate().for_each(|(block, y)| {
            for (k, sum) in y.iter_mut().enumerate() {
                let (columns, values) = self.row(block * ROWS + k);
                *sum = columns.iter().zip(values).map(|(c, v)| v * x[*c as usize]).sum();
            }
        });
    }

    /// The diagonal.
    #[must_use]
    pub fn diagonal(&self) -> Vec<f64> {
        (0..self.len()).map(|i| self.get(i, i)).collect()
    }

    /// Checks that all entries are finite and that mirrored ones agree to a share `tolerance` of the larger diagonal entry.
    ///
    /// # Errors
    /// The first entry that is not finite, or the first pair that differs.
    pub fn check_symmetric(&self, tolerance: f64) -> Result<(), SolveError> {
        for row in 0..self.len() {
            let (columns, values) = self.row(row);
            for (column, value) in columns.iter().zip(values) {
                let column = *column as usize;
                if !value.is_finite() {
                    return Err(SolveError::MatrixNotFinite { row, column, value: *value });
                }
                if column <= row {
                    continue;
                }
                let mirrored = self.get(column, row);
                let size = value.abs().max(mirrored.abs());
                if (value - mirrored).abs() > tolerance * size {
                    return Err(SolveError::NotSymmetric { row, column, value: *value, mirrored });
                }
            }
        }
        Ok(())
    }
}

impl<'a> From<&'a CsMatI<f64, u32, usize>> for CsrView<'a> {
    /// A matrix of `sprs` has been checked when it was made; it must be square and in compressed rows.
    fn from(matrix: &'a CsMatI<f64, u32, usize>) -> Self {
        debug_assert!(matrix.is_csr() && matrix.rows() == matrix.cols());
        Self { offsets: matrix.indptr().into_raw_storage(), columns: matrix.indices(), values: matrix.data() }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn malformed_rows_and_sizes_are_told() {
        let new = |o: &[usize], c: &[u32], v: &[f64]| CsrView::new(o, c, v).map(|_| ()).unwrap_err();
        assert!(matches!(new(&[0, 2], &[0], &[1.0]), SolveError::SizeMismatch { given: 1, expected: 2, .. }));
        assert!(matches!(new(&[0, 1, 3], &[0, 1, 0], &[1.0; 3]), SolveError::MalformedRow { row: 1, .. }));
        assert!(matches!(new(&[0, 1], &[1], &[1.0]), SolveError::MalformedRow { row: 0, .. }));
    }

    #[test]
    fn first_unsymmetric_or_infinite_entry_is_told() {
        let (offsets, columns) = ([0, 2, 4], [0, 1, 0, 1]);
        let check = |values: &[f64]| CsrView::new(&offsets, &columns, values).unwrap().check_symmetric(1e-12);
        assert!(check(&[2.0, 1.0, 1.0, 2.0]).is_ok());
        assert!(matches!(check(&[2.0, 1.0, 1.1, 2.0]), Err(SolveError::NotSymmetric { row: 0, column: 1, .. })));
        assert!(matches!(
            check(&[2.0, f64::NAN, 1.0, 2.0]),
            Err(SolveError::MatrixNotFinite { row: 0, column: 1, .. })
        ));
    }
}
