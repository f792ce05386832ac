//! The sparsity pattern, made once for a space and filled as often as needed.

use hypercircle_mesh::CellId;
use rayon::prelude::*;
use sprs::CsMatI;

use crate::Space;

/// A sparse matrix in compressed rows with 32-bit columns.
pub type SparseMatrix = CsMatI<f64, u32, usize>;

/// Rows worked on by one task: fixed, so that results do not depend on the number of threads.
const ROWS_PER_TASK: usize = 4096;

/// Which unknowns meet in a cell: offsets and sorted columns of the matrix rows, and for each cell where its local
/// entries go.
///
/// ```
/// use hypercircle_assembly::{Pattern, Space};
/// use hypercircle_mesh::Interval;
/// let space = Space::new(Interval::uniform(0.0, 1.0, 4).mesh()?.into(), 1)?;
/// let pattern = Pattern::new(&space);
/// assert_eq!(pattern.entry_count(), 13); // tridiagonal, 5 × 5
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
pub struct Pattern {
    offsets: Vec<usize>,
    columns: Vec<u32>,
    slots: Vec<u32>,
    local: usize,
}

impl Pattern {
    /// The pattern of a space.
    #[must_use]
    pub fn new<const D: usize>(space: &Space<D>) -> Self {
        let local = space.basis().nodes().len();
        let (cell_offsets, cells) = cells_of_unknowns(space);
        let rows = space.unknown_count();
        let blocks: Vec<(Vec<u32>, Vec<u32>)> = (0..rows.div_ceil(ROWS_PER_TASK))
            .into_par_iter()
            .map(|block| {
                let first = block * ROWS_PER_TASK;
                let last = (first + ROWS_PER_TASK).min(rows);
                let mut columns = Vec::with_capacity((last - first) * 2 * local);
                let mut lengths = Vec::with_capacity(last - first);
                let mut row = Vec::new();
                for unknown in first..last {
                    row.clear();
                    for cell in &cells[cell_offsets[unknown] as usize..cell_offsets[unknown + 1] as usize] {
                        row.extend_from_slice(space.unknowns(*cell));
                    }
                    row.sort_unstable();
                    row.dedup();
                    lengths.push(row.len() as u32);
                    columns.extend_from_slice(&row);
                }
                (lengths, columns)
            })
            .collect();
        let mut offsets = Vec::with_capacity(rows + 1);
        offsets.push(0);
        let mut columns = Vec::with_capacity(blocks.iter().map(|b| b.1.len()).sum());
        for (lengths, part) in blocks {
            for length in lengths {
                offsets.push(offsets[offsets.len() - 1] + length as usize);
            }
            columns.extend_from_slice(&part);
        }
        let mut slots = vec![0; space.mesh().cell_count() * local * local];
        slots.par_chunks_mut(ROWS_PER_TASK * local * local).enumerate().for_each(|(block, slots)| {
            for (k, slots) in slots.chunks_exact_mut(local * local).enumerate() {
                let unknowns = space.unknowns(CellId((block * ROWS_PER_TASK + k) as u32));
                for (i, row) in unknowns.iter().enumerate() {
                    let start = offsets[*row as usize];
                    let columns = &columns[start..offsets[*row as usize + 1]];
                    for (j, column) in unknowns.iter().enumerate() {
                        slots[i * local + j] = (start + columns.partition_point(|c| c < column)) as u32;
                    }
                }
            }
        });
        Self { offsets, columns, slots, local }
    }

    /// Number of stored entries.
    #[must_use]
    pub fn entry_count(&self) -> usize {
        self.columns.len()
    }

    /// Number of rows.
    #[must_use]
    pub fn row_count(&self) -> usize {
        self.offsets.len() - 1
    }

    /// Where the local entries of a cell go in the array of values, row-major.
    #[must_use]
    #[inline]
    pub fn slots(&self, cell: CellId) -> &[u32] {
        let n = self.local * self.local;
        &self.slots[cell.index() * n..(cell.index() + 1) * n]
    }

    /// A matrix of zeros with this pattern.
    #[must_use]
    pub fn zero_matrix(&self) -> SparseMatrix {
        // The pattern is made here with sorted columns and monotone offsets, so nothing is left to check.
        let rows = self.row_count();
        SparseMatrix::new((rows, rows), self.offsets.clone(), self.columns.clone(), vec![0.0; self.columns.len()])
    }
}

/// The cells of each unknown, laid end to end with offsets.
fn cells_of_unknowns<const D: usize>(space: &Space<D>) -> (Vec<u32>, Vec<CellId>) {
    let mut offsets = vec![0_u32; space.unknown_count() + 1];
    for cell in space.mesh().cells() {
        for unknown in space.unknowns(cell) {
            offsets[*unknown as usize + 1] += 1;
        }
    }
    for i in 0..space.unknown_count() {
        offsets[i + 1] += offsets[i];
    }
    let mut next = offsets.clone();
    let mut cells = vec![CellId(0); offsets[space.unknown_count()] as usize];
    for cell in space.mesh().cells() {
        for unknown in space.unknowns(cell) {
            cells[next[*unknown as usize] as usize] = cell;
            next[*unknown as usize] += 1;
        }
    }
    (offsets, cells)
}
