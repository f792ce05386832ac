//! A field as this crate takes it: values at the Lagrange nodes of each cell, for any mesh.

use hypercircle_mesh::{CellId, Mesh};

use crate::ExportError;
use crate::nodes::{Nodes, first_coordinates, place};

/// Values of a scalar field at the nodes of each cell, cell after cell.
///
/// Order 1 has the vertices of the cell. Order 2 adds the middle of each side: on a triangle (v₀, v₁, v₂) the values
/// are at v₀, v₁, v₂ and the middles of v₀v₁, v₁v₂, v₂v₀; on an interval at both ends, then in the middle. Orders up
/// to 12 have the nodes of [`hypercircle_element::Lagrange`]. Each cell has its own values, so that a field may jump
/// between cells. A field that is known otherwise is interpolated: [`Field::of_function`] from a function of the
/// coordinates, [`Field::sampled`] from one of the cell and the point in it.
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
        Self::sampled(mesh, name, unit, order, |cell, reference| value(&mesh.place(cell, reference)))
    }

    /// A field of a given order that interpolates a function of the cell and the reference point in it.
    ///
    /// An order that is none gives a field without values, which is told when it is shown.
    ///
    /// ```
    /// use hypercircle_export::Field;
    /// use hypercircle_mesh::Interval;
    /// let rod = Interval::uniform(0.0, 1.0, 4).mesh()?;
    /// // The number of the cell, and a slope inside: a field that jumps between cells.
    /// let saw = Field::sampled(&rod, "saw", "", 1, |cell, reference| cell.0 as f64 - reference[0]);
    /// assert_eq!(saw.values()[2..4], [1.0, 0.0]);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn sampled<const D: usize>(
        mesh: &Mesh<D>,
        name: &str,
        unit: &str,
        order: usize,
        value: impl Fn(CellId, &[f64; D]) -> f64,
    ) -> Self {
        let nodes = Nodes::new(D, order);
        let points: Vec<[f64; D]> = nodes.iter().flat_map(Nodes::reference).map(first_coordinates).collect();
        let values = mesh.cells().flat_map(|cell| points.iter().map(move |p| (cell, p))).map(|(c, p)| value(c, p));
        Self::new(name, unit, order, values.collect())
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

    /// Checks order, length and values against a mesh; gives the nodes of a cell.
    pub(crate) fn check<const D: usize>(&self, mesh: &Mesh<D>) -> Result<Nodes, ExportError> {
        let Some(nodes) = Nodes::new(D, self.order) else {
            let highest = Nodes::HIGHEST_ORDER;
            return Err(ExportError::Order { name: self.name.clone(), order: self.order, highest });
        };
        let each = nodes.reference().len();
        let expected = each * mesh.cell_count();
        if self.values.len() != expected {
            return Err(ExportError::WrongLength { what: self.name.clone(), given: self.values.len(), expected });
        }
        if let Some(i) = self.values.iter().position(|v| !v.is_finite()) {
            let place = place(mesh, CellId((i / each) as u32), &nodes.reference()[i % each]);
            return Err(ExportError::NotFinite { name: self.name.clone(), cell: i / each, place: place.to_vec() });
        }
        Ok(nodes)
    }
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::{Interval, Rectangle};

    use super::*;

    #[test]
    fn nodes_are_in_the_promised_order() {
        let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [1, 1]).mesh().unwrap();
        let [x, y] = [0, 1].map(|i| Field::of_function(&mesh, "", "", 2, |x| x[i]).values);
        for (middle, (a, b)) in [(3, (0, 1)), (4, (1, 2)), (5, (2, 0))] {
            assert_eq!([x[middle], y[middle]], [0.5 * (x[a] + x[b]), 0.5 * (y[a] + y[b])]);
        }
        let line = Interval::uniform(0.0, 4.0, 2).mesh().unwrap();
        assert_eq!(Field::of_function(&line, "", "", 2, |x| x[0]).values[3..], [2.0, 4.0, 3.0]);
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
        for order in [0, 13] {
            let error = Field::of_function(&line, "u", "", order, |x| x[0]).check(&line).unwrap_err();
            assert_eq!(error, ExportError::Order { name: "u".into(), order, highest: 12 });
        }
        let error = Field::new("u", "", 1, vec![0.0; 3]).check(&line).unwrap_err();
        assert!(matches!(error, ExportError::WrongLength { given: 3, expected: 4, .. }));
        assert!(Field::at_vertices(&line, "u", "", &[1.0]).is_err());
    }
}
