//! The local problem on the patch of a vertex in two dimensions: particular flux and stream function.
//!
//! On the cells around a vertex with hat function ψ, the flux s of least ‖A^{−1/2}(s + ψ A∇u_h)‖ is sought in RT_q with
//! div s = Π(ψ(f − c u_h) − ∇ψ·A∇u_h), no flow through the outer sides, given flow through Neumann sides and free flow
//! through Dirichlet and (penalized) Robin sides. A particular flux is found by marching around the vertex; the rest is the
//! curl of a stream function of degree q + 1 on the patch, a small symmetric positive definite problem.
//!
//! Sources: D. Braess, J. Schöberl, Math. Comp. 77 (2008); A. Ern, M. Vohralík, SIAM J. Numer. Anal. 53 (2015).

use hypercircle_assembly::AssemblyError;
use hypercircle_mesh::{CellId, VertexId};

use crate::cholesky;
use crate::reference::Reference;
use crate::state::{Candidate, CellState, SideRole, SideState};
use crate::survey::Survey;

const NONE: u32 = u32::MAX;

/// A cell of a patch with the vertex's number in it.
type Member = (CellId, usize);

/// What the patches of a candidate share.
pub(crate) struct Problem<'a, const D: usize> {
    pub(crate) candidate: Candidate<'a, D>,
    /// What the fluxes have to balance.
    pub(crate) survey: &'a Survey,
    /// Tables at the points of assembly: any flux that balances is admissible, so the smallest one need not be found with the
    /// finest rule.
    pub(crate) reference: &'a Reference,
    /// Tables at the points of the survey, for data on sides.
    pub(crate) closer: &'a Reference,
}

/// Buffers for patches, one for each thread.
pub(crate) struct PatchSolver<'a, const D: usize> {
    problem: &'a Problem<'a, D>,
    reference: &'a Reference,
    states: Vec<CellState<D>>,
    members: Vec<Member>,
    /// Divergence moments and flux moments by member.
    divergence: Vec<f64>,
    moments: Vec<f64>,
    /// Patch number of each local stream function of each member.
    numbers: Vec<u32>,
    matrix: Vec<f64>,
    right: Vec<f64>,
    local_matrix: Vec<f64>,
    local_right: Vec<f64>,
}

impl<'a, const D: usize> PatchSolver<'a, D> {
    pub(crate) fn new(problem: &'a Problem<'a, D>) -> Self {
        let reference = problem.reference;
        let n = reference.stream.count;
        Self {
            problem,
            reference,
            states: Vec::new(),
            members: Vec::new(),
            divergence: Vec::new(),
            moments: Vec::new(),
            numbers: Vec::new(),
            matrix: Vec::new(),
            right: Vec::new(),
            local_matrix: vec![0.0; n * n],
            local_right: vec![0.0; n],
        }
    }

    /// Appends the flux moments of the patch of a vertex to `out`, in the order of the cells around it.
    pub(crate) fn solve(&mut self, vertex: VertexId, out: &mut Vec<f64>) -> Result<(), AssemblyError> {
        let closed = self.collect(vertex);
        let count = self.members.len();
        let (n, tests) = (self.reference.moments, self.reference.test_count);
        while self.states.len() < count {
            self.states.push(CellState::new(self.reference.rule.len()));
        }
        self.divergence.clear();
        self.divergence.resize(count * tests, 0.0);
        for (k, (cell, i)) in self.members.iter().enumerate() {
            self.states[k].visit(&self.problem.candidate, self.reference, *cell)?;
            let moments = self.problem.survey.vertex(self.reference, *cell, *i);
            self.divergence[k * tests..(k + 1) * tests].copy_from_slice(moments);
        }
        let ends = if closed { None } else { Some(self.end_roles()) };
        self.march(ends.as_ref());
        self.number_streams(ends.as_ref());
        self.improve(ends.as_ref());
        // Out in the order of the cell numbers.
        let mesh = self.problem.candidate.space.mesh();
        for cell in mesh.topology().cells_around(vertex) {
            let k = self.members.iter().position(|m| m.0 == *cell).unwrap_or(0);
            out.extend_from_slice(&self.moments[k * n..(k + 1) * n]);
        }
        Ok(())
    }

    /// Collects the cells around a vertex counterclockwise; from the boundary if it is there. Tells whether they close.
    fn collect(&mut self, vertex: VertexId) -> bool {
        let mesh = self.problem.candidate.space.mesh();
        let topology = mesh.topology();
        let around = topology.cells_around(vertex);
        let number = |cell: CellId| mesh.cell_vertices(cell).iter().position(|v| *v == vertex).unwrap_or(0);
        // The side that leaves the vertex is clockwise of the cell: on the boundary it is the beginning.
        let begin = around.iter().find(|c| topology.neighbor(**c, number(**c) as u8).is_none());
        let mut cell = *begin.unwrap_or(&around[0]);
        self.members.clear();
        for _ in 0..around.len() {
            let i = number(cell);
            self.members.push((cell, i));
            match topology.neighbor(cell, ((i + 2) % 3) as u8) {
                Some((next, _)) => cell = next,
                None => break,
            }
        }
        begin.is_none()
    }

