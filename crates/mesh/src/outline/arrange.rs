//! Loops laid over each other: points that coincide become one, sides are split where they touch or cross.

use rstar::RTree;
use rstar::primitives::GeomWithData;

use super::Stated;
use super::loops::{
    LoopFault, RESOLUTION, around, cross, crossing_point, distance_to_segment, extent, fault, nearest_parameter,
    segment_tree,
};
use crate::MeshError;

/// Splitting a side moves it by up to the resolution, which may make it touch another: rounds before giving up.
const ROUNDS: usize = 30;

/// Points and edges that meet in end points only.
#[derive(Debug)]
pub(super) struct Arrangement {
    pub(super) points: Vec<[f64; 2]>,
    /// Sorted by end points, the lower number first.
    pub(super) edges: Vec<Edge>,
    /// Places closer than this are one place.
    pub(super) tolerance: f64,
}

/// A straight piece of the border of one or several areas.
#[derive(Debug)]
pub(super) struct Edge {
    pub(super) ends: [u32; 2],
    /// The areas (by statement) on exactly one side of it.
    pub(super) areas: Vec<u32>,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct Piece {
    ends: [u32; 2],
    area: u32,
}

struct Builder<'a> {
    stated: &'a [Stated],
    tolerance: f64,
    points: Vec<[f64; 2]>,
    tree: RTree<GeomWithData<[f64; 2], u32>>,
    pieces: Vec<Piece>,
}

/// Lays all loops over each other. `marks` are further places at which sides are to be split.
pub(super) fn arrange(stated: &[Stated], marks: &[[f64; 2]]) -> Result<Arrangement, MeshError> {
    let corners: Vec<[f64; 2]> =
        stated.iter().flat_map(|s| s.area.loops()).flat_map(|l| l.corners().iter().copied()).collect();
    let size = extent(&corners);
    let farthest = corners.iter().flatten().fold(0.0_f64, |far, x| far.max(x.abs()));
    if !(1e-30..=1e50).contains(&size) {
        return Err(MeshError::NotPositive {
            what: "the extent of the outline, seen as a usual size,".into(),
            value: size,
        });
    }
    let tolerance = (RESOLUTION * size).max(64.0 * f64::EPSILON * farthest);
    let mut builder = Builder { stated, tolerance, points: Vec::new(), tree: RTree::new(), pieces: Vec::new() };
    builder.lay_loops()?;
    for mark in marks {
        builder.point(*mark);
    }
    for _ in 0..ROUNDS {
        while builder.split_at_contacts() {}
        if !builder.split_at_crossings()? {
            return Ok(builder.finish());
        }
    }
    Err(MeshError::TooThin { at: builder.points.last().copied().unwrap_or_default().to_vec() })
}

