//! How good the shapes and how even the sizes of cells are.

use crate::mesh::distance;
use crate::{CellId, Mesh};

/// The extremes of shape and size in a mesh, each with the lowest cell that attains it; made by [`Mesh::quality`].
#[derive(Debug, Clone, Copy, PartialEq)]
#[non_exhaustive]
pub struct Quality {
    /// The smallest angle, in degrees, and its cell; `None` for intervals. At best 60.
    pub smallest_angle: Option<(f64, CellId)>,
    /// The smallest diameter and its cell.
    pub smallest_cell: (f64, CellId),
    /// The largest diameter and its cell.
    pub largest_cell: (f64, CellId),
}

impl<const D: usize> Mesh<D> {
    /// The smallest angle and the smallest and largest cell.
    ///
    /// ```
    /// use hypercircle_mesh::Rectangle;
    /// let quality = Rectangle::new([0.0, 0.0], [1.0, 1.0], [4, 4]).mesh()?.quality();
    /// assert!((quality.smallest_angle.unwrap().0 - 45.0).abs() < 1e-12);
    /// assert!((quality.largest_cell.0 - 0.125_f64.sqrt()).abs() < 1e-15);
    /// # Ok::<(), hypercircle_mesh::MeshError>(())
    /// ```
    #[must_use]
    pub fn quality(&self) -> Quality {
        let mut angle = (f64::INFINITY, CellId(0));
        let mut smallest = (f64::INFINITY, CellId(0));
        let mut largest = (0.0, CellId(0));
        for cell in self.cells() {
            let diameter = self.cell_diameter(cell);
            if diameter < smallest.0 {
                smallest = (diameter, cell);
            }
            if diameter > largest.0 {
                largest = (diameter, cell);
            }
            let here = self.smallest_angle(cell);
            if here < angle.0 {
                angle = (here, cell);
            }
        }
        let smallest_angle = (D > 1).then_some(angle);
        Quality { smallest_angle, smallest_cell: smallest, largest_cell: largest }
    }

    /// In degrees. The angle between sides of the lengths a, b follows from tan α = 2·area·2 / (a² + b² − c²).
    fn smallest_angle(&self, cell: CellId) -> f64 {
        if D == 1 {
            return f64::INFINITY;
        }
        let v = self.cell_vertices(cell);
        let squares: [f64; 3] =
            std::array::from_fn(|i| distance(&self.point(v[i]), &self.point(v[(i + 1) % 3])).powi(2));
        let area = self.cell_measure(cell);
        (0..3)
            .map(|i| (4.0 * area).atan2(squares[i] + squares[(i + 1) % 3] - squares[(i + 2) % 3]))
            .fold(f64::INFINITY, f64::min)
            .to_degrees()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Arrays, Interval, Toward};

    #[test]
    fn angles_of_known_triangles() {
        // 30-60-90 degrees, and an obtuse one of 15, 15 and 150 degrees.
        let half = 3.0_f64.sqrt() / 2.0;
        let low = 15.0_f64.to_radians().tan() * half;
        for (points, exact) in [
            (vec![[0.0, 0.0], [half, 0.0], [0.0, 0.5]], 30.0),
            (vec![[-half, 0.0], [half, 0.0], [0.0, low]], 15.0),
            (vec![[0.0, 0.0], [1.0, 0.0], [0.5, half]], 60.0),
        ] {
            let quality = Arrays::new(points, &[[0, 1, 2]]).mesh().unwrap().quality();
            let (angle, cell) = quality.smallest_angle.unwrap();
            assert!((angle - exact).abs() < 1e-12, "{angle}");
            assert_eq!(cell, CellId(0));
        }
    }

    #[test]
    fn sizes_of_intervals_and_where_they_are() {
        for (toward, smallest, largest) in [(Toward::Start, 0, 3), (Toward::End, 3, 0)] {
            let quality = Interval::graded(0.0, 15.0, 4, toward, 8.0).mesh().unwrap().quality();
            assert_eq!(quality.smallest_angle, None);
            assert_eq!((quality.smallest_cell.1, quality.largest_cell.1), (CellId(smallest), CellId(largest)));
            assert!((quality.smallest_cell.0 - 1.0).abs() < 1e-13);
            assert!((quality.largest_cell.0 - 8.0).abs() < 1e-13);
        }
    }
}