    /// What the two boundary sides at a boundary vertex ask for: the first member's and the last member's.
    fn end_roles(&self) -> [SideRole; 2] {
        let (first, i) = self.members[0];
        let (last, j) = self.members[self.members.len() - 1];
        let side = |cell, local: usize, from_start| {
            let closer = self.problem.closer;
            SideState::visit(&self.problem.candidate, closer, cell, local as u8).role(closer, from_start)
        };
        [side(first, i, true), side(last, (j + 2) % 3, false)]
    }

    /// The particular flux: flows through the spokes from one cell to the next, completed inside each cell.
    fn march(&mut self, ends: Option<&[SideRole; 2]>) {
        let (n, tests, per_side) = (self.reference.moments, self.reference.test_count, self.reference.side_moments);
        let count = self.members.len();
        // Integral of the divergence: the first test polynomial is the constant √2.
        let total = |k: usize| self.divergence[k * tests] / std::f64::consts::SQRT_2;
        self.moments.clear();
        self.moments.resize(count * n, 0.0);
        let sum: f64 = (0..count).map(total).sum();
        // Flow out through the first spoke.
        let start = match ends {
            None => 0.0,
            Some([SideRole::Given(given), _]) => given[0],
            Some([_, SideRole::Given(given)]) => sum - given[0],
            Some(_) => 0.5 * sum,
        };
        let mut forward = -start;
        for k in 0..count {
            let i = self.members[k].1;
            let out = total(k) + forward;
            let moments = &mut self.moments[k * n..(k + 1) * n];
            moments[i * per_side] = -forward;
            moments[(i + 2) % 3 * per_side] = out;
            forward = out;
        }
        if let Some([first, last]) = ends {
            let (i, j) = (self.members[0].1, self.members[count - 1].1);
            if let SideRole::Given(given) = first {
                self.moments[i * per_side..(i + 1) * per_side].copy_from_slice(given);
            }
            if let SideRole::Given(given) = last {
                let at = (count - 1) * n + (j + 2) % 3 * per_side;
                self.moments[at..at + per_side].copy_from_slice(given);
            }
        }
        for k in 0..count {
            let divergence = &self.divergence[k * tests..(k + 1) * tests];
            self.reference.complete(&mut self.moments[k * n..(k + 1) * n], divergence);
        }
    }

    /// Numbers the stream functions: the vertex, the spokes, the insides; outer sides and given ends are held at zero.
    fn number_streams(&mut self, ends: Option<&[SideRole; 2]>) {
        let count = self.members.len();
        let functions = self.reference.stream.count;
        let per_side = self.reference.side_moments - 1; // inner nodes of a side: order of the stream functions less one
        let per_cell = functions - 3 - 3 * per_side;
        self.numbers.clear();
        self.numbers.resize(count * functions, NONE);
        let held = |end: usize| ends.is_some_and(|roles| matches!(roles[end], SideRole::Given(_)));
        let mut next = 0;
        let mut take = |n: usize| {
            next += n as u32;
            next - n as u32
        };
        let center = if held(0) || held(1) { NONE } else { take(1) };
        let spokes = if ends.is_some() { count + 1 } else { count };
        for spoke in 0..spokes {
            if (spoke == 0 && held(0)) || (spoke == count && held(1)) {
                continue;
            }
            let first = take(per_side);
            if spoke < count {
                // Walked from the vertex outwards in the member that begins with it …
                let at = spoke * functions + 3 + self.members[spoke].1 * per_side;
                for s in 0..per_side {
                    self.numbers[at + s] = first + s as u32;
                }
            }
            if spoke > 0 || ends.is_none() {
                // … and inwards in the one that ends with it.
                let before = (spoke + count - 1) % count;
                let at = before * functions + 3 + (self.members[before].1 + 2) % 3 * per_side;
                for s in 0..per_side {
                    self.numbers[at + s] = first + (per_side - 1 - s) as u32;
                }
            }
        }
        for k in 0..count {
            self.numbers[k * functions + self.members[k].1] = center;
            let first = take(per_cell);
            for s in 0..per_cell {
                self.numbers[(k + 1) * functions - per_cell + s] = first + s as u32;
            }
        }
        let unknowns = next as usize;
        self.matrix.clear();
        self.matrix.resize(unknowns * unknowns, 0.0);
        self.right.clear();
        self.right.resize(unknowns, 0.0);
    }

