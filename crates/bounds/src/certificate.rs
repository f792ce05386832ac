//! The certificate: a guaranteed bound of the energy of the error, cell by cell.
//!
//! For any u_h and any σ in H(div), with r = f − c u_h − div σ, t = g + σ·n on Neumann sides and
//! t = α(uₑ − u_h) + σ·n on Robin sides, and w any function that equals g_D − u_h on Dirichlet sides,
//!
//! |||u − u_h|||² ≤ Σ_K [(η_K + C_P h_K ‖r‖/√λ + Σ_E C_E ‖t‖_E/√λ)² + Σ_E ‖α^{−1/2} t‖²_E] + |||w|||²
//!
//! with η_K = ‖A^{−1/2}(σ + A∇u_h)‖_K, λ the smallest principal value of A in the cell, h_K its diameter,
//! C_P = 1/j₁₁ on triangles (R. S. Laugesen, B. A. Siudeja, J. Differential Equations 249, 2010) and 1/π on intervals
//! (L. E. Payne, H. F. Weinberger, 1960), and C_E² = (|E|/|K|) d (d + H), d = C_P h_K, H the distance from the apex to the farther end
//! of E. Where c > 0 the residual may instead be paid by ‖c^{−1/2} r‖²; the cheaper way is taken.
//!
//! Source: W. Prager, J. L. Synge, Quart. Appl. Math. 5 (1947); A. Ern, M. Vohralík, SIAM J. Numer. Anal. 53 (2015).

use hypercircle_assembly::{AssemblyError, Condition, Space, System, Terms};
use hypercircle_element::RaviartThomas;
use hypercircle_mesh::{CellId, RegionId};
use rayon::prelude::*;

use crate::equilibrate::equilibrate;
use crate::patch::Problem;
use crate::reference::Reference;
use crate::state::{Candidate, CellState, SideKind, SideState};
use crate::survey::Survey;
use crate::{Flux, Guarantee, algebra, lift};

/// Rounding of the sums: the bound is enlarged by this share.
const ROUNDING: f64 = 1e-10;
/// Degrees by which data that are only sampled are looked at more closely than they were assembled.
const CLOSER: usize = 6;
/// Cells judged by one task.
const CELLS: usize = 1024;

/// A guaranteed bound of the error of a vector of unknowns, with its parts.
///
/// ```
/// use std::sync::Arc;
/// use hypercircle_assembly::{tensorial, Condition, Pattern, Scatter, Space, System, Terms};
/// use hypercircle_bounds::Certificate;
/// use hypercircle_mesh::Interval;
/// // −u″ = 2, u(0) = u(1) = 0, with u_h = 0: the error is the whole solution, of energy ∫ (1 − 2x)² = 1/3.
/// let space = Space::new(Interval::uniform(0.0, 1.0, 4).mesh()?.into(), 1)?;
/// let mut terms = Terms::conducting(space.mesh(), tensorial(1.0));
/// terms.source = Some(Arc::new(2.0));
/// for end in ["start", "end"] {
///     terms.set(space.mesh().find_side(end)?, Condition::Dirichlet(Arc::new(0.0)));
/// }
/// let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter)?;
/// let certificate = Certificate::of(&space, &terms, &system, &[0.0; 5])?;
/// assert!((certificate.bound().powi(2) - 1.0 / 3.0).abs() < 1e-9);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
#[must_use]
pub struct Certificate<const D: usize> {
    bound: f64,
    flux_part: f64,
    data_part: f64,
    algebra_part: f64,
    lifted: bool,
    shares: Vec<f64>,
    flux: Flux<D>,
    guarantee: Guarantee,
}

/// What one cell adds, as squares.
#[derive(Debug, Clone, Copy, Default)]
struct Parts {
    share: f64,
    flux: f64,
    data: f64,
    algebra: f64,
}

