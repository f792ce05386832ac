//! Meshes of intervals.

use hypercircle_element::Shape;

use crate::limits::check_counts;
use crate::mesh::Parts;
use crate::{CellId, Mesh, MeshError, NamedSide, Names, RegionId, SideNameId, VertexId};

/// A place this share of the length from a node is that node, so that rounding makes no slivers.
const SNAP: f64 = 1e-12;

/// Where the cells of [`Interval::graded`] are smallest.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Toward {
    /// At the start.
    Start,
    /// At the end.
    End,
    /// At both, with the largest cells in the middle.
    Both,
}

/// An interval cut into cells.
///
/// The region is named "domain" and the ends "start" and "end" unless told otherwise. Vertices and cells are numbered
/// from start to end.
///
/// ```
/// use hypercircle_mesh::Interval;
/// let rod = Interval::pieces(&[("copper", 0.0, 0.4, 40), ("steel", 0.4, 1.0, 30)]).ends("hot", "cold").mesh()?;
/// assert_eq!(rod.cell_count(), 70);
/// assert_eq!(rod.region_name(rod.region(hypercircle_mesh::CellId(39))), "copper");
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone)]
#[must_use = "call `mesh` to get the mesh"]
pub struct Interval {
    /// The nodes, or what was wrong with the numbers they are made from.
    nodes: Result<Vec<f64>, MeshError>,
    ends: [String; 2],
    regions: Vec<(String, [f64; 2])>,
    points: Vec<(String, f64)>,
}

impl Interval {
    /// The interval from `start` to `end` in `count` equal cells.
    pub fn uniform(start: f64, end: f64, count: usize) -> Self {
        Self::from_result(checked(start, end, count).map(|()| piece(start, end, count)))
    }

    /// The interval with the given nodes, ascending.
    pub fn from_nodes(nodes: &[f64]) -> Self {
        Self::from_result(Ok(nodes.to_vec()))
    }

    /// The interval from `start` to `end` in `count` cells that grow geometrically away from the places of `toward`;
    /// the largest cell is `ratio` times the smallest.
    pub fn graded(start: f64, end: f64, count: usize, toward: Toward, ratio: f64) -> Self {
        Self::from_result(checked(start, end, count).and_then(|()| {
            if !(ratio > 0.0 && ratio.is_finite()) {
                return Err(MeshError::NotPositive {
                    what: "the ratio of the largest cell to the smallest".to_owned(),
                    value: ratio,
                });
            }
            Ok(graded_nodes(start, end, count, toward, ratio))
        }))
    }

    /// Pieces laid end to end, each a region of its own: name, start, end, number of equal cells. Each piece begins
    /// where the one before ends.
    pub fn pieces(pieces: &[(&str, f64, f64, usize)]) -> Self {
        let mut interval = Self::from_result(joined(pieces));
        interval.regions = pieces.iter().map(|(name, start, end, _)| ((*name).to_owned(), [*start, *end])).collect();
        interval
    }

    fn from_result(nodes: Result<Vec<f64>, MeshError>) -> Self {
        Self { nodes, ends: ["start".to_owned(), "end".to_owned()], regions: Vec::new(), points: Vec::new() }
    }

    /// Names the ends.
    pub fn ends(mut self, start: &str, end: &str) -> Self {
        self.ends = [start.to_owned(), end.to_owned()];
        self
    }

    /// Names the part from `start` to `end` as a region. A cell in which the part begins or ends is cut there. Where
    /// parts overlap, the one named later holds.
    pub fn region(mut self, name: &str, start: f64, end: f64) -> Self {
        self.regions.push((name.to_owned(), [start, end]));
        self
    }

    /// Names the point at `x` inside the interval as a side, for a condition or a source there. A cell that contains
    /// it is cut there.
    pub fn point(mut self, name: &str, x: f64) -> Self {
        self.points.push((name.to_owned(), x));
        self
    }

