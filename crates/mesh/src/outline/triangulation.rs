//! A triangulation under construction: half-edges, constrained segments, regions.

use std::collections::HashMap;

use spade::{ConstrainedDelaunayTriangulation, Point2, Triangulation as _};

use crate::MeshError;

/// No half-edge, segment or region.
pub(super) const NONE: u32 = u32::MAX;

/// Triangles as half-edges: triangle t has the half-edges 3t, 3t + 1, 3t + 2, counterclockwise.
#[derive(Debug, Default)]
pub(super) struct Triangulation {
    pub(super) points: Vec<[f64; 2]>,
    /// The vertex where a half-edge begins.
    pub(super) origin: Vec<u32>,
    /// The half-edge on the other hand, or [`NONE`] on the rim.
    pub(super) mate: Vec<u32>,
    /// The constrained segment a half-edge is (part of), or [`NONE`].
    pub(super) segment: Vec<u32>,
    /// The region of each triangle.
    pub(super) region: Vec<u32>,
    /// A half-edge that begins at each vertex.
    pub(super) leaving: Vec<u32>,
}

/// The next half-edge around the triangle.
#[inline]
pub(super) const fn next(h: u32) -> u32 {
    if h % 3 == 2 { h - 2 } else { h + 1 }
}

/// The previous half-edge around the triangle.
#[inline]
pub(super) const fn previous(h: u32) -> u32 {
    if h.is_multiple_of(3) { h + 2 } else { h - 1 }
}

impl Triangulation {
    /// The constrained Delaunay triangulation of the convex hull; `segment` is the number of the edge.
    pub(super) fn constrained(points: Vec<[f64; 2]>, edges: &[[u32; 2]]) -> Result<Self, MeshError> {
        let vertices: Vec<_> = points.iter().map(|p| Point2::new(p[0], p[1])).collect();
        let pairs = edges.iter().map(|e| e.map(|v| v as usize)).collect();
        let mut conflict = None;
        let kernel = ConstrainedDelaunayTriangulation::<Point2<f64>>::try_bulk_load_cdt(vertices, pairs, |edge| {
            conflict = Some(edge);
        });
        let thin = |v: usize| MeshError::TooThin { at: points.get(v).copied().unwrap_or_default().to_vec() };
        let kernel = kernel.map_err(|_| thin(0))?;
        if let Some([v, _]) = conflict {
            return Err(thin(v));
        }
        if kernel.num_vertices() != points.len() {
            let moved = kernel.vertices().zip(&points).position(|(v, p)| v.position() != Point2::new(p[0], p[1]));
            return Err(thin(moved.unwrap_or(kernel.num_vertices())));
        }
        let number: HashMap<[u32; 2], u32> =
            edges.iter().enumerate().map(|(i, e)| ([e[0].min(e[1]), e[0].max(e[1])], i as u32)).collect();
        let count = kernel.num_inner_faces();
        let mut half = vec![NONE; kernel.num_directed_edges()];
        let mut result = Self { leaving: vec![NONE; points.len()], region: vec![NONE; count], ..Self::default() };
        for (t, face) in kernel.inner_faces().enumerate() {
            for (i, edge) in face.adjacent_edges().into_iter().enumerate() {
                let h = (3 * t + i) as u32;
                let [a, b] = [edge.from(), edge.to()].map(|v| v.fix().index() as u32);
                half[edge.fix().index()] = h;
                result.origin.push(a);
                result.leaving[a as usize] = h;
                let constrained = if edge.is_constraint_edge() { number.get(&[a.min(b), a.max(b)]) } else { None };
                result.segment.push(constrained.copied().unwrap_or(NONE));
            }
        }
        let mates = kernel.inner_faces().flat_map(|f| f.adjacent_edges()).map(|e| half[e.rev().fix().index()]);
        result.mate = mates.collect();
        result.points = points;
        Ok(result)
    }

    /// A triangle yet without vertices.
    pub(super) fn add_triangle(&mut self) -> u32 {
        self.region.push(NONE);
        for list in [&mut self.origin, &mut self.mate, &mut self.segment] {
            list.extend([NONE; 3]);
        }
        self.region.len() as u32 - 1
    }

    pub(super) fn triangle_count(&self) -> usize {
        self.region.len()
    }

    /// The vertex where a half-edge begins.
    #[inline]
    pub(super) fn from(&self, h: u32) -> u32 {
        self.origin[h as usize]
    }

    /// The vertex where a half-edge ends.
    #[inline]
    pub(super) fn to(&self, h: u32) -> u32 {
        self.origin[next(h) as usize]
    }

