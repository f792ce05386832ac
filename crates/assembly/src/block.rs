//! Blocks of cells or sides as kernels see them.

use hypercircle_element::{Rule, Shape, Table};
use hypercircle_mesh::CellId;

use crate::Place;
use crate::space::{Space, clip, pad};

/// Inverse and determinant of a Jacobian.
#[inline]
pub(crate) fn inverse<const D: usize>(jacobian: &[[f64; D]; D]) -> ([[f64; D]; D], f64) {
    let mut inverse = [[0.0; D]; D];
    if D == 1 {
        inverse[0][0] = 1.0 / jacobian[0][0];
        return (inverse, jacobian[0][0]);
    }
    let determinant = jacobian[0][0] * jacobian[1][1] - jacobian[0][1] * jacobian[1][0];
    inverse[0][0] = jacobian[1][1] / determinant;
    inverse[0][1] = -jacobian[0][1] / determinant;
    inverse[1][0] = -jacobian[1][0] / determinant;
    inverse[1][1] = jacobian[0][0] / determinant;
    (inverse, determinant)
}

/// ∇ₓ = J⁻ᵀ ∇_ξ.
#[inline]
pub(crate) fn pull_gradient<const D: usize>(inverse: &[[f64; D]; D], reference: &[f64; D]) -> [f64; D] {
    let mut gradient = [0.0; D];
    for i in 0..D {
        for j in 0..D {
            gradient[i] += inverse[j][i] * reference[j];
        }
    }
    gradient
}

/// A block of cells, or of sides with their cells, at the points of one quadrature rule.
///
/// Data at points are laid out point after point, and within a point cell after cell: `places[q * len + c]`.
#[derive(Debug)]
pub struct Block<'a, const D: usize> {
    cells: &'a [CellId],
    table: &'a Table,
    reference_weights: &'a [f64],
    places: Vec<Place<D>>,
    weights: Vec<f64>,
    inverses: Vec<[[f64; D]; D]>,
    determinants: Vec<f64>,
}

impl<'a, const D: usize> Block<'a, D> {
    /// The block of some cells; `table` is the basis at the points of the rule.
    #[must_use]
    pub fn of_cells(space: &Space<D>, cells: &'a [CellId], rule: &'a Rule, table: &'a Table) -> Self {
        let mut block = Self::empty(cells, rule, table);
        for cell in cells {
            block.push_map(space, *cell);
        }
        for (q, (point, w)) in rule.points().iter().zip(rule.weights()).enumerate() {
            for (c, cell) in cells.iter().enumerate() {
                block.push_point(space, *cell, &clip(point), w * block.determinants[c]);
            }
            debug_assert_eq!(block.weights.len(), (q + 1) * cells.len());
        }
        block
    }

    /// The block of one side of one cell. Weights integrate along the side.
    #[must_use]
    pub fn of_side(space: &Space<D>, cell: &'a [CellId; 1], local: u8, sides: &'a SideTables) -> Self {
        let mut block = Self::empty(cell, sides.rule(), sides.table(local));
        block.push_map(space, cell[0]);
        let length = space.mesh().side_measure(cell[0], local);
        for (point, w) in sides.points(local).iter().zip(sides.rule().weights()) {
            block.push_point(space, cell[0], &clip(point), w * length);
        }
        block
    }

    fn empty(cells: &'a [CellId], rule: &'a Rule, table: &'a Table) -> Self {
        let points = rule.len() * cells.len();
        Self {
            cells,
            table,
            reference_weights: rule.weights(),
            places: Vec::with_capacity(points),
            weights: Vec::with_capacity(points),
            inverses: Vec::with_capacity(cells.len()),
            determinants: Vec::with_capacity(cells.len()),
        }
    }

    fn push_map(&mut self, space: &Space<D>, cell: CellId) {
        let (inverse, determinant) = inverse(&space.mesh().jacobian(cell));
        self.inverses.push(inverse);
        self.determinants.push(determinant);
    }

    fn push_point(&mut self, space: &Space<D>, cell: CellId, at: &[f64; D], weight: f64) {
        let mesh = space.mesh();
        self.places.push(Place { x: mesh.place(cell, at), region: mesh.region(cell), cell });
        self.weights.push(weight);
    }

    /// Number of cells.
    #[must_use]
    pub fn len(&self) -> usize {
        self.cells.len()
    }

