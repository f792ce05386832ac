//! Meshes of rectangles.

use hypercircle_element::Shape;

use crate::limits::check_counts;
use crate::longest_side::longest_side_first;
use crate::mesh::Parts;
use crate::{CellId, Mesh, MeshError, NamedSide, Names, RegionId, SideNameId, VertexId};

/// How the little rectangles of a [`Rectangle`] are cut into triangles.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub enum Diagonal {
    /// Two triangles each, cut from lower left to upper right.
    #[default]
    Rising,
    /// Two triangles each, cut from upper left to lower right.
    Falling,
    /// Two triangles each, rising and falling in turn like the colors of a chessboard; rising at the lower left.
    Alternating,
    /// Four triangles each, around a vertex in the middle.
    Crossed,
}

/// A rectangle with sides parallel to the axes, cut into equal little rectangles and these into triangles.
///
/// The region is named "domain" and the sides "left", "right", "bottom" and "top" unless told otherwise. Vertices and
/// cells are numbered row by row from the lower left; middles of crossed rectangles come after all corners.
///
/// ```
/// use hypercircle_mesh::{Diagonal, Rectangle};
/// let mesh = Rectangle::new([0.0, 0.0], [0.24, 1.0], [6, 25])
///     .diagonal(Diagonal::Crossed)
///     .region("brick")
///     .sides(["room", "street", "floor", "ceiling"])
///     .mesh()?;
/// assert_eq!(mesh.cell_count(), 4 * 6 * 25);
/// assert!(mesh.find_side("street").is_ok());
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone)]
#[must_use = "call `mesh` to get the mesh"]
pub struct Rectangle {
    low: [f64; 2],
    high: [f64; 2],
    counts: [usize; 2],
    diagonal: Diagonal,
    region: String,
    sides: [String; 4],
}

impl Rectangle {
    /// The rectangle from its lower left corner to its upper right one, with so many little rectangles along x and y.
    pub fn new(low: [f64; 2], high: [f64; 2], counts: [usize; 2]) -> Self {
        Self {
            low,
            high,
            counts,
            diagonal: Diagonal::default(),
            region: "domain".to_owned(),
            sides: ["left", "right", "bottom", "top"].map(str::to_owned),
        }
    }

    /// How the little rectangles are cut.
    pub fn diagonal(mut self, diagonal: Diagonal) -> Self {
        self.diagonal = diagonal;
        self
    }

    /// Names the region.
    pub fn region(mut self, name: &str) -> Self {
        name.clone_into(&mut self.region);
        self
    }

    /// Names the sides: left, right, bottom, top. Sides may share a name.
    pub fn sides(mut self, names: [&str; 4]) -> Self {
        self.sides = names.map(str::to_owned);
        self
    }

    /// Makes the mesh. All triangles are counterclockwise and begin with their longest side.
    ///
    /// # Errors
    /// [`MeshError::NotFinite`] for a corner, [`MeshError::NotPositive`] for a width, a height or a number of cells,
    /// [`MeshError::RepeatedPoint`] where cells are too small for the numbers' resolution, [`MeshError::TooMany`].
    pub fn mesh(&self) -> Result<Mesh<2>, MeshError> {
        let [nx, ny] = self.checked_counts()?;
        let x = axis_nodes("column", self.low[0], self.high[0], nx)?;
        let y = axis_nodes("row", self.low[1], self.high[1], ny)?;
        let points = self.points(&x, &y);
        let triangles = self.triangles(&points, nx, ny);
        let mut region_names = Names::default();
        region_names.add(&self.region);
        let mut side_names = Names::default();
        let names = [0, 1, 2, 3].map(|i: usize| SideNameId(side_names.add(&self.sides[i])));
        let named_sides = named_sides(&triangles, nx, ny, names);
        Ok(Mesh::from_parts(Parts {
            shape: Shape::Triangle,
            points,
            regions: vec![RegionId(0); triangles.len()],
            connectivity: triangles.into_flattened(),
            region_names,
            side_names,
            named_sides,
        }))
    }