impl<const D: usize> Certificate<D> {
    /// Judges any vector of unknowns, however it was made.
    ///
    /// # Errors
    /// A vector of the wrong length, or coefficients that are not finite or out of range.
    pub fn of(space: &Space<D>, terms: &Terms<D>, system: &System, u: &[f64]) -> Result<Self, AssemblyError> {
        if u.len() != space.unknown_count() {
            let (given, expected) = (u.len(), space.unknown_count());
            return Err(AssemblyError::WrongLength { what: "vector of unknowns", given, expected });
        }
        let mut guarantee = sampled_or_full(space, terms);
        let reference = Reference::new(space, 0)?;
        let closer = match guarantee {
            Guarantee::Full => None,
            _ => Some(Reference::new(space, CLOSER)?),
        };
        let closer = closer.as_ref().unwrap_or(&reference);
        let candidate = Candidate { space, terms, u };
        let mut survey = Survey::new(&candidate, closer)?;
        let density = algebra::density(space, &survey, &system.constraints)?;
        if let Some(density) = &density {
            survey.take_off(&candidate, &reference, density);
        }
        let mut moments = equilibrate(&Problem { candidate, survey: &survey, reference: &reference, closer })?;
        let carried = density.as_ref().map(|density| algebra::flux(&candidate, &reference, density));
        if let Some(carried) = &carried {
            moments.iter_mut().zip(&carried.moments).for_each(|(m, c)| *m += c);
        }
        let judge = Judge { candidate, reference: closer, moments: &moments, carried: carried.as_ref() };
        let mut parts = judge.all()?;
        let lifts = lift::energies(&judge.candidate, |cell| judge.state(cell))?;
        for (cell, energy) in &lifts {
            parts[cell.index()].share += energy;
            parts[cell.index()].data += energy;
        }
        if let Some((cell, _)) = lifts.iter().find(|(_, energy)| energy.is_infinite()) {
            let at = space.mesh().cell_center(*cell);
            let why = format!(
                "the solution has no finite energy or misses its data: prescribed values jump, or are not met at a vertex, near {at:?}"
            );
            guarantee = guarantee.and(Guarantee::None(why));
        } else if parts.iter().any(|p| !p.share.is_finite()) {
            let why =
                "the residual of the system reaches a cell that no Dirichlet side, Robin side or reaction answers for";
            guarantee = guarantee.and(Guarantee::None(why.to_owned()));
        }
        let root = |part: fn(&Parts) -> f64| parts.iter().map(part).sum::<f64>().sqrt() * (1.0 + ROUNDING);
        let (bound, flux_part, data_part, algebra_part) =
            (root(|p| p.share), root(|p| p.flux), root(|p| p.data), root(|p| p.algebra));
        let fields = RaviartThomas::new(space.basis().shape(), space.order())?;
        let shares = parts.iter().map(|p| p.share).collect();
        let lifted = !lifts.is_empty();
        let flux = Flux::new(space.mesh().clone(), fields, moments);
        Ok(Self { bound, flux_part, data_part, algebra_part, lifted, shares, flux, guarantee })
    }

    /// The bound of |||u − u_h|||, in the unit of the energy norm; infinite if there is none.
    #[must_use]
    pub fn bound(&self) -> f64 {
        self.bound
    }

    /// The part of the discretization: how far the flux σ and −A∇u_h are apart, on Robin sides too.
    #[must_use]
    pub fn flux_part(&self) -> f64 {
        self.flux_part
    }

    /// The part of the data: sources and inflows beyond the polynomials of the order, and prescribed values outside the trial
    /// space.
    #[must_use]
    pub fn data_part(&self) -> f64 {
        self.data_part
    }

    /// The part of the algebra: energy of the flux that carries the residual of the linear system away. Zero for a system solved
    /// to rounding.
    #[must_use]
    pub fn algebra_part(&self) -> f64 {
        self.algebra_part
    }

    /// Whether prescribed values lie outside the trial space, so that the energy of u_h is no upper bound by itself.
    #[must_use]
    pub fn is_lifted(&self) -> bool {
        self.lifted
    }

    /// What each cell adds to the square of the bound.
    #[must_use]
    pub fn shares(&self) -> &[f64] {
        &self.shares
    }

    /// The equilibrated flux σ ≈ −A∇u.
    #[must_use]
    pub fn flux(&self) -> &Flux<D> {
        &self.flux
    }

