//! Everything about a reference cell that the local problems need, tabulated once for an order.

use hypercircle_assembly::{AssemblyError, SideTables, Space, cell_rule, side_rule};
use hypercircle_element::{
    Lagrange, RaviartThomas, Rule, Shape, Table, orthonormal_values, polynomial_count, unit_legendre,
};

/// Tables at the points of one cell rule and one side rule.
#[derive(Debug)]
pub(crate) struct Reference {
    pub(crate) shape: Shape,
    pub(crate) rule: Rule,
    /// The primal basis at the cell points and at the points of each side.
    pub(crate) primal: Table,
    pub(crate) sides: SideTables,
    /// Hats at the cell points; hats at side points follow from t.
    pub(crate) hats: Vec<[f64; 3]>,
    /// Orthonormal test polynomials of degree q at the cell points.
    pub(crate) tests: Vec<Vec<f64>>,
    /// Raviart–Thomas fields and their divergences at the cell points.
    pub(crate) fields: Vec<Vec<[f64; 2]>>,
    pub(crate) divergences: Vec<Vec<f64>>,
    /// Orthonormal Legendre polynomials at the side points.
    pub(crate) legendre: Vec<Vec<f64>>,
    pub(crate) moments: usize,
    pub(crate) side_moments: usize,
    pub(crate) test_count: usize,
    /// Inner moments from side moments and divergence moments.
    pub(crate) completion: Vec<f64>,
    pub(crate) stream: Stream,
}

/// Stream functions φ of order q + 1 and their curls (triangle only; empty on the interval).
#[derive(Debug, Default)]
pub(crate) struct Stream {
    pub(crate) count: usize,
    /// Reference curls at the cell points.
    pub(crate) curls: Vec<Vec<[f64; 2]>>,
    /// ∫ cᵢᵃ cⱼᵇ on the reference cell for (a, b) = (0, 0), (0, 1) symmetrized, (1, 1); laid out [i][j].
    pub(crate) products: Vec<[f64; 3]>,
    /// Moments of the curls, one row for each moment.
    pub(crate) moments: Vec<f64>,
}

impl Reference {
    /// Tables for the order of a space, at the points that assembly uses raised by `extra` degrees.
    pub(crate) fn new<const D: usize>(space: &Space<D>, extra: usize) -> Result<Self, AssemblyError> {
        let shape = space.basis().shape();
        let order = space.order();
        let rule = Rule::of_degree(shape, cell_rule(space)?.degree() + extra)?;
        let side_extra = if D == 1 { 0 } else { extra };
        let side_rule = Rule::of_degree(Shape::Interval, side_rule(space)?.degree() + side_extra)?;
        let fluxes = RaviartThomas::new(shape, order)?;
        let sides = SideTables::new(space, side_rule);
        let points = rule.points();
        Ok(Self {
            shape,
            primal: space.basis().table(points),
            hats: points.iter().map(|at| shape.hats(at)).collect(),
            tests: points.iter().map(|at| orthonormal_values(shape, order, at)).collect(),
            fields: points.iter().map(|at| fluxes.fields(at)).collect(),
            divergences: points.iter().map(|at| fluxes.divergences(at)).collect(),
            legendre: sides
                .rule()
                .points()
                .iter()
                .map(|t| unit_legendre(fluxes.side_moment_count() - 1, t[0]))
                .collect(),
            moments: fluxes.moment_count(),
            side_moments: fluxes.side_moment_count(),
            test_count: polynomial_count(shape, order),
            completion: fluxes.completion()?,
            stream: if shape == Shape::Triangle { Stream::new(&fluxes, &rule)? } else { Stream::default() },
            sides,
            rule,
        })
    }

    /// Number of moments on all sides together.
    pub(crate) fn all_side_moments(&self) -> usize {
        self.shape.vertex_count() * self.side_moments
    }

    /// Fills in the inner moments of a field from its side moments and the moments of its divergence.
    pub(crate) fn complete(&self, moments: &mut [f64], divergence: &[f64]) {
        let sides = self.all_side_moments();
        let (given, inner) = moments.split_at_mut(sides);
        for (value, row) in inner.iter_mut().zip(self.completion.chunks_exact(sides + self.test_count)) {
            *value = row[..sides].iter().zip(given.iter()).map(|(a, b)| a * b).sum::<f64>()
                + row[sides..].iter().zip(divergence).map(|(a, b)| a * b).sum::<f64>();
        }
    }
}

impl Stream {
    fn new(fluxes: &RaviartThomas, rule: &Rule) -> Result<Self, AssemblyError> {
        let basis = Lagrange::new(Shape::Triangle, fluxes.order() + 1)?;
        let count = basis.nodes().len();
        let table = basis.table(rule.points());
        let curls: Vec<Vec<[f64; 2]>> =
            (0..rule.len()).map(|q| table.gradients_at(q).iter().map(|g| [g[1], -g[0]]).collect()).collect();
        let mut products = vec![[0.0; 3]; count * count];
        for (curls, w) in curls.iter().zip(rule.weights()) {
            for i in 0..count {
                for j in 0..count {
                    let (c, d) = (curls[i], curls[j]);
                    let product = &mut products[i * count + j];
                    product[0] += w * c[0] * d[0];
                    product[1] += w * (c[0] * d[1] + c[1] * d[0]);
                    product[2] += w * c[1] * d[1];
                }
            }
        }
        // Side moments see only the nodes on their side: the others are zero but for rounding.
        let mut moments = fluxes.curl_moments()?;
        for value in &mut moments {
            if value.abs() < 1e-11 {
                *value = 0.0;
            }
        }
        Ok(Self { count, curls, products, moments })
    }
}
