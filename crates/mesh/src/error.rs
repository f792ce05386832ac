//! What can be wrong with a mesh or with what it is made from.

use crate::{CellId, LoopFault, VertexId};

/// An error of mesh generation, checking, refinement or location. Each names the place and ends with the mend.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum MeshError {
    /// A coordinate is NaN or infinite.
    #[error("{what} {index} has the coordinates {at:?}, which are not finite: give finite numbers")]
    NotFinite {
        /// What the point is (vertex, corner of a loop, node, …).
        what: &'static str,
        /// Its number.
        index: usize,
        /// Its coordinates.
        at: Vec<f64>,
    },
    /// Two points coincide.
    #[error("{what} {first} and {second} are at the same place {at:?}: give each place once")]
    RepeatedPoint {
        /// What the points are.
        what: &'static str,
        /// The earlier number.
        first: usize,
        /// The later number.
        second: usize,
        /// Where.
        at: Vec<f64>,
    },
    /// Nodes that are not in ascending order.
    #[error("{what} {index} at {value} lies before the one ahead of it at {before}: list them in ascending order")]
    NotAscending {
        /// What they are.
        what: &'static str,
        /// The number of the later one.
        index: usize,
        /// Where the one ahead of it in the list is.
        before: f64,
        /// Where the later one is.
        value: f64,
    },
    /// A piece of an interval that does not begin where the one before ends.
    #[error("piece {index} begins at {value}, but the one before ends at {before}: let it begin there")]
    Gap {
        /// The number of the piece.
        index: usize,
        /// Where the piece before ends.
        before: f64,
        /// Where the piece begins.
        value: f64,
    },
    /// A name that does not exist.
    #[error("there is no {what} named \"{name}\": use one of {known:?}")]
    UnknownName {
        /// Region or side.
        what: &'static str,
        /// The name that was asked for.
        name: String,
        /// The names there are.
        known: Vec<String>,
    },
    /// A number of cells, a size or a length that is not positive.
    #[error("{what} is {value}: give a positive, finite number")]
    NotPositive {
        /// What it is.
        what: String,
        /// What was given.
        value: f64,
    },
    /// A cell is turned inside out.
    #[error("{cell} at {at:?} is inverted (measure {measure:e}): list its vertices in the other order")]
    InvertedCell {
        /// Which cell.
        cell: CellId,
        /// Its middle.
        at: Vec<f64>,
        /// Its signed length or area.
        measure: f64,
    },
    /// A cell has (nearly) no length or area.
    #[error("{cell} at {at:?} is degenerate (measure {measure:e}): remove it or move its vertices apart")]
    DegenerateCell {
        /// Which cell.
        cell: CellId,
        /// Its middle.
        at: Vec<f64>,
        /// Its signed length or area.
        measure: f64,
    },
    /// Two cells cover the same ground beside a common side.
    #[error(
        "{first} and {second} overlap beside their common side at {at:?}: remove one of them or mend the vertex list"
    )]
    OverlappingCells {
        /// One cell.
        first: CellId,
        /// The other.
        second: CellId,
        /// Middle of the common side.
        at: Vec<f64>,
    },
    /// A vertex number beyond the list of points.
    #[error("{cell} uses vertex {index}, but there are only {count} points: mend the cell or add the point")]
    VertexOutOfRange {
        /// Which cell.
        cell: CellId,
        /// The number it uses.
        index: usize,
        /// How many there are.
        count: usize,
    },
    /// A cell number beyond the cells of the mesh.
    #[error("{cell} does not exist: the mesh has {count} cells, numbered from 0")]
    NoSuchCell {
        /// The number that was given.
        cell: CellId,
        /// How many cells there are.
        count: usize,
    },
    /// A vertex that belongs to no cell.
    #[error("{vertex} at {at:?} belongs to no cell: remove it")]
    UnusedVertex {
        /// Which vertex.
        vertex: VertexId,
        /// Where.
        at: Vec<f64>,
    },
    /// Two parts of the domain touch in a single point.
    #[error("parts of the domain touch only in {vertex} at {at:?}: join them by a side or separate them")]
    PinchedVertex {
        /// Which vertex.
        vertex: VertexId,
        /// Where.
        at: Vec<f64>,
    },
    /// A named side that is no side of the mesh.
    #[error("side \"{name}\" names {place}, which is no side of any cell: name a pair of neighboring vertices")]
    NoSuchSide {
        /// The name.
        name: String,
        /// What it names, in words.
        place: String,
    },
    /// A side that is given two names.
    #[error("the side at {at:?} is named both \"{first}\" and \"{second}\": give it one name")]
    NamedTwice {
        /// One name.
        first: String,
        /// The other.
        second: String,
        /// Middle of the side.
        at: Vec<f64>,
    },
    /// Array lengths that do not fit together.
    #[error("{what} has {given} entries where {expected} are needed: give one for each")]
    WrongLength {
        /// Which array.
        what: &'static str,
        /// Its length.
        given: usize,
        /// The length it should have.
        expected: usize,
    },
    /// Nothing to mesh.
    #[error("{what} is empty: give at least one {needed}")]
    Empty {
        /// What is empty.
        what: &'static str,
        /// What it needs.
        needed: &'static str,
    },
    /// A point that lies in no cell.
    #[error(
        "the point {at:?} lies outside the mesh: ask within its bounding box {low:?} to {high:?} and off its holes"
    )]
    OutsideMesh {
        /// Where.
        at: Vec<f64>,
        /// Lower corner of the mesh's box.
        low: Vec<f64>,
        /// Upper corner of the mesh's box.
        high: Vec<f64>,
    },
    /// More entities than the index type can count.
    #[error("{what} would be {count}, more than the {limit} that can be: use a coarser mesh")]
    TooMany {
        /// What is counted.
        what: &'static str,
        /// How many there would be.
        count: usize,
        /// How many there may be.
        limit: usize,
    },
    /// A loop of an outline is not the border of an area.
    #[error("the loop \"{name}\" {fault} at {at:?}: {}", .fault.mend())]
    Loop {
        /// Name of the region or hole.
        name: String,
        /// What is wrong.
        fault: LoopFault,
        /// Where.
        at: Vec<f64>,
    },
    /// The loop of a region reaches over the rim of what it overlaps.
    #[error(
        "the loops \"{first}\" and \"{second}\" cross at {at:?}: let them share a border, or put one inside the other"
    )]
    CrossingLoops {
        /// The region or hole stated earlier.
        first: String,
        /// The later one.
        second: String,
        /// Where.
        at: Vec<f64>,
    },
    /// Borders so close to each other that numbers cannot tell them apart.
    #[error("borders are too close to each other near {at:?}: let them coincide or move them apart")]
    TooThin {
        /// Where.
        at: Vec<f64>,
    },
}
