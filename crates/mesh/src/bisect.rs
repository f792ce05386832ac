//! Refinement by bisection of marked cells.

use crate::halves::{Part, WHOLE};
use crate::limits::check_counts;
use crate::mesh::Parts;
use crate::{CellId, Mesh, MeshError, NamedSide, Relation, SideId, VertexId};

impl<const D: usize> Mesh<D> {
    /// Cuts the marked cells in two, and as many others as it takes to leave no hanging vertex.
    ///
    /// Intervals are halved. Triangles are cut by newest vertex bisection: from the middle m of side 0 to the vertex
    /// opposite, (v₀, v₁, v₂) → (v₂, v₀, m) and (v₁, v₂, m), so that the side opposite to the newest vertex is cut next
    /// time. However often it is repeated, only finitely many shapes of triangles appear (four for each triangle of the
    /// first mesh), so that angles do not degenerate. Any choice of the sides 0 will do. Regions and names of sides
    /// are inherited.
    ///
    /// Old vertices keep their numbers and new ones follow in the order of the edges they halve. Takes time linear in
    /// the number of cells. Marks may repeat and come in any order.
    ///
    /// # Errors
    /// [`MeshError::NoSuchCell`] for a mark, [`MeshError::DegenerateCell`] if a cell is too small for the resolution
    /// of its coordinates to be cut, [`MeshError::TooMany`].
    ///
    /// # Source
    /// P. Binev, W. Dahmen, R. DeVore, Adaptive finite element methods with convergence rates, Numer. Math. 97 (2004);
    /// M. Karkulik, D. Pavlicek, D. Praetorius, On 2D newest vertex bisection, Constr. Approx. 38 (2013): no
    /// condition on the first sides 0 is needed.
    ///
    /// ```
    /// use hypercircle_mesh::{CellId, Rectangle};
    /// let coarse = Rectangle::new([0.0, 0.0], [1.0, 1.0], [1, 1]).mesh()?;
    /// let (fine, relation) = coarse.bisect(&[CellId(0)])?;
    /// // Both triangles had to be cut, for they share their longest side.
    /// assert_eq!(fine.cell_count(), 4);
    /// assert_eq!(relation.children(CellId(1)), 2..4);
    /// # Ok::<(), hypercircle_mesh::MeshError>(())
    /// ```
    pub fn bisect(&self, marked: &[CellId]) -> Result<(Self, Relation), MeshError> {
        let count = self.cell_count();
        if let Some(cell) = marked.iter().copied().find(|cell| cell.index() >= count) {
            return Err(MeshError::NoSuchCell { cell, count });
        }
        self.cut(&self.edges_to_halve(marked))
    }

    /// Halves all edges: two children for each interval, four for each triangle (by bisecting it and then both
    /// halves).
    ///
    /// # Errors
    /// As [`Mesh::bisect`].
    ///
    /// ```
    /// use hypercircle_mesh::Rectangle;
    /// let coarse = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).mesh()?;
    /// assert_eq!(coarse.refine_uniformly()?.0.cell_count(), 32);
    /// # Ok::<(), hypercircle_mesh::MeshError>(())
    /// ```
    pub fn refine_uniformly(&self) -> Result<(Self, Relation), MeshError> {
        self.cut(&vec![true; self.edge_count()])
    }

    /// Edges are what gets halved: the cells themselves in one dimension, their sides in two.
    fn edge_count(&self) -> usize {
        if D == 1 { self.cell_count() } else { self.topology().side_count() }
    }

    /// The edges of a cell, the one to be halved first in front.
    #[inline]
    fn edges(&self, cell: CellId) -> impl ExactSizeIterator<Item = usize> {
        let sides = if D == 1 { &[][..] } else { self.topology().cell_sides(cell) };
        (0..if D == 1 { 1 } else { 3 }).map(move |i| sides.get(i).map_or(cell.index(), |side| side.index()))
    }

