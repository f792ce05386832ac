//! Placeholder.
#![forbid(unsafe_code)]
mod shape;
pub use shape::Shape;
