//! One cell as the local problems see it: coefficients and the approximate solution at the quadrature points.

use hypercircle_assembly::{AssemblyError, Condition, Place, Space, Tensor, Terms, check, place};
use hypercircle_mesh::CellId;

use crate::reference::Reference;

/// What is known about the problem and the vector that is judged.
#[derive(Clone, Copy)]
pub(crate) struct Candidate<'a, const D: usize> {
    pub(crate) space: &'a Space<D>,
    pub(crate) terms: &'a Terms<D>,
    pub(crate) u: &'a [f64],
}

/// Values at the points of one cell.
#[derive(Debug)]
pub(crate) struct CellState<const D: usize> {
    pub(crate) cell: CellId,
    pub(crate) determinant: f64,
    pub(crate) jacobian: [[f64; D]; D],
    /// Integration weights in real coordinates.
    pub(crate) weights: Vec<f64>,
    pub(crate) u: Vec<f64>,
    /// ∂u/∂ξ and A∇u.
    pub(crate) slopes: Vec<[f64; D]>,
    pub(crate) conduction: Vec<[f64; D]>,
    /// Jᵀ A⁻¹ J / det J, the metric of the energy of Piola-mapped fields.
    pub(crate) metrics: Vec<[[f64; D]; D]>,
    /// f − c u, after [`CellState::visit_supply`].
    pub(crate) supply: Vec<f64>,
    pub(crate) reaction: Vec<f64>,
    /// Smallest principal value of A at any point.
    pub(crate) least_conductivity: f64,
    /// Whether A is the same at all points.
    pub(crate) uniform: bool,
    places: Vec<Place<D>>,
    tensors: Vec<Tensor<D>>,
}

impl<const D: usize> CellState<D> {
    pub(crate) fn new(points: usize) -> Self {
        let nowhere = Place { x: [0.0; D], region: hypercircle_mesh::RegionId(0), cell: CellId(0) };
        Self {
            cell: CellId(0),
            determinant: 0.0,
            jacobian: [[0.0; D]; D],
            weights: vec![0.0; points],
            u: vec![0.0; points],
            slopes: vec![[0.0; D]; points],
            conduction: vec![[0.0; D]; points],
            metrics: vec![[[0.0; D]; D]; points],
            supply: vec![0.0; points],
            reaction: vec![0.0; points],
            least_conductivity: 0.0,
            uniform: false,
            places: vec![nowhere; points],
            tensors: vec![Tensor::from(1.0); points],
        }
    }

    /// Evaluates a cell, save for what [`CellState::visit_supply`] adds.
    pub(crate) fn visit(
        &mut self,
        candidate: &Candidate<'_, D>,
        reference: &Reference,
        cell: CellId,
    ) -> Result<(), AssemblyError> {
        let space = candidate.space;
        let mesh = space.mesh();
        self.cell = cell;
        self.jacobian = mesh.jacobian(cell);
        let j = &self.jacobian;
        self.determinant = if D == 1 { j[0][0] } else { j[0][0] * j[1][1] - j[0][1] * j[1][0] };
        for (q, point) in reference.rule.points().iter().enumerate() {
            self.places[q] = place(mesh, cell, point);
            self.weights[q] = reference.rule.weights()[q] * self.determinant;
        }
        self.visit_conductivity(candidate)?;
        let inverse = self.inverse_jacobian();
        let unknowns = space.unknowns(cell);
        for q in 0..self.u.len() {
            let (mut u, mut slope) = (0.0, [0.0; D]);
            let (values, gradients) = (reference.primal.values_at(q), reference.primal.gradients_at(q));
            for ((unknown, value), gradient) in unknowns.iter().zip(values).zip(gradients) {
                let weight = candidate.u[*unknown as usize];
                u += weight * value;
                for i in 0..D {
                    slope[i] += weight * gradient[i];
                }
            }
            let gradient = std::array::from_fn(|i| (0..D).map(|k| inverse[k][i] * slope[k]).sum());
            self.u[q] = u;
            self.slopes[q] = slope;
            self.conduction[q] = self.tensors[q].apply(&gradient);
        }
        Ok(())
    }

