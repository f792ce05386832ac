//! Delaunay refinement: segments are halved until nothing crowds them, triangles get a vertex near their circumcenter
//! until they are small enough and not too pointed.
//!
//! # Source
//! J. Ruppert, A Delaunay refinement algorithm for quality 2-dimensional mesh generation, J. Algorithms 18 (1995);
//! A. Üngör's off-centers (2004); for small angles of the input G. Miller, S. Pav, N. Walkington, When and why Delaunay
//! refinement algorithms work (2003): segments that meet at a small angle are split on concentric circles, and a
//! triangle whose shortest side joins two such segments is left alone.

use std::collections::VecDeque;

use super::insert::{Cavity, Spot};
use super::pieces::too_many;
use super::regions::Border;
use super::sizes::SizeField;
use super::triangulation::{NONE, Triangulation, next, previous};
use crate::MeshError;

/// Triangles with an angle smaller than this (in degrees) get a new vertex.
const POINTED: f64 = 28.0;
/// Longest side allowed, in sizes: half a square of the size wanted is just good.
const TOO_LONG: f64 = 1.45;
/// Segments that meet at less than this angle (cos 60°) are split on circles around the common end.
const SMALL_ANGLE_COSINE: f64 = 0.5 + 1e-9;
/// Triangles between segments that meet at less than this angle (cos 30°) may keep it.
const GIVEN_ANGLE_COSINE: f64 = 0.866;
/// Queues of triangles, the most pointed first, the merely large last.
const QUEUES: usize = 9;

/// Half-edges by vertices rather than number, so that a note stays true when triangles change.
type Ends = [u32; 2];

pub(super) struct Refinement<'a> {
    mesh: Triangulation,
    cavity: Cavity,
    given: Given<'a>,
    /// Whether a corner has borders that meet at a small angle.
    sharp: Vec<bool>,
    crowded: VecDeque<Ends>,
    bad: Vec<VecDeque<(u32, [u32; 3])>>,
    sine_squared: f64,
    off_center: f64,
}

/// What refinement has to know beside the triangles.
#[derive(Debug)]
pub(super) struct Given<'a> {
    pub(super) sizes: &'a SizeField,
    pub(super) borders: &'a [Border],
    /// The border each vertex lies on; [`NONE`] for ends of borders, which come first, and for inner vertices.
    pub(super) border_of: Vec<u32>,
    /// How many vertices are ends of borders.
    pub(super) corner_count: u32,
    /// Segments shorter than this are not split any more.
    pub(super) shortest: f64,
    /// Cells at most.
    pub(super) limit: usize,
}

impl<'a> Refinement<'a> {
    pub(super) fn new(mesh: Triangulation, cavity: Cavity, given: Given<'a>) -> Self {
        let sine = POINTED.to_radians().sin();
        let ratio = 0.5 / sine; // circumradius over shortest side
        Self {
            sharp: sharp_corners(&mesh, given.borders, given.corner_count),
            mesh,
            cavity,
            given,
            crowded: VecDeque::new(),
            bad: (0..QUEUES).map(|_| VecDeque::new()).collect(),
            sine_squared: sine * sine,
            // Height over its base of the triangle with the base as shortest side and the smallest angle allowed.
            off_center: ratio + (ratio * ratio - 0.25).sqrt(),
        }
    }

    /// Refines until every triangle is good, or as good as the outline's own angles allow.
    pub(super) fn run(mut self) -> Result<Triangulation, MeshError> {
        for h in 0..self.mesh.mate.len() as u32 {
            self.note_if_crowded(h);
        }
        for t in 0..self.mesh.triangle_count() as u32 {
            self.note_if_bad(t);
        }
        loop {
            if self.mesh.triangle_count() > self.given.limit {
                return Err(too_many(self.mesh.triangle_count() as f64, self.given.limit));
            }
            if let Some([a, b]) = self.crowded.pop_front() {
                if let Some(h) = self.segment(a, b).filter(|h| self.is_crowded(*h)) {
                    self.split(h);
                }
            } else if let Some((t, vertices)) = self.bad.iter_mut().find_map(VecDeque::pop_front) {
                if self.vertices(t) == vertices {
                    self.improve(t);
                }
            } else {
                return Ok(self.mesh);
            }
        }
    }

    fn vertices(&self, t: u32) -> [u32; 3] {
        [0, 1, 2].map(|i| self.mesh.origin[3 * t as usize + i])
    }

    /// The half-edge between two vertices, in either direction, if it is part of a segment.
    fn segment(&self, a: u32, b: u32) -> Option<u32> {
        let h = self.mesh.edge(a, b).or_else(|| self.mesh.edge(b, a))?;
        (self.mesh.segment[h as usize] != NONE).then_some(h)
    }

    /// Whether the vertex opposite to a segment, on either hand, lies within the circle over it.
    fn is_crowded(&self, h: u32) -> bool {
        let seen_from = |h: u32| {
            let [a, b, apex] = [h, next(h), previous(h)].map(|k| self.mesh.place(self.mesh.from(k)));
            dot(a, b, apex) < 0.0
        };
        let mate = self.mesh.mate[h as usize];
        seen_from(h) || (mate != NONE && seen_from(mate))
    }

