//! Meshes from the user's own arrays, checked.

use hypercircle_element::Shape;

use crate::arrays_check::{check_cells, check_fans, check_points, check_sides};
use crate::limits::check_counts;
use crate::longest_side::longest_side_first;
use crate::mesh::Parts;
use crate::{CellId, Mesh, MeshError, NamedSide, Names, RegionId, SideNameId, VertexId};

/// Points and cells that come from elsewhere: a file, another mesh generator, the user's own code.
///
/// [`Arrays::mesh`] checks everything that the rest of the library relies on. The numbers of points and cells are kept;
/// the vertices of a triangle may be rotated, so that its side 0 is the longest. The region is named "domain" unless
/// told otherwise, and a side has a name only if it is given one.
///
/// ```
/// use hypercircle_mesh::Arrays;
/// let points = vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
/// let mesh = Arrays::new(points, &[[0, 1, 2], [0, 2, 3]])
///     .region_of_each_cell(&["brick", "foam"])
///     .side("floor", &[[0, 1]])
///     .side("joint", &[[0, 2]])
///     .mesh()?;
/// assert_eq!(mesh.region_names().len(), 2);
/// assert!((mesh.measure() - 1.0).abs() < 1e-15);
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone)]
#[must_use = "call `mesh` to get the mesh"]
pub struct Arrays<const D: usize> {
    points: Vec<[f64; D]>,
    vertices_per_cell: usize,
    vertices: Vec<VertexId>,
    region_names: Names,
    regions: Option<Vec<u32>>,
    sides: Vec<(String, Vec<[u32; D]>)>,
}

impl<const D: usize> Arrays<D> {
    /// The coordinates of all points and the point numbers of each cell: two ascending ones for an interval (`D` = 1),
    /// three counterclockwise ones for a triangle (`D` = 2).
    pub fn new<const V: usize>(points: Vec<[f64; D]>, cells: &[[u32; V]]) -> Self {
        Self {
            points,
            vertices_per_cell: V,
            vertices: cells.iter().flatten().map(|i| VertexId(*i)).collect(),
            region_names: Names::default(),
            regions: None,
            sides: Vec::new(),
        }
    }

    /// The name of the region of each cell.
    pub fn region_of_each_cell<S: AsRef<str>>(mut self, names: &[S]) -> Self {
        self.region_names = Names::default();
        self.regions = Some(names.iter().map(|name| self.region_names.add(name.as_ref())).collect());
        self
    }

    /// The names of the regions, and for each cell the number of its region in that list.
    pub fn regions(mut self, names: &[&str], number_of_each_cell: &[u32]) -> Self {
        // A name that is given twice is one region.
        self.region_names = Names::default();
        let numbers: Vec<u32> = names.iter().map(|name| self.region_names.add(name)).collect();
        let known = |number: &u32| numbers.get(*number as usize).copied().unwrap_or(u32::MAX);
        self.regions = Some(number_of_each_cell.iter().map(known).collect());
        self
    }

    /// Names sides, each given by its vertices in any order: pairs for triangles, single ones for intervals. They may
    /// lie on the boundary or between cells. Further sides may be added to a name later.
    pub fn side(mut self, name: &str, sides: &[[u32; D]]) -> Self {
        self.sides.push((name.to_owned(), sides.to_vec()));
        self
    }

