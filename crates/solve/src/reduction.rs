//! Sums that come out the same on any number of threads.

use rayon::prelude::*;

/// Entries summed by one task.
const BLOCK: usize = 4096;

/// Scalar product: blocks of fixed size in parallel, their sums in order.
pub(crate) fn dot(a: &[f64], b: &[f64]) -> f64 {
    let parts: Vec<f64> =
        a.par_chunks(BLOCK).zip(b.par_chunks(BLOCK)).map(|(a, b)| a.iter().zip(b).map(|(x, y)| x * y).sum()).collect();
    parts.iter().sum()
}