impl Builder<'_> {
    /// The number of the point at a place, which is added if there is none so near.
    fn point(&mut self, mut place: [f64; 2]) -> u32 {
        for x in &mut place {
            if x.abs() < 1e-6 * self.tolerance {
                *x = 0.0;
            }
        }
        if let Some((near, square)) = self.tree.nearest_neighbor_iter_with_distance_2(place).next()
            && square <= self.tolerance * self.tolerance
        {
            return near.data;
        }
        let number = self.points.len() as u32;
        self.points.push(place);
        self.tree.insert(GeomWithData::new(place, number));
        number
    }

    fn lay_loops(&mut self) -> Result<(), MeshError> {
        for (area, stated) in self.stated.iter().enumerate() {
            for polygon in stated.area.loops() {
                let numbers: Vec<u32> = polygon.corners().iter().map(|c| self.point(*c)).collect();
                for (i, a) in numbers.iter().enumerate() {
                    let b = numbers[(i + 1) % numbers.len()];
                    if *a == b {
                        return Err(fault(&stated.name, LoopFault::RepeatedCorner, polygon.corners()[i]));
                    }
                    self.pieces.push(Piece { ends: [(*a).min(b), (*a).max(b)], area: area as u32 });
                }
            }
        }
        Ok(())
    }

    fn places(&self, piece: Piece) -> [[f64; 2]; 2] {
        piece.ends.map(|p| self.points[p as usize])
    }

    /// Splits each piece at the points that lie on it. Whether there were any.
    fn split_at_contacts(&mut self) -> bool {
        let cuts: Vec<Vec<u32>> = self.pieces.iter().map(|piece| self.contacts(*piece)).collect();
        self.cut(&cuts)
    }

    fn contacts(&self, piece: Piece) -> Vec<u32> {
        let [a, b] = self.places(piece);
        self.tree
            .locate_in_envelope(around([a, b], self.tolerance))
            .filter(|p| !piece.ends.contains(&p.data) && distance_to_segment(*p.geom(), a, b) <= self.tolerance)
            .map(|p| p.data)
            .collect()
    }

    /// Cuts pieces at points, in order along the piece. Whether there was anything to cut.
    fn cut(&mut self, cuts: &[Vec<u32>]) -> bool {
        let mut cut_any = false;
        let mut pieces = Vec::with_capacity(self.pieces.len());
        for (piece, cuts) in self.pieces.iter().zip(cuts) {
            let [a, b] = self.places(*piece);
            let mut chain: Vec<(f64, u32)> =
                cuts.iter().map(|p| (nearest_parameter(self.points[*p as usize], a, b), *p)).collect();
            chain.sort_unstable_by(|p, q| p.0.total_cmp(&q.0).then(p.1.cmp(&q.1)));
            let mut from = piece.ends[0];
            for to in chain.into_iter().map(|(_, p)| p).chain([piece.ends[1]]) {
                if to != from {
                    pieces.push(Piece { ends: [from.min(to), from.max(to)], area: piece.area });
                }
                from = to;
            }
            cut_any |= !cuts.is_empty();
        }
        self.pieces = pieces;
        cut_any
    }

    /// Splits pieces that cross, where a crossing is meant. Whether there were any.
    fn split_at_crossings(&mut self) -> Result<bool, MeshError> {
        let segments: Vec<_> = self.pieces.iter().map(|p| self.places(*p)).collect();
        let tree = segment_tree(&segments);
        let mut cuts = vec![Vec::new(); segments.len()];
        for i in 0..segments.len() {
            let mut near: Vec<usize> = tree
                .locate_in_envelope_intersecting(around(segments[i], 0.0))
                .map(|other| other.data as usize)
                .filter(|j| *j > i && cross(segments[i], segments[*j]))
                .collect();
            near.sort_unstable();
            for j in near {
                let at = crossing_point(segments[i], segments[j]);
                self.check_crossing(i, j, at)?;
                let point = self.point(at);
                cuts[i].push(point);
                cuts[j].push(point);
            }
        }
        Ok(self.cut(&cuts))
    }

    /// A region or hole may cross the borders between regions stated before it, but not the rim of them all.
    fn check_crossing(&self, i: usize, j: usize, at: [f64; 2]) -> Result<(), MeshError> {
        let order = |piece: usize| {
            let area = self.pieces[piece].area;
            (self.stated[area as usize].hole, area)
        };
        let (earlier, later) = if order(i) < order(j) { (i, j) } else { (j, i) };
        let [a, b] = self.places(self.pieces[earlier]);
        let step = 100.0 * self.tolerance / (b[0] - a[0]).hypot(b[1] - a[1]);
        let aside = [(b[1] - a[1]) * step, (a[0] - b[0]) * step];
        let covered = |x: [f64; 2]| {
            let before = self.stated.iter().enumerate().filter(|(k, s)| !s.hole && (false, *k as u32) < order(later));
            before.into_iter().any(|(_, s)| s.area.contains(x))
        };
        let apart = order(earlier).1 != order(later).1 && !order(earlier).0;
        if apart && covered([at[0] + aside[0], at[1] + aside[1]]) && covered([at[0] - aside[0], at[1] - aside[1]]) {
            return Ok(());
        }
        let name = |piece: usize| self.stated[self.pieces[piece].area as usize].name.clone();
        if self.pieces[i].area == self.pieces[j].area {
            return Err(fault(&name(i), LoopFault::CrossesItself, at));
        }
        Err(MeshError::CrossingLoops { first: name(earlier), second: name(later), at: at.to_vec() })
    }

    /// Gathers pieces between the same points, and drops those that an area runs along on both hands.
    fn finish(mut self) -> Arrangement {
        self.pieces.sort_unstable();
        let mut edges: Vec<Edge> = Vec::new();
        for same in self.pieces.chunk_by(|p, q| p == q).filter(|same| same.len() % 2 == 1) {
            let Piece { ends, area } = same[0];
            match edges.last_mut() {
                Some(last) if last.ends == ends => last.areas.push(area),
                _ => edges.push(Edge { ends, areas: vec![area] }),
            }
        }
        // Marks that lie on no side drop out.
        let mut number = vec![u32::MAX; self.points.len()];
        let mut points = Vec::new();
        for end in edges.iter_mut().flat_map(|e| &mut e.ends) {
            let new = &mut number[*end as usize];
            if *new == u32::MAX {
                *new = points.len() as u32;
                points.push(self.points[*end as usize]);
            }
            *end = *new;
        }
        for edge in &mut edges {
            edge.ends.sort_unstable();
        }
        Arrangement { points, edges, tolerance: self.tolerance }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::outline::loops::{polygon, rectangle};
    use crate::outline::{Area, Polygon};

    fn stated(loops: &[(&str, Polygon)]) -> Vec<Stated> {
        loops
            .iter()
            .map(|(name, l)| Stated { name: (*name).to_owned(), area: Area::from(l.clone()), hole: *name == "hole" })
            .collect()
    }

    #[test]
    fn a_shared_border_is_one_edge_of_both() {
        let both = stated(&[("a", rectangle((0.0, 0.0), (1.0, 1.0))), ("b", rectangle((1.0, 0.0), (2.0, 1.0)))]);
        let arrangement = arrange(&both, &[]).unwrap();
        assert_eq!((arrangement.points.len(), arrangement.edges.len()), (6, 7));
        let shared: Vec<_> = arrangement.edges.iter().filter(|e| e.areas == [0, 1]).collect();
        assert_eq!(shared.len(), 1);
        assert!(shared[0].ends.iter().all(|p| arrangement.points[*p as usize][0] == 1.0));
    }

    #[test]
    fn corners_and_marks_in_the_middle_of_a_side_split_it() {
        let slanted = polygon(&[(0.0, 0.0), (3.0, 1.0), (0.0, 1.0)]);
        let beside = polygon(&[(0.3, 0.1), (0.9, 0.3), (0.9, 0.1)]);
        let arrangement = arrange(&stated(&[("a", slanted), ("b", beside)]), &[[2.1, 0.7], [9.0, 9.0]]).unwrap();
        assert_eq!(arrangement.edges.iter().filter(|e| e.areas == [0, 1]).count(), 1);
        assert_eq!((arrangement.points.len(), arrangement.edges.len()), (3 + 3 + 1, 2 + 4 + 2));
    }

    #[test]
    fn borders_of_earlier_regions_may_be_crossed_and_their_rim_not() {
        let (a, b) = (rectangle((0.0, 0.0), (1.0, 1.0)), rectangle((1.0, 0.0), (2.0, 1.0)));
        let anchor = rectangle((0.5, 0.4), (1.5, 0.6));
        let arrangement = arrange(&stated(&[("a", a.clone()), ("b", b), ("c", anchor.clone())]), &[]).unwrap();
        assert_eq!((arrangement.points.len(), arrangement.edges.len()), (6 + 4 + 2, 7 + 2 + 4 + 2));
        let crossing = arrange(&stated(&[("a", a.clone()), ("c", anchor.clone())]), &[]).unwrap_err();
        let MeshError::CrossingLoops { first, second, at } = crossing else { panic!("{crossing}") };
        assert_eq!((first.as_str(), second.as_str(), at[0]), ("a", "c", 1.0));
        // A hole counts as stated last.
        let crossing = arrange(&stated(&[("hole", anchor), ("a", a)]), &[]).unwrap_err();
        assert!(matches!(crossing, MeshError::CrossingLoops { second, .. } if second == "hole"));
    }

    #[test]
    fn what_an_area_runs_along_twice_is_no_border() {
        let notched = rectangle((0.0, 0.0), (2.0, 1.0)).without(rectangle((0.5, 0.0), (1.0, 0.5)));
        let stated = [Stated { name: "a".to_owned(), area: notched, hole: false }];
        let arrangement = arrange(&stated, &[]).unwrap();
        assert_eq!((arrangement.points.len(), arrangement.edges.len()), (8, 8));
    }

    #[test]
    fn extents_out_of_all_measure_are_refused() {
        let tiny = stated(&[("a", rectangle((0.0, 0.0), (1e-40, 1e-40)))]);
        assert!(matches!(arrange(&tiny, &[]), Err(MeshError::NotPositive { value, .. }) if value == 1e-40));
    }
}
