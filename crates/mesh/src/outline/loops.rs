//! Closed loops of straight sides, and what can be wrong with one.

use robust::{Coord, orient2d};
use rstar::primitives::{GeomWithData, Rectangle as Frame};
use rstar::{AABB, RTree};

use crate::MeshError;

/// A closed loop of straight sides, in either orientation. Made by [`polygon`], [`rectangle`] or
/// [`regular_polygon`]; checked when it is stated as a region or hole of an [`crate::Outline`].
#[derive(Debug, Clone, PartialEq)]
pub struct Polygon {
    corners: Vec<[f64; 2]>,
}

impl Polygon {
    /// The corners in order; the side from the last to the first closes the loop.
    #[must_use]
    pub fn corners(&self) -> &[[f64; 2]] {
        &self.corners
    }

    /// Area, positive for counterclockwise corners: ½ Σ (xᵢ yᵢ₊₁ − xᵢ₊₁ yᵢ), in square meters for corners in meters.
    #[must_use]
    pub fn signed_area(&self) -> f64 {
        let Some(origin) = self.corners.first() else { return 0.0 };
        let shifted = |p: &[f64; 2]| [p[0] - origin[0], p[1] - origin[1]];
        self.sides().map(|[a, b]| (shifted(&a), shifted(&b))).map(|(a, b)| 0.5 * (a[0] * b[1] - b[0] * a[1])).sum()
    }

    /// The area inside this loop and outside another one within it.
    ///
    /// ```
    /// use hypercircle_mesh::{Outline, rectangle, regular_polygon};
    /// let mut pipe = Outline::new();
    /// pipe.region("wall", regular_polygon((0.0, 0.0), 0.1, 24).without(rectangle((-0.05, -0.05), (0.05, 0.05))))?;
    /// let area = 12.0 * (std::f64::consts::PI / 12.0).sin() * 0.01 - 0.01;
    /// assert!((pipe.mesh(0.02)?.measure() - area).abs() < 1e-15);
    /// # Ok::<(), hypercircle_mesh::MeshError>(())
    /// ```
    #[must_use]
    pub fn without(self, opening: Self) -> Area {
        Area::from(self).without(opening)
    }

    /// The sides in order.
    pub(super) fn sides(&self) -> impl Iterator<Item = [[f64; 2]; 2]> + '_ {
        let n = self.corners.len();
        (0..n).map(move |i| [self.corners[i], self.corners[(i + 1) % n]])
    }
}

/// The loop through the given corners. The first corner may be repeated at the end or not: the loop is closed.
///
/// ```
/// use hypercircle_mesh::polygon;
/// let triangle = polygon(&[(0.0, 0.0), (4.0, 0.0), (0.0, 3.0)]);
/// assert_eq!(triangle.signed_area(), 6.0);
/// ```
#[must_use]
pub fn polygon(corners: &[(f64, f64)]) -> Polygon {
    let mut corners: Vec<[f64; 2]> = corners.iter().map(|c| [c.0, c.1]).collect();
    if corners.len() > 1 && corners.first() == corners.last() {
        corners.pop();
    }
    Polygon { corners }
}

/// The rectangle with sides along the axes between two opposite corners.
#[must_use]
pub fn rectangle(corner: (f64, f64), opposite: (f64, f64)) -> Polygon {
    polygon(&[corner, (opposite.0, corner.1), opposite, (corner.0, opposite.1)])
}

/// The regular polygon with its corners on a circle, the first to the right of the center. Its area is
/// n/2 · sin(2π/n) · radius², which is the disk's but for a factor 1 − 2π²/(3n²).
#[must_use]
pub fn regular_polygon(center: (f64, f64), radius: f64, corners: usize) -> Polygon {
    let angle = |i: usize| std::f64::consts::TAU * i as f64 / corners as f64;
    let corner = |i: usize| [center.0 + radius * angle(i).cos(), center.1 + radius * angle(i).sin()];
    Polygon { corners: (0..corners).map(corner).collect() }
}

/// An area: a loop, less the openings inside it.
#[derive(Debug, Clone, PartialEq)]
pub struct Area {
    pub(super) outer: Polygon,
    pub(super) openings: Vec<Polygon>,
}

impl From<Polygon> for Area {
    fn from(outer: Polygon) -> Self {
        Self { outer, openings: Vec::new() }
    }
}

impl Area {
    /// This area less the inside of one more loop. The opening is a hole without name unless another region fills it.
    #[must_use]
    pub fn without(mut self, opening: Polygon) -> Self {
        self.openings.push(opening);
        self
    }

