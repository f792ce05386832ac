//! From a mesh and coefficients to a sparse system.
//!
//! Data travel one way: a [`Space`] numbers the unknowns of a mesh, a [`Pattern`] holds the sparsity, kernels
//! ([`MatrixKernel`], [`VectorKernel`]) say what a cell contributes, a [`Strategy`] sums the contributions, and a [`System`] is the result
//! for the [`Terms`] of a balance. Kernels and strategies do not know each other; which linear solver runs is nobody's
//! business here.
//!
//! ```
//! use std::sync::Arc;
//! use hypercircle_assembly::{tensorial, Condition, Pattern, Place, Scatter, Space, System, Terms};
//! use hypercircle_mesh::Rectangle;
//!
//! let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [8, 8]).mesh()?;
//! let space = Space::new(mesh.into(), 2)?;
//! let mut terms = Terms::conducting(space.mesh(), tensorial(|at: &Place<2>| 1.0 + at.x[0]));
//! terms.set(space.mesh().find_side("left")?, Condition::Dirichlet(Arc::new(0.0)));
//! let pattern = Pattern::new(&space);
//! let system = System::assemble(&space, &pattern, &terms, &Scatter)?;
//! let reduced = system.constraints.reduce(&system.matrix, &system.load);
//! assert_eq!(reduced.free.len(), 17 * 16);
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```
#![forbid(unsafe_code)]

mod block;
pub mod check;
mod coefficient;
mod constraint;
mod error;
mod kernel;
mod pattern;
mod space;
mod strategy;
mod system;
mod tensor;
mod terms;

pub use block::{Block, CellView, SideTables};
pub use coefficient::{Coefficient, PerRegion, Place, Scalar, Tensorial, tensorial};
pub use constraint::{Constraints, Reduced};
pub use error::AssemblyError;
pub use kernel::{Diffusion, Load, Mass, MatrixKernel, VectorKernel};
pub use pattern::{Pattern, SparseMatrix};
pub use space::Space;
pub use strategy::{Scatter, Strategy};
pub use system::System;
pub use tensor::Tensor;
pub use terms::{Condition, ConditionSide, Terms, cell_rule, place, side_rule};
