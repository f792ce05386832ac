//! An outline — regions as closed loops, holes, named sides, wanted sizes — becomes a mesh of triangles.
//!
//! From left to right: loops are checked one by one (`loops`) and laid over each other (`arrange`); faces get their
//! regions and edges their names (`regions`); borders are cut into pieces of the wanted size (`pieces`, `sizes`) and
//! triangulated (`triangulation`); a lattice fills what is uniform (`seed`), refinement does the rest (`refine`, on
//! the insertion of single vertices in `insert`); `finish` orders and hands over.

mod arrange;
mod finish;
#[cfg(feature = "geo-types")]
mod geo;
mod insert;
mod loops;
mod pieces;
mod refine;
mod regions;
mod seed;
mod sides;
mod sizes;
mod triangulation;

pub use loops::{Area, LoopFault, Polygon, polygon, rectangle, regular_polygon};
pub use sides::{Sides, between, border_of, rest_of_boundary};

use self::insert::Cavity;
use self::refine::{Given, Refinement};
use self::regions::{Border, Plan};
use self::sizes::{SizeField, Source};
use self::triangulation::{NONE, Triangulation};
use crate::{Mesh, MeshError};

/// A plane figure to be meshed, stated piece by piece.
///
/// **Regions** are closed loops of straight sides. They may share borders wholly or in part; a corner of one may lie
/// in the middle of another's side. **The later lies on top**: where regions overlap, the one stated last wins, so a
/// layer can be filled first and the metal put into it afterwards. A region may also cross the borders between regions
/// stated before it; that it reaches over the rim of them all, a typing error more often than not, is
/// [`MeshError::CrossingLoops`]: let it share the rim. The same name may be given to several parts.
///
/// **Holes** win over every region. Their sides carry the hole's name unless a statement of [`Outline::side`] renames
/// them.
///
/// Points closer than 10⁻¹⁰ of the outline's extent are one point.
///
/// ```
/// use hypercircle_mesh::{Outline, between, polygon, rectangle};
///
/// let mut wall = Outline::new(); // meters
/// wall.region("brick", polygon(&[(0.0, 0.0), (0.24, 0.0), (0.24, 1.0), (0.0, 1.0)]))?;
/// wall.region("foam", polygon(&[(0.24, 0.0), (0.36, 0.0), (0.36, 1.0), (0.24, 1.0)]))?;
/// wall.region("anchor", rectangle((0.1, 0.4), (0.3, 0.42)))?; // lies over both
/// wall.hole("duct", rectangle((0.05, 0.7), (0.15, 0.8)))?;
/// wall.side("room", between((0.0, 0.0), (0.0, 1.0)))?;
/// wall.side("street", between((0.36, 0.0), (0.36, 1.0)))?;
/// wall.size_near_point((0.24, 0.41), 0.002)?;
/// let mesh = wall.mesh(0.05)?;
/// assert!((mesh.measure() - 0.35).abs() < 1e-12);
/// # Ok::<(), hypercircle_mesh::MeshError>(())
/// ```
#[derive(Debug, Clone, Default)]
pub struct Outline {
    stated: Vec<Stated>,
    sides: Vec<(String, Sides)>,
    sizes: Vec<Wish>,
    max_cells: Option<usize>,
}

/// A region or a hole.
#[derive(Debug, Clone)]
struct Stated {
    name: String,
    area: Area,
    hole: bool,
}

/// A size wanted somewhere.
#[derive(Debug, Clone)]
enum Wish {
    In(String, f64),
    NearPoint([f64; 2], f64),
    NearSide(String, f64),
}

/// Cells at most, unless [`Outline::max_cells`] says otherwise: some 3 GB while meshing.
const MAX_CELLS: usize = 30_000_000;

impl Outline {
    /// An outline with nothing in it.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a region: a [`Polygon`], or with the feature `geo-types` a polygon of that crate.
    ///
    /// # Errors
    /// [`MeshError::Loop`] if the loop has fewer than three corners or no area, repeats a corner, crosses itself, or is
    /// not finite.
    pub fn region(&mut self, name: &str, area: impl Into<Area>) -> Result<&mut Self, MeshError> {
        self.state(name, area.into(), false)
    }

