//! Guaranteed error bounds from equilibrated fluxes.
//!
//! Whoever solves −div(A∇u) + c u = f approximately, by whatever means, holds a vector of unknowns. This crate builds a flux σ from
//! it that balances the source in every cell and has continuous normal components. By the theorem of Prager and
//! Synge the true solution lies on a sphere through the two (the *hypercircle*), so their distance bounds the error:
//! without an unknown constant, a reference solution or a finer mesh.
//!
//! [`Certificate::of`] judges a vector; [`mark`] picks the cells that matter; [`Enclosure`] is a result with its
//! guaranteed ends.
//!
//! ```
//! use std::sync::Arc;
//! use hypercircle_assembly::{tensorial, Condition, Pattern, Scatter, Space, System, Terms};
//! use hypercircle_bounds::{mark, Certificate, Guarantee};
//! use hypercircle_mesh::Rectangle;
//!
//! let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [4, 4]).mesh()?;
//! let space = Space::new(mesh.into(), 1)?;
//! let mut terms = Terms::conducting(space.mesh(), tensorial(1.0));
//! terms.source = Some(Arc::new(1.0));
//! terms.set(space.mesh().find_side("left")?, Condition::Dirichlet(Arc::new(0.0)));
//! let system = System::assemble(&space, &Pattern::new(&space), &terms, &Scatter)?;
//! // Any vector will do, here a poor guess: u = x − x²/2 is the solution.
//! let guess: Vec<f64> = space.positions().iter().map(|x| x[0]).collect();
//! let certificate = Certificate::of(&space, &terms, &system, &guess)?;
//! let true_error = (1.0_f64 / 3.0).sqrt(); // ‖∇(u − x)‖ = ‖x‖
//! assert!(certificate.bound() >= true_error);
//! assert_eq!(certificate.guarantee(), &Guarantee::Full);
//! assert!(!mark(certificate.shares(), 0.5).is_empty());
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```
#![forbid(unsafe_code)]

mod algebra;
mod certificate;
mod cholesky;
mod enclosure;
mod equilibrate;
mod flux;
mod interval_1d;
mod lift;
mod marking;
mod patch;
mod reference;
mod state;
mod survey;

pub use certificate::Certificate;
pub use enclosure::{Enclosure, Guarantee};
pub use flux::Flux;
pub use marking::mark;