    fn checked_counts(&self) -> Result<[usize; 2], MeshError> {
        for (index, at) in [self.low, self.high].into_iter().enumerate() {
            if !at.iter().all(|c| c.is_finite()) {
                return Err(MeshError::NotFinite { what: "corner", index, at: at.to_vec() });
            }
        }
        for i in 0..2 {
            let extent = self.high[i] - self.low[i];
            if !(extent > 0.0 && extent.is_finite()) {
                return Err(MeshError::NotPositive {
                    what: format!("the {} of the rectangle", ["width", "height"][i]),
                    value: extent,
                });
            }
            if self.counts[i] == 0 {
                return Err(MeshError::NotPositive {
                    what: format!("the number of cells along {}", ["x", "y"][i]),
                    value: 0.0,
                });
            }
        }
        let [nx, ny] = self.counts;
        let rectangles = nx.saturating_mul(ny);
        let corners = nx.saturating_add(1).saturating_mul(ny.saturating_add(1));
        let (vertices, cells) = match self.diagonal {
            Diagonal::Crossed => (corners.saturating_add(rectangles), rectangles.saturating_mul(4)),
            _ => (corners, rectangles.saturating_mul(2)),
        };
        check_counts(Shape::Triangle, vertices, cells)?;
        Ok(self.counts)
    }

    fn points(&self, x: &[f64], y: &[f64]) -> Vec<[f64; 2]> {
        let corners = y.iter().flat_map(|y| x.iter().map(|x| [*x, *y]));
        if self.diagonal != Diagonal::Crossed {
            return corners.collect();
        }
        let middles =
            y.windows(2).flat_map(|y| x.windows(2).map(|x| [f64::midpoint(x[0], x[1]), f64::midpoint(y[0], y[1])]));
        corners.chain(middles).collect()
    }

    fn triangles(&self, points: &[[f64; 2]], nx: usize, ny: usize) -> Vec<[VertexId; 3]> {
        let mut triangles = Vec::with_capacity(nx * ny * if self.diagonal == Diagonal::Crossed { 4 } else { 2 });
        let mut add = |v: [usize; 3]| triangles.push(longest_side_first(points, v.map(|i| VertexId(i as u32))));
        for row in 0..ny {
            for column in 0..nx {
                let a = row * (nx + 1) + column;
                let (b, c, d) = (a + 1, a + nx + 2, a + nx + 1);
                let rising = match self.diagonal {
                    Diagonal::Rising => true,
                    Diagonal::Falling => false,
                    Diagonal::Alternating => (row + column) % 2 == 0,
                    Diagonal::Crossed => {
                        let middle = (nx + 1) * (ny + 1) + row * nx + column;
                        [[a, b, middle], [b, c, middle], [c, d, middle], [d, a, middle]].into_iter().for_each(&mut add);
                        continue;
                    }
                };
                let pair = if rising { [[a, b, c], [a, c, d]] } else { [[a, b, d], [b, c, d]] };
                pair.into_iter().for_each(&mut add);
            }
        }
        triangles
    }
}

/// The coordinates of `count` equal cells, strictly ascending.
fn axis_nodes(what: &'static str, low: f64, high: f64, count: usize) -> Result<Vec<f64>, MeshError> {
    let at = |i: usize| if i == count { high } else { low + (high - low) * (i as f64 / count as f64) };
    let nodes: Vec<f64> = (0..=count).map(at).collect();
    match nodes.windows(2).position(|pair| pair[0] >= pair[1]) {
        Some(i) => Err(MeshError::RepeatedPoint { what, first: i, second: i + 1, at: vec![nodes[i]] }),
        None => Ok(nodes),
    }
}

fn named_sides(triangles: &[[VertexId; 3]], nx: usize, ny: usize, names: [SideNameId; 4]) -> Vec<NamedSide> {
    let corners = (nx + 1) * (ny + 1);
    // Which of left, right, bottom, top a vertex lies on.
    let touches = |v: VertexId| {
        let (row, column) = (v.index() / (nx + 1), v.index() % (nx + 1));
        [column == 0, column == nx, row == 0, row == ny].map(|on| on && v.index() < corners)
    };
    let mut sides = Vec::with_capacity(2 * (nx + ny));
    for (cell, v) in triangles.iter().enumerate() {
        for local in 0..3 {
            let (a, b) = (touches(v[local]), touches(v[(local + 1) % 3]));
            if let Some(i) = (0..4).find(|i| a[*i] && b[*i]) {
                sides.push(NamedSide { cell: CellId(cell as u32), local: local as u8, name: names[i] });
            }
        }
    }
    sides
}

#[cfg(test)]
mod tests {
    use super::*;

    const ALL: [Diagonal; 4] = [Diagonal::Rising, Diagonal::Falling, Diagonal::Alternating, Diagonal::Crossed];