    /// All loops, the outer one first.
    pub(super) fn loops(&self) -> impl Iterator<Item = &Polygon> {
        std::iter::once(&self.outer).chain(&self.openings)
    }

    /// Whether a point lies inside, by the number of sides to its right (odd: inside).
    pub(super) fn contains(&self, x: [f64; 2]) -> bool {
        let right = |[a, b]: &[[f64; 2]; 2]| {
            (a[1] > x[1]) != (b[1] > x[1]) && x[0] < a[0] + (x[1] - a[1]) / (b[1] - a[1]) * (b[0] - a[0])
        };
        self.loops().flat_map(Polygon::sides).filter(right).count() % 2 == 1
    }

    /// Checks each loop by itself.
    pub(super) fn check(&self, name: &str) -> Result<(), MeshError> {
        self.loops().try_for_each(|l| check_loop(name, l))?;
        match self.openings.iter().find_map(|o| o.corners.iter().find(|c| !self.touches(**c))) {
            Some(at) => Err(fault(name, LoopFault::Outside, *at)),
            None => Ok(()),
        }
    }

    /// Whether a point lies inside the outer loop or on it.
    fn touches(&self, x: [f64; 2]) -> bool {
        let outer = Self::from(self.outer.clone());
        let tolerance = RESOLUTION * extent(&self.outer.corners);
        outer.contains(x) || self.outer.sides().any(|[a, b]| distance_to_segment(x, a, b) <= tolerance)
    }
}

/// What can be wrong with one loop of an outline.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum LoopFault {
    /// Fewer than three corners.
    TooFewCorners,
    /// A corner that is NaN, infinite, or beyond 1e50.
    NotFinite,
    /// Two corners at the same place.
    RepeatedCorner,
    /// A side crosses or touches another side of the same loop.
    CrossesItself,
    /// All corners on one line.
    NoArea,
    /// A hole beside the regions, or an opening beside its loop.
    Outside,
    /// A region of which later regions and holes leave nothing.
    Hidden,
}

impl LoopFault {
    /// What to do about it.
    #[must_use]
    pub fn mend(self) -> &'static str {
        match self {
            Self::TooFewCorners => "give at least three corners",
            Self::NotFinite => "give finite coordinates of ordinary size",
            Self::RepeatedCorner => "give each corner once",
            Self::CrossesItself => "put the corners in order along the border, and state parts that only touch singly",
            Self::NoArea => "give corners that are not all on one line",
            Self::Outside => "move it within the regions or state the region around it",
            Self::Hidden => "state it after what it lies on and clear of holes, or leave it out",
        }
    }
}

impl std::fmt::Display for LoopFault {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Self::TooFewCorners => "has fewer than three corners",
            Self::NotFinite => "has a corner that is not finite",
            Self::RepeatedCorner => "repeats a corner",
            Self::CrossesItself => "crosses or touches itself",
            Self::NoArea => "encloses no area",
            Self::Outside => "lies outside its region",
            Self::Hidden => "is covered entirely by what is stated after it",
        })
    }
}

/// Places closer than this fraction of the outline's extent are one place.
pub(super) const RESOLUTION: f64 = 1e-10;

/// The larger side of the box around points.
pub(super) fn extent(points: &[[f64; 2]]) -> f64 {
    let width = |i: usize| {
        let low = points.iter().map(|p| p[i]).fold(f64::INFINITY, f64::min);
        points.iter().map(|p| p[i]).fold(f64::NEG_INFINITY, f64::max) - low
    };
    width(0).max(width(1))
}

pub(super) fn fault(name: &str, fault: LoopFault, at: [f64; 2]) -> MeshError {
    MeshError::Loop { name: name.to_owned(), fault, at: at.to_vec() }
}

/// Position of the point of segment ab nearest to x, from 0 at a to 1 at b.
pub(super) fn nearest_parameter(x: [f64; 2], a: [f64; 2], b: [f64; 2]) -> f64 {
    let (dx, dy) = (b[0] - a[0], b[1] - a[1]);
    let square = dx * dx + dy * dy;
    if square == 0.0 { 0.0 } else { (((x[0] - a[0]) * dx + (x[1] - a[1]) * dy) / square).clamp(0.0, 1.0) }
}

pub(super) fn distance_to_segment(x: [f64; 2], a: [f64; 2], b: [f64; 2]) -> f64 {
    let t = nearest_parameter(x, a, b);
    (x[0] - a[0] - t * (b[0] - a[0])).hypot(x[1] - a[1] - t * (b[1] - a[1]))
}

