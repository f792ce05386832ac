//! Placeholder.
#![forbid(unsafe_code)]

mod bisect;
mod error;
mod halves;
mod hilbert;
mod id;
mod interval;
mod limits;
mod longest_side;
mod mesh;
mod names;
mod rectangle;
mod relation;
mod topology;

pub use error::MeshError;
pub use id::{CellId, RegionId, SideId, SideNameId, VertexId};
pub use interval::{Interval, Toward};
pub use mesh::{Mesh, NamedSide};
pub use names::Names;
pub use rectangle::{Diagonal, Rectangle};
pub use relation::Relation;
pub use topology::Topology;
