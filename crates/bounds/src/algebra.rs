//! The algebraic residual as a density in the cells, and a flux that carries it to where it may leave.
//!
//! A vector u that does not solve its system exactly leaves a residual Rⱼ at every free unknown. It is spread over the cells
//! as a broken polynomial r_h with (r_h, φⱼ)_K = Rⱼ / #cells(j); the local problems then balance f − c u − r_h, and a second
//! flux with divergence r_h makes up for it. That one runs along a tree of least resistance from every cell to a
//! Dirichlet or Robin side. Its energy is larger than the best possible one, but it needs no constant, and it is of the size of
//! the residual. Data that are only sampled are looked at with a finer rule than that of assembly; the difference is part of the residual and
//! paid for in the same way.
//!
//! Source of the splitting: P. Jiránek, Z. Strakoš, M. Vohralík, SIAM J. Sci. Comput. 32 (2010).

use std::cmp::Ordering;
use std::collections::BinaryHeap;

use hypercircle_assembly::{AssemblyError, Constraints, Space, place};
use hypercircle_element::{Rule, orthonormal_values};
use hypercircle_mesh::CellId;

use crate::reference::Reference;
use crate::state::{Candidate, SideKind, SideState};
use crate::survey::Survey;

/// A residual below this share of the sizes of its terms at every unknown is rounding.
const ROUNDING: f64 = 1e-13;

/// The residual as a density: coefficients in the primal basis, cell after cell. `None` if it is mere rounding.
pub(crate) fn density<const D: usize>(
    space: &Space<D>,
    survey: &Survey,
    constraints: &Constraints,
) -> Result<Option<Vec<f64>>, AssemblyError> {
    let mut residual = survey.residual.clone();
    for unknown in constraints.unknowns() {
        residual[*unknown as usize] = 0.0;
    }
    if residual.iter().zip(&survey.sizes).all(|(r, size)| r.abs() <= ROUNDING * size) {
        return Ok(None);
    }
    let n = space.basis().nodes().len();
    let mut sharing = vec![0.0; space.unknown_count()];
    for cell in space.mesh().cells() {
        for unknown in space.unknowns(cell) {
            sharing[*unknown as usize] += 1.0;
        }
    }
    let shape = space.basis().shape();
    let rule = Rule::of_degree(shape, 2 * space.order())?;
    let table = space.basis().table(rule.points());
    let mut mass = vec![0.0; n * n];
    for (q, w) in rule.weights().iter().enumerate() {
        let values = table.values_at(q);
        for i in 0..n {
            for j in 0..n {
                mass[i * n + j] += w * values[i] * values[j];
            }
        }
    }
    let mut density = vec![0.0; space.mesh().cell_count() * n];
    let mut factor = vec![0.0; n * n];
    for (cell, local) in space.mesh().cells().zip(density.chunks_exact_mut(n)) {
        let determinant = space.mesh().cell_measure(cell) / shape.measure();
        for (value, unknown) in local.iter_mut().zip(space.unknowns(cell)) {
            *value = residual[*unknown as usize] / sharing[*unknown as usize] / determinant;
        }
        factor.copy_from_slice(&mass);
        crate::cholesky::solve(&mut factor, local);
    }
    Ok(Some(density))
}

#[derive(PartialEq)]
struct Front {
    resistance: f64,
    cell: CellId,
}

impl Eq for Front {}