    /// For each edge whether it is halved: edge 0 of the marked cells and of every cell with a halved edge. Each
    /// cell is taken from the list at most once for each edge newly halved, so this comes to an end.
    fn edges_to_halve(&self, marked: &[CellId]) -> Vec<bool> {
        let mut halve = vec![false; self.edge_count()];
        let mut waiting = marked.to_vec();
        while let Some(cell) = waiting.pop() {
            for edge in self.edges(cell).take(1) {
                if !std::mem::replace(&mut halve[edge], true) && D > 1 {
                    waiting.extend(self.topology().neighbor(cell, 0).map(|(other, _)| other));
                }
            }
        }
        halve
    }

    /// Cuts every cell by the pattern of its halved edges.
    fn cut(&self, halve: &[bool]) -> Result<(Self, Relation), MeshError> {
        let shape = self.shape(CellId(0));
        let mut first_child = Vec::with_capacity(self.cell_count() + 1);
        let mut new_cells = 0_usize;
        for cell in self.cells() {
            first_child.push(new_cells as u32);
            new_cells += 1 + self.edges(cell).filter(|edge| halve[*edge]).count();
        }
        first_child.push(new_cells as u32);
        let new_vertices = self.vertex_count() + halve.iter().filter(|h| **h).count();
        check_counts(shape, new_vertices, new_cells)?;

        let (middles, halved) = self.number_middles(halve, new_vertices);
        let mut points = Vec::with_capacity(new_vertices);
        points.extend_from_slice(self.points());
        points.extend(halved.iter().map(|[a, b]| {
            let (a, b) = (self.point(*a), self.point(*b));
            std::array::from_fn(|i| f64::midpoint(a[i], b[i]))
        }));
        let (connectivity, named_sides) = self.children(&middles, new_cells);
        let relation = Relation::new(self.vertex_count(), halved, first_child);
        let (region_names, side_names) = self.names();
        let regions = relation.parents().iter().map(|parent| self.region(*parent)).collect();
        let new =
            Self::from_parts(Parts { shape, points, connectivity, regions, region_names, side_names, named_sides });
        self.check_resolution(&new, &relation)?;
        Ok((new, relation))
    }

    /// Numbers the middles of the halved edges, in the order of the edges: for each edge its middle or [`WHOLE`], and
    /// for each middle the two vertices it lies between.
    fn number_middles(&self, halve: &[bool], new_vertices: usize) -> (Vec<u32>, Vec<[VertexId; 2]>) {
        let mut middles = vec![WHOLE; halve.len()];
        let mut halved = Vec::with_capacity(new_vertices - self.vertex_count());
        for edge in (0..halve.len()).filter(|edge| halve[*edge]) {
            middles[edge] = (self.vertex_count() + halved.len()) as u32;
            let (cell, local) =
                if D == 1 { (CellId(edge as u32), 0) } else { self.topology().first_cell(SideId(edge as u32)) };
            // Edge `local` runs from vertex `local` to the next.
            let v = self.cell_vertices(cell);
            let local = usize::from(local);
            halved.push([v[local], v[(local + 1) % v.len()]]);
        }
        (middles, halved)
    }

    /// The vertices of all children, and the named sides they inherit.
    fn children(&self, middles: &[u32], new_cells: usize) -> (Vec<VertexId>, Vec<NamedSide>) {
        let mut connectivity = Vec::with_capacity(new_cells * (D + 1));
        let mut named_sides = Vec::with_capacity(2 * self.named_sides().len());
        let mut names = self.named_sides();
        let mut parts = Vec::with_capacity(4);
        let mut child = 0;
        for cell in self.cells() {
            parts.clear();
            self.parts_of(cell, middles, &mut parts);
            let (own, rest) = names.split_at(names.iter().take_while(|named| named.cell == cell).count());
            names = rest;
            for part in &parts {
                connectivity.extend_from_slice(&part.vertices[..=D]);
                for named in own {
                    for local in (0..=D).filter(|local| part.on[*local] == named.local) {
                        named_sides.push(NamedSide { cell: CellId(child), local: local as u8, name: named.name });
                    }
                }
                child += 1;
            }
        }
        (connectivity, named_sides)
    }