    /// Checks everything and makes the mesh. Cells that overlap without having a side in common are not looked for.
    ///
    /// # Errors
    /// [`MeshError::WrongLength`] and [`MeshError::Empty`] for arrays, [`MeshError::TooMany`], [`MeshError::NotFinite`]
    /// for coordinates, [`MeshError::RepeatedPoint`] for points closer than 10⁻¹³ of the mesh's diameter,
    /// [`MeshError::VertexOutOfRange`], [`MeshError::DegenerateCell`] for a measure within the rounding of coordinates
    /// or 10⁻¹⁴ of the cell's diameter squared, [`MeshError::InvertedCell`], [`MeshError::UnusedVertex`],
    /// [`MeshError::OverlappingCells`] for two cells on the same hand of a side, [`MeshError::PinchedVertex`],
    /// [`MeshError::UnknownName`] for a number that belongs to no region, [`MeshError::NoSuchSide`] and
    /// [`MeshError::NamedTwice`] for named sides.
    pub fn mesh(&self) -> Result<Mesh<D>, MeshError> {
        let shape = self.checked_shape()?;
        check_points(&self.points)?;
        check_cells(&self.points, &self.vertices, self.vertices_per_cell)?;
        check_sides(&self.points, &self.vertices, self.vertices_per_cell)?;
        let (region_names, regions) = self.checked_regions()?;
        let mut connectivity = self.vertices.clone();
        if shape == Shape::Triangle {
            let (triangles, _) = connectivity.as_chunks_mut::<3>();
            triangles.iter_mut().for_each(|v| *v = longest_side_first(&self.points, *v));
        }
        let mesh = Mesh::from_parts(Parts {
            shape,
            points: self.points.clone(),
            connectivity,
            regions,
            region_names,
            side_names: Names::default(),
            named_sides: Vec::new(),
        });
        check_fans(&mesh)?;
        let (side_names, named_sides) = self.checked_names(&mesh)?;
        Ok(mesh.with_named_sides(side_names, named_sides))
    }

    fn checked_shape(&self) -> Result<Shape, MeshError> {
        let Some(shape) = Shape::simplex(D) else {
            return Err(MeshError::WrongLength { what: "each point", given: D, expected: 2 });
        };
        let expected = shape.vertex_count();
        if self.vertices_per_cell != expected {
            return Err(MeshError::WrongLength { what: "each cell", given: self.vertices_per_cell, expected });
        }
        if self.vertices.is_empty() {
            return Err(MeshError::Empty { what: "the list of cells", needed: "cell" });
        }
        check_counts(shape, self.points.len(), self.vertices.len() / expected)?;
        Ok(shape)
    }

    fn checked_regions(&self) -> Result<(Names, Vec<RegionId>), MeshError> {
        let expected = self.vertices.len() / self.vertices_per_cell;
        let Some(regions) = &self.regions else {
            let mut names = Names::default();
            let domain = RegionId(names.add("domain"));
            return Ok((names, vec![domain; expected]));
        };
        if regions.len() != expected {
            return Err(MeshError::WrongLength { what: "the list of regions", given: regions.len(), expected });
        }
        if let Some(cell) = regions.iter().position(|number| *number as usize >= self.region_names.len()) {
            return Err(MeshError::UnknownName {
                what: "region",
                name: format!("that of cell {cell}"),
                known: self.region_names.iter().map(str::to_owned).collect(),
            });
        }
        Ok((self.region_names.clone(), regions.iter().map(|number| RegionId(*number)).collect()))
    }

    fn checked_names(&self, mesh: &Mesh<D>) -> Result<(Names, Vec<NamedSide>), MeshError> {
        let mut names = Names::default();
        let mut named = Vec::new();
        for (name, sides) in &self.sides {
            let number = SideNameId(names.add(name));
            for side in sides {
                let Some((cell, local)) = find_side(mesh, side) else {
                    return Err(MeshError::NoSuchSide { name: name.clone(), place: format!("vertices {side:?}") });
                };
                named.push(NamedSide { cell, local, name: number });
            }
        }
        named.sort_unstable();
        named.dedup();
        let twice = named.windows(2).find(|pair| (pair[0].cell, pair[0].local) == (pair[1].cell, pair[1].local));
        if let Some([first, second]) = twice.and_then(|pair| pair.first_chunk::<2>()) {
            let text = |side: &NamedSide| names.get(side.name.0).unwrap_or_default().to_owned();
            return Err(MeshError::NamedTwice {
                first: text(first),
                second: text(second),
                at: middle(mesh, first.cell, first.local),
            });
        }
        Ok((names, named))
    }
}

/// The lowest cell that has the side with these vertices.
fn find_side<const D: usize>(mesh: &Mesh<D>, side: &[u32; D]) -> Option<(CellId, u8)> {
    if side[0] as usize >= mesh.vertex_count() {
        return None;
    }
    let mut wanted = side.map(VertexId);
    wanted.sort_unstable();
    let local_in = |cell: &CellId| {
        (0..=D as u8).find(|local| {
            let mut vertices = mesh.side_vertices(*cell, *local);
            vertices.sort_unstable();
            vertices == wanted
        })
    };
    mesh.topology().cells_around(VertexId(side[0])).iter().find_map(|cell| Some((*cell, local_in(cell)?)))
}