    /// How far the bound can be trusted.
    #[must_use]
    pub fn guarantee(&self) -> &Guarantee {
        &self.guarantee
    }
}

/// Are all coefficients known to be constant in every region?
fn sampled_or_full<const D: usize>(space: &Space<D>, terms: &Terms<D>) -> Guarantee {
    let mesh = space.mesh();
    let regions = || (0..mesh.region_names().len() as u32).map(RegionId);
    let known = |c: &hypercircle_assembly::Scalar<D>| regions().all(|r| c.constant_in(r).is_some());
    let names = (0..mesh.side_names().len() as u32).map(hypercircle_mesh::SideNameId);
    let sides = names.filter_map(|name| terms.condition(name)).all(|condition| match condition {
        Condition::Dirichlet(value) | Condition::Neumann(value) => known(value),
        Condition::Robin { film, surroundings } => known(film) && known(surroundings),
    });
    let cells = regions().all(|r| terms.conductivity.constant_in(r).is_some())
        && terms.reaction.as_ref().is_none_or(known)
        && terms.source.as_ref().is_none_or(known);
    if sides && cells { Guarantee::Full } else { Guarantee::Sampled }
}

/// Judges the flux cell by cell.
struct Judge<'a, const D: usize> {
    candidate: Candidate<'a, D>,
    reference: &'a Reference,
    moments: &'a [f64],
    carried: Option<&'a algebra::Carried>,
}

