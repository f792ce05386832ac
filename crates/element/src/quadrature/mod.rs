//! Quadrature rules on the reference cells.

mod adaptive;
mod catalog;
mod gauss;
mod kronrod;
mod pieces;
mod rule;
mod symmetric_high;
mod symmetric_low;
mod triangle;

pub use adaptive::{Adaptive, Integral, IntegralEnd};
pub use catalog::{Composite, IntervalRule, Quadrature, TriangleRule};
pub(crate) use gauss::lobatto;
pub use kronrod::Kronrod;
pub use rule::Rule;