    /// The parts of a cell: one if no edge is halved.
    fn parts_of(&self, cell: CellId, middles: &[u32], parts: &mut Vec<Part>) {
        let v = self.cell_vertices(cell);
        if D == 1 {
            let whole = Part::interval([v[0], v[1]]);
            whole.halved_if(middles[cell.index()], Part::interval_halves, parts);
            return;
        }
        let sides = self.topology().cell_sides(cell);
        let middle = |local: u8| middles[sides[usize::from(local)].index()];
        let whole = Part::triangle([v[0], v[1], v[2]]);
        if middle(0) == WHOLE {
            parts.push(whole);
            return;
        }
        for half in whole.triangle_halves(VertexId(middle(0))) {
            half.halved_if(middle(half.on[0]), Part::triangle_halves, parts);
        }
    }

    /// Rounding can bring a middle onto an end of its edge, or across the cell.
    fn check_resolution(&self, new: &Self, relation: &Relation) -> Result<(), MeshError> {
        let lost = |child: &CellId| {
            let positive = new.cell_measure(*child) > 0.0;
            !positive && relation.is_cut(relation.parent(*child))
        };
        match new.cells().find(lost) {
            Some(child) => {
                let cell = relation.parent(child);
                let at = self.cell_center(cell).to_vec();
                Err(MeshError::DegenerateCell { cell, at, measure: self.cell_measure(cell) })
            }
            None => Ok(()),
        }
    }
}

#[cfg(test)]
mod tests {
    use hypercircle_element::Shape;

    use super::*;
    use crate::{Diagonal, Interval, Rectangle, RegionId, SideNameId};

    /// A generator of random numbers, so that the marks are the same on every run (Marsaglia's xorshift).
    fn random(state: &mut u64) -> usize {
        *state ^= *state << 13;
        *state ^= *state >> 7;
        *state ^= *state << 17;
        (*state >> 11) as usize
    }

    fn side_length<const D: usize>(mesh: &Mesh<D>, name: &str) -> f64 {
        let name = mesh.find_side(name).unwrap();
        mesh.named_sides().iter().filter(|s| s.name == name).map(|s| mesh.side_measure(s.cell, s.local)).sum()
    }

    fn region_measure<const D: usize>(mesh: &Mesh<D>, name: &str) -> f64 {
        let region = mesh.find_region(name).unwrap();
        mesh.cells().filter(|c| mesh.region(*c) == region).map(|c| mesh.cell_measure(c)).sum()
    }

    fn angles([a, b, c]: [[f64; 2]; 3]) -> [f64; 3] {
        let at = |p: [f64; 2], q: [f64; 2], r: [f64; 2]| {
            let (u, v) = ([q[0] - p[0], q[1] - p[1]], [r[0] - p[0], r[1] - p[1]]);
            (u[0] * v[1] - u[1] * v[0]).atan2(u[0] * v[0] + u[1] * v[1])
        };
        [at(a, b, c), at(b, c, a), at(c, a, b)]
    }

    fn corners(mesh: &Mesh<2>, cell: CellId) -> [[f64; 2]; 3] {
        std::array::from_fn(|i| mesh.point(mesh.cell_vertices(cell)[i]))
    }

    fn smallest_angle(mesh: &Mesh<2>) -> f64 {
        mesh.cells().flat_map(|cell| angles(corners(mesh, cell))).fold(f64::INFINITY, f64::min)
    }

    /// Newest vertex bisection makes triangles of four shapes only (W. F. Mitchell, J. Comput. Appl. Math. 36, 1991): the first
    /// one, its two halves, and the quarter between the medians.
    fn smallest_angle_to_come(mesh: &Mesh<2>) -> f64 {
        let middle = |a: [f64; 2], b: [f64; 2]| [0.5 * (a[0] + b[0]), 0.5 * (a[1] + b[1])];
        let shapes = |cell| {
            let [a, b, c] = corners(mesh, cell);
            let m = middle(a, b);
            [[a, b, c], [c, a, m], [b, c, m], [m, c, middle(c, a)]]
        };
        mesh.cells().flat_map(shapes).flat_map(angles).fold(f64::INFINITY, f64::min)
    }

