//! Reference cells.

/// The shape of a cell, with its reference cell.
///
/// Reference cells have their first vertex at the origin: the interval is [0, 1], the triangle has the vertices
/// (0, 0), (1, 0), (0, 1). Side `i` of a triangle runs from vertex `i` to vertex `i + 1` (cyclically), so that
/// walking along the sides leaves the cell on the left; side `i` of an interval is its vertex `i`.
///
/// ```
/// use hypercircle_element::Shape;
/// assert_eq!(Shape::Triangle.vertex_count(), 3);
/// assert_eq!(Shape::Triangle.side_vertices(2), &[2, 0]);
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum Shape {
    /// The unit interval [0, 1].
    Interval,
    /// The unit triangle with the vertices (0, 0), (1, 0), (0, 1).
    Triangle,
}

impl Shape {
    /// The simplex of a dimension: the interval for 1, the triangle for 2, none otherwise.
    #[must_use]
    pub const fn simplex(dimension: usize) -> Option<Self> {
        match dimension {
            1 => Some(Self::Interval),
            2 => Some(Self::Triangle),
            _ => None,
        }
    }

    /// Dimension of the cell.
    #[must_use]
    pub const fn dimension(self) -> usize {
        match self {
            Self::Interval => 1,
            Self::Triangle => 2,
        }
    }

    /// Number of vertices, which is also the number of sides.
    #[must_use]
    pub const fn vertex_count(self) -> usize {
        match self {
            Self::Interval => 2,
            Self::Triangle => 3,
        }
    }

    /// Coordinates of the reference vertices; the second coordinate of an interval is 0.
    #[must_use]
    pub const fn vertices(self) -> &'static [[f64; 2]] {
        match self {
            Self::Interval => &[[0.0, 0.0], [1.0, 0.0]],
            Self::Triangle => &[[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]],
        }
    }

    /// Local vertices of a side, in walking order. Sides are numbered modulo their count.
    #[must_use]
    pub const fn side_vertices(self, side: usize) -> &'static [usize] {
        const INTERVAL: [[usize; 1]; 2] = [[0], [1]];
        const TRIANGLE: [[usize; 2]; 3] = [[0, 1], [1, 2], [2, 0]];
        match self {
            Self::Interval => &INTERVAL[side % 2],
            Self::Triangle => &TRIANGLE[side % 3],
        }
    }

    /// Length of the interval (1) or area of the triangle (1/2).
    #[must_use]
    pub const fn measure(self) -> f64 {
        match self {
            Self::Interval => 1.0,
            Self::Triangle => 0.5,
        }
    }

    /// Values of the vertex functions (hats) at a reference point, in vertex order.
    #[must_use]
    pub fn hats(self, at: &[f64]) -> [f64; 3] {
        match self {
            Self::Interval => [1.0 - at[0], at[0], 0.0],
            Self::Triangle => [1.0 - at[0] - at[1], at[0], at[1]],
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hats_are_one_at_their_vertex_and_zero_at_the_others() {
        for shape in [Shape::Interval, Shape::Triangle] {
            for (i, vertex) in shape.vertices().iter().enumerate() {
                for (j, hat) in shape.hats(vertex).iter().take(shape.vertex_count()).enumerate() {
                    assert!((hat - f64::from(u8::from(i == j))).abs() < 1e-15);
                }
            }
        }
    }
}
