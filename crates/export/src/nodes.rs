//! Lagrange nodes of any order, and fields between them.

use hypercircle_element::{Lagrange, Shape};
use hypercircle_mesh::{CellId, Mesh};

/// The nodes and basis functions of an order on intervals or triangles.
#[derive(Debug, Clone)]
pub(crate) struct Nodes {
    basis: Lagrange,
}

impl Nodes {
    /// Highest order there is.
    pub(crate) const HIGHEST_ORDER: usize = Lagrange::HIGHEST_ORDER;

    /// The nodes of an order in `dimension` 1 or 2; `None` for an order that is none.
    pub(crate) fn new(dimension: usize, order: usize) -> Option<Self> {
        Some(Self { basis: Lagrange::new(Shape::simplex(dimension)?, order).ok()? })
    }

    /// Reference coordinates of the nodes.
    pub(crate) fn reference(&self) -> &[[f64; 2]] {
        self.basis.nodes()
    }

    /// Prepares the evaluation of fields at points given in reference coordinates.
    pub(crate) fn sampler(&self, points: &[[f64; 2]]) -> Sampler {
        let table = self.basis.table(points);
        let weights = (0..points.len()).flat_map(|p| table.values_at(p).iter().copied()).collect();
        let near = |p: &[f64; 2], q: &[f64; 2]| (p[0] - q[0]).abs().max((p[1] - q[1]).abs()) < 1e-12;
        let node_at = points.iter().map(|p| self.reference().iter().position(|q| near(p, q))).collect();
        Sampler { count: self.reference().len(), weights, node_at }
    }
}

/// Weights that give a field at fixed points of the reference cell from its values at the nodes.
#[derive(Debug, Clone)]
pub(crate) struct Sampler {
    count: usize,
    weights: Vec<f64>,
    /// The node that a point is, if it is one.
    node_at: Vec<Option<usize>>,
}

impl Sampler {
    /// The field at a point.
    ///
    /// Exact at nodes, and exact where the field is constant in the cell: there, rounding errors would draw lines.
    pub(crate) fn value(&self, point: usize, values: &[f64]) -> f64 {
        if let Some(node) = self.node_at[point] {
            return values[node];
        }
        let weights = &self.weights[point * self.count..(point + 1) * self.count];
        values[0] + weights.iter().zip(values).map(|(w, v)| w * (v - values[0])).sum::<f64>()
    }

    /// The field at all points.
    pub(crate) fn values<'a>(&'a self, values: &'a [f64]) -> impl Iterator<Item = f64> + 'a {
        (0..self.node_at.len()).map(|point| self.value(point, values))
    }
}

/// A point of a cell from its reference coordinates, of which one dimension needs only the first.
pub(crate) fn place<const D: usize>(mesh: &Mesh<D>, cell: CellId, reference: &[f64; 2]) -> [f64; D] {
    mesh.place(cell, &first_coordinates(reference))
}

/// As many reference coordinates as there are dimensions.
pub(crate) fn first_coordinates<const D: usize>(reference: &[f64; 2]) -> [f64; D] {
    std::array::from_fn(|i| reference.get(i).copied().unwrap_or(0.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn polynomials_of_the_order_are_met_between_the_nodes() {
        for order in 1..=Nodes::HIGHEST_ORDER {
            let nodes = Nodes::new(2, order).unwrap();
            let f = |x: &[f64; 2]| (0.3 + x[0] - 0.5 * x[1]).powi(order as i32);
            let values: Vec<f64> = nodes.reference().iter().map(f).collect();
            let points = [[0.21, 0.33], [0.0, 0.77], [0.5, 0.5], [1.0, 0.0]];
            for (p, v) in points.iter().zip(nodes.sampler(&points).values(&values)) {
                assert!((v - f(p)).abs() < 1e-11, "order {order} at {p:?}: {v} for {}", f(p));
            }
        }
    }

    #[test]
    fn a_constant_is_met_to_the_last_bit() {
        let nodes = Nodes::new(1, 7).unwrap();
        let points: Vec<[f64; 2]> = (0..=50).map(|i| [f64::from(i) / 50.0, 0.0]).collect();
        assert!(nodes.sampler(&points).values(&[0.1; 8]).all(|v| v == 0.1));
    }

    #[test]
    fn orders_that_are_none_have_no_nodes() {
        assert!(Nodes::new(2, 0).is_none() && Nodes::new(2, 13).is_none() && Nodes::new(3, 1).is_none());
    }
}
