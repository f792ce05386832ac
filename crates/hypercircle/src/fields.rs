//! Solutions as fields for pictures and files.

use hypercircle_export::Field;

use crate::Solution;

impl<const D: usize> Solution<D> {
    /// The solution as a field with a name and a unit, for pictures and field files.
    ///
    /// ```
    /// use hypercircle::export::Picture;
    /// use hypercircle::mesh::Rectangle;
    /// use hypercircle::Diffusion;
    /// let plate = Rectangle::new([0.0, 0.0], [2.0, 1.0], [8, 4]).region("plate").mesh()?;
    /// let solution = Diffusion::on(plate)
    ///     .conductivity("plate", 1.0)
    ///     .dirichlet("left", 0.0)
    ///     .dirichlet("right", 20.0)
    ///     .solve()?;
    /// let field = solution.field("temperature", "°C");
    /// let picture = Picture::of(solution.mesh()).field(&field).contours(8).to_svg()?;
    /// assert!(picture.starts_with("<svg") || picture.starts_with("<?xml"));
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    #[must_use]
    pub fn field(&self, name: &str, unit: &str) -> Field {
        let values = self.mesh().cells().flat_map(|cell| self.cell_values(cell)).collect();
        Field::new(name, unit, self.space().order(), values)
    }
}