    /// Adds a hole, whose sides get its name.
    ///
    /// # Errors
    /// Those of [`Outline::region`]. That it lies outside the regions is found by [`Outline::mesh`].
    pub fn hole(&mut self, name: &str, area: impl Into<Area>) -> Result<&mut Self, MeshError> {
        self.state(name, area.into(), true)
    }

    fn state(&mut self, name: &str, area: Area, hole: bool) -> Result<&mut Self, MeshError> {
        area.check(name)?;
        self.stated.push(Stated { name: name.to_owned(), area, hole });
        Ok(self)
    }

    /// Names sides: see [`between`], [`border_of`] and [`rest_of_boundary`]. A later statement wins over an earlier one;
    /// a name may be given in several statements.
    ///
    /// # Errors
    /// [`MeshError::NotFinite`] for points that are not finite. Whether there are such sides is found by
    /// [`Outline::mesh`].
    pub fn side(&mut self, name: &str, sides: Sides) -> Result<&mut Self, MeshError> {
        for (index, mark) in sides.marks().into_iter().enumerate() {
            check_finite("end of a line of sides", index, mark)?;
        }
        self.sides.push((name.to_owned(), sides));
        Ok(self)
    }

    /// Sets the size in a region, instead of the general one. Around it sizes grow by three tenths of the distance.
    ///
    /// # Errors
    /// [`MeshError::NotPositive`].
    pub fn size_in(&mut self, region: &str, size: f64) -> Result<&mut Self, MeshError> {
        self.wish(Wish::In(region.to_owned(), size), size, region)
    }

    /// Asks for a size at a point; away from it sizes grow by three tenths of the distance.
    ///
    /// # Errors
    /// [`MeshError::NotPositive`], [`MeshError::NotFinite`].
    pub fn size_near_point(&mut self, point: (f64, f64), size: f64) -> Result<&mut Self, MeshError> {
        check_finite("point with a size", self.sizes.len(), [point.0, point.1])?;
        self.wish(Wish::NearPoint([point.0, point.1], size), size, "a point")
    }

    /// Asks for a size along sides with a name; away from them sizes grow by three tenths of the distance.
    ///
    /// # Errors
    /// [`MeshError::NotPositive`].
    pub fn size_near_side(&mut self, side: &str, size: f64) -> Result<&mut Self, MeshError> {
        self.wish(Wish::NearSide(side.to_owned(), size), size, side)
    }

    fn wish(&mut self, wish: Wish, size: f64, place: &str) -> Result<&mut Self, MeshError> {
        check_size(size, || format!("the size wanted at \"{place}\""))?;
        self.sizes.push(wish);
        Ok(self)
    }

    /// Limits the number of cells (30 million if not set): a mesh that needs more is refused before memory runs out.
    pub fn max_cells(&mut self, count: usize) -> &mut Self {
        self.max_cells = Some(count);
        self
    }

