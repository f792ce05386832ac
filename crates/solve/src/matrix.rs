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
/// matrix.multiply(&[1.0, 2.0], &mut y)?;
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
        if offsets.first().is_some_and(|first| *first != 0) {
            return Err(SolveError::MalformedRow { row: 0, columns: rows });
        }
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

    /// y = A x, in parallel.
    ///
    /// # Errors
    /// Vectors whose size is not that of the matrix.
    pub fn multiply(&self, x: &[f64], y: &mut [f64]) -> Result<(), SolveError> {
        for (what, given) in [("vector to be multiplied", x.len()), ("product", y.len())] {
            if given != self.len() {
                return Err(SolveError::SizeMismatch { what, given, expected: self.len() });
            }
        }
        y.par_chunks_mut(ROWS).enumerate().for_each(|(block, y)| {
            for (k, sum) in y.iter_mut().enumerate() {
                let (columns, values) = self.row(block * ROWS + k);
                *sum = columns.iter().zip(values).map(|(c, v)| v * x[*c as usize]).sum();
            }
        });
        Ok(())
    }

    /// The diagonal.
    #[must_use]
    pub fn diagonal(&self) -> Vec<f64> {
        (0..self.len()).map(|i| self.get(i, i)).collect()
    }

    /// Checks in one pass that the matrix is symmetric: mirrored entries may differ by 10⁻¹⁰ of √(a_ii a_jj) or of the larger
    /// of them, which is rounding.
    ///
    /// # Errors
    /// The first entry whose mirror image is missing or differs.
    pub fn check_symmetric(&self) -> Result<(), SolveError> {
        let differs = |row: usize, column: usize, value: f64, mirrored: f64| {
            let diagonal = (self.get(row, row) * self.get(column, column)).abs().sqrt();
            (value - mirrored).abs() > 1e-10 * diagonal.max(value.abs()).max(mirrored.abs())
        };
        // Rows are met in ascending order, so the entries left of a row's diagonal are mirrored one after the other.
        let mut next = self.offsets.to_vec();
        for row in 0..self.len() {
            // Entries on the left that no earlier row has mirrored.
            if let Some(k) = (next[row]..self.offsets[row + 1]).next().filter(|k| (self.columns[*k] as usize) < row) {
                let (column, value) = (self.columns[k] as usize, self.values[k]);
                if differs(row, column, value, 0.0) {
                    return Err(SolveError::NotSymmetric { row, column, value, mirrored: 0.0 });
                }
            }
            let (columns, values) = self.row(row);
            for (column, value) in columns.iter().zip(values).filter(|(column, _)| **column as usize > row) {
                let column = *column as usize;
                let end = self.offsets[column + 1];
                while next[column] < end && (self.columns[next[column]] as usize) < row {
                    next[column] += 1;
                }
                let there = next[column] < end && self.columns[next[column]] as usize == row;
                let mirrored = if there { self.values[next[column]] } else { 0.0 };
                if (*value != mirrored || !there) && differs(row, column, *value, mirrored) {
                    return Err(SolveError::NotSymmetric { row, column, value: *value, mirrored });
                }
                next[column] += usize::from(there);
            }
        }
        Ok(())
    }
}

impl<'a> TryFrom<&'a CsMatI<f64, u32, usize>> for CsrView<'a> {
    type Error = SolveError;

    /// A matrix of `sprs` has sound rows by construction; it must be square and in compressed rows.
    fn try_from(matrix: &'a CsMatI<f64, u32, usize>) -> Result<Self, SolveError> {
        if !matrix.is_csr() || matrix.rows() != matrix.cols() {
            let (given, expected) = (matrix.cols(), matrix.rows());
            return Err(SolveError::SizeMismatch { what: "square matrix in compressed rows", given, expected });
        }
        Ok(Self { offsets: matrix.indptr().into_raw_storage(), columns: matrix.indices(), values: matrix.data() })
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
        assert!(matches!(new(&[1, 2], &[0, 0], &[1.0; 2]), SolveError::MalformedRow { row: 0, .. }));
        let one = CsrView::new(&[0, 1], &[0], &[1.0]).unwrap();
        assert!(matches!(one.multiply(&[1.0, 2.0], &mut [0.0]), Err(SolveError::SizeMismatch { given: 2, .. })));
    }

    #[test]
    fn first_unsymmetric_pair_is_told_wherever_it_stands() {
        let full = ([0, 2, 4], [0, 1, 0, 1]);
        let check = |values: &[f64]| CsrView::new(&full.0, &full.1, values).unwrap().check_symmetric();
        assert!(check(&[2.0, 1.0, 1.0, 2.0]).is_ok());
        assert!(check(&[2.0, 1e-17, 0.0, 2.0]).is_ok());
        assert!(matches!(check(&[2.0, 1.0, 1.1, 2.0]), Err(SolveError::NotSymmetric { row: 0, column: 1, .. })));
        // A lone entry above, then below the diagonal.
        let above = CsrView::new(&[0, 2, 3], &[0, 1, 1], &[2.0, 1.0, 2.0]).unwrap().check_symmetric();
        assert!(matches!(above, Err(SolveError::NotSymmetric { row: 0, column: 1, .. })));
        let below = CsrView::new(&[0, 1, 3], &[0, 0, 1], &[2.0, 1.0, 2.0]).unwrap().check_symmetric();
        assert!(matches!(below, Err(SolveError::NotSymmetric { row: 1, column: 0, .. })));
    }
}
