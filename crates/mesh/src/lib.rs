//! Placeholder.
#![forbid(unsafe_code)]

mod error;
mod hilbert;
mod id;
mod mesh;
mod names;
mod topology;

pub use error::MeshError;
pub use id::{CellId, RegionId, SideId, SideNameId, VertexId};
pub use mesh::{Mesh, NamedSide};
pub use names::Names;
pub use topology::Topology;