    /// Two regions and a named side between them, with sides 0 chosen at random.
    fn random_start(state: &mut u64) -> Mesh<2> {
        let base = Rectangle::new([0.0; 2], [1.5, 1.0], [6, 5]).diagonal(Diagonal::Alternating).mesh().unwrap();
        let mut connectivity = base.connectivity().to_vec();
        let (mut region_names, mut side_names) = base.names();
        region_names.add("right half");
        let between = SideNameId(side_names.add("between"));
        let mut named_sides = base.named_sides().to_vec();
        let middle = |v: VertexId| (base.point(v)[0] - 0.75).abs() < 1e-12;
        for cell in base.cells().filter(|c| base.cell_center(*c)[0] < 0.75) {
            let common = (0..3).filter(|i| base.side_vertices(cell, *i).into_iter().all(middle));
            named_sides.extend(common.map(|local| NamedSide { cell, local, name: between }));
        }
        for cell in base.cells() {
            let turn = random(state) % 3;
            connectivity[3 * cell.index()..][..3].rotate_left(turn);
            for named in named_sides.iter_mut().filter(|s| s.cell == cell) {
                named.local = (named.local + 3 - turn as u8) % 3;
            }
        }
        let regions = base.cells().map(|c| RegionId(u32::from(base.cell_center(c)[0] > 0.75))).collect();
        let (shape, points) = (Shape::Triangle, base.points().to_vec());
        Mesh::from_parts(Parts { shape, points, connectivity, regions, region_names, side_names, named_sides })
    }

    #[test]
    fn random_bisections_keep_area_names_regions_and_conformity() {
        let mut state = 88_172_645_463_325_252;
        for _ in 0..20 {
            let mut mesh = random_start(&mut state);
            let bound = smallest_angle_to_come(&mesh);
            for _ in 0..8 {
                let marked: Vec<CellId> =
                    (0..5).map(|_| CellId((random(&mut state) % mesh.cell_count()) as u32)).collect();
                let (new, relation) = mesh.bisect(&marked).unwrap();
                assert!(marked.iter().all(|cell| relation.is_cut(*cell)));
                assert_eq!(new.points()[..mesh.vertex_count()], *mesh.points());
                mesh = new;
            }
            assert!((mesh.measure() - 1.5).abs() < 1e-13);
            assert!((region_measure(&mesh, "right half") - 0.75).abs() < 1e-13);
            for (name, exact) in [("left", 1.0), ("right", 1.0), ("bottom", 1.5), ("top", 1.5), ("between", 1.0)] {
                assert!((side_length(&mesh, name) - exact).abs() < 1e-13, "{name}");
            }
            // A hanging vertex would show as a boundary side without a name, and break Euler's formula.
            let topology = mesh.topology();
            let inner = side_count_named(&mesh, "between");
            assert_eq!(topology.boundary_sides().count(), mesh.named_sides().len() - inner);
            assert_eq!(mesh.vertex_count() + mesh.cell_count(), topology.side_count() + 1);
            assert!(mesh.cells().all(|cell| mesh.cell_measure(cell) > 0.0));
            assert!(smallest_angle(&mesh) >= bound * (1.0 - 1e-9));
        }
    }

    fn side_count_named(mesh: &Mesh<2>, name: &str) -> usize {
        let name = mesh.find_side(name).unwrap();
        mesh.named_sides().iter().filter(|s| s.name == name).count()
    }

    #[test]
    fn a_named_side_between_two_cells_stays_with_the_lower_cell_and_on_its_line() {
        let mut state = 1234;
        let mut mesh = random_start(&mut state);
        for _ in 0..3 {
            mesh = mesh.refine_uniformly().unwrap().0;
        }
        let between = mesh.find_side("between").unwrap();
        for side in mesh.named_sides().iter().filter(|s| s.name == between) {
            let (other, _) = mesh.topology().neighbor(side.cell, side.local).unwrap();
            assert!(side.cell < other);
            assert!(mesh.side_vertices(side.cell, side.local).iter().all(|v| mesh.point(*v)[0] == 0.75));
        }
    }

    #[test]
    fn with_longest_sides_first_no_angle_falls_below_half_the_smallest() {
        // I. G. Rosenberg, F. Stenger, A lower bound on the angles of triangles constructed by bisecting the longest
        // side, Math. Comp. 29 (1975).
        let mut state = 99;
        for (height, diagonal) in [(1.0, Diagonal::Crossed), (0.6, Diagonal::Crossed), (3.0, Diagonal::Falling)] {
            let mut mesh = Rectangle::new([0.0; 2], [1.0, height], [2, 2]).diagonal(diagonal).mesh().unwrap();
            let first = smallest_angle(&mesh);
            for _ in 0..20 {
                mesh = mesh.bisect(&[CellId((random(&mut state) % mesh.cell_count()) as u32)]).unwrap().0;
            }
            assert!(smallest_angle(&mesh) >= 0.5 * first * (1.0 - 1e-9));
        }
    }