    /// Adds the curl of the best stream function to the particular flux.
    fn improve(&mut self, ends: Option<&[SideRole; 2]>) {
        let (n, functions) = (self.reference.moments, self.reference.stream.count);
        let unknowns = self.right.len();
        let count = self.members.len();
        for k in 0..count {
            self.local_problem(k);
            if let Some([first, last]) = ends {
                let i = self.members[k].1;
                if k == 0 {
                    self.add_penalty(k, i, first);
                }
                if k == count - 1 {
                    self.add_penalty(k, (i + 2) % 3, last);
                }
            }
            let numbers = &self.numbers[k * functions..(k + 1) * functions];
            for (i, row) in numbers.iter().enumerate().filter(|(_, row)| **row != NONE) {
                self.right[*row as usize] -= self.local_right[i];
                for (j, column) in numbers.iter().enumerate() {
                    // Only the lower triangle is read.
                    if *column <= *row {
                        self.matrix[*row as usize * unknowns + *column as usize] +=
                            self.local_matrix[i * functions + j];
                    }
                }
            }
        }
        // The particular flux alone is admissible too, should rounding ever spoil the factorization.
        if unknowns == 0 || !cholesky::solve(&mut self.matrix, &mut self.right) {
            return;
        }
        for k in 0..count {
            let numbers = &self.numbers[k * functions..(k + 1) * functions];
            let moments = &mut self.moments[k * n..(k + 1) * n];
            for (moment, row) in moments.iter_mut().zip(self.reference.stream.moments.chunks_exact(functions)) {
                for (number, curl) in numbers.iter().zip(row).filter(|(number, _)| **number != NONE) {
                    *moment += curl * self.right[*number as usize];
                }
            }
        }
        self.match_spokes(ends.is_none());
    }

    /// Energy matrix of the curls of one member and their products with s₀ + ψA∇u.
    fn local_problem(&mut self, k: usize) {
        let (n, functions) = (self.reference.moments, self.reference.stream.count);
        let (state, i) = (&self.states[k], self.members[k].1);
        let moments = &self.moments[k * n..(k + 1) * n];
        self.local_right.fill(0.0);
        if state.uniform {
            let g = &state.metrics[0];
            for (entry, product) in self.local_matrix.iter_mut().zip(&self.reference.stream.products) {
                *entry = g[0][0] * product[0] + g[0][1] * product[1] + g[1][1] * product[2];
            }
        } else {
            self.local_matrix.fill(0.0);
        }
        for (q, w) in self.reference.rule.weights().iter().enumerate() {
            let mut s = [0.0; 2];
            for (moment, field) in moments.iter().zip(&self.reference.fields[q]) {
                s[0] += moment * field[0];
                s[1] += moment * field[1];
            }
            let (g, slope, hat) = (&state.metrics[q], &state.slopes[q], self.reference.hats[q][i]);
            let pull = [
                w * (g[0][0] * s[0] + g[0][1] * s[1] + hat * slope[0]),
                w * (g[1][0] * s[0] + g[1][1] * s[1] + hat * slope[1]),
            ];
            let curls = &self.reference.stream.curls[q];
            for (entry, c) in self.local_right.iter_mut().zip(curls) {
                *entry += c[0] * pull[0] + c[1] * pull[1];
            }
            if !state.uniform {
                for (row, c) in self.local_matrix.chunks_exact_mut(functions).zip(curls) {
                    let gc = [w * (g[0][0] * c[0] + g[0][1] * c[1]), w * (g[1][0] * c[0] + g[1][1] * c[1])];
                    for (entry, d) in row.iter_mut().zip(curls) {
                        *entry += gc[0] * d[0] + gc[1] * d[1];
                    }
                }
            }
        }
    }

    /// Adds the penalty of a Robin side to the problem of its cell.
    fn add_penalty(&mut self, k: usize, side: usize, role: &SideRole) {
        let SideRole::Penalized { mass, linear } = role else { return };
        let (n, functions, per_side) =
            (self.reference.moments, self.reference.stream.count, self.reference.side_moments);
        let moments = &self.moments[k * n + side * per_side..k * n + (side + 1) * per_side];
        let rows = &self.reference.stream.moments[side * per_side * functions..(side + 1) * per_side * functions];
        for a in 0..per_side {
            let slope = linear[a] + (0..per_side).map(|b| mass[a * per_side + b] * moments[b]).sum::<f64>();
            for i in 0..functions {
                let c = rows[a * functions + i];
                self.local_right[i] += c * slope;
                for b in 0..per_side {
                    let factor = c * mass[a * per_side + b];
                    for j in 0..functions {
                        self.local_matrix[i * functions + j] += factor * rows[b * functions + j];
                    }
                }
            }
        }
    }

    /// Makes the flow through a spoke the same number in both cells: ℓⱼ walked backwards is (−1)ʲ ℓⱼ.
    fn match_spokes(&mut self, closed: bool) {
        let (n, per_side) = (self.reference.moments, self.reference.side_moments);
        let count = self.members.len();
        for k in usize::from(!closed)..count {
            let before = (k + count - 1) % count;
            let from = before * n + (self.members[before].1 + 2) % 3 * per_side;
            let to = k * n + self.members[k].1 * per_side;
            for j in 0..per_side {
                let sign = if j % 2 == 0 { -1.0 } else { 1.0 };
                self.moments[to + j] = sign * self.moments[from + j];
            }
        }
    }
}