    /// Makes the mesh.
    ///
    /// # Errors
    /// [`MeshError::NotFinite`] and [`MeshError::NotPositive`] for the numbers given, [`MeshError::Empty`] for less
    /// than two nodes, [`MeshError::RepeatedPoint`], [`MeshError::NotAscending`] and [`MeshError::Gap`] for nodes or pieces out of
    /// order, [`MeshError::OutsideMesh`] for a region or a point beyond the ends, [`MeshError::TooMany`].
    pub fn mesh(&self) -> Result<Mesh<1>, MeshError> {
        let mut nodes = self.nodes.clone()?;
        check_nodes(&nodes)?;
        let (start, end) = (nodes[0], nodes[nodes.len() - 1]);
        for (name, part) in &self.regions {
            check_part(name, *part)?;
        }
        if let Some(index) = self.points.iter().position(|(_, x)| !x.is_finite()) {
            return Err(MeshError::NotFinite { what: "named point", index, at: vec![self.points[index].1] });
        }
        let snap = SNAP * (end - start);
        for x in self.regions.iter().flat_map(|(_, part)| *part).chain(self.points.iter().map(|(_, x)| *x)) {
            if !(x >= start - snap && x <= end + snap) {
                return Err(MeshError::OutsideMesh { at: vec![x], low: vec![start], high: vec![end] });
            }
            if (nearest(&nodes, x).1 - x).abs() > snap {
                nodes.insert(nodes.partition_point(|n| *n < x), x);
            }
        }
        check_counts(Shape::Interval, nodes.len(), nodes.len() - 1)?;
        let (region_names, regions) = self.region_of_cells(&nodes);
        let (side_names, named_sides) = self.named_sides(&nodes)?;
        let connectivity = (0..nodes.len() as u32 - 1).flat_map(|i| [VertexId(i), VertexId(i + 1)]).collect();
        let points = nodes.into_iter().map(|x| [x]).collect();
        let shape = Shape::Interval;
        Ok(Mesh::from_parts(Parts { shape, points, connectivity, regions, region_names, side_names, named_sides }))
    }

    fn region_of_cells(&self, nodes: &[f64]) -> (Names, Vec<RegionId>) {
        // Which of the parts holds in each cell; none is the default region.
        let mut part_of = vec![usize::MAX; nodes.len() - 1];
        for (i, (_, [from, to])) in self.regions.iter().enumerate() {
            part_of[nearest(nodes, *from).0..nearest(nodes, *to).0].fill(i);
        }
        let mut names = Names::default();
        let mut number_of = |part: usize| names.add(self.regions.get(part).map_or("domain", |(name, _)| name.as_str()));
        let regions = part_of.into_iter().map(|part| RegionId(number_of(part))).collect();
        (names, regions)
    }

    fn named_sides(&self, nodes: &[f64]) -> Result<(Names, Vec<NamedSide>), MeshError> {
        let last = nodes.len() - 1;
        let mut names = Names::default();
        let [start, end] = [0, 1].map(|i: usize| SideNameId(names.add(&self.ends[i])));
        let mut sides = vec![
            NamedSide { cell: CellId(0), local: 0, name: start },
            NamedSide { cell: CellId(last as u32 - 1), local: 1, name: end },
        ];
        // Named places are counted with the two ends first.
        let mut taken = vec![0, last];
        for (index, (name, x)) in self.points.iter().enumerate() {
            let node = nearest(nodes, *x).0;
            if let Some(first) = taken.iter().position(|t| *t == node) {
                return Err(MeshError::RepeatedPoint { what: "named place", first, second: index + 2, at: vec![*x] });
            }
            taken.push(node);
            sides.push(NamedSide { cell: CellId(node as u32 - 1), local: 1, name: SideNameId(names.add(name)) });
        }
        Ok((names, sides))
    }
}

