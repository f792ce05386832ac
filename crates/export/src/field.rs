//! A field as this crate takes it: values at the Lagrange nodes of each cell, for any mesh.

use hypercircle_mesh::{CellId, Mesh};

use crate::ExportError;

/// Orders of elements that can be shown.
const ORDERS: &[usize] = &[1, 2];

/// Values of a scalar field at the nodes of each cell, cell after cell.
///
/// Order 1 has the vertices of the cell. Order 2 adds the middle of each side: on a triangle (v₀, v₁, v₂) the values
/// are at v₀, v₁, v₂ and the middles of v₀v₁, v₁v₂, v₂v₀; on an interval at both ends, then in the middle. Each cell
/// has its own values, so that a field may jump between cells.
///
/// ```
/// use hypercircle_export::Field;
/// use hypercircle_mesh::Rectangle;
/// let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).mesh()?;
/// let height: Vec<f64> = mesh.points().iter().map(|x| x[1]).collect();
/// let field = Field::at_vertices(&mesh, "height", "m", &height)?;
/// assert_eq!(field.range(), Some((0.0, 1.0)));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone, PartialEq)]
pub struct Field {
    name: String,
    unit: String,
    order: usize,
    values: Vec<f64>,
}

impl Field {
    /// A field of a given order from its values cell after cell.
    ///
    /// Length and order are checked when the field meets a mesh.
    #[must_use]
    pub fn new(name: &str, unit: &str, order: usize, cell_values: Vec<f64>) -> Self {
        Self { name: name.into(), unit: unit.into(), order, values: cell_values }
    }

    /// A continuous field of order 1 from one value for each vertex of a mesh.
    ///
    /// # Errors
    /// [`ExportError::WrongLength`] unless there is one value for each vertex.
    pub fn at_vertices<const D: usize>(
        mesh: &Mesh<D>,
        name: &str,
        unit: &str,
        values: &[f64],
    ) -> Result<Self, ExportError> {
        if values.len() != mesh.vertex_count() {
            return Err(ExportError::WrongLength {
                what: name.into(),
                given: values.len(),
                expected: mesh.vertex_count(),
            });
        }
        let spread = mesh.connectivity().iter().map(|v| values[v.index()]).collect();
        Ok(Self::new(name, unit, 1, spread))
    }

    /// A field of a given order that interpolates a function of the coordinates.
    pub fn of_function<const D: usize>(
        mesh: &Mesh<D>,
        name: &str,
        unit: &str,
        order: usize,
        value: impl Fn(&[f64; D]) -> f64,
    ) -> Self {
        let mut values = Vec::new();
        for cell in mesh.cells() {
            values.extend(node_places(mesh, cell, order).iter().map(&value));
        }
        Self::new(name, unit, order, values)
    }

    /// The name of the quantity.
    #[must_use]
    pub fn name(&self) -> &str {
        &self.name
    }

    /// The unit of the values; empty for a pure number.
    #[must_use]
    pub fn unit(&self) -> &str {
        &self.unit
    }

    /// The polynomial order.
    #[must_use]
    pub fn order(&self) -> usize {
        self.order
    }

    /// All values, cell after cell.
    #[must_use]
    pub fn values(&self) -> &[f64] {
        &self.values
    }

    /// Smallest and largest value at a node; `None` for a field without values.
    #[must_use]
    pub fn range(&self) -> Option<(f64, f64)> {
        let first = *self.values.first()?;
        Some(self.values.iter().fold((first, first), |(low, high), &v| (low.min(v), high.max(v))))
    }

    /// Name and unit as a picture prints them.
    pub(crate) fn label(&self) -> String {
        match (self.name.is_empty(), self.unit.is_empty()) {
            (false, false) => format!("{}, {}", self.name, self.unit),
            (true, _) => self.unit.clone(),
            (_, true) => self.name.clone(),
        }
    }

    /// Checks order, length and values against a mesh; gives the number of values in a cell.
    pub(crate) fn check<const D: usize>(&self, mesh: &Mesh<D>) -> Result<usize, ExportError> {
        if !ORDERS.contains(&self.order) {
            return Err(ExportError::Order { name: self.name.clone(), order: self.order, allowed: ORDERS });
        }
        let each = node_count(D, self.order);
        let expected = each * mesh.cell_count();
        if self.values.len() != expected {
            return Err(ExportError::WrongLength { what: self.name.clone(), given: self.values.len(), expected });
        }
        if let Some(i) = self.values.iter().position(|v| !v.is_finite()) {
            let place = node_places(mesh, CellId((i / each) as u32), self.order)[i % each];
            return Err(ExportError::NotFinite { name: self.name.clone(), cell: i / each, place: place.to_vec() });
        }
        Ok(each)
    }
}

/// Number of nodes of a cell in `dimension` 1 or 2 and order 1 or 2.
pub(crate) fn node_count(dimension: usize, order: usize) -> usize {
    match (dimension, order) {
        (1, _) => order + 1,
        (_, 1) => 3,
        _ => 6,
    }
}

/// Coordinates of the nodes of a cell in the order of [`Field`]; vertices only for an order that is none.
pub(crate) fn node_places<const D: usize>(mesh: &Mesh<D>, cell: CellId, order: usize) -> Vec<[f64; D]> {
    let mut places: Vec<[f64; D]> = mesh.cell_vertices(cell).iter().map(|&v| mesh.point(v)).collect();
    if order == 2 {
        let vertices = places.len();
        let sides = if D == 1 { 1 } else { 3 };
        for side in 0..sides {
            let (a, b) = (places[side], places[(side + 1) % vertices]);
            places.push(std::array::from_fn(|i| 0.5 * (a[i] + b[i])));
        }
    }
    places
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::{Interval, Rectangle};

    use super::*;

    #[test]
    fn nodes_are_in_the_promised_order() {
        let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [1, 1]).mesh().unwrap();
        let places = node_places(&mesh, CellId(0), 2);
        for (middle, (a, b)) in [(3, (0, 1)), (4, (1, 2)), (5, (2, 0))] {
            assert_eq!(places[middle], [0, 1].map(|i| 0.5 * (places[a][i] + places[b][i])));
        }
        let line = Interval::uniform(0.0, 4.0, 2).mesh().unwrap();
        assert_eq!(node_places(&line, CellId(1), 2), [[2.0], [4.0], [3.0]]);
    }

    #[test]
    fn a_value_that_is_none_is_told_with_its_place() {
        let line = Interval::uniform(0.0, 4.0, 2).mesh().unwrap();
        let field = Field::new("u", "K", 2, vec![0.0, 0.0, 0.0, 0.0, 0.0, f64::NAN]);
        let error = field.check(&line).unwrap_err();
        assert_eq!(error, ExportError::NotFinite { name: "u".into(), cell: 1, place: vec![3.0] });
    }

    #[test]
    fn wrong_orders_and_lengths_are_told() {
        let line = Interval::uniform(0.0, 4.0, 2).mesh().unwrap();
        let error = Field::new("u", "", 3, vec![0.0; 8]).check(&line).unwrap_err();
        assert!(matches!(error, ExportError::Order { order: 3, allowed: &[1, 2], .. }));
        let error = Field::new("u", "", 1, vec![0.0; 3]).check(&line).unwrap_err();
        assert!(matches!(error, ExportError::WrongLength { given: 3, expected: 4, .. }));
        assert!(Field::at_vertices(&line, "u", "", &[1.0]).is_err());
    }
}
