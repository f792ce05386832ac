//! Values that others have published, or that follow from closed forms, against what the library computes.
//!
//! Each check names its source. "From memory" means that a figure of a standard or a book was not looked up again but agrees,
//! to the digits published, with an independent recomputation of the series or closed form. Run with `-- --nocapture` to see
//! the figures reached.

mod elements;
mod heat;
mod one_dimension;
mod potential;
mod singular;
mod smooth;
mod torsion;
