//! The loop: solve, certify, mark, bisect, until the bound meets the tolerance.

use std::ops::Deref;
use std::sync::Arc;
use std::time::{Duration, Instant};

use hypercircle_assembly::{Space, Terms};
use hypercircle_bounds::{Guarantee, mark};
use hypercircle_mesh::{Mesh, MeshError};
use hypercircle_solve::{LinearSolver, SolveError};

use crate::budget::Limit;
use crate::{Budget, Error, Round, Signal, Solution, Watch};

/// What the guaranteed bound shall come down to.
#[derive(Debug, Clone, Copy, PartialEq)]
#[non_exhaustive]
pub enum Tolerance {
    /// Bound of the error in the energy norm, relative to the energy norm of the solution ([`Solution::relative_bound`]).
    Relative(f64),
    /// Bound of the error in the energy norm, absolute.
    Absolute(f64),
    /// Width of the guaranteed interval of the flow between two levels, relative to the flow ([`Solution::exchanged_flow`]).
    FlowRelative(f64),
    /// Width of that interval, absolute.
    FlowAbsolute(f64),
    /// Width of the guaranteed interval of the work of the loads, relative to it ([`Solution::load_work`]).
    WorkRelative(f64),
}

impl Tolerance {
    fn value(self) -> f64 {
        match self {
            Self::Relative(v)
            | Self::Absolute(v)
            | Self::FlowRelative(v)
            | Self::FlowAbsolute(v)
            | Self::WorkRelative(v) => v,
        }
    }

    /// How far a solution is from meeting it: met at one and below.
    fn distance<const D: usize>(self, solution: &Solution<D>) -> Result<f64, Error> {
        let reached = match self {
            Self::Relative(_) => solution.relative_bound()?,
            Self::Absolute(_) => solution.certificate()?.bound(),
            Self::FlowRelative(_) => solution.exchanged_flow()?.relative_width(),
            Self::FlowAbsolute(_) => solution.exchanged_flow()?.width(),
            Self::WorkRelative(_) => solution.load_work()?.relative_width(),
        };
        Ok(reached / self.value())
    }
}

/// A tolerance with the budget to reach it.
///
/// ```
/// use hypercircle::{Budget, Goal, Tolerance};
/// let goal = Goal::new(Tolerance::Relative(1e-3)).within(Budget::none().unknowns(100_000));
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[must_use]
pub struct Goal {
    tolerance: Tolerance,
    budget: Budget,
    share: f64,
}

impl Goal {
    /// A tolerance without limits.
    pub fn new(tolerance: Tolerance) -> Self {
        Self { tolerance, budget: Budget::none(), share: 0.5 }
    }

    /// With a budget.
    pub fn within(self, budget: Budget) -> Self {
        Self { budget, ..self }
    }

    /// Marks the smallest set of cells with this share of the squared bound in each round (0.5 if not set); 1 refines
    /// everywhere that has any error.
    pub fn marking(self, share: f64) -> Self {
        Self { share, ..self }
    }

    fn check(&self) -> Result<(), Error> {
        let value = self.tolerance.value();
        if !(value > 0.0 && value.is_finite()) {
            return Err(Error::Tolerance { value });
        }
        if !(self.share > 0.0 && self.share <= 1.0) {
            return Err(Error::MarkedShare { value: self.share });
        }
        self.budget.check()
    }
}

/// Why a run has ended.
#[derive(Debug, Clone, PartialEq)]
#[non_exhaustive]
pub enum Ending {
    /// The bound meets the tolerance.
    Met,
    /// The next round would break a limit of the budget.
    OutOfBudget(Limit),
    /// The watch said stop.
    Cancelled,
    /// The bound stays where it is: rounding or the resolution of the coordinates is reached, or there is no bound (the reason is in the
    /// certificate).
    Stuck,
    /// The linear solver gave up on the next round.
    SolverFailed(SolveError),
}

/// The best solution of a run, why the run ended, and its rounds.
///
/// It can be asked everything that a [`Solution`] can.
#[derive(Debug, Clone)]
#[must_use]
pub struct Answer<const D: usize> {
    solution: Solution<D>,
    ending: Ending,
    rounds: Vec<Round>,
}

impl<const D: usize> Answer<D> {
    /// The best solution.
    pub fn solution(&self) -> &Solution<D> {
        &self.solution
    }

    /// Why the run ended.
    #[must_use]
    pub fn ending(&self) -> &Ending {
        &self.ending
    }

    /// Whether the tolerance is met.
    #[must_use]
    pub fn is_met(&self) -> bool {
        self.ending == Ending::Met
    }

    /// All rounds; the last one belongs to the solution.
    #[must_use]
    pub fn rounds(&self) -> &[Round] {
        &self.rounds
    }

    /// The solution alone.
    #[must_use]
    pub fn into_solution(self) -> Solution<D> {
        self.solution
    }
}

impl<const D: usize> Deref for Answer<D> {
    type Target = Solution<D>;
    fn deref(&self) -> &Solution<D> {
        &self.solution
    }
}

/// A bound that falls to more than this share of itself in `PATIENCE` rounds is no progress.
const PROGRESS: f64 = 0.999;
const PATIENCE: usize = 8;
/// A rising bound means that sampled data are only now being seen, unless it is as small as this: then it is rounding.
const SEEN: f64 = 1e-8;

