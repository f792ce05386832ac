//! The equilibrated flux in one dimension, in closed form.
//!
//! The flux of a vertex is the antiderivative of ψ(f − c u) − ψ′A u′, zero at the outer ends of its two cells: nothing is
//! left to minimize. Where both ends of the domain are open, one constant of the whole flux is free and takes its best
//! value; for c = 0 the flux is then the exact one.

use hypercircle_assembly::AssemblyError;
use hypercircle_mesh::CellId;

use crate::patch::Problem;
use crate::reference::Reference;
use crate::state::{Candidate, CellState, SideKind, SideRole, SideState};

/// Moments of the flux in every cell, in one dimension.
pub(crate) fn sweep<const D: usize>(problem: &Problem<'_, D>) -> Result<Vec<f64>, AssemblyError> {
    let (candidate, reference) = (&problem.candidate, problem.closer);
    let mesh = candidate.space.mesh();
    let n = reference.moments;
    let mut moments = vec![0.0; mesh.cell_count() * n];
    let mut part = vec![0.0; n];
    // Flow out of the lower cell at a vertex, once that cell has been visited.
    let mut handed: Vec<Option<f64>> = vec![None; mesh.vertex_count()];
    for cell in chains(candidate).concat() {
        for (i, vertex) in mesh.cell_vertices(cell).iter().enumerate() {
            let divergence = problem.survey.vertex(reference, cell, i);
            let total = divergence[0]; // the first test polynomial is one
            let out = if mesh.topology().neighbor(cell, i as u8).is_none() {
                match SideState::visit(candidate, reference, cell, i as u8).role(reference, true) {
                    SideRole::Given(given) => given[0],
                    _ => total,
                }
            } else {
                match handed[vertex.index()] {
                    Some(flow) => -flow,
                    None => {
                        handed[vertex.index()] = Some(total);
                        total
                    }
                }
            };
            part.fill(0.0);
            part[i] = out;
            reference.complete(&mut part, divergence);
            let sum = &mut moments[cell.index() * n..(cell.index() + 1) * n];
            sum.iter_mut().zip(&part).for_each(|(a, b)| *a += b);
        }
    }
    for chain in chains(candidate) {
        add_best_constant(candidate, reference, &chain, &mut moments)?;
    }
    Ok(moments)
}

/// The connected parts, each as its cells in ascending order of place.
fn chains<const D: usize>(candidate: &Candidate<'_, D>) -> Vec<Vec<CellId>> {
    let mesh = candidate.space.mesh();
    let starts = mesh.cells().filter(|c| mesh.topology().neighbor(*c, 0).is_none());
    starts
        .map(|start| {
            let mut chain = vec![start];
            let mut cell = start;
            while let Some((next, _)) = mesh.topology().neighbor(cell, 1) {
                chain.push(next);
                cell = next;
            }
            chain
        })
        .collect()
}

/// Adds to the flux of a chain with two open ends the constant that makes ∫ A⁻¹(σ + Au′)² plus the mismatch at Robin ends smallest.
fn add_best_constant<const D: usize>(
    candidate: &Candidate<'_, D>,
    reference: &Reference,
    chain: &[CellId],
    moments: &mut [f64],
) -> Result<(), AssemblyError> {
    let n = reference.moments;
    let (mut slope, mut curvature) = (0.0, 0.0);
    for (cell, local) in [(chain[0], 0_usize), (chain[chain.len() - 1], 1)] {
        let side = SideState::visit(candidate, reference, cell, local as u8);
        match &side.kind {
            SideKind::Neumann(_) => return Ok(()),
            SideKind::Dirichlet => {}
            SideKind::Robin(film, level) => {
                let outward = 2.0 * local as f64 - 1.0;
                let mismatch = film[0] * (level[0] - side.u[0]) + moments[cell.index() * n + local];
                slope += outward * mismatch / film[0];
                curvature += 1.0 / film[0];
            }
        }
    }
    let mut state = CellState::new(reference.rule.len());
    for cell in chain {
        state.visit(candidate, reference, *cell)?;
        let moments = &moments[cell.index() * n..(cell.index() + 1) * n];
        for (q, w) in reference.rule.weights().iter().enumerate() {
            let flux: f64 = moments.iter().zip(&reference.fields[q]).map(|(m, f)| m * f[0]).sum();
            // In one dimension the metric is J / A.
            slope += w * (state.metrics[q][0][0] * flux + state.slopes[q][0]);
            curvature += w * state.metrics[q][0][0];
        }
    }
    let constant = -slope / curvature;
    let unit = constant_moments(reference);
    for cell in chain {
        for (moment, one) in moments[cell.index() * n..(cell.index() + 1) * n].iter_mut().zip(&unit) {
            *moment += constant * one;
        }
    }
    Ok(())
}

/// Moments of the constant flux 1: −1 out at the lower end, 1 out at the upper, no divergence.
fn constant_moments(reference: &Reference) -> Vec<f64> {
    let mut unit = vec![0.0; reference.moments];
    (unit[0], unit[1]) = (-1.0, 1.0);
    reference.complete(&mut unit, &vec![0.0; reference.test_count]);
    unit
}