    fn note_if_crowded(&mut self, h: u32) {
        if self.mesh.segment[h as usize] != NONE && self.is_crowded(h) {
            self.crowded.push_back([self.mesh.from(h), self.mesh.to(h)]);
        }
    }

    fn note_if_bad(&mut self, t: u32) {
        if let Some(urgency) = self.urgency(t) {
            let note = (t, self.vertices(t));
            self.bad[urgency].push_back(note);
        }
    }

    /// Splits a segment, at its middle or on a circle around a sharp corner. Whether it could.
    fn split(&mut self, h: u32) -> bool {
        let (a, b) = (self.mesh.from(h), self.mesh.to(h));
        let (p, q) = (self.mesh.place(a), self.mesh.place(b));
        let length = distance(p, q);
        if length < self.given.shortest {
            return false;
        }
        let is_sharp = |v: u32| v < self.given.corner_count && self.sharp[v as usize];
        let shell = (0.5 * length).log2().round().exp2();
        let x = match (is_sharp(a), is_sharp(b)) {
            (true, false) => between(p, q, shell / length),
            (false, true) => between(q, p, shell / length),
            _ => between(p, q, 0.5),
        };
        let border = self.mesh.segment[h as usize];
        self.cavity.dig_at_segment(&self.mesh, x, h);
        let Some(vertex) = self.cavity.fill(&mut self.mesh, x, Some(h)) else { return false };
        self.given.border_of.push(border);
        debug_assert_eq!(self.given.border_of.len() as u32, vertex + 1);
        self.note_made();
        true
    }

    /// Looks at the triangles the last insertion made.
    fn note_made(&mut self) {
        for i in 0..self.cavity.made.len() {
            let t = self.cavity.made[i];
            for h in 3 * t..3 * t + 3 {
                self.note_if_crowded(h);
            }
            self.note_if_bad(t);
        }
    }

    /// Gives a bad triangle a vertex, or splits the segments that are in the way.
    fn improve(&mut self, t: u32) {
        let (start, x) = self.new_vertex(t);
        let blocking = match self.mesh.walk(start, x) {
            Spot::Behind(h) => {
                if self.mesh.segment[h as usize] == NONE {
                    return;
                }
                vec![[self.mesh.from(h), self.mesh.to(h)]]
            }
            Spot::In(target) => {
                self.cavity.dig(&self.mesh, x, target);
                let crowds = |a: u32, b: u32| dot(self.mesh.place(a), self.mesh.place(b), x) < 0.0;
                let rim = self.cavity.rim.iter().filter(|e| e.segment != NONE && crowds(e.from, e.to));
                rim.map(|e| [e.from, e.to]).collect()
            }
        };
        if blocking.is_empty() {
            if self.cavity.fill(&mut self.mesh, x, None).is_some() {
                self.given.border_of.push(NONE);
                self.note_made();
            }
            return;
        }
        let vertices = self.vertices(t);
        let mut changed = false;
        for [a, b] in blocking {
            if let Some(h) = self.segment(a, b) {
                changed |= self.split(h);
            }
        }
        if changed && self.vertices(t) == vertices {
            self.note_if_bad(t);
        }
    }

    /// The place for a new vertex, and the half-edge from whose origin the straight way leads there through the triangle:
    /// the circumcenter, or the nearer off-center that makes a just good triangle with the shortest side.
    fn new_vertex(&self, t: u32) -> (u32, [f64; 2]) {
        let corners = self.mesh.corners(t);
        let (shortest, longest) = extremes(corners);
        let [p, q, r] = [0, 1, 2].map(|i| corners[(shortest + i) % 3]);
        let (u, v) = ([q[0] - p[0], q[1] - p[1]], [r[0] - p[0], r[1] - p[1]]);
        let (uu, vv, cross) = (u[0] * u[0] + u[1] * u[1], v[0] * v[0] + v[1] * v[1], u[0] * v[1] - u[1] * v[0]);
        let center = [(uu * v[1] - vv * u[1]) / (2.0 * cross), (vv * u[0] - uu * v[0]) / (2.0 * cross)];
        let length = uu.sqrt();
        let height = (u[0] * center[1] - u[1] * center[0]) / length;
        let off = self.off_center * length;
        let x =
            if height > off { [0.5 * u[0] - u[1] / length * off, 0.5 * u[1] + u[0] / length * off] } else { center };
        (3 * t + (longest as u32 + 2) % 3, [p[0] + x[0], p[1] + x[1]])
    }

