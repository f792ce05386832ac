//! What a run may cost.

use std::time::Duration;

use crate::Error;

/// Limits of a run that refines. A limit that is reached ends the run with its best result, never with an error.
///
/// ```
/// use hypercircle::Budget;
/// use std::time::Duration;
/// let budget = Budget::none().unknowns(200_000).time(Duration::from_secs(30));
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Default)]
#[must_use]
pub struct Budget {
    unknowns: Option<usize>,
    bytes: Option<usize>,
    time: Option<Duration>,
}

impl Budget {
    /// No limits.
    pub fn none() -> Self {
        Self::default()
    }

    /// At most so many unknowns.
    pub fn unknowns(self, limit: usize) -> Self {
        Self { unknowns: Some(limit), ..self }
    }

    /// At most so many bytes, by the forecast of [`forecast_bytes`].
    pub fn bytes(self, limit: usize) -> Self {
        Self { bytes: Some(limit), ..self }
    }

    /// At most so much time, judged by the rounds so far.
    pub fn time(self, limit: Duration) -> Self {
        Self { time: Some(limit), ..self }
    }

    /// A limit of zero allows nothing.
    pub(crate) fn check(&self) -> Result<(), Error> {
        let limits = [
            ("unknowns", self.unknowns.map(|n| n as f64)),
            ("bytes", self.bytes.map(|n| n as f64)),
            ("seconds", self.time.map(|t| t.as_secs_f64())),
        ];
        match limits.into_iter().find(|(_, limit)| *limit == Some(0.0)) {
            Some((what, _)) => Err(Error::EmptyBudget { what, value: 0.0 }),
            None => Ok(()),
        }
    }

    /// The first limit that a round with so many unknowns, which would end so late, would break.
    pub(crate) fn broken_by(&self, unknowns: usize, order: usize, end: Duration) -> Option<Limit> {
        let over = |limit: Option<usize>, value: usize| limit.is_some_and(|limit| value > limit);
        if over(self.unknowns, unknowns) {
            Some(Limit::Unknowns)
        } else if over(self.bytes, forecast_bytes(unknowns, order)) {
            Some(Limit::Bytes)
        } else if self.time.is_some_and(|limit| end > limit) {
            Some(Limit::Time)
        } else {
            None
        }
    }
}

/// A limit of a [`Budget`].
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Limit {
    /// Number of unknowns.
    Unknowns,
    /// Memory.
    Bytes,
    /// Time.
    Time,
}

/// Roughly the memory of a two-dimensional solve with the direct solver: matrix, factor (about 4 n log₂ n entries with nested
/// dissection for order 1) and certificate.
///
/// ```
/// let million = hypercircle::forecast_bytes(1_000_000, 1);
/// assert!((1_000_000_000..3_000_000_000).contains(&million));
/// ```
#[must_use]
pub fn forecast_bytes(unknowns: usize, order: usize) -> usize {
    let n = unknowns as f64;
    let p = order as f64;
    // Entries of a matrix row: 7 for order 1, 11.5 for order 2, growing with p².
    let row = 2.5 * p * p + 4.5;
    let factor = 4.0 * (row / 7.0) * n * n.max(2.0).log2() * 9.0;
    let matrix = 2.0 * row * n * 12.0;
    let cells = 2.0 * n / (p * p);
    let certificate = cells * 4.0 * (p + 1.0) * (p + 3.0) * 8.0;
    (factor + matrix + certificate) as usize
}