/// Twice the signed area of the triangle abc; its sign is exact.
#[inline]
pub(super) fn orientation(a: [f64; 2], b: [f64; 2], c: [f64; 2]) -> f64 {
    orient2d(Coord { x: a[0], y: a[1] }, Coord { x: b[0], y: b[1] }, Coord { x: c[0], y: c[1] })
}

/// Whether two segments cross within both.
pub(super) fn cross([a, b]: [[f64; 2]; 2], [c, d]: [[f64; 2]; 2]) -> bool {
    let apart = |p: f64, q: f64| (p < 0.0 && q > 0.0) || (p > 0.0 && q < 0.0);
    apart(orientation(a, b, c), orientation(a, b, d)) && apart(orientation(c, d, a), orientation(c, d, b))
}

/// The point where two crossing segments meet.
pub(super) fn crossing_point([a, b]: [[f64; 2]; 2], [c, d]: [[f64; 2]; 2]) -> [f64; 2] {
    let (before, after) = (orientation(c, d, a), orientation(c, d, b));
    let t = before / (before - after);
    [a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])]
}

/// Boxes around segments, for the question which of them may meet.
pub(super) fn segment_tree(segments: &[[[f64; 2]; 2]]) -> RTree<GeomWithData<Frame<[f64; 2]>, u32>> {
    let boxed = |(i, s): (usize, &[[f64; 2]; 2])| GeomWithData::new(Frame::from_corners(s[0], s[1]), i as u32);
    RTree::bulk_load(segments.iter().enumerate().map(boxed).collect())
}

/// The box around a segment, widened.
pub(super) fn around([a, b]: [[f64; 2]; 2], margin: f64) -> AABB<[f64; 2]> {
    let low = [a[0].min(b[0]) - margin, a[1].min(b[1]) - margin];
    AABB::from_corners(low, [a[0].max(b[0]) + margin, a[1].max(b[1]) + margin])
}

fn check_loop(name: &str, polygon: &Polygon) -> Result<(), MeshError> {
    let corners = &polygon.corners;
    let ordinary = |c: &&[f64; 2]| !(c[0].abs() <= 1e50 && c[1].abs() <= 1e50);
    if let Some(at) = corners.iter().find(ordinary) {
        return Err(fault(name, LoopFault::NotFinite, *at));
    }
    let first = corners.first().copied().unwrap_or_default();
    if corners.len() < 3 {
        return Err(fault(name, LoopFault::TooFewCorners, first));
    }
    let tolerance = RESOLUTION * extent(corners);
    if let Some([a, _]) = polygon.sides().find(|[a, b]| (a[0] - b[0]).hypot(a[1] - b[1]) <= tolerance) {
        return Err(fault(name, LoopFault::RepeatedCorner, a));
    }
    let line = |c: &[f64; 2]| {
        let far = corners.iter().max_by(|p, q| distance(**p, first).total_cmp(&distance(**q, first))).unwrap_or(c);
        distance_to_segment(*c, first, *far).min(nearest_line(*c, first, *far)) <= tolerance
    };
    if corners.iter().all(line) {
        return Err(fault(name, LoopFault::NoArea, first));
    }
    check_simple(name, polygon, tolerance)
}

fn distance(a: [f64; 2], b: [f64; 2]) -> f64 {
    (a[0] - b[0]).hypot(a[1] - b[1])
}

fn nearest_line(x: [f64; 2], a: [f64; 2], b: [f64; 2]) -> f64 {
    (orientation(a, b, x) / distance(a, b)).abs()
}