    /// Whether there are no cells.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.cells.is_empty()
    }

    /// The cells.
    #[must_use]
    pub fn cells(&self) -> &[CellId] {
        self.cells
    }

    /// The basis at the points, with gradients in reference coordinates.
    #[must_use]
    pub fn table(&self) -> &Table {
        self.table
    }

    /// Weights of the rule on the reference cell.
    #[must_use]
    pub fn reference_weights(&self) -> &[f64] {
        self.reference_weights
    }

    /// Places of the points, point after point.
    #[must_use]
    pub fn places(&self) -> &[Place<D>] {
        &self.places
    }

    /// Integration weights w |det J| (on a side: w times its length), in the layout of the places.
    #[must_use]
    pub fn weights(&self) -> &[f64] {
        &self.weights
    }

    /// J⁻¹ of a cell, `[i][j]` = ∂ξᵢ/∂xⱼ.
    #[must_use]
    pub fn inverse_jacobian(&self, cell: usize) -> &[[f64; D]; D] {
        &self.inverses[cell]
    }

    /// det J of a cell.
    #[must_use]
    pub fn determinant(&self, cell: usize) -> f64 {
        self.determinants[cell]
    }

    /// One cell of the block.
    #[must_use]
    pub fn cell(&self, cell: usize) -> CellView<'_, 'a, D> {
        CellView { block: self, cell }
    }
}

/// One cell (or side) of a [`Block`]: what a kernel for a single cell reads.
#[derive(Debug, Clone, Copy)]
pub struct CellView<'b, 'a, const D: usize> {
    block: &'b Block<'a, D>,
    cell: usize,
}

impl<const D: usize> CellView<'_, '_, D> {
    /// Number of basis functions.
    #[must_use]
    pub fn function_count(&self) -> usize {
        self.block.table.function_count()
    }

    /// Number of quadrature points.
    #[must_use]
    pub fn point_count(&self) -> usize {
        self.block.table.point_count()
    }

    /// Where a point lies.
    #[must_use]
    pub fn place(&self, point: usize) -> &Place<D> {
        &self.block.places[point * self.block.len() + self.cell]
    }

    /// Integration weight of a point: w |det J|, or w times the length of the side.
    #[must_use]
    pub fn weight(&self, point: usize) -> f64 {
        self.block.weights[point * self.block.len() + self.cell]
    }

    /// Values of the basis functions at a point.
    #[must_use]
    pub fn values(&self, point: usize) -> &[f64] {
        self.block.table.values_at(point)
    }

    /// Gradient of a basis function at a point, in real coordinates.
    #[must_use]
    pub fn gradient(&self, point: usize, function: usize) -> [f64; D] {
        let reference = clip(&self.block.table.gradients_at(point)[function]);
        pull_gradient(self.block.inverse_jacobian(self.cell), &reference)
    }
}

/// The basis of a cell at the points of a rule on each of its sides.
///
/// ```
/// use hypercircle_assembly::{side_rule, SideTables, Space};
/// use hypercircle_mesh::Rectangle;
/// let space = Space::new(Rectangle::new([0.0; 2], [1.0; 2], [1, 1]).mesh()?.into(), 1)?;
/// let sides = SideTables::new(&space, side_rule(&space)?);
/// // On side 0 the function of the opposite vertex is zero.
/// assert!(sides.table(0).values_at(0)[2].abs() < 1e-15);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
pub struct SideTables {
    rule: Rule,
    points: Vec<Vec<[f64; 2]>>,
    tables: Vec<Table>,
}

impl SideTables {
    /// For a space and a rule on the interval.
    #[must_use]
    pub fn new<const D: usize>(space: &Space<D>, rule: Rule) -> Self {
        let shape = space.basis().shape();
        let points: Vec<_> = (0..shape.vertex_count()).map(|local| side_points(shape, local as u8, &rule)).collect();
        let tables = points.iter().map(|points| space.basis().table(points)).collect();
        Self { rule, points, tables }
    }

    /// The rule along a side.
    #[must_use]
    pub fn rule(&self) -> &Rule {
        &self.rule
    }

    /// Reference points of the cell on a side, in walking order of the side.
    #[must_use]
    pub fn points(&self, local: u8) -> &[[f64; 2]] {
        &self.points[usize::from(local)]
    }

    /// The basis of the cell at these points.
    #[must_use]
    pub fn table(&self, local: u8) -> &Table {
        &self.tables[usize::from(local)]
    }
}

/// Reference points of a cell that lie on one of its sides, from a rule on the interval (on the point side of an
/// interval cell: its end, for each point of the rule).
#[must_use]
pub(crate) fn side_points(shape: Shape, local: u8, rule: &Rule) -> Vec<[f64; 2]> {
    let ends = shape.side_vertices(usize::from(local));
    let (a, b) = (shape.vertices()[ends[0]], shape.vertices()[ends[ends.len() - 1]]);
    rule.points().iter().map(|t| pad(&[0, 1].map(|i| a[i] + t[0] * (b[i] - a[i])))).collect()
}
