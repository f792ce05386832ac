//! Krylov methods.

mod cg;

pub use cg::ConjugateGradients;
