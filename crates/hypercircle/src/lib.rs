//! Diffusion problems in one and two dimensions, solved with guaranteed error bounds.
//!
//! State −div(A∇u) + c u = f on a mesh with conditions on named sides ([`Diffusion`]), solve it once or until a guaranteed
//! bound meets a tolerance ([`Diffusion::solve_within`]), and ask the answer for values, flows, balances and intervals. The
//! bound is part of the ordinary path: every [`Solution`] has its [`Certificate`], and energy-type results (heat flow between
//! two surroundings, capacitance, torsional constant) come as an [`Enclosure`] with a lower and an upper end that the true
//! value cannot leave.
//!
//! ```
//! use hypercircle::mesh::{polygon, rest_of_boundary, Outline};
//! use hypercircle::{Diffusion, Tolerance};
//!
//! // Torsion of an L-shaped bar: −Δφ = 2, φ = 0 around; the torsional constant is 2 ∫ φ.
//! let mut bar = Outline::new();
//! bar.region("bar", polygon(&[(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0)]))?;
//! bar.side("surface", rest_of_boundary())?;
//! let answer = Diffusion::on(bar.mesh(0.2)?)
//!     .conductivity_everywhere(1.0)
//!     .source_everywhere(2.0)
//!     .dirichlet("surface", 0.0)
//!     .order(2)
//!     .solve_within(Tolerance::WorkRelative(1e-4))?;
//! let constant = answer.load_work()?; // value, lower and upper end
//! assert!(constant.relative_width() <= 1e-4);
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```
//!
//! # Rooms
//! - [`mesh`]: outlines, rectangles, intervals, refinement, location;
//! - [`element`]: reference cells, bases, quadrature;
//! - [`assembly`]: coefficients, numbering, kernels, matrices;
//! - [`solve`]: linear solvers;
//! - [`bounds`]: equilibrated fluxes, certificates, intervals, marking;
//! - `export` (feature `export`): pictures, field files, tables.
//!
//! Each is a crate of its own and can be used alone.
//!
//! # What is guaranteed
//! The bound holds for the exact solution on the meshed domain, up to rounding, when all coefficients are numbers or
//! tables of numbers ([`Guarantee::Full`]). Closures and types of your own are sampled at quadrature points, and the guarantee says so
//! ([`Guarantee::Sampled`]). Whether the model is the right one, no bound can tell.
//!
//! # Caution
//! A calculation aid. Where results can hurt someone, a licensed practitioner checks them under the local code.
#![forbid(unsafe_code)]

mod budget;
mod diffusion;
mod energy;
mod error;
mod extremes;
#[cfg(feature = "export")]
mod fields;
mod refine;
mod results;
mod solution;
mod watch;

pub use hypercircle_assembly as assembly;
pub use hypercircle_bounds as bounds;
pub use hypercircle_element as element;
#[cfg(feature = "export")]
pub use hypercircle_export as export;
pub use hypercircle_mesh as mesh;
pub use hypercircle_solve as solve;

pub use budget::{Budget, Limit, forecast_bytes};
pub use diffusion::Diffusion;
pub use error::Error;
pub use extremes::{Extreme, Extremes};
pub use hypercircle_assembly::{Coefficient, PerRegion, Place, Tensor};
pub use hypercircle_bounds::{Certificate, Enclosure, Guarantee};
pub use refine::{Answer, Ending, Goal, Tolerance};
pub use results::{Balance, RegionResult};
pub use solution::Solution;
pub use watch::{Round, Signal, Unwatched, Watch};

/// The program on the front page of the project runs.
#[cfg(doctest)]
#[doc = include_str!(concat!(env!("CARGO_MANIFEST_DIR"), "/../../README.md"))]
pub struct Readme;