    #[test]
    fn right_isosceles_triangles_stay_right_isosceles() {
        let mut mesh = Rectangle::new([0.0; 2], [1.0; 2], [2, 2]).mesh().unwrap();
        for _ in 0..30 {
            // Toward the lower left corner: graded down to cells of 2⁻³⁰.
            let corner: Vec<CellId> = mesh.topology().cells_around(VertexId(0)).to_vec();
            mesh = mesh.bisect(&corner).unwrap().0;
        }
        assert!((smallest_angle(&mesh).to_degrees() - 45.0).abs() < 1e-9);
        assert!(mesh.cell_count() < 200, "{}", mesh.cell_count());
        assert!((mesh.measure() - 1.0).abs() < 1e-14);
    }

    #[test]
    fn uniform_refinement_halves_every_edge() {
        let old = Rectangle::new([0.0; 2], [3.0, 1.0], [3, 2]).mesh().unwrap();
        let (new, relation) = old.refine_uniformly().unwrap();
        assert_eq!(new.cell_count(), 4 * old.cell_count());
        assert_eq!(new.vertex_count(), old.vertex_count() + old.topology().side_count());
        for cell in old.cells() {
            for child in relation.children(cell) {
                assert!((new.cell_measure(CellId(child)) - old.cell_measure(cell) / 4.0).abs() < 1e-15);
            }
        }
    }

    #[test]
    fn intervals_are_halved_and_keep_names_and_regions() {
        let old = Interval::pieces(&[("a", 0.0, 1.0, 2), ("b", 1.0, 3.0, 2)]).point("joint", 1.0).mesh().unwrap();
        let (new, relation) = old.bisect(&[CellId(1), CellId(3), CellId(1)]).unwrap();
        assert_eq!(new.points(), [[0.0], [0.5], [1.0], [2.0], [3.0], [0.75], [2.5]]);
        assert_eq!(relation.halved_edges(), [[VertexId(1), VertexId(2)], [VertexId(3), VertexId(4)]]);
        assert_eq!(new.named_side(CellId(2), 1), new.find_side("joint").ok());
        assert_eq!(new.named_side(CellId(5), 1), new.find_side("end").ok());
        assert_eq!(new.named_sides().len(), 3);
        assert!((region_measure(&new, "b") - 2.0).abs() < 1e-15);
        assert_eq!(old.refine_uniformly().unwrap().0.cell_count(), 8);
    }

    #[test]
    fn nothing_marked_changes_nothing() {
        let old = Rectangle::new([0.0; 2], [1.0; 2], [3, 3]).mesh().unwrap();
        let (new, relation) = old.bisect(&[]).unwrap();
        assert_eq!((new.points(), new.connectivity()), (old.points(), old.connectivity()));
        assert_eq!(new.named_sides(), old.named_sides());
        assert!(old.cells().all(|cell| !relation.is_cut(cell)));
    }

    #[test]
    fn wrong_marks_and_cells_too_small_to_cut_are_told() {
        let mesh = Interval::uniform(0.0, 1.0, 2).mesh().unwrap();
        assert_eq!(mesh.bisect(&[CellId(2)]).unwrap_err(), MeshError::NoSuchCell { cell: CellId(2), count: 2 });
        let tight = Interval::from_nodes(&[0.0, 1.0, 1.0 + f64::EPSILON]).mesh().unwrap();
        assert!(tight.bisect(&[CellId(0)]).is_ok());
        assert!(matches!(tight.bisect(&[CellId(1)]), Err(MeshError::DegenerateCell { cell: CellId(1), .. })));
        let sliver = Rectangle::new([1.0, 0.0], [1.0 + f64::EPSILON, 1.0], [1, 1]).mesh().unwrap();
        let refined = sliver.refine_uniformly();
        assert!(matches!(refined, Err(MeshError::DegenerateCell { .. })), "{refined:?}");
    }
}
