//! One pass over the cells: what every unknown and every vertex of every cell has to balance.

use hypercircle_assembly::AssemblyError;
use hypercircle_mesh::CellId;
use rayon::prelude::*;

use crate::reference::Reference;
use crate::state::{Candidate, CellState, SideKind, SideState};

/// Cells surveyed by one task, and between two ordered sums: fixed, so that nothing depends on the number of threads.
const CELLS: usize = 1024;
const BATCH: usize = 64 * CELLS;

/// Sums by the rules of a reference. What a rule finer than that of assembly sees of the data is part of the residual.
pub(crate) struct Survey {
    /// Residual of every unknown.
    pub(crate) residual: Vec<f64>,
    /// Sum of the sizes of its terms.
    pub(crate) sizes: Vec<f64>,
    /// ∫ (ψ (f − c u) − ∇ψ·A∇u) v for all cells, hats ψ of their vertices and test polynomials v, in this order.
    pub(crate) moments: Vec<f64>,
}

impl Survey {
    pub(crate) fn new<const D: usize>(
        candidate: &Candidate<'_, D>,
        reference: &Reference,
    ) -> Result<Self, AssemblyError> {
        let space = candidate.space;
        let unknowns = space.unknown_count();
        let cells: Vec<CellId> = space.mesh().cells().collect();
        let (n, tests) = (space.basis().nodes().len(), reference.test_count);
        let per_cell = reference.shape.vertex_count() * tests;
        let mut survey = Self {
            residual: vec![0.0; unknowns],
            sizes: vec![0.0; unknowns],
            moments: vec![0.0; cells.len() * per_cell],
        };
        let mut buffer = vec![[0.0; 2]; BATCH.min(cells.len()) * n];
        for (batch, moments) in cells.chunks(BATCH).zip(survey.moments.chunks_mut(BATCH * per_cell)) {
            let buffer = &mut buffer[..batch.len() * n];
            buffer.fill([0.0; 2]);
            let outcomes: Vec<_> = (batch.par_chunks(CELLS), buffer.par_chunks_mut(CELLS * n))
                .into_par_iter()
                .zip(moments.par_chunks_mut(CELLS * per_cell))
                .map_init(
                    || CellState::new(reference.rule.len()),
                    |state, ((cells, parts), moments)| {
                        for (k, cell) in cells.iter().enumerate() {
                            state.visit(candidate, reference, *cell)?;
                            state.visit_supply(candidate);
                            state.add_residual(reference, &mut parts[k * n..(k + 1) * n]);
                            for i in 0..reference.shape.vertex_count() {
                                let at = k * per_cell + i * tests;
                                state.vertex_moments(reference, i, &mut moments[at..at + tests]);
                            }
                        }
                        Ok(())
                    },
                )
                .collect();
            outcomes.into_iter().collect::<Result<(), AssemblyError>>()?;
            for (cell, part) in batch.iter().zip(buffer.chunks_exact(n)) {
                for (unknown, [term, size]) in space.unknowns(*cell).iter().zip(part) {
                    survey.residual[*unknown as usize] += term;
                    survey.sizes[*unknown as usize] += size;
                }
            }
        }
        survey.add_sides(candidate, reference);
        Ok(survey)
    }

    fn add_sides<const D: usize>(&mut self, candidate: &Candidate<'_, D>, reference: &Reference) {
        let space = candidate.space;
        for side in candidate.terms.condition_sides(space.mesh()) {
            let state = SideState::visit(candidate, reference, side.cell, side.local);
            let table = reference.sides.table(side.local);
            for (q, w) in reference.sides.rule().weights().iter().enumerate() {
                let inflow = match &state.kind {
                    SideKind::Dirichlet => continue,
                    SideKind::Neumann(inflow) => inflow[q],
                    SideKind::Robin(films, levels) => films[q] * (levels[q] - state.u[q]),
                };
                for (unknown, value) in space.unknowns(side.cell).iter().zip(table.values_at(q)) {
                    let term = w * state.length * inflow * value;
                    self.residual[*unknown as usize] += term;
                    self.sizes[*unknown as usize] += term.abs();
                }
            }
        }
    }

    /// Takes a density, given in the primal basis cell after cell, off the source that the moments hold.
    pub(crate) fn take_off<const D: usize>(
        &mut self,
        candidate: &Candidate<'_, D>,
        reference: &Reference,
        density: &[f64],
    ) {
        let mesh = candidate.space.mesh();
        let (vertices, tests) = (reference.shape.vertex_count(), reference.test_count);
        let n = candidate.space.basis().nodes().len();
        for (cell, moments) in mesh.cells().zip(self.moments.chunks_exact_mut(vertices * tests)) {
            let determinant = mesh.cell_measure(cell) / reference.shape.measure();
            let local = &density[cell.index() * n..(cell.index() + 1) * n];
            for (q, w) in reference.rule.weights().iter().enumerate() {
                let r: f64 = local.iter().zip(reference.primal.values_at(q)).map(|(r, v)| r * v).sum();
                for (hat, moments) in reference.hats[q].iter().zip(moments.chunks_exact_mut(tests)) {
                    let part = w * determinant * hat * r;
                    moments.iter_mut().zip(&reference.tests[q]).for_each(|(m, v)| *m -= part * v);
                }
            }
        }
    }

    /// The moments of one vertex of a cell.
    pub(crate) fn vertex(&self, reference: &Reference, cell: CellId, i: usize) -> &[f64] {
        let tests = reference.test_count;
        let at = (cell.index() * reference.shape.vertex_count() + i) * tests;
        &self.moments[at..at + tests]
    }
}
