//! The equilibrated flux of a candidate: patch after patch in two dimensions, in one sweep in one dimension.

use hypercircle_assembly::AssemblyError;
use hypercircle_mesh::VertexId;
use rayon::prelude::*;

use crate::interval_1d;
use crate::patch::{PatchSolver, Problem};

/// Vertices worked on by one task: fixed, so that nothing depends on the number of threads.
const PATCHES: usize = 256;
/// Cells gathered by one task.
const CELLS: usize = 4096;

/// Moments of the equilibrated flux in every cell.
pub(crate) fn equilibrate<const D: usize>(problem: &Problem<'_, D>) -> Result<Vec<f64>, AssemblyError> {
    if D == 1 { interval_1d::sweep(problem) } else { patches(problem) }
}

fn patches<const D: usize>(problem: &Problem<'_, D>) -> Result<Vec<f64>, AssemblyError> {
    let mesh = problem.candidate.space.mesh();
    let offsets = mesh.topology().around_offsets();
    let n = problem.reference.moments;
    let vertices = mesh.vertex_count();
    let parts: Vec<Result<Vec<f64>, AssemblyError>> = (0..vertices.div_ceil(PATCHES))
        .into_par_iter()
        .map_init(
            || PatchSolver::new(problem),
            |solver, part| {
                let (first, last) = (part * PATCHES, ((part + 1) * PATCHES).min(vertices));
                let mut out = Vec::with_capacity((offsets[last] - offsets[first]) as usize * n);
                for vertex in first..last {
                    solver.solve(VertexId(vertex as u32), &mut out)?;
                }
                Ok(out)
            },
        )
        .collect();
    let parts = parts.into_iter().collect::<Result<Vec<_>, _>>()?;
    // Each cell sums what its vertices gave, in the order of its vertices.
    let mut moments = vec![0.0; mesh.cell_count() * n];
    moments.par_chunks_mut(CELLS * n).enumerate().for_each(|(chunk, moments)| {
        for (k, sum) in moments.chunks_exact_mut(n).enumerate() {
            let cell = hypercircle_mesh::CellId((chunk * CELLS + k) as u32);
            for vertex in mesh.cell_vertices(cell) {
                let part = vertex.index() / PATCHES;
                let around = mesh.topology().cells_around(*vertex);
                let position = around.partition_point(|c| *c < cell);
                let begin = (offsets[vertex.index()] - offsets[part * PATCHES]) as usize + position;
                for (a, b) in sum.iter_mut().zip(&parts[part][begin * n..(begin + 1) * n]) {
                    *a += b;
                }
            }
        }
    });
    Ok(moments)
}