    fn side_length(mesh: &Mesh<2>, name: &str) -> f64 {
        let name = mesh.find_side(name).unwrap();
        mesh.named_sides().iter().filter(|s| s.name == name).map(|s| mesh.side_measure(s.cell, s.local)).sum()
    }

    #[test]
    fn area_side_lengths_and_euler_formula_are_exact() {
        for diagonal in ALL {
            for counts in [[1, 1], [3, 5], [8, 1]] {
                let mesh = Rectangle::new([-1.0, 2.0], [2.0, 4.0], counts).diagonal(diagonal).mesh().unwrap();
                assert!((mesh.measure() - 6.0).abs() < 1e-13);
                let lengths = ["left", "right", "bottom", "top"].map(|name| side_length(&mesh, name));
                for (length, exact) in lengths.iter().zip([2.0, 2.0, 3.0, 3.0]) {
                    assert!((length - exact).abs() < 1e-13);
                }
                for (name, axis, exact) in [("left", 0, -1.0), ("right", 0, 2.0), ("bottom", 1, 2.0), ("top", 1, 4.0)] {
                    let name = mesh.find_side(name).unwrap();
                    for side in mesh.named_sides().iter().filter(|s| s.name == name) {
                        let ends = mesh.side_vertices(side.cell, side.local);
                        assert!(ends.iter().all(|v| mesh.point(*v)[axis] == exact));
                    }
                }
                // Euler: vertices − edges + faces = 1 without the outer face.
                let topology = mesh.topology();
                assert_eq!(mesh.vertex_count() + mesh.cell_count(), topology.side_count() + 1);
                assert_eq!(topology.boundary_sides().count(), mesh.named_sides().len());
            }
        }
    }

    #[test]
    fn triangles_are_counterclockwise_and_begin_with_their_longest_side() {
        for diagonal in ALL {
            for high in [[1.0, 1.0], [1.0, 5.0], [7.0, 1.0]] {
                let mesh = Rectangle::new([0.0, 0.0], high, [3, 4]).diagonal(diagonal).mesh().unwrap();
                for cell in mesh.cells() {
                    assert!(mesh.cell_measure(cell) > 0.0);
                    assert!((mesh.side_measure(cell, 0) - mesh.cell_diameter(cell)).abs() < 1e-14);
                }
            }
        }
    }

    #[test]
    fn alternating_diagonals_meet_in_every_other_vertex() {
        let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).diagonal(Diagonal::Alternating).mesh().unwrap();
        assert_eq!(mesh.topology().cells_around(VertexId(4)).len(), 8);
        assert_eq!(mesh.topology().cells_around(VertexId(1)).len(), 2);
    }

    #[test]
    fn names_are_taken_and_may_be_shared() {
        let mesh = Rectangle::new([0.0; 2], [1.0; 2], [2, 2])
            .region("foam")
            .sides(["wall", "wall", "in", "out"])
            .mesh()
            .unwrap();
        assert_eq!(mesh.region_name(mesh.region(CellId(7))), "foam");
        assert_eq!(mesh.side_names().len(), 3);
        assert!((side_length(&mesh, "wall") - 2.0).abs() < 1e-15);
    }

    #[test]
    fn wrong_rectangles_are_told_with_their_place() {
        let error = |low, high, counts| Rectangle::new(low, high, counts).mesh().unwrap_err();
        assert!(matches!(
            error([0.0, f64::NAN], [1.0, 1.0], [1, 1]),
            MeshError::NotFinite { what: "corner", index: 0, .. }
        ));
        assert!(
            matches!(error([0.0, 0.0], [1.0, -1.0], [1, 1]), MeshError::NotPositive { value, .. } if value == -1.0)
        );
        assert!(
            matches!(error([0.0, 0.0], [1.0, 1.0], [1, 0]), MeshError::NotPositive { what, .. } if what.ends_with('y'))
        );
        assert!(matches!(
            error([1.0, 0.0], [1.0 + 4.0 * f64::EPSILON, 1.0], [8, 1]),
            MeshError::RepeatedPoint { what: "column", .. }
        ));
        assert!(matches!(error([0.0; 2], [1.0; 2], [usize::MAX, 2]), MeshError::TooMany { .. }));
        assert!(matches!(error([-1e308, 0.0], [1e308, 1.0], [1, 1]), MeshError::NotPositive { .. }));
    }
}
