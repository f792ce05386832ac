//! Watching a run, and ending it.

use std::time::Duration;

/// One finished round of a run: a mesh, its solution and its bound.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Round {
    /// Counted from 1.
    pub number: usize,
    /// Cells of the mesh.
    pub cells: usize,
    /// Unknowns of the system.
    pub unknowns: usize,
    /// Guaranteed bound of the energy norm of the error.
    pub bound: f64,
    /// The bound relative to the energy norm of the solution, guaranteed too.
    pub relative: f64,
    /// Time since the start of the run.
    pub elapsed: Duration,
}

/// Whether to go on.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Signal {
    /// Go on.
    Continue,
    /// End the run; its best result comes back.
    Stop,
}

/// Is told of every round and may end the run. Closures will do.
///
/// ```
/// use hypercircle::{Round, Signal, Watch};
/// let mut watch = |round: &Round| if round.number < 5 { Signal::Continue } else { Signal::Stop };
/// let round = Round { number: 1, cells: 2, unknowns: 4, bound: 0.1, relative: 0.1, elapsed: Default::default() };
/// assert_eq!(watch.round(&round), Signal::Continue);
/// ```
pub trait Watch {
    /// A round has ended.
    fn round(&mut self, round: &Round) -> Signal;
}

impl<F: FnMut(&Round) -> Signal> Watch for F {
    fn round(&mut self, round: &Round) -> Signal {
        self(round)
    }
}

/// Watches nothing.
#[derive(Debug, Clone, Copy, Default)]
pub struct Unwatched;

impl Watch for Unwatched {
    fn round(&mut self, _round: &Round) -> Signal {
        Signal::Continue
    }
}
