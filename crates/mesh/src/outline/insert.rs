//! New vertices: the walk to where a point lies, and the cavity of triangles it replaces.

use robust::{Coord, incircle};

use super::loops::orientation;
use super::triangulation::{NONE, Triangulation, next, previous};

/// Where a point lies.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Spot {
    /// Inside this triangle or on one of its unconstrained sides.
    In(u32),
    /// Behind or on a segment, which this half-edge is part of.
    Behind(u32),
}

/// A half-edge of the rim of the cavity, seen from inside.
#[derive(Debug, Clone, Copy)]
pub(super) struct RimEdge {
    pub(super) from: u32,
    pub(super) to: u32,
    mate: u32,
    pub(super) segment: u32,
    region: u32,
}

/// The triangles whose circumcircle contains a new point, and the rim of their union. Kept between insertions to
/// spare allocations.
#[derive(Debug, Default)]
pub(super) struct Cavity {
    triangles: Vec<u32>,
    pub(super) rim: Vec<RimEdge>,
    /// The triangles that the last insertion made.
    pub(super) made: Vec<u32>,
    stamp: u32,
    triangle_stamp: Vec<u32>,
    starts_at: Vec<(u32, u32)>,
}

impl Triangulation {
    /// Walks from the vertex where half-edge `start` begins straight to a point.
    pub(super) fn walk(&self, start: u32, x: [f64; 2]) -> Spot {
        let v = self.from(start);
        let source = self.place(v);
        let Some(wedge) = self.wedge(start, source, x) else { return Spot::Behind(start) };
        let mut exit = next(wedge);
        loop {
            let side = orientation(self.place(self.from(exit)), self.place(self.to(exit)), x);
            if side > 0.0 || (side == 0.0 && self.segment[exit as usize] == NONE) {
                return Spot::In(exit / 3);
            }
            let mate = self.mate[exit as usize];
            if self.segment[exit as usize] != NONE || mate == NONE {
                return Spot::Behind(exit);
            }
            let apex = self.place(self.from(previous(mate)));
            exit = if orientation(source, x, apex) > 0.0 { next(mate) } else { previous(mate) };
        }
    }

    /// The half-edge from the walk's source into whose triangle the way to x leads.
    fn wedge(&self, start: u32, source: [f64; 2], x: [f64; 2]) -> Option<u32> {
        let leads = |h: &u32| {
            let (a, b) = (self.place(self.to(*h)), self.place(self.from(previous(*h))));
            orientation(source, a, x) >= 0.0 && orientation(b, source, x) >= 0.0
        };
        if leads(&start) { Some(start) } else { self.around(self.from(start)).find(leads) }
    }

    fn circle_contains(&self, t: u32, x: [f64; 2]) -> bool {
        let [a, b, c] = self.corners(t).map(|p| Coord { x: p[0], y: p[1] });
        incircle(a, b, c, Coord { x: x[0], y: x[1] }) > 0.0
    }
}

impl Cavity {
    /// Finds the cavity of a point in a triangle. The rim stops at segments.
    pub(super) fn dig(&mut self, mesh: &Triangulation, x: [f64; 2], start: u32) {
        self.begin(mesh);
        self.enter(start);
        self.grow(mesh, x, NONE);
    }

    /// Finds the cavity of a point on the segment of a half-edge, on both hands of it.
    pub(super) fn dig_at_segment(&mut self, mesh: &Triangulation, x: [f64; 2], h: u32) {
        self.begin(mesh);
        self.enter(h / 3);
        if mesh.mate[h as usize] != NONE {
            self.enter(mesh.mate[h as usize] / 3);
        }
        self.grow(mesh, x, h);
    }

    fn begin(&mut self, mesh: &Triangulation) {
        self.stamp += 1;
        self.triangles.clear();
        self.rim.clear();
        self.triangle_stamp.resize(mesh.triangle_count(), 0);
    }

    fn enter(&mut self, t: u32) {
        self.triangle_stamp[t as usize] = self.stamp;
        self.triangles.push(t);
    }

    fn grow(&mut self, mesh: &Triangulation, x: [f64; 2], split: u32) {
        let mut i = 0;
        while i < self.triangles.len() {
            let t = self.triangles[i];
            i += 1;
            for h in 3 * t..3 * t + 3 {
                let mate = mesh.mate[h as usize];
                if h == split || (mate == split && split != NONE) {
                    continue;
                }
                let segment = mesh.segment[h as usize];
                if segment == NONE && mate != NONE {
                    let neighbor = mate / 3;
                    if self.triangle_stamp[neighbor as usize] == self.stamp {
                        continue;
                    }
                    if mesh.circle_contains(neighbor, x) {
                        self.enter(neighbor);
                        continue;
                    }
                }
                let region = mesh.region[t as usize];
                self.rim.push(RimEdge { from: mesh.from(h), to: mesh.to(h), mate, segment, region });
            }
        }
    }

    /// Whether the point sees the whole rim from its left: then the new triangles are sound.
    fn is_star(&mut self, mesh: &Triangulation, x: [f64; 2]) -> bool {
        self.starts_at.resize(mesh.points.len() + 1, (0, NONE));
        self.rim.iter().all(|e| {
            let once = self.starts_at[e.from as usize].0 != self.stamp;
            self.starts_at[e.from as usize] = (self.stamp, NONE);
            once && orientation(mesh.place(e.from), mesh.place(e.to), x) > 0.0
        })
    }

