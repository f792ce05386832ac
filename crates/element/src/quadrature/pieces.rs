//! The pieces of an adaptive integration: cells that can be halved, with their integrals.

use std::cmp::Ordering;
use std::collections::BinaryHeap;

/// All pieces with their sums, which are kept up to date piece by piece and summed anew before they count.
pub(super) struct Pieces<C> {
    heap: BinaryHeap<Aged<C>>,
    value: f64,
    error: f64,
    /// Number of pieces made so far.
    made: usize,
    /// When so many are made, the sums are due.
    recount: usize,
}

impl<C: Cell> Pieces<C> {
    pub(super) fn new() -> Self {
        Self { heap: BinaryHeap::new(), value: 0.0, error: 0.0, made: 0, recount: 0 }
    }

    pub(super) fn value(&self) -> f64 {
        self.value
    }

    pub(super) fn error(&self) -> f64 {
        self.error
    }

    pub(super) fn len(&self) -> usize {
        self.heap.len()
    }

    pub(super) fn push(&mut self, piece: Piece<C>) {
        self.value += piece.value;
        self.error += piece.error;
        self.heap.push(Aged { piece, number: self.made });
        self.made += 1;
    }

    /// The halves of the piece with the largest error, unless it is all rounding or too small.
    pub(super) fn halves_of_worst(&self) -> Option<[C; 2]> {
        let worst = &self.heap.peek()?.piece;
        if worst.rounded { None } else { worst.cell.halves() }
    }

    /// Takes the piece with the largest error away; tells its error.
    pub(super) fn drop_worst(&mut self) -> f64 {
        self.heap.pop().map_or(0.0, |worst| {
            self.value -= worst.piece.value;
            self.error -= worst.piece.error;
            worst.piece.error
        })
    }

    /// Whether so many pieces were made that rounding may have spoilt the running sums.
    pub(super) fn must_recount(&self) -> bool {
        self.made >= self.recount
    }

    /// Sums in the order in which the pieces were made.
    pub(super) fn sum_up(&mut self) {
        let mut parts: Vec<_> = self.heap.iter().map(|p| (p.number, p.piece.value, p.piece.error)).collect();
        parts.sort_unstable_by_key(|p| p.0);
        (self.value, self.error) = parts.iter().fold((0.0, 0.0), |(value, error), p| (value + p.1, error + p.2));
        self.recount = self.made + self.made / 4 + 8;
    }
}

/// Points on the reference cell with the weights of two rules.
pub(super) struct Tables {
    pub(super) points: Vec<[f64; 2]>,
    pub(super) better: Vec<f64>,
    pub(super) worse: Vec<f64>,
}

impl Tables {
    /// Value and error (at least `inherited`) on a cell, or the point where the function is not finite.
    pub(super) fn piece<C: Cell>(
        &self,
        cell: C,
        inherited: f64,
        function: &mut impl FnMut([f64; 2]) -> f64,
    ) -> Result<Piece<C>, [f64; 2]> {
        let (mut better, mut worse, mut size) = (0.0, 0.0, 0.0);
        for (i, x) in self.points.iter().enumerate() {
            let at = cell.place(*x);
            let f = function(at);
            if !f.is_finite() {
                return Err(at);
            }
            better += self.better[i] * f;
            worse += self.worse[i] * f;
            size += self.better[i] * f.abs();
        }
        let scale = cell.scale();
        let (difference, rounding) = ((better - worse).abs(), 4.0 * f64::EPSILON * size);
        let least = scale.abs() * rounding;
        let error = (scale.abs() * difference).max(inherited).max(least);
        Ok(Piece { cell, value: scale * better, error, rounded: error <= least })
    }
}

/// A part of the domain of integration.
pub(super) trait Cell: Copy {
    /// Part of the error of a piece that each half keeps at least: a half whose points all miss a jump looks exact, but
    /// comes from a piece that was not. Smooth functions lose more than this by halving.
    const INHERITED: f64;
    /// The place of a reference point.
    fn place(&self, at: [f64; 2]) -> [f64; 2];
    /// Ratio of its measure to that of the reference cell.
    fn scale(&self) -> f64;
    /// Its two halves, if floating point numbers can tell them apart.
    fn halves(&self) -> Option<[Self; 2]>;
}