impl<const D: usize> Judge<'_, D> {
    fn state(&self, cell: CellId) -> Result<CellState<D>, AssemblyError> {
        let mut state = CellState::new(self.reference.rule.len());
        state.visit(&self.candidate, self.reference, cell)?;
        state.visit_supply(&self.candidate);
        Ok(state)
    }

    fn all(&self) -> Result<Vec<Parts>, AssemblyError> {
        let count = self.candidate.space.mesh().cell_count();
        let mut parts = vec![Parts::default(); count];
        let outcomes: Vec<Result<(), AssemblyError>> = parts
            .par_chunks_mut(CELLS)
            .enumerate()
            .map_init(
                || CellState::new(self.reference.rule.len()),
                |state, (chunk, parts)| {
                    for (k, part) in parts.iter_mut().enumerate() {
                        let cell = CellId((chunk * CELLS + k) as u32);
                        state.visit(&self.candidate, self.reference, cell)?;
                        state.visit_supply(&self.candidate);
                        *part = self.cell(state);
                    }
                    Ok(())
                },
            )
            .collect();
        outcomes.into_iter().collect::<Result<(), _>>()?;
        Ok(parts)
    }

    /// The share of one cell and its parts.
    fn cell(&self, state: &CellState<D>) -> Parts {
        let mesh = self.candidate.space.mesh();
        let cell = state.cell;
        let n = self.reference.moments;
        let range = cell.index() * n..(cell.index() + 1) * n;
        let moments = &self.moments[range.clone()];
        let mut parts = Parts::default();
        let (mut mismatch, mut residual, mut by_reaction) = (0.0, 0.0, 0.0);
        let inverse = state.inverse_jacobian();
        for (q, w) in self.reference.rule.weights().iter().enumerate() {
            // σ + A∇u_h, pulled back by the Piola map: the difference first, so that nothing cancels later.
            let mut s = [0.0; D];
            for (moment, field) in moments.iter().zip(&self.reference.fields[q]) {
                for i in 0..D {
                    s[i] += moment * field[i];
                }
            }
            for i in 0..D {
                let pulled: f64 = (0..D).map(|k| inverse[i][k] * state.conduction[q][k]).sum();
                s[i] += state.determinant * pulled;
            }
            mismatch += w * energy(&state.metrics[q], &s);
            let divergence: f64 = moments.iter().zip(&self.reference.divergences[q]).map(|(m, d)| m * d).sum();
            let r = state.supply[q] - divergence / state.determinant;
            residual += state.weights[q] * r * r;
            by_reaction += state.weights[q] * r * r / state.reaction[q];
            if let Some(carried) = self.carried {
                let mut a = [0.0; D];
                for (moment, field) in carried.moments[range.clone()].iter().zip(&self.reference.fields[q]) {
                    for i in 0..D {
                        a[i] += moment * field[i];
                    }
                }
                parts.algebra += w * energy(&state.metrics[q], &a);
            }
        }
        let poincare = if D == 1 { std::f64::consts::FRAC_1_PI } else { 1.0 / 3.831_705_970_207_512 };
        let d = poincare * mesh.cell_diameter(cell);
        let stiffness = state.least_conductivity.sqrt();
        let sides = self.sides(cell, d, moments);
        let (eta, inflow) = (mismatch.sqrt(), sides.inflow / stiffness);
        let by_conduction = d * residual.sqrt() / stiffness;
        let keeps = self.carried.is_some_and(|c| c.keeps[cell.index()]);
        let conducted = if keeps { f64::INFINITY } else { (eta + inflow + by_conduction).powi(2) };
        let reacted = if by_reaction.is_nan() { f64::INFINITY } else { (eta + inflow).powi(2) + by_reaction };
        let paid = if conducted <= reacted { by_conduction.powi(2) } else { by_reaction };
        parts.share = conducted.min(reacted) + sides.exchange;
        parts.flux = mismatch + sides.exchange;
        parts.data = (paid.sqrt() + inflow).powi(2);
        parts
    }

    /// Σ C_E ‖t‖ over Neumann sides and Σ ‖α^{−1/2} t‖² over Robin sides.
    fn sides(&self, cell: CellId, d: f64, moments: &[f64]) -> Sides {
        let mesh = self.candidate.space.mesh();
        let mut sum = Sides::default();
        for local in 0..self.reference.shape.vertex_count() as u8 {
            if mesh.topology().neighbor(cell, local).is_some() {
                continue;
            }
            let side = SideState::visit(&self.candidate, self.reference, cell, local);
            let per_side = self.reference.side_moments;
            let own = &moments[usize::from(local) * per_side..usize::from(local + 1) * per_side];
            let outflow =
                |q: usize| own.iter().zip(&self.reference.legendre[q]).map(|(m, l)| m * l).sum::<f64>() / side.length;
            let weights = self.reference.sides.rule().weights();
            match &side.kind {
                SideKind::Dirichlet => {}
                SideKind::Neumann(inflow) => {
                    let square: f64 =
                        (0..inflow.len()).map(|q| weights[q] * side.length * (inflow[q] + outflow(q)).powi(2)).sum();
                    sum.inflow += edge_constant(mesh, cell, local, d) * square.sqrt();
                }
                SideKind::Robin(films, levels) => {
                    for q in 0..films.len() {
                        let t = films[q] * (levels[q] - side.u[q]) + outflow(q);
                        sum.exchange += weights[q] * side.length * t * t / films[q];
                    }
                }
            }
        }
        sum
    }
}

#[derive(Debug, Default)]
struct Sides {
    inflow: f64,
    exchange: f64,
}

fn energy<const D: usize>(metric: &[[f64; D]; D], s: &[f64; D]) -> f64 {
    let mut sum = 0.0;
    for i in 0..D {
        for j in 0..D {
            sum += s[i] * metric[i][j] * s[j];
        }
    }
    sum
}

/// C_E of a side; on an interval |E|/|K| becomes 1/h.
fn edge_constant<const D: usize>(mesh: &hypercircle_mesh::Mesh<D>, cell: CellId, local: u8, d: f64) -> f64 {
    let ends = mesh.side_vertices(cell, local).map(|v| mesh.point(v));
    let apex = mesh.cell_vertices(cell).iter().map(|v| mesh.point(*v));
    // The farthest of the other vertices from any end: the apex from the farther end.
    let height =
        apex.flat_map(|p| ends.map(|e| (0..D).map(|i| (p[i] - e[i]).powi(2)).sum::<f64>())).fold(0.0, f64::max).sqrt();
    (mesh.side_measure(cell, local) / mesh.cell_measure(cell) * d * (d + height)).sqrt()
}