/// Checks the numbers of an interval or a piece.
fn checked(start: f64, end: f64, count: usize) -> Result<(), MeshError> {
    for (index, x) in [start, end].into_iter().enumerate() {
        if !x.is_finite() {
            return Err(MeshError::NotFinite { what: "end", index, at: vec![x] });
        }
    }
    check_length("the length of the interval", end - start)?;
    check_length("the number of cells", count as f64)?;
    check_counts(Shape::Interval, count.saturating_add(1), count)
}

fn check_length(what: &str, value: f64) -> Result<(), MeshError> {
    if value > 0.0 && value.is_finite() { Ok(()) } else { Err(MeshError::NotPositive { what: what.to_owned(), value }) }
}

fn check_part(name: &str, [start, end]: [f64; 2]) -> Result<(), MeshError> {
    for (index, x) in [start, end].into_iter().enumerate() {
        if !x.is_finite() {
            return Err(MeshError::NotFinite { what: "end of a region", index, at: vec![x] });
        }
    }
    check_length(&format!("the length of region \"{name}\""), end - start)
}

fn check_nodes(nodes: &[f64]) -> Result<(), MeshError> {
    if nodes.len() < 2 {
        return Err(MeshError::Empty { what: "the interval", needed: "cell, between two nodes" });
    }
    check_counts(Shape::Interval, nodes.len(), nodes.len() - 1)?;
    if let Some(index) = nodes.iter().position(|x| !x.is_finite()) {
        return Err(MeshError::NotFinite { what: "node", index, at: vec![nodes[index]] });
    }
    for i in 1..nodes.len() {
        let (before, value) = (nodes[i - 1], nodes[i]);
        if before == value {
            return Err(MeshError::RepeatedPoint { what: "node", first: i - 1, second: i, at: vec![value] });
        }
        if before > value {
            return Err(MeshError::NotAscending { what: "node", index: i, before, value });
        }
    }
    check_length("the length of the interval", nodes[nodes.len() - 1] - nodes[0])
}

/// Nodes of equal cells, both ends exact.
fn piece(start: f64, end: f64, count: usize) -> Vec<f64> {
    (0..=count).map(|i| if i == count { end } else { start + (end - start) * (i as f64 / count as f64) }).collect()
}

fn joined(pieces: &[(&str, f64, f64, usize)]) -> Result<Vec<f64>, MeshError> {
    let mut nodes: Vec<f64> = Vec::new();
    for (index, (name, start, end, count)) in pieces.iter().enumerate() {
        check_part(name, [*start, *end])?;
        checked(*start, *end, *count)?;
        check_counts(Shape::Interval, nodes.len().saturating_add(*count), 1)?;
        let before = nodes.pop().unwrap_or(*start);
        if (before - start).abs() > SNAP * (end - start) {
            return Err(MeshError::Gap { index, before, value: *start });
        }
        nodes.extend(piece(before, *end, *count));
    }
    Ok(nodes)
}

/// Cell k from a fine end is `step`ᵏ as long as the finest one. Nodes are summed from the fine end, where the digits
/// matter.
fn graded_nodes(start: f64, end: f64, count: usize, toward: Toward, ratio: f64) -> Vec<f64> {
    let distinct = if toward == Toward::Both { count.div_ceil(2) } else { count };
    let step = ratio.powf(1.0 / (distinct.max(2) - 1) as f64);
    let size = |i: usize| {
        let from_fine = match toward {
            Toward::Start => i,
            Toward::End => count - 1 - i,
            Toward::Both => i.min(count - 1 - i),
        };
        step.powf(from_fine as f64)
    };
    let total: f64 = (0..count).map(size).sum();
    let scale = (end - start) / total;
    // From the start up to the middle (or to a fine end's far side), then from the end backward.
    let forward = match toward {
        Toward::Start => count,
        Toward::End => 0,
        Toward::Both => count.div_ceil(2),
    };
    let mut nodes = vec![start; count + 1];
    nodes[count] = end;
    let mut sum = 0.0;
    for i in 1..=forward.min(count - 1) {
        sum += size(i - 1) * scale;
        nodes[i] = start + sum;
    }
    sum = 0.0;
    for i in (forward + 1..count).rev() {
        sum += size(i) * scale;
        nodes[i] = end - sum;
    }
    nodes
}

