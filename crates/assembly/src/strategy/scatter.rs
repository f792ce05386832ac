//! Local matrices in parallel, then one ordered scatter through the stored slots.

use hypercircle_element::{Rule, Table};
use hypercircle_mesh::CellId;
use rayon::prelude::*;

use super::Strategy;
use crate::{AssemblyError, Block, MatrixKernel, Pattern, Space, VectorKernel};

/// Computes the contributions of a batch of cells in parallel and adds them in the order of the cells.
#[derive(Debug, Clone, Copy, Default)]
pub struct Scatter;

/// Cells in one kernel block, and in one batch between two scatters: fixed, so that nothing depends on threads.
const BLOCK: usize = 64;
const BATCH: usize = 16384;

/// Runs `kernel` on blocks of cells in parallel and hands each cell's contribution to `add`, in order.
fn run<const D: usize>(
    space: &Space<D>,
    rule: &Rule,
    size: usize,
    kernel: impl Fn(&Block<'_, D>, &mut [f64]) -> Result<(), AssemblyError> + Sync,
    mut add: impl FnMut(CellId, &[f64]),
) -> Result<(), AssemblyError> {
    let table: Table = space.basis().table(rule.points());
    let cells: Vec<CellId> = space.mesh().cells().collect();
    let mut buffer = vec![0.0; BATCH.min(cells.len()) * size];
    for batch in cells.chunks(BATCH) {
        let buffer = &mut buffer[..batch.len() * size];
        buffer.fill(0.0);
        let outcomes: Vec<_> = batch
            .par_chunks(BLOCK)
            .zip(buffer.par_chunks_mut(BLOCK * size))
            .map(|(cells, local)| kernel(&Block::of_cells(space, cells, rule, &table), local))
            .collect();
        outcomes.into_iter().collect::<Result<(), _>>()?;
        for (cell, local) in batch.iter().zip(buffer.chunks_exact(size)) {
            add(*cell, local);
        }
    }
    Ok(())
}

impl<const D: usize> Strategy<D> for Scatter {
    fn add_matrices(
        &self,
        space: &Space<D>,
        pattern: &Pattern,
        rule: &Rule,
        kernel: &dyn MatrixKernel<D>,
        values: &mut [f64],
    ) -> Result<(), AssemblyError> {
        let n = space.basis().nodes().len();
        run(
            space,
            rule,
            n * n,
            |block, local| kernel.block(block, local),
            |cell, local| {
                for (slot, value) in pattern.slots(cell).iter().zip(local) {
                    values[*slot as usize] += value;
                }
            },
        )
    }

    fn add_vectors(
        &self,
        space: &Space<D>,
        rule: &Rule,
        kernel: &dyn VectorKernel<D>,
        vector: &mut [f64],
    ) -> Result<(), AssemblyError> {
        run(
            space,
            rule,
            space.basis().nodes().len(),
            |block, local| kernel.block(block, local),
            |cell, local| {
                for (unknown, value) in space.unknowns(cell).iter().zip(local) {
                    vector[*unknown as usize] += value;
                }
            },
        )
    }
}
