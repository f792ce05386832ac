//! Solvers for sparse symmetric positive definite systems.
//!
//! This crate knows matrices and vectors only. A [`LinearSystem`] is a borrowed matrix ([`CsrView`]), a load, and, where known, the
//! places of the unknowns; a [`LinearSolver`] solves it. [`Automatic`] picks a method and says why; [`Direct`],
//! [`ConjugateGradients`] and [`Tridiagonal`] are the methods; your own solver is one trait away.
//!
//! ```
//! use hypercircle_solve::{Automatic, CsrView, LinearSolver, LinearSystem};
//! // The chain of three springs −x₀ + 2x₁ − x₂ = 0 … with a pull of 4 at its end.
//! let matrix = CsrView::new(&[0, 2, 5, 7], &[0, 1, 0, 1, 2, 1, 2], &[2.0, -1.0, -1.0, 2.0, -1.0, -1.0, 2.0])?;
//! let mut x = [0.0; 3];
//! let system = LinearSystem { matrix, load: &[0.0, 0.0, 4.0], coordinates: None };
//! let outcome = Automatic::default().solve(&system, &mut x)?;
//! assert!((x[2] - 3.0).abs() < 1e-14);
//! println!("{}: {}", outcome.method, outcome.why);
//! # Ok::<(), hypercircle_solve::SolveError>(())
//! ```
//!
//! All results are the same to the last bit on any number of threads.
#![forbid(unsafe_code)]

mod automatic;
mod direct;
mod dissection;
mod error;
mod krylov;
mod matrix;
mod reduction;
mod solver;
mod tridiagonal;

pub use automatic::Automatic;
pub use direct::Direct;
pub use dissection::nested_dissection;
pub use error::SolveError;
pub use krylov::ConjugateGradients;
pub use matrix::CsrView;
pub use solver::{Coordinates, LinearSolver, LinearSystem, Outcome, check_solver};
pub use tridiagonal::Tridiagonal;