/// The node nearest to a place, with its number. There are at least two nodes.
fn nearest(nodes: &[f64], x: f64) -> (usize, f64) {
    let above = nodes.partition_point(|n| *n < x).clamp(1, nodes.len() - 1);
    let i = if x - nodes[above - 1] <= nodes[above] - x { above - 1 } else { above };
    (i, nodes[i])
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sizes(mesh: &Mesh<1>) -> Vec<f64> {
        mesh.cells().map(|c| mesh.cell_measure(c)).collect()
    }

    #[test]
    fn uniform_cells_fill_the_interval_between_named_ends() {
        let mesh = Interval::uniform(-1.0, 2.0, 7).mesh().unwrap();
        assert_eq!((mesh.cell_count(), mesh.vertex_count()), (7, 8));
        assert!(sizes(&mesh).iter().all(|h| (h - 3.0 / 7.0).abs() < 1e-15));
        let (start, end) = (mesh.find_side("start").unwrap(), mesh.find_side("end").unwrap());
        assert_eq!(mesh.named_side(CellId(0), 0), Some(start));
        assert_eq!(mesh.named_side(CellId(6), 1), Some(end));
        assert_eq!(mesh.region_name(mesh.region(CellId(3))), "domain");
        assert_eq!(mesh.topology().boundary_sides().count(), 2);
    }

    #[test]
    fn graded_cells_follow_the_geometric_series() {
        // Cells 1, 2, 4, 8 of 15 parts: ratio 8.
        let start = Interval::graded(0.0, 15.0, 4, Toward::Start, 8.0).mesh().unwrap();
        let end = Interval::graded(0.0, 15.0, 4, Toward::End, 8.0).mesh().unwrap();
        for (h, exact) in sizes(&start).iter().zip([1.0, 2.0, 4.0, 8.0]) {
            assert!((h - exact).abs() < 1e-13);
        }
        for (h, exact) in sizes(&end).iter().rev().zip([1.0, 2.0, 4.0, 8.0]) {
            assert!((h - exact).abs() < 1e-13);
        }
        for (count, exact) in [(5, vec![1.0, 2.0, 4.0, 2.0, 1.0]), (4, vec![1.0, 4.0, 4.0, 1.0])] {
            let both = Interval::graded(0.0, 10.0, count, Toward::Both, 4.0).mesh().unwrap();
            for (h, exact) in sizes(&both).iter().zip(exact) {
                assert!((h - exact).abs() < 1e-13);
            }
        }
        let single = Interval::graded(0.0, 1.0, 1, Toward::Both, 4.0).mesh().unwrap();
        assert_eq!(sizes(&single), [1.0]);
        let strong = Interval::graded(0.0, 1.0, 60, Toward::Start, 1e15).mesh().unwrap();
        let h = sizes(&strong);
        assert!((h[59] / h[0] / 1e15 - 1.0).abs() < 1e-10, "{:e}", h[59] / h[0]);
    }

    #[test]
    fn regions_cut_cells_and_later_ones_hold() {
        let mesh = Interval::uniform(0.0, 1.0, 4).region("wall", 0.0, 0.6).region("stud", 0.3, 0.5).mesh().unwrap();
        // Nodes 0, 0.25, 0.3, 0.5, 0.6, 0.75, 1.
        let names: Vec<&str> = mesh.cells().map(|c| mesh.region_name(mesh.region(c))).collect();
        assert_eq!(names, ["wall", "wall", "stud", "wall", "domain", "domain"]);
        assert_eq!(mesh.points()[2], [0.3]);
        assert!((mesh.measure() - 1.0).abs() < 1e-15);
    }

    #[test]
    fn pieces_join_with_their_own_cells_and_named_points_sit_on_nodes() {
        let rod = Interval::pieces(&[("copper", 0.0, 0.1 + 0.2, 3), ("steel", 0.3, 1.0, 2)])
            .ends("hot", "cold")
            .point("weld", 0.3)
            .point("sensor", 0.5)
            .mesh()
            .unwrap();
        assert_eq!((rod.cell_count(), rod.region_names().len()), (6, 2));
        assert_eq!(rod.named_side(CellId(2), 1), rod.find_side("weld").ok());
        assert_eq!(rod.named_side(CellId(3), 1), rod.find_side("sensor").ok());
        assert_eq!(rod.named_side(CellId(5), 1), rod.find_side("cold").ok());
    }

    #[test]
    fn wrong_intervals_are_told_with_their_place() {
        let error = |interval: Interval| interval.mesh().unwrap_err();
        assert!(matches!(error(Interval::uniform(0.0, 0.0, 3)), MeshError::NotPositive { value: 0.0, .. }));
        assert!(matches!(error(Interval::uniform(1.0, 0.0, 3)), MeshError::NotPositive { value: -1.0, .. }));
        assert!(matches!(error(Interval::uniform(0.0, 1.0, 0)), MeshError::NotPositive { .. }));
        assert!(matches!(error(Interval::uniform(0.0, f64::NAN, 3)), MeshError::NotFinite { index: 1, .. }));
        assert!(matches!(error(Interval::uniform(0.0, 1.0, usize::MAX)), MeshError::TooMany { .. }));
        assert!(matches!(error(Interval::graded(0.0, 1.0, 3, Toward::End, -2.0)), MeshError::NotPositive { .. }));
        assert!(matches!(
            error(Interval::graded(1.0, 2.0, 60, Toward::Start, 1e30)),
            MeshError::RepeatedPoint { what: "node", first: 0, second: 1, .. }
        ));
        assert!(matches!(error(Interval::from_nodes(&[1.0])), MeshError::Empty { .. }));
        assert!(matches!(
            error(Interval::from_nodes(&[0.0, f64::INFINITY])),
            MeshError::NotFinite { what: "node", index: 1, .. }
        ));
        assert!(matches!(
            error(Interval::from_nodes(&[0.0, 1.0, 1.0])),
            MeshError::RepeatedPoint { what: "node", first: 1, second: 2, .. }
        ));
        assert!(matches!(
            error(Interval::from_nodes(&[0.0, 2.0, 1.0])),
            MeshError::NotAscending { what: "node", index: 2, before: 2.0, value: 1.0 }
        ));
        let gap = Interval::pieces(&[("a", 0.0, 1.0, 1), ("b", 1.5, 2.0, 1)]);
        assert_eq!(error(gap), MeshError::Gap { index: 1, before: 1.0, value: 1.5 });
        assert!(matches!(error(Interval::pieces(&[])), MeshError::Empty { .. }));
        let unit = || Interval::uniform(0.0, 1.0, 2);
        assert!(matches!(error(unit().region("a", 0.5, 1.5)), MeshError::OutsideMesh { at, .. } if at == [1.5]));
        assert!(
            matches!(error(unit().region("a", 0.5, 0.5)), MeshError::NotPositive { what, .. } if what.contains("\"a\""))
        );
        assert!(matches!(error(unit().region("a", 0.5, f64::NAN)), MeshError::NotFinite { index: 1, .. }));
        assert!(matches!(error(unit().point("p", f64::NAN)), MeshError::NotFinite { index: 0, .. }));
        assert!(matches!(
            error(unit().point("p", 0.2).point("q", 0.2)),
            MeshError::RepeatedPoint { what: "named place", first: 2, second: 3, .. }
        ));
        assert!(matches!(
            error(unit().point("p", 1.0)),
            MeshError::RepeatedPoint { what: "named place", first: 1, second: 2, .. }
        ));
    }
}
