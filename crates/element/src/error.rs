//! What can be asked for in vain.

use crate::Shape;

/// An error of the element crate.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum ElementError {
    /// An order or degree beyond what is offered.
    #[error("{what} is {value}: stay between the lowest one and {limit}")]
    OutOfRange {
        /// What it is.
        what: &'static str,
        /// What was asked for.
        value: usize,
        /// The highest one offered.
        limit: usize,
    },
    /// The conditions that should fix a basis depend on each other.
    #[error("condition {index} of the basis follows from the others: choose distinct nodes")]
    DependentConditions {
        /// Number of the condition.
        index: usize,
    },
    /// Fewer parts than the thing needs to exist.
    #[error("{what} is {value}: it needs at least {least}")]
    TooFew {
        /// What it is.
        what: &'static str,
        /// What was asked for.
        value: usize,
        /// The least that works.
        least: usize,
    },
    /// A thing that exists on one shape only, asked for on another.
    #[error("{what} does not exist on the {shape:?}: choose one that is made for that shape")]
    WrongShape {
        /// What it is.
        what: &'static str,
        /// The shape it was asked for on.
        shape: Shape,
    },
    /// A quadrature rule whose points and weights differ in number.
    #[error("the rule has {points} points and {weights} weights: give one weight for each point, at least one")]
    UnequalLengths {
        /// Number of points.
        points: usize,
        /// Number of weights.
        weights: usize,
    },
    /// A number that is not finite.
    #[error("{what} {index} is not finite: give a number")]
    NotFinite {
        /// What it is: a point or a weight.
        what: &'static str,
        /// Its number.
        index: usize,
    },
    /// A quadrature point outside its reference cell.
    #[error(
        "point {index} at ({}, {}) lies outside the reference {shape:?}: give points on [0, 1] (second coordinate 0) or \
         on the triangle (0, 0), (1, 0), (0, 1)", at[0], at[1]
    )]
    OutsideCell {
        /// Number of the point.
        index: usize,
        /// Where it lies.
        at: [f64; 2],
        /// The cell it should lie in.
        shape: Shape,
    },
    /// A quadrature rule that does not integrate a polynomial of the degree it claims.
    #[error(
        "the rule claims degree {degree} but gives {value:e} for the integral {exact:e} of x^{} y^{}: claim a lower degree \
         or mend its points and weights", monomial[0], monomial[1]
    )]
    Inexact {
        /// The degree claimed.
        degree: usize,
        /// Exponents of x and y of the monomial of lowest degree that fails.
        monomial: [usize; 2],
        /// What the rule gives.
        value: f64,
        /// The integral.
        exact: f64,
    },
    /// An adaptive integration that was asked to do what cannot be done.
    #[error("{what} is {value}: give a finite number that is not negative")]
    BadSetting {
        /// Which setting.
        what: &'static str,
        /// What it is.
        value: f64,
    },
}
