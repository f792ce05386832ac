//! Placeholder.
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