impl PartialOrd for Front {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Front {
    // The heap gives its largest: that shall be the least resistance, then the lowest cell.
    fn cmp(&self, other: &Self) -> Ordering {
        other.resistance.total_cmp(&self.resistance).then(other.cell.cmp(&self.cell))
    }
}

/// A flux that carries the algebraic residual away.
pub(crate) struct Carried {
    /// Its moments, cell after cell.
    pub(crate) moments: Vec<f64>,
    /// Cells that keep what reaches them: their reaction term answers for it.
    pub(crate) keeps: Vec<bool>,
}

/// Moments of a flux with divergence r_h in every cell that does not keep it.
pub(crate) fn flux<const D: usize>(candidate: &Candidate<'_, D>, reference: &Reference, density: &[f64]) -> Carried {
    let space = candidate.space;
    let mesh = space.mesh();
    let (n, tests, per_side) = (reference.moments, reference.test_count, reference.side_moments);
    let local = space.basis().nodes().len();
    // Moments of r_h.
    let values: Vec<Vec<f64>> =
        reference.rule.points().iter().map(|at| orthonormal_values(reference.shape, space.order(), at)).collect();
    let mut divergence = vec![0.0; mesh.cell_count() * tests];
    for cell in mesh.cells() {
        let determinant = mesh.cell_measure(cell) / reference.shape.measure();
        let coefficients = &density[cell.index() * local..(cell.index() + 1) * local];
        let moments = &mut divergence[cell.index() * tests..(cell.index() + 1) * tests];
        for (q, w) in reference.rule.weights().iter().enumerate() {
            let r: f64 = coefficients.iter().zip(reference.primal.values_at(q)).map(|(a, b)| a * b).sum();
            moments.iter_mut().zip(&values[q]).for_each(|(m, v)| *m += w * determinant * r * v);
        }
    }
    let (order, parents) = ways_out(candidate, reference);
    // From the far ends of the tree inwards: each cell passes on its own excess and what has come in.
    let mut moments = vec![0.0; mesh.cell_count() * n];
    let sides = reference.shape.vertex_count();
    let mean = reference.shape.measure().sqrt();
    for cell in order.iter().rev() {
        let Some(side) = parents[cell.index()] else { continue };
        let come_in: f64 = (0..sides).map(|s| moments[cell.index() * n + s * per_side]).sum();
        let out = divergence[cell.index() * tests] * mean - come_in;
        moments[cell.index() * n + usize::from(side) * per_side] = out;
        if let Some((other, other_side)) = mesh.topology().neighbor(*cell, side) {
            moments[other.index() * n + usize::from(other_side) * per_side] = -out;
        }
    }
    for (moments, divergence) in moments.chunks_exact_mut(n).zip(divergence.chunks_exact(tests)) {
        reference.complete(moments, divergence);
    }
    Carried { moments, keeps: parents.iter().map(Option::is_none).collect() }
}

/// A tree of least resistance (Σ 1/A over the cells passed): cells in the order in which they are reached from
/// the exits, and for each the side that leads out. Cells with a reaction may also keep what reaches them, at the
/// resistance 1/(c |K|^{2/D}).
fn ways_out<const D: usize>(candidate: &Candidate<'_, D>, reference: &Reference) -> (Vec<CellId>, Vec<Option<u8>>) {
    let Candidate { space, terms, .. } = candidate;
    let mesh = space.mesh();
    let center = space.basis().shape().vertices().iter().fold([0.0; 2], |sum, v| [sum[0] + v[0], sum[1] + v[1]]);
    let center = center.map(|x| x / space.basis().shape().vertex_count() as f64);
    let resistance = |cell| 1.0 / terms.conductivity.at(&place(mesh, cell, &center)).smallest_eigenvalue();
    let mut parents = vec![None; mesh.cell_count()];
    let mut best = vec![f64::INFINITY; mesh.cell_count()];
    let mut heap = BinaryHeap::new();
    for side in terms.condition_sides(mesh) {
        let kind = SideState::visit(candidate, reference, side.cell, side.local).kind;
        let open = matches!(kind, SideKind::Dirichlet | SideKind::Robin(..));
        let own = resistance(side.cell);
        if open && own < best[side.cell.index()] {
            best[side.cell.index()] = own;
            parents[side.cell.index()] = Some(side.local);
            heap.push(Front { resistance: own, cell: side.cell });
        }
    }
    if let Some(reaction) = &terms.reaction {
        for cell in mesh.cells() {
            let c = reaction.at(&place(mesh, cell, &center));
            let own = resistance(cell) + 1.0 / (c * mesh.cell_measure(cell).powf(2.0 / D as f64));
            if c > 0.0 && own < best[cell.index()] {
                best[cell.index()] = own;
                parents[cell.index()] = None;
                heap.push(Front { resistance: own, cell });
            }
        }
    }
    let mut reached = vec![false; mesh.cell_count()];
    let mut order = Vec::with_capacity(mesh.cell_count());
    while let Some(Front { resistance: so_far, cell }) = heap.pop() {
        if std::mem::replace(&mut reached[cell.index()], true) {
            continue;
        }
        order.push(cell);
        for local in 0..mesh.cell_vertices(cell).len() as u8 {
            let Some((other, side)) = mesh.topology().neighbor(cell, local) else { continue };
            let through = so_far + resistance(other);
            if !reached[other.index()] && through < best[other.index()] {
                best[other.index()] = through;
                parents[other.index()] = Some(side);
                heap.push(Front { resistance: through, cell: other });
            }
        }
    }
    (order, parents)
}
