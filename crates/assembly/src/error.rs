//! What can go wrong while a system is made.

use hypercircle_element::ElementError;
use hypercircle_mesh::MeshError;

/// An error of numbering, coefficients or assembly. Each names the place and ends with the mend.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum AssemblyError {
    /// Something is wrong with the mesh or a name in it.
    #[error(transparent)]
    Mesh(#[from] MeshError),
    /// An order or degree beyond what is offered.
    #[error(transparent)]
    Element(#[from] ElementError),
    /// A region that lacks a coefficient.
    #[error("region \"{region}\" has no {what}: give it one")]
    RegionWithout {
        /// Which coefficient.
        what: &'static str,
        /// Which region.
        region: String,
    },
    /// A coefficient gave NaN or infinity.
    #[error("the {what} at {at:?} in region \"{region}\" is {value}: make it finite")]
    NotFinite {
        /// Which coefficient.
        what: &'static str,
        /// Where.
        at: Vec<f64>,
        /// In which region.
        region: String,
        /// What it gave.
        value: f64,
    },
    /// A conductivity that is not positive definite.
    #[error(
        "the conductivity at {at:?} in region \"{region}\" has the principal value {smallest}: it must be positive definite"
    )]
    NotPositiveDefinite {
        /// Where.
        at: Vec<f64>,
        /// In which region.
        region: String,
        /// The smallest principal value.
        smallest: f64,
    },
    /// A film or reaction coefficient below zero.
    #[error("the {what} at {at:?} in region \"{region}\" is {value}: it must not be negative")]
    Negative {
        /// Which coefficient.
        what: &'static str,
        /// Where.
        at: Vec<f64>,
        /// In which region.
        region: String,
        /// What it gave.
        value: f64,
    },
    /// A condition on a side that lies inside the domain.
    #[error("side \"{name}\" has a condition but lies inside the domain at {at:?}: conditions go on the boundary")]
    InnerCondition {
        /// The name of the side.
        name: String,
        /// Middle of the first such side.
        at: Vec<f64>,
    },
    /// A part of the domain whose level nothing holds.
    #[error(
        "nothing holds the level of the part around {at:?} (region \"{region}\"): only its slopes are determined; give it a \
         Dirichlet or Robin side or a reaction term"
    )]
    LevelUndetermined {
        /// A point in the part.
        at: Vec<f64>,
        /// The region there.
        region: String,
    },
    /// A vector whose length does not fit.
    #[error("{what} has {given} entries where {expected} are needed: give one for each unknown")]
    WrongLength {
        /// Which vector.
        what: &'static str,
        /// Its length.
        given: usize,
        /// The length it should have.
        expected: usize,
    },
}
