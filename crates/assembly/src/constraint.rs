//! Unknowns whose values are prescribed, and the smaller system for the others.

use hypercircle_element::{Rule, Shape, unit_legendre};
use hypercircle_mesh::VertexId;

use crate::pattern::SparseMatrix;
use crate::terms::place;
use crate::{AssemblyError, Condition, Space, Terms, check};

/// Prescribed values of unknowns, in ascending order of the unknowns.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Constraints {
    unknowns: Vec<u32>,
    values: Vec<f64>,
    jumps: Vec<(VertexId, f64)>,
}

impl Constraints {
    /// The values that Dirichlet sides prescribe.
    ///
    /// At vertices the data are interpolated; along a side of order p ≥ 2 they are fitted so that the remainder is orthogonal to
    /// the polynomials of degree p − 2, which makes its slope smallest. Where two sides disagree at a vertex, their
    /// mean is taken and the disagreement noted ([`Constraints::jumps`]).
    ///
    /// # Errors
    /// [`AssemblyError::NotFinite`] for a prescribed value that is NaN or infinite.
    pub fn dirichlet<const D: usize>(space: &Space<D>, terms: &Terms<D>) -> Result<Self, AssemblyError> {
        let mesh = space.mesh();
        let mut at_vertex: Vec<(u32, f64)> = Vec::new();
        for side in terms.condition_sides(mesh) {
            let Condition::Dirichlet(data) = side.condition else { continue };
            for (vertex, local) in mesh
                .side_vertices(side.cell, side.local)
                .iter()
                .zip(space.basis().shape().side_vertices(side.local.into()))
            {
                let at = place(mesh, side.cell, &space.basis().shape().vertices()[*local]);
                let value = data.at(&at);
                check::finite(mesh, "prescribed value", &at, value)?;
                at_vertex.push((vertex.0, value));
            }
        }
        at_vertex.sort_by(|a, b| a.0.cmp(&b.0).then(a.1.total_cmp(&b.1)));
        let mut constraints = Self::default();
        for group in at_vertex.chunk_by(|a, b| a.0 == b.0) {
            let (low, high) = (group[0].1, group[group.len() - 1].1);
            let scale = low.abs().max(high.abs());
            let agreed = high - low <= 1e-12 * scale;
            constraints.unknowns.push(group[0].0);
            constraints.values.push(if agreed { low } else { 0.5 * (low + high) });
            if !agreed {
                constraints.jumps.push((VertexId(group[0].0), high - low));
            }
        }
        if D > 1 && space.order() > 1 {
            constraints.fit_sides(space, terms)?;
        }
        Ok(constraints)
    }

    /// Adds the inner unknowns of Dirichlet sides to those of their vertices.
    fn fit_sides<const D: usize>(&mut self, space: &Space<D>, terms: &Terms<D>) -> Result<(), AssemblyError> {
        let mesh = space.mesh();
        let shape = space.basis().shape();
        let inner = space.order() - 1;
        let rule = Rule::of_degree(Shape::Interval, 2 * space.order() + 8)?;
        let mut along = Vec::new();
        for side in terms.condition_sides(mesh) {
            let Condition::Dirichlet(data) = side.condition else { continue };
            let ends = mesh.side_vertices(side.cell, side.local);
            let ends = [ends[0], ends[D - 1]].map(|v| self.value(v.0).unwrap_or(0.0));
            let points = crate::block::side_points(shape, side.local, &rule);
            let coefficients = bubble_coefficients(space.order(), &rule, |q, t| {
                let at = place(mesh, side.cell, &points[q]);
                let value = data.at(&at);
                check::finite(mesh, "prescribed value", &at, value)?;
                Ok(value - (1.0 - t) * ends[0] - t * ends[1])
            })?;
            let first = shape.vertex_count() + usize::from(side.local) * inner;
            let corners = shape.side_vertices(side.local.into());
            let corner = |i: usize| shape.vertices()[corners[i]];
            let (a, b) = (corner(0), corner(1));
            for k in first..first + inner {
                let node = space.basis().nodes()[k];
                let axis = usize::from((b[0] - a[0]).abs() < 0.5);
                let t = (node[axis] - a[axis]) / (b[axis] - a[axis]);
                let value = (1.0 - t) * ends[0] + t * ends[1] + bubble_value(&coefficients, t);
                along.push((space.unknowns(side.cell)[k], value));
            }
        }
        along.sort_by_key(|entry| entry.0);
        along.dedup_by_key(|entry| entry.0);
        self.unknowns.extend(along.iter().map(|entry| entry.0));
        self.values.extend(along.iter().map(|entry| entry.1));
        Ok(())
    }