    /// Conductivity with its metric at the points.
    fn visit_conductivity(&mut self, candidate: &Candidate<'_, D>) -> Result<(), AssemblyError> {
        let mesh = candidate.space.mesh();
        let conductivity = &candidate.terms.conductivity;
        let constant = conductivity.constant_in(mesh.region(self.cell));
        self.uniform = constant.is_some();
        match constant {
            Some(a) => self.tensors.fill(a),
            None => conductivity.fill(&self.places, &mut self.tensors),
        }
        self.least_conductivity = f64::INFINITY;
        for q in 0..self.tensors.len() {
            if q > 0 && self.uniform {
                self.metrics[q] = self.metrics[0];
                continue;
            }
            check::conductivity(mesh, &self.places[q], &self.tensors[q])?;
            self.least_conductivity = self.least_conductivity.min(self.tensors[q].smallest_eigenvalue());
            let inverse = self.tensors[q].inverse();
            let j = &self.jacobian;
            for a in 0..D {
                let column = inverse.apply(&std::array::from_fn(|i| j[i][a]));
                for b in 0..D {
                    self.metrics[q][b][a] = (0..D).map(|i| j[i][b] * column[i]).sum::<f64>() / self.determinant;
                }
            }
        }
        Ok(())
    }

    /// Evaluates reaction and source at the points of the cell visited last.
    pub(crate) fn visit_supply(&mut self, candidate: &Candidate<'_, D>) {
        match &candidate.terms.reaction {
            Some(c) => c.fill(&self.places, &mut self.reaction),
            None => self.reaction.fill(0.0),
        }
        match &candidate.terms.source {
            Some(f) => f.fill(&self.places, &mut self.supply),
            None => self.supply.fill(0.0),
        }
        for q in 0..self.supply.len() {
            self.supply[q] -= self.reaction[q] * self.u[q];
        }
    }

    /// The largest A v·v over the points of the cell.
    pub(crate) fn largest_energy(&self, v: &[f64; D]) -> f64 {
        let energy = |a: &Tensor<D>| a.apply(v).iter().zip(v).map(|(x, y)| x * y).sum::<f64>();
        self.tensors.iter().map(energy).fold(0.0, f64::max)
    }

    /// J⁻¹, `[i][j]` = ∂ξᵢ/∂xⱼ.
    pub(crate) fn inverse_jacobian(&self) -> [[f64; D]; D] {
        let j = &self.jacobian;
        let mut inverse = [[0.0; D]; D];
        if D == 1 {
            inverse[0][0] = 1.0 / j[0][0];
        } else {
            inverse[0][0] = j[1][1] / self.determinant;
            inverse[0][1] = -j[0][1] / self.determinant;
            inverse[1][0] = -j[1][0] / self.determinant;
            inverse[1][1] = j[0][0] / self.determinant;
        }
        inverse
    }

    /// Adds ∫ ((f − c u) φ − A∇u·∇φ) of every function φ of the primal basis, with the size of its terms.
    pub(crate) fn add_residual(&self, reference: &Reference, part: &mut [[f64; 2]]) {
        let inverse = self.inverse_jacobian();
        for q in 0..self.u.len() {
            // A∇u·J⁻ᵀ∇̂φ = J⁻¹A∇u·∇̂φ
            let pulled: [f64; D] = std::array::from_fn(|i| (0..D).map(|k| inverse[i][k] * self.conduction[q][k]).sum());
            let (values, gradients) = (reference.primal.values_at(q), reference.primal.gradients_at(q));
            for ((sum, value), gradient) in part.iter_mut().zip(values).zip(gradients) {
                let made = self.weights[q] * self.supply[q] * value;
                let conducted = self.weights[q] * (0..D).map(|i| pulled[i] * gradient[i]).sum::<f64>();
                sum[0] += made - conducted;
                sum[1] += made.abs() + conducted.abs();
            }
        }
    }

    /// Moments ∫ (ψ (f − c u) − ∇ψ·A∇u) v of what the flux of a vertex has to balance, for the hat ψ of local vertex `i`
    /// and all test polynomials v.
    pub(crate) fn vertex_moments(&self, reference: &Reference, i: usize, moments: &mut [f64]) {
        let inverse = self.inverse_jacobian();
        // Reference gradients of the hats: −1 for vertex 0, unit vectors for the others.
        let slope: [f64; D] = std::array::from_fn(|k| if i == 0 { -1.0 } else { f64::from(u8::from(i == k + 1)) });
        let gradient: [f64; D] = std::array::from_fn(|b| (0..D).map(|k| inverse[k][b] * slope[k]).sum());
        moments.fill(0.0);
        for q in 0..self.u.len() {
            let conducted: f64 = (0..D).map(|b| gradient[b] * self.conduction[q][b]).sum();
            let density = self.weights[q] * (reference.hats[q][i] * self.supply[q] - conducted);
            for (moment, v) in moments.iter_mut().zip(&reference.tests[q]) {
                *moment += density * v;
            }
        }
    }
}