    /// Puts the point into the cavity dug last: the new vertex, or nothing (and no change) if rounding forbids it.
    /// `split` is the half-edge whose segment the point splits, if it does.
    pub(super) fn fill(&mut self, mesh: &mut Triangulation, x: [f64; 2], split: Option<u32>) -> Option<u32> {
        if self.rim.len() < self.triangles.len() || !self.is_star(mesh, x) {
            return None;
        }
        let (ends, segment) =
            split.map_or(([NONE; 2], NONE), |h| ([mesh.from(h), mesh.to(h)], mesh.segment[h as usize]));
        let vertex = mesh.points.len() as u32;
        mesh.points.push(x);
        self.made.clear();
        for k in 0..self.rim.len() {
            let t = self.triangles.get(k).copied().unwrap_or_else(|| mesh.add_triangle());
            self.made.push(t);
            let (edge, h) = (self.rim[k], 3 * t as usize);
            let spoke = |end: u32| if ends.contains(&end) { segment } else { NONE };
            mesh.region[t as usize] = edge.region;
            mesh.origin[h..h + 3].copy_from_slice(&[edge.from, edge.to, vertex]);
            mesh.segment[h..h + 3].copy_from_slice(&[edge.segment, spoke(edge.to), spoke(edge.from)]);
            mesh.mate[h..h + 3].copy_from_slice(&[edge.mate, NONE, NONE]);
            if edge.mate != NONE {
                mesh.mate[edge.mate as usize] = h as u32;
            }
            mesh.leaving[edge.from as usize] = h as u32;
            self.starts_at[edge.from as usize] = (self.stamp, h as u32);
        }
        for t in &self.made {
            let spoke = 3 * t + 1;
            let to = mesh.from(spoke);
            let (stamp, start) = self.starts_at[to as usize];
            if stamp == self.stamp {
                mesh.mate[spoke as usize] = start + 2;
                mesh.mate[start as usize + 2] = spoke;
            } else {
                mesh.leaving[to as usize] = spoke; // the rim of the domain: no new triangle starts there
            }
        }
        mesh.leaving.push(3 * self.made[0] + 2);
        Some(vertex)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A square cut by a segment along x = 1.
    fn two_halves() -> Triangulation {
        let points = vec![[0.0, 0.0], [1.0, 0.0], [2.0, 0.0], [2.0, 1.0], [1.0, 1.0], [0.0, 1.0]];
        let mut mesh =
            Triangulation::constrained(points, &[[0, 1], [1, 2], [2, 3], [3, 4], [4, 5], [5, 0], [1, 4]]).unwrap();
        mesh.region.fill(7);
        mesh
    }

    fn check(mesh: &Triangulation, triangles: usize) {
        assert_eq!(mesh.triangle_count(), triangles);
        for h in 0..3 * triangles as u32 {
            let [a, b, c] = mesh.corners(h / 3);
            assert!(orientation(a, b, c) > 0.0);
            let mate = mesh.mate[h as usize];
            assert_eq!(mate == NONE, mesh.mate.iter().all(|m| *m != h));
            if mate != NONE {
                assert_eq!((mesh.from(mate), mesh.to(mate)), (mesh.to(h), mesh.from(h)));
                assert_eq!(mesh.segment[mate as usize], mesh.segment[h as usize]);
            } else {
                assert_ne!(mesh.segment[h as usize], NONE);
            }
            assert_eq!(mesh.from(mesh.leaving[mesh.from(h) as usize]), mesh.from(h));
        }
    }

    #[test]
    fn the_walk_ends_in_the_triangle_or_at_a_segment() {
        let mesh = two_halves();
        let Spot::In(t) = mesh.walk(mesh.leaving[0], [0.7, 0.9]) else { panic!() };
        let [a, b, c] = mesh.corners(t);
        assert!([[a, b], [b, c], [c, a]].iter().all(|[p, q]| orientation(*p, *q, [0.7, 0.9]) >= 0.0));
        let Spot::Behind(h) = mesh.walk(mesh.leaving[0], [1.9, 0.6]) else { panic!() };
        assert_eq!(mesh.segment[h as usize], 6);
    }

    #[test]
    fn vertices_inside_on_a_segment_and_on_the_rim() {
        let mut mesh = two_halves();
        let mut cavity = Cavity::default();
        let Spot::In(t) = mesh.walk(mesh.leaving[0], [0.4, 0.4]) else { panic!() };
        cavity.dig(&mesh, [0.4, 0.4], t);
        assert_eq!(cavity.fill(&mut mesh, [0.4, 0.4], None), Some(6));
        check(&mesh, 6);
        let inner = mesh.edge(1, 4).unwrap();
        cavity.dig_at_segment(&mesh, [1.0, 0.5], inner);
        assert_eq!(cavity.fill(&mut mesh, [1.0, 0.5], Some(inner)), Some(7));
        check(&mesh, 8);
        assert_eq!(mesh.segment.iter().filter(|s| **s == 6).count(), 4);
        let rim = mesh.edge(1, 2).unwrap();
        cavity.dig_at_segment(&mesh, [1.5, 0.0], rim);
        assert_eq!(cavity.fill(&mut mesh, [1.5, 0.0], Some(rim)), Some(8));
        check(&mesh, 9);
        assert_eq!(mesh.segment.iter().filter(|s| **s == 1).count(), 2);
        assert!(mesh.region.iter().all(|r| *r == 7));
    }

    #[test]
    fn a_place_already_taken_changes_nothing() {
        let mut mesh = two_halves();
        let before = format!("{mesh:?}");
        let mut cavity = Cavity::default();
        let Spot::In(t) = mesh.walk(mesh.leaving[0], [0.5, 0.5]) else { panic!() };
        cavity.dig(&mesh, [1.0, 1.0], t);
        assert_eq!(cavity.fill(&mut mesh, [1.0, 1.0], None), None);
        assert_eq!(format!("{mesh:?}"), before);
    }
}