    /// Makes the mesh. `size` is the length of cell edges where nothing else is asked for; no edge is longer than
    /// about 1.45 times the size wanted at its place. Angles are at least 28°, save near corners at which the outline
    /// itself has an angle below 30°.
    ///
    /// The same outline gives the same mesh, bit for bit.
    ///
    /// # Errors
    /// * [`MeshError::NotPositive`] for the size, [`MeshError::Empty`] without any region,
    /// * [`MeshError::CrossingLoops`], [`MeshError::TooThin`], [`MeshError::PinchedVertex`] for loops that do not go
    ///   together,
    /// * [`MeshError::Loop`] for a hole outside the regions and a region hidden by later ones,
    /// * [`MeshError::NoSuchSide`] for a name without sides, [`MeshError::UnknownName`] for a size at an unknown name,
    /// * [`MeshError::TooMany`] beyond the limit of cells.
    ///
    /// # Source
    /// Constrained Delaunay triangulation; refinement after J. Ruppert, J. Algorithms 18 (1995), with the off-centers of
    /// A. Üngör (2004) and, at small angles of the outline, the concentric circles of G. Miller, S. Pav and
    /// N. Walkington (2003); equilateral lattice where the size is uniform.
    pub fn mesh(&self, size: f64) -> Result<Mesh<2>, MeshError> {
        check_size(size, || "the general size".to_owned())?;
        if !self.stated.iter().any(|s| !s.hole) {
            return Err(MeshError::Empty { what: "the outline", needed: "region" });
        }
        let limit = self.max_cells.unwrap_or(MAX_CELLS).min(u32::MAX as usize / 4);
        let marks: Vec<_> = self.sides.iter().flat_map(|(_, sides)| sides.marks()).collect();
        let arrangement = arrange::arrange(&self.stated, &marks)?;
        let shortest = 10.0 * arrangement.tolerance;
        let plan = regions::plan(&self.stated, &self.sides, arrangement)?;
        let low = [0, 1].map(|i| plan.points.iter().map(|p| p[i]).fold(f64::INFINITY, f64::min));
        let sizes = self.size_field(&plan, size, low, shortest)?;

        let ends: Vec<[u32; 2]> = plan.borders.iter().map(|b| b.ends).collect();
        let mut triangles = Triangulation::constrained(plan.points.clone(), &ends)?;
        regions::flood(&mut triangles, &plan.borders);
        triangles.drop_outside();
        pieces::forecast(&triangles, &sizes, limit)?;

        let mut cavity = Cavity::default();
        let mut border_of = pieces::cut(&mut triangles, &mut cavity, &plan.borders, &sizes, limit)?;
        seed::seed(&mut triangles, &mut cavity, &sizes, low);
        border_of.resize(triangles.points.len(), NONE);
        let corner_count = plan.points.len() as u32;
        let given = Given { sizes: &sizes, borders: &plan.borders, border_of, corner_count, shortest, limit };
        let triangles = Refinement::new(triangles, cavity, given).run()?;
        Ok(finish::finish(&triangles, plan))
    }

    /// Translates the wishes into sizes of regions and sources. `finest` is the smallest size that can be resolved.
    fn size_field(&self, plan: &Plan, size: f64, low: [f64; 2], finest: f64) -> Result<SizeField, MeshError> {
        let mut of_region = vec![size; plan.region_names.len()];
        let mut sources = Vec::new();
        let source = |border: &Border, size: f64| Source { ends: border.ends.map(|p| plan.points[p as usize]), size };
        for wish in &self.sizes {
            match wish {
                Wish::In(region, size) => of_region[plan.region_names.require("region", region)? as usize] = *size,
                Wish::NearSide(side, size) => {
                    let number = plan.side_names.require("side", side)?;
                    sources.extend(plan.borders.iter().filter(|b| b.name == number).map(|b| source(b, *size)));
                }
                Wish::NearPoint(x, size) => sources.push(Source { ends: [*x, *x], size: *size }),
            }
        }
        // The border of a region asks for its size on the other hand.
        for border in plan.borders.iter().filter(|b| b.left != NONE && b.right != NONE) {
            let (left, right) = (of_region[border.left as usize], of_region[border.right as usize]);
            if left != right {
                sources.push(source(border, left.min(right)));
            }
        }
        let smallest = sources.iter().map(|s| s.size).chain(of_region.iter().copied()).fold(f64::INFINITY, f64::min);
        check_size(smallest - finest, || "the smallest size, less the finest that can be resolved,".to_owned())?;
        Ok(SizeField::new(of_region, sources, low, loops::extent(&plan.points)))
    }
}

fn check_size(size: f64, what: impl FnOnce() -> String) -> Result<(), MeshError> {
    if size > 0.0 && size.is_finite() { Ok(()) } else { Err(MeshError::NotPositive { what: what(), value: size }) }
}

fn check_finite(what: &'static str, index: usize, at: [f64; 2]) -> Result<(), MeshError> {
    if at.iter().all(|x| x.is_finite()) { Ok(()) } else { Err(MeshError::NotFinite { what, index, at: at.to_vec() }) }
}

#[cfg(test)]
mod tests;
