//! How a single cell is halved, and where the sides of its parts come from.

use crate::VertexId;

/// Stands for an edge that is not halved.
pub(crate) const WHOLE: u32 = u32::MAX;
/// Stands for a part's side that lies inside the cell.
const INNER: u8 = u8::MAX;

/// A part of a cell: its vertices, and for each of its sides the side of the cell it lies on. Intervals use the first
/// two entries.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Part {
    pub(crate) vertices: [VertexId; 3],
    pub(crate) on: [u8; 3],
}

impl Part {
    pub(crate) fn interval([a, b]: [VertexId; 2]) -> Self {
        Self { vertices: [a, b, b], on: [0, 1, INNER] }
    }

    pub(crate) fn triangle(vertices: [VertexId; 3]) -> Self {
        Self { vertices, on: [0, 1, 2] }
    }

    pub(crate) fn interval_halves(self, middle: VertexId) -> [Self; 2] {
        let [a, b, _] = self.vertices;
        [
            Self { vertices: [a, middle, middle], on: [self.on[0], INNER, INNER] },
            Self { vertices: [middle, b, b], on: [INNER, self.on[1], INNER] },
        ]
    }

    /// Newest vertex bisection: from the middle of side 0 to the vertex opposite; the sides 0 of the halves lie
    /// opposite to the middle.
    pub(crate) fn triangle_halves(self, middle: VertexId) -> [Self; 2] {
        let [a, b, c] = self.vertices;
        let [ab, bc, ca] = self.on;
        [Self { vertices: [c, a, middle], on: [ca, ab, INNER] }, Self { vertices: [b, c, middle], on: [bc, INNER, ab] }]
    }

    /// Adds the halves, or the whole if there is no middle.
    pub(crate) fn halved_if(self, middle: u32, halves: impl Fn(Self, VertexId) -> [Self; 2], parts: &mut Vec<Self>) {
        if middle == WHOLE {
            parts.push(self);
        } else {
            parts.extend(halves(self, VertexId(middle)));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn halves_of_a_triangle_keep_its_turn_and_know_its_sides() {
        let whole = Part::triangle([7, 8, 9].map(VertexId));
        let [first, second] = whole.triangle_halves(VertexId(20));
        assert_eq!((first.vertices, first.on), ([9, 7, 20].map(VertexId), [2, 0, INNER]));
        assert_eq!((second.vertices, second.on), ([8, 9, 20].map(VertexId), [1, INNER, 0]));
    }

    #[test]
    fn without_a_middle_the_part_stays_whole() {
        let mut parts = Vec::new();
        Part::interval([3, 4].map(VertexId)).halved_if(WHOLE, Part::interval_halves, &mut parts);
        Part::interval([3, 4].map(VertexId)).halved_if(9, Part::interval_halves, &mut parts);
        let ends: Vec<_> = parts.iter().map(|part| (part.vertices[0].0, part.vertices[1].0)).collect();
        assert_eq!(ends, [(3, 4), (3, 9), (9, 4)]);
    }
}
