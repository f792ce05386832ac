//! What Dirichlet data outside the trial space cost.
//!
//! On a Dirichlet side let δ = g − u_h, zero at its ends. The function w = (λ₀ + λ₁) δ(λ₁ / (λ₀ + λ₁)) continues δ into the
//! cell and vanishes on its other sides; its energy is an integral along the side and enters the bound.

use hypercircle_assembly::{AssemblyError, Condition, SideTables, Space, place};
use hypercircle_element::{Rule, Shape, unit_legendre};
use hypercircle_mesh::{CellId, Mesh};

use crate::state::{Candidate, CellState};

/// Deviations below this share of the data are rounding.
const ROUNDING: f64 = 1e-12;

/// Energies (squares) of the lifts, by cell; infinite where the data jump or the vector misses them at a vertex.
pub(crate) fn energies<const D: usize>(
    candidate: &Candidate<'_, D>,
    state_of: impl Fn(CellId) -> Result<CellState<D>, AssemblyError>,
) -> Result<Vec<(CellId, f64)>, AssemblyError> {
    let mesh = candidate.space.mesh();
    let mut energies: Vec<(CellId, f64)> = Vec::new();
    let sides = candidate.terms.condition_sides(mesh);
    let fit = Fit::new(candidate.space)?;
    for side in sides {
        let Condition::Dirichlet(data) = side.condition else { continue };
        let deviation = |point: &[f64; 2]| {
            let g = data.at(&place(mesh, side.cell, point));
            let at: [f64; D] = std::array::from_fn(|i| point[i]);
            (g, g - candidate.space.value(candidate.u, side.cell, &at))
        };
        let shape = candidate.space.basis().shape();
        let mut corners = shape.side_vertices(side.local.into()).iter().map(|i| deviation(&shape.vertices()[*i]));
        let along: Vec<_> = fit.sides.points(side.local).iter().map(&deviation).collect();
        let size = candidate.space.unknowns(side.cell).iter().map(|k| candidate.u[*k as usize].abs());
        let scale = along.iter().map(|(g, _)| g.abs()).chain(size).fold(0.0, f64::max);
        if corners.any(|(_, d)| d.abs() > ROUNDING * scale) {
            energies.push((side.cell, f64::INFINITY));
            continue;
        }
        if D == 1 || along.iter().all(|(_, d)| d.abs() <= ROUNDING * scale) {
            continue;
        }
        let state = state_of(side.cell)?;
        let energy = fit.energy(mesh, side.local, &state, &along.iter().map(|(_, d)| *d).collect::<Vec<_>>());
        // Two lifts in one cell: the triangle inequality.
        match energies.last_mut().filter(|last| last.0 == side.cell) {
            Some(last) => last.1 = (last.1.sqrt() + energy.sqrt()).powi(2),
            None => energies.push((side.cell, energy)),
        }
    }
    Ok(energies)
}

/// Fits the slope of a deviation along a side.
struct Fit {
    sides: SideTables,
    degree: usize,
    legendre: Vec<Vec<f64>>,
}

impl Fit {
    fn new<const D: usize>(space: &Space<D>) -> Result<Self, AssemblyError> {
        let degree = space.order() + 7;
        let rule = Rule::of_degree(Shape::Interval, 2 * degree + 6)?;
        let legendre = rule.points().iter().map(|t| unit_legendre(degree, t[0])).collect();
        Ok(Self { sides: SideTables::new(space, rule), degree, legendre })
    }

    /// δ′ at the points of the rule: its Legendre coefficients are −∫ δ ℓ′ₙ, as δ vanishes at the ends.
    fn slopes(&self, deviation: &[f64]) -> Vec<f64> {
        let mut slopes = vec![0.0; deviation.len()];
        for n in 1..self.degree {
            let coefficient: f64 = (0..deviation.len())
                .map(|q| {
                    // ℓ′ₙ = 2 √(2n + 1) Σ √(2j + 1) ℓⱼ over j = n − 1, n − 3, …
                    let slope: f64 =
                        (0..n).rev().step_by(2).map(|j| (2.0 * j as f64 + 1.0).sqrt() * self.legendre[q][j]).sum();
                    -self.sides.rule().weights()[q] * deviation[q] * 2.0 * (2.0 * n as f64 + 1.0).sqrt() * slope
                })
                .sum();
            for (slope, l) in slopes.iter_mut().zip(&self.legendre) {
                *slope += coefficient * l[n];
            }
        }
        slopes
    }

    /// |K| ∫ A∇w·∇w ds + c (|K|/2) ∫ δ² ds along the side.
    fn energy<const D: usize>(&self, mesh: &Mesh<D>, local: u8, state: &CellState<D>, deviation: &[f64]) -> f64 {
        let inverse = state.inverse_jacobian();
        // Gradients of the barycentric coordinates of the side's start, its end and the apex.
        let gradient = |vertex: usize| -> [f64; D] {
            let slope = |k: usize| if vertex == 0 { -1.0 } else { f64::from(u8::from(vertex == k + 1)) };
            std::array::from_fn(|b| (0..D).map(|k| inverse[k][b] * slope(k)).sum())
        };
        let local = usize::from(local);
        let [start, end, apex] = [local, (local + 1) % 3, (local + 2) % 3].map(gradient);
        let area = mesh.cell_measure(state.cell);
        let reaction = state.reaction.iter().fold(0.0_f64, |m, c| m.max(*c));
        let slopes = self.slopes(deviation);
        let mut energy = 0.0;
        for (q, (s, w)) in self.sides.rule().points().iter().zip(self.sides.rule().weights()).enumerate() {
            let s = s[0];
            let w_gradient: [f64; D] =
                std::array::from_fn(|i| -deviation[q] * apex[i] + slopes[q] * ((1.0 - s) * end[i] - s * start[i]));
            energy += w * area * (state.largest_energy(&w_gradient) + 0.5 * reaction * deviation[q] * deviation[q]);
        }
        energy
    }
}