/// Whether the bound has stayed where it is for long.
fn is_stuck(rounds: &[Round], exact_data: bool) -> bool {
    let [.., last] = rounds else { return false };
    let Some(before) = rounds.len().checked_sub(PATIENCE + 1).map(|k| rounds[k]) else { return false };
    let falling = last.bound.is_finite() && last.bound <= PROGRESS * before.bound;
    let rising = last.bound.is_finite() && last.bound > before.bound / PROGRESS && !exact_data && last.relative > SEEN;
    !falling && !rising
}

/// Cells smaller than this share of the largest coordinate are at the end of what coordinates resolve.
const RESOLUTION: f64 = 2e-15;
/// A round refines in at most so many passes, and no further than to so many times the cells.
const PASSES: usize = 8;
const GROWTH: f64 = 1.15;

/// Runs the loop.
pub(crate) fn pursue<const D: usize>(
    mesh: &Arc<Mesh<D>>,
    order: usize,
    terms: &Terms<D>,
    goal: &Goal,
    solver: &mut dyn LinearSolver,
    watch: &mut dyn Watch,
) -> Result<Answer<D>, Error> {
    goal.check()?;
    let start = Instant::now();
    let mut rounds: Vec<Round> = Vec::new();
    let mut solution = Solution::new(Space::new(mesh.clone(), order)?, terms.clone(), solver)?;
    loop {
        let certificate = solution.certificate()?;
        let round = Round {
            number: rounds.len() + 1,
            cells: solution.mesh().cell_count(),
            unknowns: solution.unknown_count(),
            bound: certificate.bound(),
            relative: solution.relative_bound()?,
            elapsed: start.elapsed(),
        };
        rounds.push(round);
        let signal = watch.round(&round);
        let unbounded = matches!(certificate.guarantee(), Guarantee::None(_));
        if !unbounded && goal.tolerance.distance(&solution)? <= 1.0 {
            return Ok(Answer { solution, ending: Ending::Met, rounds });
        }
        if signal == Signal::Stop {
            return Ok(Answer { solution, ending: Ending::Cancelled, rounds });
        }
        let exact_data = certificate.guarantee() == &Guarantee::Full;
        let finer = refined(solution.mesh(), certificate.shares(), order, goal.share)?;
        let Some(finer) = finer.filter(|_| !is_stuck(&rounds, exact_data)) else {
            return Ok(Answer { solution, ending: Ending::Stuck, rounds });
        };
        let space = Space::new(Arc::new(finer), order)?;
        let unknowns = space.unknown_count();
        if let Some(limit) = goal.budget.broken_by(unknowns, order, foreseen_end(&rounds, unknowns)) {
            return Ok(Answer { solution, ending: Ending::OutOfBudget(limit), rounds });
        }
        match Solution::new(space, terms.clone(), solver) {
            Ok(finer) => solution = finer,
            Err(Error::Solve(error)) => return Ok(Answer { solution, ending: Ending::SolverFailed(error), rounds }),
            Err(error) => return Err(error),
        }
    }
}

/// Marks and bisects, again and again with shares foretold for the children, until the mesh has grown enough to be worth
/// another solve. Near a singularity a round so does the work of many. `None` if no cell has a share.
///
/// A cell of measure m adds about m^{p+1} to the square of the bound where the solution is smooth: the child with the part r of
/// its parent's measure gets the part r^{p+1} of its share. At a singularity the true share is larger, so too little is refined rather
/// than too much. Cells at the resolution of the coordinates are left as they are.
fn refined<const D: usize>(
    mesh: &Arc<Mesh<D>>,
    shares: &[f64],
    order: usize,
    share: f64,
) -> Result<Option<Mesh<D>>, Error> {
    let enough = (GROWTH * mesh.cell_count() as f64) as usize;
    let (low, high) = mesh.bounding_box();
    let smallest = RESOLUTION * low.iter().chain(&high).fold(0.0_f64, |size, x| size.max(x.abs()));
    let mut finer: Option<Mesh<D>> = None;
    let mut shares = shares.to_vec();
    for _ in 0..PASSES {
        let now = finer.as_ref().unwrap_or(mesh);
        for cell in now.cells().filter(|c| now.cell_diameter(*c) <= smallest) {
            shares[cell.index()] = 0.0;
        }
        let marked = mark(&shares, share);
        if marked.is_empty() {
            break;
        }
        let (next, relation) = match now.bisect(&marked) {
            Err(MeshError::DegenerateCell { .. }) => break,
            other => other?,
        };
        let exponent = (2 * order / D + 1) as i32;
        shares = next
            .cells()
            .map(|cell| {
                let parent = relation.parent(cell);
                let ratio = next.cell_measure(cell) / now.cell_measure(parent);
                shares[parent.index()] * ratio.powi(exponent)
            })
            .collect();
        let done = next.cell_count() >= enough;
        finer = Some(next);
        if done {
            break;
        }
    }
    Ok(finer)
}

/// When the next round will end, if its time grows with the number of unknowns.
fn foreseen_end(rounds: &[Round], unknowns: usize) -> Duration {
    let Some(last) = rounds.last() else { return Duration::ZERO };
    let before = if rounds.len() > 1 { rounds[rounds.len() - 2].elapsed } else { Duration::ZERO };
    last.elapsed + (last.elapsed - before).mul_f64(unknowns as f64 / last.unknowns.max(1) as f64)
}