/// No side meets another one, save neighbors at their common corner.
fn check_simple(name: &str, polygon: &Polygon, tolerance: f64) -> Result<(), MeshError> {
    let sides: Vec<_> = polygon.sides().collect();
    let tree = segment_tree(&sides);
    let n = sides.len();
    for (i, side) in sides.iter().enumerate() {
        let mut near: Vec<usize> = tree
            .locate_in_envelope_intersecting(around(*side, tolerance))
            .map(|other| other.data as usize)
            .filter(|j| *j != i)
            .collect();
        near.sort_unstable();
        for j in near {
            // The corner where side j begins, unless it ends side i as well.
            let corner = sides[j][0];
            if j != (i + 1) % n && j != i && distance_to_segment(corner, side[0], side[1]) <= tolerance {
                let fault_is = if distance(corner, side[0]) <= tolerance || distance(corner, side[1]) <= tolerance {
                    LoopFault::RepeatedCorner
                } else {
                    LoopFault::CrossesItself
                };
                return Err(fault(name, fault_is, corner));
            }
            if i < j && cross(*side, sides[j]) {
                return Err(fault(name, LoopFault::CrossesItself, crossing_point(*side, sides[j])));
            }
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn fault_of(corners: &[(f64, f64)]) -> (LoopFault, Vec<f64>) {
        match Area::from(polygon(corners)).check("plate") {
            Err(MeshError::Loop { name, fault, at }) if name == "plate" => (fault, at),
            other => panic!("{other:?}"),
        }
    }

    #[test]
    fn each_fault_has_its_name_and_place() {
        assert_eq!(fault_of(&[]).0, LoopFault::TooFewCorners);
        assert_eq!(fault_of(&[(1.0, 2.0), (3.0, 4.0), (1.0, 2.0)]), (LoopFault::TooFewCorners, vec![1.0, 2.0]));
        assert_eq!(fault_of(&[(0.0, 0.0), (1.0, f64::NAN), (0.0, 1.0)]).0, LoopFault::NotFinite);
        assert_eq!(fault_of(&[(0.0, 0.0), (f64::INFINITY, 1.0), (0.0, 1.0)]).1[0], f64::INFINITY);
        let repeated = [(0.0, 0.0), (1.0, 0.0), (1.0, 0.0), (0.0, 1.0)];
        assert_eq!(fault_of(&repeated), (LoopFault::RepeatedCorner, vec![1.0, 0.0]));
        let nearly = [(0.0, 0.0), (1.0, 0.0), (1.0, 1e-14), (0.0, 1.0)];
        assert_eq!(fault_of(&nearly), (LoopFault::RepeatedCorner, vec![1.0, 0.0]));
        let line = [(0.0, 0.0), (1.0, 1.0), (3.0, 3.0), (2.0, 2.0)];
        assert_eq!(fault_of(&line), (LoopFault::NoArea, vec![0.0, 0.0]));
        let bow = [(0.0, 0.0), (1.0, 1.0), (1.0, 0.0), (0.0, 1.0)];
        assert_eq!(fault_of(&bow), (LoopFault::CrossesItself, vec![0.5, 0.5]));
        let spike = [(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (2.0, 0.5), (0.0, 0.5)];
        assert_eq!(fault_of(&spike), (LoopFault::CrossesItself, vec![2.0, 0.5]));
        let touching = [(0.0, 0.0), (2.0, 0.0), (2.0, 2.0), (1.0, 0.0), (0.0, 2.0)];
        assert_eq!(fault_of(&touching), (LoopFault::CrossesItself, vec![1.0, 0.0]));
        let eight = [(0.0, 0.0), (1.0, 1.0), (2.0, 0.0), (2.0, 2.0), (1.0, 1.0), (0.0, 2.0)];
        assert_eq!(fault_of(&eight), (LoopFault::RepeatedCorner, vec![1.0, 1.0]));
    }

    #[test]
    fn openings_lie_inside() {
        let plate = || rectangle((0.0, 0.0), (2.0, 1.0));
        assert_eq!(plate().without(rectangle((0.5, 0.0), (1.0, 0.5))).check("plate"), Ok(()));
        let beside = plate().without(rectangle((1.5, 0.5), (2.5, 0.75))).check("plate");
        assert_eq!(beside, Err(fault("plate", LoopFault::Outside, [2.5, 0.5])));
    }

    #[test]
    fn closing_corner_orientation_and_area() {
        let open = [(0.0, 0.0), (2.0, 0.0), (2.0, 3.0)];
        assert_eq!(polygon(&open), polygon(&[open[0], open[1], open[2], open[0]]));
        assert_eq!(polygon(&open).signed_area(), 3.0);
        assert_eq!(polygon(&[open[2], open[1], open[0]]).signed_area(), -3.0);
        assert_eq!(rectangle((1.0, 1.0), (-1.0, 4.0)).signed_area(), -6.0);
        assert!((regular_polygon((5.0, 5.0), 2.0, 4).signed_area() - 8.0).abs() < 1e-14);
    }

    #[test]
    fn points_in_areas_and_crossing_segments() {
        let frame = rectangle((0.0, 0.0), (3.0, 3.0)).without(rectangle((1.0, 1.0), (2.0, 2.0)));
        assert!(frame.contains([0.5, 1.5]) && frame.contains([1.5, 2.5]));
        assert!(!frame.contains([1.5, 1.5]) && !frame.contains([3.5, 1.5]));
        let (p, q) = ([[0.0, 0.0], [2.0, 2.0]], [[0.0, 1.0], [1.0, 0.0]]);
        assert!(cross(p, q));
        assert_eq!(crossing_point(p, q), [0.5, 0.5]);
        assert!(!cross(p, [[1.0, 1.0], [2.0, 0.0]]), "touching is no crossing");
        assert_eq!(distance_to_segment([3.0, 2.0], p[0], p[1]), 1.0);
    }
}