    /// The prescribed unknowns, ascending.
    #[must_use]
    pub fn unknowns(&self) -> &[u32] {
        &self.unknowns
    }

    /// The prescribed values, in the order of the unknowns.
    #[must_use]
    pub fn values(&self) -> &[f64] {
        &self.values
    }

    /// The prescribed value of an unknown, if it is prescribed.
    #[must_use]
    pub fn value(&self, unknown: u32) -> Option<f64> {
        self.unknowns.binary_search(&unknown).ok().map(|i| self.values[i])
    }

    /// Vertices at which sides prescribe different values, with the difference. A function with such a jump has no
    /// finite energy.
    #[must_use]
    pub fn jumps(&self) -> &[(VertexId, f64)] {
        &self.jumps
    }

    /// The system K_ff u_f = b_f − K_fc u_c of the free unknowns: symmetric when the matrix is.
    #[must_use]
    pub fn reduce(&self, matrix: &SparseMatrix, load: &[f64]) -> Reduced {
        let rows = matrix.rows();
        let mut position = vec![u32::MAX; rows];
        let mut prescribed = vec![0.0; rows];
        for (unknown, value) in self.unknowns.iter().zip(&self.values) {
            prescribed[*unknown as usize] = *value;
            position[*unknown as usize] = u32::MAX - 1;
        }
        let mut free = Vec::with_capacity(rows - self.unknowns.len());
        for (unknown, slot) in position.iter_mut().enumerate() {
            if *slot == u32::MAX {
                *slot = free.len() as u32;
                free.push(unknown as u32);
            }
        }
        let indptr = matrix.indptr();
        let offsets = indptr.raw_storage();
        let (columns, values) = (matrix.indices(), matrix.data());
        let mut new_offsets = Vec::with_capacity(free.len() + 1);
        new_offsets.push(0);
        let mut new_columns = Vec::with_capacity(columns.len());
        let mut new_values = Vec::with_capacity(columns.len());
        let mut right = Vec::with_capacity(free.len());
        for unknown in &free {
            let row = *unknown as usize;
            let mut sum = load[row];
            for k in offsets[row]..offsets[row + 1] {
                let column = columns[k] as usize;
                if position[column] == u32::MAX - 1 {
                    sum -= values[k] * prescribed[column];
                } else {
                    new_columns.push(position[column]);
                    new_values.push(values[k]);
                }
            }
            new_offsets.push(new_columns.len());
            right.push(sum);
        }
        let n = free.len();
        let matrix = SparseMatrix::new((n, n), new_offsets, new_columns, new_values);
        Reduced { matrix, load: right, free }
    }

    /// All unknowns from the free ones.
    #[must_use]
    pub fn expand(&self, reduced: &Reduced, solution: &[f64]) -> Vec<f64> {
        let mut all = vec![0.0; self.unknowns.len() + reduced.free.len()];
        for (unknown, value) in reduced.free.iter().zip(solution) {
            all[*unknown as usize] = *value;
        }
        for (unknown, value) in self.unknowns.iter().zip(&self.values) {
            all[*unknown as usize] = *value;
        }
        all
    }
}

/// The system of the free unknowns.
#[derive(Debug, Clone)]
pub struct Reduced {
    /// K_ff.
    pub matrix: SparseMatrix,
    /// b_f − K_fc u_c.
    pub load: Vec<f64>,
    /// The number of each free unknown in the whole.
    pub free: Vec<u32>,
}

