//! What can be asked for in vain.

/// An error of the element crate.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
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
}