/// What the flux of a patch must do on a boundary side.
pub(crate) enum SideRole {
    /// Dirichlet: nothing.
    Free,
    /// Neumann or insulated: its outward moments are given.
    Given(Vec<f64>),
    /// Robin: adds ½ mᵀ(mass)m + (linear)ᵀm to the functional of its outward moments m.
    Penalized { mass: Vec<f64>, linear: Vec<f64> },
}

/// Film coefficients whose smallest value on a side is below this share of the largest are taken into the data, because
/// the penalty 1/α would swamp everything.
const EVEN_FILM: f64 = 1e-6;

/// Values on one boundary side at the points of the side rule.
pub(crate) struct SideState {
    pub(crate) length: f64,
    pub(crate) u: Vec<f64>,
    pub(crate) kind: SideKind,
}

pub(crate) enum SideKind {
    Dirichlet,
    /// Inflow densities.
    Neumann(Vec<f64>),
    /// Film coefficients and levels of the surroundings.
    Robin(Vec<f64>, Vec<f64>),
}

impl SideState {
    /// Evaluates a boundary side of a cell.
    pub(crate) fn visit<const D: usize>(
        candidate: &Candidate<'_, D>,
        reference: &Reference,
        cell: CellId,
        local: u8,
    ) -> Self {
        let mesh = candidate.space.mesh();
        let unknowns = candidate.space.unknowns(cell);
        let table = reference.sides.table(local);
        let u: Vec<f64> = (0..reference.sides.rule().len())
            .map(|q| unknowns.iter().zip(table.values_at(q)).map(|(k, v)| candidate.u[*k as usize] * v).sum())
            .collect();
        let places = || reference.sides.points(local).iter().map(|point| place(mesh, cell, point));
        let condition = mesh.named_side(cell, local).and_then(|name| candidate.terms.condition(name));
        let kind = match condition {
            None => SideKind::Neumann(vec![0.0; u.len()]),
            Some(Condition::Dirichlet(_)) => SideKind::Dirichlet,
            Some(Condition::Neumann(inflow)) => SideKind::Neumann(places().map(|at| inflow.at(&at)).collect()),
            Some(Condition::Robin { film, surroundings }) => {
                let films: Vec<f64> = places().map(|at| film.at(&at)).collect();
                let levels: Vec<f64> = places().map(|at| surroundings.at(&at)).collect();
                let (least, most) = films.iter().fold((f64::INFINITY, 0.0_f64), |(l, m), a| (l.min(*a), m.max(*a)));
                if least > EVEN_FILM * most {
                    SideKind::Robin(films, levels)
                } else {
                    let exchange = films.iter().zip(levels.iter().zip(&u));
                    SideKind::Neumann(exchange.map(|(a, (level, u))| a * (level - u)).collect())
                }
            }
        };
        Self { length: mesh.side_measure(cell, local), u, kind }
    }

    /// What the side asks of the flux of the patch of its start (`from_start`) or end vertex.
    pub(crate) fn role(&self, reference: &Reference, from_start: bool) -> SideRole {
        let n = reference.side_moments;
        let hat = |q: usize| {
            let t = reference.sides.rule().points()[q][0];
            // The end of an interval is its own vertex: its hat is one there.
            if reference.shape.dimension() == 1 {
                1.0
            } else if from_start {
                1.0 - t
            } else {
                t
            }
        };
        let weights = reference.sides.rule().weights();
        match &self.kind {
            SideKind::Dirichlet => SideRole::Free,
            SideKind::Neumann(inflow) => {
                let mut moments = vec![0.0; n];
                for (q, t) in inflow.iter().enumerate() {
                    for (moment, l) in moments.iter_mut().zip(&reference.legendre[q]) {
                        *moment -= weights[q] * self.length * hat(q) * t * l;
                    }
                }
                SideRole::Given(moments)
            }
            SideKind::Robin(films, levels) => {
                let (mut mass, mut linear) = (vec![0.0; n * n], vec![0.0; n]);
                for q in 0..films.len() {
                    let l = &reference.legendre[q];
                    for i in 0..n {
                        linear[i] -= weights[q] * hat(q) * (self.u[q] - levels[q]) * l[i];
                        for j in 0..n {
                            mass[i * n + j] += weights[q] * l[i] * l[j] / (films[q] * self.length);
                        }
                    }
                }
                SideRole::Penalized { mass, linear }
            }
        }
    }
}