/// Coefficients cₖ, k = 2 … p, of the integrated Legendre polynomials ∫₀ᵗ ℓₖ₋₁ that fit a remainder r with r(0) = r(1) = 0:
/// cₖ = ∫ r′ ℓₖ₋₁ = −∫ r ℓ′ₖ₋₁.
fn bubble_coefficients(
    order: usize,
    rule: &Rule,
    remainder: impl Fn(usize, f64) -> Result<f64, AssemblyError>,
) -> Result<Vec<f64>, AssemblyError> {
    let mut coefficients = vec![0.0; order - 1];
    for (q, (point, w)) in rule.points().iter().zip(rule.weights()).enumerate() {
        let r = remainder(q, point[0])?;
        let l = unit_legendre(order, point[0]);
        for (i, coefficient) in coefficients.iter_mut().enumerate() {
            let n = i + 1;
            // ℓ′ₙ = 2 √(2n + 1) Σ √(2j + 1) ℓⱼ over j = n − 1, n − 3, …
            let slope: f64 = (0..n).rev().step_by(2).map(|j| (2.0 * j as f64 + 1.0).sqrt() * l[j]).sum();
            *coefficient -= w * r * 2.0 * (2.0 * n as f64 + 1.0).sqrt() * slope;
        }
    }
    Ok(coefficients)
}

/// Σ cₖ ∫₀ᵗ ℓₖ₋₁, with ∫₀ᵗ ℓₙ = (Pₙ₊₁ − Pₙ₋₁) / (2 √(2n + 1)) and Pₙ = ℓₙ / √(2n + 1).
fn bubble_value(coefficients: &[f64], t: f64) -> f64 {
    let l = unit_legendre(coefficients.len() + 1, t);
    let p = |n: usize| l[n] / (2.0 * n as f64 + 1.0).sqrt();
    coefficients
        .iter()
        .enumerate()
        .map(|(i, c)| c * (p(i + 2) - p(i)) / (2.0 * (2.0 * (i + 1) as f64 + 1.0).sqrt()))
        .sum()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Place, tensorial};
    use hypercircle_mesh::Rectangle;
    use std::sync::Arc;

    #[test]
    fn polynomial_data_of_the_order_are_met_exactly() {
        for order in 1..=5 {
            let mesh = Rectangle::new([0.0, 0.0], [1.0, 2.0], [2, 2]).mesh().unwrap();
            let space = Space::new(mesh.into(), order).unwrap();
            let mesh = space.mesh();
            let g = move |at: &Place<2>| (at.x[0] - 0.3 * at.x[1] + 0.1).powi(order as i32);
            let mut terms = Terms::conducting(mesh, tensorial(1.0));
            for name in ["left", "right", "bottom", "top"] {
                terms.set(mesh.find_side(name).unwrap(), Condition::Dirichlet(Arc::new(g)));
            }
            let constraints = Constraints::dirichlet(&space, &terms).unwrap();
            assert_eq!(constraints.unknowns().len(), 8 * order);
            assert!(constraints.jumps().is_empty());
            let positions = space.positions();
            for (unknown, value) in constraints.unknowns().iter().zip(constraints.values()) {
                let x = positions[*unknown as usize];
                assert!((value - (x[0] - 0.3 * x[1] + 0.1).powi(order as i32)).abs() < 1e-13);
            }
        }
    }

    #[test]
    fn sides_that_disagree_at_a_corner_are_noted() {
        let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).mesh().unwrap();
        let space = Space::new(mesh.into(), 1).unwrap();
        let mesh = space.mesh();
        let mut terms = Terms::conducting(mesh, tensorial(1.0));
        terms.set(mesh.find_side("left").unwrap(), Condition::Dirichlet(Arc::new(0.0)));
        terms.set(mesh.find_side("top").unwrap(), Condition::Dirichlet(Arc::new(20.0)));
        let constraints = Constraints::dirichlet(&space, &terms).unwrap();
        assert_eq!(constraints.jumps().len(), 1);
        let (vertex, jump) = constraints.jumps()[0];
        assert_eq!((mesh.point(vertex), jump), ([0.0, 1.0], 20.0));
        assert_eq!(constraints.value(vertex.0), Some(10.0));
    }
}
