//! Meshes of intervals and triangles: made from outlines, rectangles, intervals or your own arrays; refined where you
//! want; asked for neighbors, names and places.
//!
//! A [`Mesh`] is a value that never changes: points, cells, a region for each cell, names for sides. Refinement makes a
//! new mesh and its [`Relation`] to the old one. This crate knows nothing of unknowns, matrices or equations.
//!
//! ```
//! use hypercircle_mesh::{CellId, Locator, Rectangle};
//! let plate = Rectangle::new([0.0, 0.0], [2.0, 1.0], [8, 4]).region("steel").mesh()?;
//! // Refine the cells along the left side.
//! let left = plate.find_side("left")?;
//! let marked: Vec<CellId> = plate.named_sides().iter().filter(|s| s.name == left).map(|s| s.cell).collect();
//! let (finer, relation) = plate.bisect(&marked)?;
//! assert!((finer.measure() - 2.0).abs() < 1e-14);
//! // Which cell is here, and which one was it a part of?
//! let (cell, _) = Locator::new(finer.into()).find(&[0.01, 0.3])?;
//! assert!(relation.is_cut(relation.parent(cell)));
//! # Ok::<(), hypercircle_mesh::MeshError>(())
//! ```
//!
//! Rooms, all re-exported here:
//!
//! - to make a mesh: [`Outline`] (regions, holes and wanted sizes), [`Rectangle`], [`Interval`], [`Arrays`] (your own
//!   points and cells, checked);
//! - to ask it: [`Mesh`] itself, [`Topology`] (sides and neighbors), [`Locator`] (which cell a point lies in),
//!   [`Quality`] (angles and sizes), [`Names`];
//! - to refine it: [`Mesh::bisect`], [`Mesh::refine_uniformly`] and the [`Relation`] they return;
//! - [`MeshError`]: what can be wrong, where, and how to mend it.
#![forbid(unsafe_code)]

mod arrays;
mod arrays_check;
mod bisect;
mod error;
mod halves;
mod hilbert;
mod id;
mod interval;
mod limits;
mod locate;
mod longest_side;
mod mesh;
mod names;
mod outline;
mod quality;
mod rectangle;
mod relation;
mod topology;

pub use arrays::Arrays;
pub use error::MeshError;
pub use id::{CellId, RegionId, SideId, SideNameId, VertexId};
pub use interval::{Interval, Toward};
pub use locate::Locator;
pub use mesh::{Mesh, NamedSide};
pub use names::Names;
pub use outline::{
    Area, LoopFault, Outline, Polygon, Sides, between, border_of, polygon, rectangle, regular_polygon, rest_of_boundary,
};
pub use quality::Quality;
pub use rectangle::{Diagonal, Rectangle};
pub use relation::Relation;
pub use topology::Topology;