    #[inline]
    pub(super) fn place(&self, vertex: u32) -> [f64; 2] {
        self.points[vertex as usize]
    }

    /// The places of a triangle's vertices.
    #[inline]
    pub(super) fn corners(&self, t: u32) -> [[f64; 2]; 3] {
        [0, 1, 2].map(|i| self.place(self.origin[3 * t as usize + i]))
    }

    /// Half-edges that begin at a vertex: counterclockwise from [`Triangulation::leaving`] to the rim or full circle,
    /// then clockwise.
    pub(super) fn around(&self, vertex: u32) -> impl Iterator<Item = u32> + '_ {
        let start = self.leaving[vertex as usize];
        let mut h = start;
        let mut clockwise = false;
        std::iter::from_fn(move || {
            if h == NONE {
                return None;
            }
            let here = h;
            if !clockwise {
                h = self.mate[previous(h) as usize];
                if h == start {
                    h = NONE;
                    return Some(here);
                }
                clockwise = h == NONE;
                if clockwise {
                    h = start;
                }
            }
            if clockwise {
                let back = self.mate[h as usize];
                h = if back == NONE { NONE } else { next(back) };
            }
            Some(here)
        })
    }

    /// The half-edge from one vertex to another, if there is one (on the rim only one of the two directions is).
    pub(super) fn edge(&self, from: u32, to: u32) -> Option<u32> {
        self.around(from).find(|h| self.to(*h) == to)
    }

    /// Drops triangles without region.
    pub(super) fn drop_outside(&mut self) {
        let mut new_triangle = vec![NONE; self.region.len()];
        let mut kept = 0;
        for t in 0..self.region.len() {
            if self.region[t] == NONE {
                continue;
            }
            new_triangle[t] = kept;
            self.region[kept as usize] = self.region[t];
            for i in 0..3 {
                let (old, new) = (3 * t + i, 3 * kept as usize + i);
                self.origin[new] = self.origin[old];
                self.mate[new] = self.mate[old];
                self.segment[new] = self.segment[old];
            }
            kept += 1;
        }
        self.region.truncate(kept as usize);
        for list in [&mut self.origin, &mut self.mate, &mut self.segment] {
            list.truncate(3 * kept as usize);
        }
        for mate in &mut self.mate {
            let t = if *mate == NONE { NONE } else { new_triangle[*mate as usize / 3] };
            *mate = if t == NONE { NONE } else { 3 * t + *mate % 3 };
        }
        self.leaving.fill(NONE);
        for (h, v) in self.origin.iter().enumerate() {
            self.leaving[*v as usize] = h as u32;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A square with a diagonal; triangles 0 and 1 on either hand.
    fn square() -> Triangulation {
        let points = vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
        Triangulation::constrained(points, &[[2, 0]]).unwrap()
    }

    #[test]
    fn half_edges_fit_together() {
        let mesh = square();
        assert_eq!(mesh.triangle_count(), 2);
        for h in 0..6 {
            assert_eq!(previous(next(h)), h);
            let mate = mesh.mate[h as usize];
            if mate != NONE {
                assert_eq!((mesh.from(mate), mesh.to(mate), mesh.mate[mate as usize]), (mesh.to(h), mesh.from(h), h));
                assert_eq!(mesh.segment[h as usize], 0);
            }
        }
        let diagonal = mesh.edge(0, 2).unwrap();
        assert_eq!((mesh.from(diagonal), mesh.to(diagonal)), (0, 2));
        assert_eq!(mesh.edge(1, 3), None);
        // On the rim one of the two directions exists.
        assert!(mesh.edge(0, 1).is_some() && mesh.edge(1, 0).is_none());
    }

    #[test]
    fn triangles_without_region_are_dropped() {
        let mut mesh = square();
        let h = mesh.edge(2, 0).unwrap();
        mesh.region[h as usize / 3] = 0; // the triangle on the left of the way from (1, 1) to (0, 0)
        mesh.drop_outside();
        assert_eq!((mesh.triangle_count(), mesh.mate.as_slice()), (1, &[NONE; 3][..]));
        assert!(mesh.edge(0, 1).is_some(), "{mesh:?}");
        assert_eq!(mesh.leaving[3], NONE);
    }

    #[test]
    fn crossing_edges_are_refused() {
        let points = vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
        assert!(matches!(Triangulation::constrained(points, &[[0, 2], [1, 3]]), Err(MeshError::TooThin { .. })));
    }
}