    /// The queue for a triangle that needs a vertex.
    fn urgency(&self, t: u32) -> Option<usize> {
        let corners = self.mesh.corners(t);
        let (shortest, longest) = extremes(corners);
        let square = |i: usize| square(corners[(i + 1) % 3], corners[i % 3]);
        let [a, b, c] = corners;
        let cross = (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]);
        let sine_squared = cross * cross / (square(shortest + 1) * square(shortest + 2));
        if sine_squared < self.sine_squared && !self.is_given(t, shortest) {
            return Some((sine_squared / self.sine_squared * (QUEUES - 1) as f64) as usize);
        }
        let middle = [(a[0] + b[0] + c[0]) / 3.0, (a[1] + b[1] + c[1]) / 3.0];
        let size = self.given.sizes.at(middle, self.mesh.region[t as usize]);
        (square(longest) > (TOO_LONG * size).powi(2)).then_some(QUEUES - 1)
    }

    /// Whether the smallest angle, opposite to the shortest side, is the outline's own: the side joins two borders that
    /// meet at a sharp corner, at the same distance from it, or the corner itself is the vertex opposite.
    fn is_given(&self, t: u32, shortest: usize) -> bool {
        let h = 3 * t + shortest as u32;
        let [u, v, apex] = [0, 1, 2].map(|i| self.mesh.origin[3 * t as usize + (shortest + i) % 3]);
        let segment = |h: u32| self.mesh.segment[h as usize] != NONE;
        if segment(next(h)) && segment(previous(h)) && apex < self.given.corner_count {
            return true;
        }
        let (first, second) = (self.given.border_of[u as usize], self.given.border_of[v as usize]);
        if first == NONE || second == NONE || first == second {
            return false;
        }
        let (first, second) = (self.given.borders[first as usize].ends, self.given.borders[second as usize].ends);
        let Some(corner) = first.into_iter().find(|c| second.contains(c) && self.sharp[*c as usize]) else {
            return false;
        };
        let [center, p, q] = [corner, u, v].map(|w| self.mesh.place(w));
        let (near, far) = (distance(p, center), distance(q, center));
        (near - far).abs() < 1e-3 * near && dot(p, q, center) > GIVEN_ANGLE_COSINE * near * far
    }
}

/// The corners where two borders meet at a small angle.
fn sharp_corners(mesh: &Triangulation, borders: &[Border], corner_count: u32) -> Vec<bool> {
    let mut directions: Vec<Vec<[f64; 2]>> = vec![Vec::new(); corner_count as usize];
    for border in borders {
        let [a, b] = border.ends;
        let (p, q) = (mesh.place(a), mesh.place(b));
        let length = distance(p, q);
        let unit = [(q[0] - p[0]) / length, (q[1] - p[1]) / length];
        directions[a as usize].push(unit);
        directions[b as usize].push([-unit[0], -unit[1]]);
    }
    let sharp = |around: &Vec<[f64; 2]>| {
        let pairs = around.iter().enumerate().flat_map(|(i, u)| around[i + 1..].iter().map(move |v| (u, v)));
        pairs.into_iter().any(|(u, v)| u[0] * v[0] + u[1] * v[1] > SMALL_ANGLE_COSINE)
    };
    directions.iter().map(sharp).collect()
}

fn square(a: [f64; 2], b: [f64; 2]) -> f64 {
    dot(a, a, b)
}

/// (a − x) · (b − x)
fn dot(a: [f64; 2], b: [f64; 2], x: [f64; 2]) -> f64 {
    (a[0] - x[0]) * (b[0] - x[0]) + (a[1] - x[1]) * (b[1] - x[1])
}

fn distance(a: [f64; 2], b: [f64; 2]) -> f64 {
    (a[0] - b[0]).hypot(a[1] - b[1])
}

fn between(a: [f64; 2], b: [f64; 2], t: f64) -> [f64; 2] {
    [a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])]
}

/// Numbers of the shortest and the longest side of a triangle.
fn extremes(corners: [[f64; 2]; 3]) -> (usize, usize) {
    let lengths = [0, 1, 2].map(|i| square(corners[(i + 1) % 3], corners[i]));
    let shortest = (1..3).fold(0, |best, i| if lengths[i] < lengths[best] { i } else { best });
    let longest = (1..3).fold(0, |best, i| if lengths[i] > lengths[best] { i } else { best });
    (shortest, longest)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_new_vertex_is_the_off_center_of_a_needle_and_the_circumcenter_of_a_plump_triangle() {
        let sizes = SizeField::new(vec![1.0], Vec::new(), [0.0; 2], 10.0);
        let place = |apex: [f64; 2]| {
            let mesh = Triangulation::constrained(vec![[0.0, 0.0], [1.0, 0.0], apex], &[]).unwrap();
            let border_of = vec![NONE; 3];
            let given = Given { sizes: &sizes, borders: &[], border_of, corner_count: 3, shortest: 0.0, limit: 9 };
            Refinement::new(mesh, Cavity::default(), given).new_vertex(0).1
        };
        // Over the base 1 stands the triangle with the angle 28° at its tip.
        let [x, y] = place([0.5, 10.0]);
        let tip = 2.0 * (0.5 / y).atan().to_degrees();
        assert!((x - 0.5).abs() < 1e-12 && (tip - POINTED).abs() < 1e-9, "{x} {tip}");
        let [x, y] = place([1.0, 1.2]);
        assert!((x - 0.5).abs() < 1e-12 && (y - 0.6).abs() < 1e-12, "{x} {y}");
    }

    #[test]
    fn the_sides_of_a_triangle_by_length() {
        assert_eq!(extremes([[0.0, 0.0], [3.0, 0.0], [3.0, 1.0]]), (1, 2));
    }
}