/// An interval from a to b.
#[derive(Clone, Copy)]
pub(super) struct Segment {
    pub(super) a: f64,
    pub(super) b: f64,
}

impl Cell for Segment {
    const INHERITED: f64 = 1.0 / 4096.0;

    fn place(&self, at: [f64; 2]) -> [f64; 2] {
        // From the nearer end, so that points next to a singular end keep their digits.
        let length = self.b - self.a;
        [if at[0] < 0.5 { self.a + at[0] * length } else { self.b - (1.0 - at[0]) * length }, 0.0]
    }

    fn scale(&self) -> f64 {
        self.b - self.a
    }

    fn halves(&self) -> Option<[Self; 2]> {
        let middle = self.a + 0.5 * (self.b - self.a);
        let distinct = middle != self.a && middle != self.b;
        distinct.then_some([Self { a: self.a, b: middle }, Self { a: middle, b: self.b }])
    }
}

/// A triangle.
#[derive(Clone, Copy)]
pub(super) struct Patch {
    pub(super) vertices: [[f64; 2]; 3],
}

impl Cell for Patch {
    const INHERITED: f64 = 1.0 / 64.0;

    fn place(&self, at: [f64; 2]) -> [f64; 2] {
        let [a, b, c] = self.vertices;
        [0, 1].map(|i| a[i] + at[0] * (b[i] - a[i]) + at[1] * (c[i] - a[i]))
    }

    fn scale(&self) -> f64 {
        let [a, b, c] = self.vertices;
        ((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])).abs()
    }

    fn halves(&self) -> Option<[Self; 2]> {
        let v = self.vertices;
        let length = |i: usize| (v[(i + 1) % 3][0] - v[i][0]).hypot(v[(i + 1) % 3][1] - v[i][1]);
        let longest = (1..3).fold(0, |best, i| if length(i) > length(best) { i } else { best });
        let (a, b, c) = (v[longest], v[(longest + 1) % 3], v[(longest + 2) % 3]);
        let middle = [0, 1].map(|i| a[i] + 0.5 * (b[i] - a[i]));
        let distinct = middle != a && middle != b;
        distinct.then_some([Self { vertices: [a, middle, c] }, Self { vertices: [middle, b, c] }])
    }
}

/// A cell with its integral.
pub(super) struct Piece<C> {
    cell: C,
    value: f64,
    error: f64,
    /// Whether the error is all rounding.
    rounded: bool,
}

/// A piece with its number in the order of making; ordered by error, then by age.
struct Aged<C> {
    piece: Piece<C>,
    number: usize,
}

impl<C> Ord for Aged<C> {
    fn cmp(&self, other: &Self) -> Ordering {
        self.piece.error.total_cmp(&other.piece.error).then(other.number.cmp(&self.number))
    }
}

impl<C> PartialOrd for Aged<C> {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl<C> PartialEq for Aged<C> {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other).is_eq()
    }
}

impl<C> Eq for Aged<C> {}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn halves_share_the_longest_side_and_the_area() {
        let whole = Patch { vertices: [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]] };
        let [a, b] = whole.halves().unwrap();
        assert!(a.scale() == 0.5 && b.scale() == 0.5);
        assert!(a.vertices.contains(&[0.5, 0.5]) && b.vertices.contains(&[0.5, 0.5]));
        assert!(Patch { vertices: [[1.0, 1.0]; 3] }.halves().is_none());
        assert!(Segment { a: 1.0, b: 1.0 + f64::EPSILON }.halves().is_none());
    }

    /// Points next to an end keep their distance from it.
    #[test]
    fn places_keep_their_digits_at_both_ends() {
        let tiny = Segment { a: -1e-300, b: 0.0 };
        assert!(
            tiny.place([0.999, 0.0])[0] < 0.0
                && tiny.place([1.0, 0.0])[0] == 0.0
                && tiny.place([0.0, 0.0])[0] == -1e-300
        );
    }
}