fn middle<const D: usize>(mesh: &Mesh<D>, cell: CellId, local: u8) -> Vec<f64> {
    let v = mesh.side_vertices(cell, local);
    let (a, b) = (mesh.point(v[0]), mesh.point(v[D - 1]));
    (0..D).map(|i| f64::midpoint(a[i], b[i])).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn square() -> Arrays<2> {
        let points = vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
        Arrays::new(points, &[[0, 1, 2], [2, 3, 0]])
    }

    #[test]
    fn numbers_are_kept_and_triangles_begin_with_their_longest_side() {
        let mesh = square().mesh().unwrap();
        assert_eq!(mesh.point(VertexId(2)), [1.0, 1.0]);
        assert_eq!(mesh.cell_vertices(CellId(0)), [2, 0, 1].map(VertexId));
        assert_eq!(mesh.cell_vertices(CellId(1)), [0, 2, 3].map(VertexId));
        assert_eq!(mesh.region_name(mesh.region(CellId(1))), "domain");
        assert!(mesh.named_sides().is_empty());
    }

    #[test]
    fn sides_are_named_by_their_vertices_in_any_order() {
        let mesh = square().side("out", &[[1, 2], [3, 2]]).side("in", &[[2, 0]]).side("out", &[[2, 1]]).mesh().unwrap();
        let (out, inner) = (mesh.find_side("out").unwrap(), mesh.find_side("in").unwrap());
        let sides: Vec<_> = mesh.named_sides().iter().map(|s| (s.cell.0, s.local, s.name)).collect();
        assert_eq!(sides, [(0, 0, inner), (0, 2, out), (1, 1, out)]);
    }

    #[test]
    fn a_line_from_arrays_may_have_regions_by_number_and_parts() {
        let line = Arrays::new(vec![[3.0], [0.0], [1.0], [2.0]], &[[1, 2], [3, 0]]);
        let mesh = line.regions(&["a", "b", "a"], &[2, 1]).side("gap", &[[2], [3]]).mesh().unwrap();
        assert_eq!(mesh.region_names().iter().collect::<Vec<_>>(), ["a", "b"]);
        assert_eq!(mesh.regions(), [RegionId(0), RegionId(1)]);
        let gap = mesh.find_side("gap").ok();
        assert_eq!((mesh.named_side(CellId(0), 1), mesh.named_side(CellId(1), 0)), (gap, gap));
        assert!((mesh.measure() - 2.0).abs() < 1e-15);
    }

    #[test]
    fn arrays_that_do_not_fit_are_told() {
        let told = |arrays: Arrays<2>| arrays.mesh().unwrap_err();
        let points = || vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
        let quadrangle = told(Arrays::new(points(), &[[0, 1, 2, 3]]));
        assert_eq!(quadrangle, MeshError::WrongLength { what: "each cell", given: 4, expected: 3 });
        let space = Arrays::new(vec![[0.0; 3]; 4], &[[0, 1, 2, 3]]).mesh().unwrap_err();
        assert_eq!(space, MeshError::WrongLength { what: "each point", given: 3, expected: 2 });
        assert!(matches!(told(Arrays::new(points(), &[[0; 3]; 0])), MeshError::Empty { .. }));
        let regions = told(square().region_of_each_cell(&["a"]));
        assert_eq!(regions, MeshError::WrongLength { what: "the list of regions", given: 1, expected: 2 });
        let unknown = told(square().regions(&["a"], &[0, 1]));
        assert!(matches!(unknown, MeshError::UnknownName { what: "region", name, .. } if name == "that of cell 1"));
    }

    #[test]
    fn wrong_named_sides_are_told() {
        for side in [[1, 3], [1, 9], [9, 1], [1, 1]] {
            let told = square().side("wall", &[side]).mesh().unwrap_err();
            assert!(matches!(told, MeshError::NoSuchSide { name, .. } if name == "wall"));
        }
        let told = square().side("a", &[[0, 1]]).side("b", &[[1, 0]]).mesh().unwrap_err();
        assert_eq!(told, MeshError::NamedTwice { first: "a".into(), second: "b".into(), at: vec![0.5, 0.0] });
    }
}
