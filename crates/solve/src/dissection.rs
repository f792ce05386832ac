//! Nested dissection by place: an elimination order with little fill.
//!
//! The unknowns are halved by place along the direction that separates them best; those of one half that touch the other are
//! the separator and come last; both halves are treated likewise. For planar meshes the factor has O(n log n) entries.
//!
//! Source: A. George, SIAM J. Numer. Anal. 10 (1973); with coordinates: common practice.

use std::sync::atomic::AtomicBool;
use std::sync::atomic::Ordering::Relaxed;

use crate::{Coordinates, CsrView, SolveError};

/// Parts of at most so many unknowns are not divided further.
const LEAF: usize = 48;
/// Parts above this size are treated in parallel.
const PARALLEL: usize = 8192;

/// The order of elimination: `order[k]` is the unknown eliminated k-th.
///
/// ```
/// use hypercircle_solve::{nested_dissection, Coordinates, CsrView};
/// let matrix = CsrView::new(&[0, 1, 2], &[0, 1], &[1.0, 1.0])?;
/// let places = Coordinates::new(1, &[0.0, 1.0])?;
/// let mut order = nested_dissection(matrix, places)?;
/// order.sort_unstable();
/// assert_eq!(order, vec![0, 1]);
/// # Ok::<(), hypercircle_solve::SolveError>(())
/// ```
///
/// # Errors
/// A number of places that is not that of the rows, or a matrix that is not symmetric.
pub fn nested_dissection(matrix: CsrView<'_>, places: Coordinates<'_>) -> Result<Vec<u32>, SolveError> {
    if places.len() != matrix.len() {
        let (given, expected) = (places.len(), matrix.len());
        return Err(SolveError::SizeMismatch { what: "list of coordinates", given, expected });
    }
    matrix.check_symmetric()?;
    let mut unknowns: Vec<u32> = (0..matrix.len() as u32).collect();
    let separated: Vec<AtomicBool> = (0..matrix.len()).map(|_| AtomicBool::new(false)).collect();
    dissect(matrix, places, &separated, &mut unknowns);
    Ok(unknowns)
}

/// Orders one part. A neighbor of a member is a member too, or was separated before: the flags of others are never read
/// while they change, so the result does not depend on the number of threads.
fn dissect(matrix: CsrView<'_>, places: Coordinates<'_>, separated: &[AtomicBool], part: &mut [u32]) {
    if part.len() <= LEAF {
        return;
    }
    // Graded meshes crowd the unknowns, so the shape of the box says little: every direction is tried.
    let cuts = (0..places.dimension()).map(|axis| cut(matrix, places, separated, part, axis));
    let Some(Cut { lower, upper, separator }) = cuts.min_by_key(|cut| cut.separator.len()) else { return };
    if lower.is_empty() || upper.is_empty() {
        return; // everything touches everything: nothing to gain
    }
    for u in &separator {
        separated[*u as usize].store(true, Relaxed);
    }
    let parallel = part.len() > PARALLEL;
    let (first, rest) = part.split_at_mut(lower.len());
    let (second, last) = rest.split_at_mut(upper.len());
    first.copy_from_slice(&lower);
    second.copy_from_slice(&upper);
    last.copy_from_slice(&separator);
    drop((lower, upper, separator));
    let mut low = || dissect(matrix, places, separated, first);
    let mut high = || dissect(matrix, places, separated, second);
    if parallel {
        rayon::join(low, high);
    } else {
        low();
        high();
    }
}

/// A part in three: no unknown of `lower` touches one of `upper`.
struct Cut {
    lower: Vec<u32>,
    upper: Vec<u32>,
    separator: Vec<u32>,
}

/// Cuts a part at its median along an axis.
fn cut(matrix: CsrView<'_>, places: Coordinates<'_>, separated: &[AtomicBool], part: &mut [u32], axis: usize) -> Cut {
    let by_place = |a: &u32, b: &u32| {
        let (x, y) = (places.get(*a as usize, axis), places.get(*b as usize, axis));
        x.total_cmp(&y).then(a.cmp(b))
    };
    let middle = part.len() / 2;
    part.select_nth_unstable_by(middle, by_place);
    let pivot = part[middle];
    let is_lower = |u: &u32| by_place(u, &pivot).is_lt();
    let touches_other_half = |u: &u32| {
        let lower = is_lower(u);
        let (columns, _) = matrix.row(*u as usize);
        columns.iter().any(|c| is_lower(c) != lower && !separated[*c as usize].load(Relaxed))
    };
    let split = |half: &[u32]| half.iter().partition::<Vec<u32>, _>(|u| !touches_other_half(u));
    let (low, high) = (split(&part[..middle]), split(&part[middle..]));
    // The separator is the thinner of the two rims; the other rim goes back to its half.
    if low.1.len() < high.1.len() {
        Cut { lower: low.0, upper: [high.0, high.1].concat(), separator: low.1 }
    } else {
        Cut { lower: [low.0, low.1].concat(), upper: high.0, separator: high.1 }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Entries of the factor by plain symbolic elimination.
    fn fill(matrix: CsrView<'_>, order: &[u32]) -> usize {
        let n = matrix.len();
        let mut position = vec![0; n];
        order.iter().enumerate().for_each(|(k, u)| position[*u as usize] = k);
        let mut structure: Vec<std::collections::BTreeSet<usize>> = vec![Default::default(); n];
        let mut count = 0;
        for k in 0..n {
            let own = matrix.row(order[k] as usize).0.iter().map(|c| position[*c as usize]).filter(|p| *p > k);
            let mut column: std::collections::BTreeSet<usize> = own.collect();
            column.extend(structure[k].iter().copied());
            count += column.len() + 1;
            if let Some(parent) = column.first().copied() {
                column.remove(&parent);
                structure[parent].extend(column);
            }
        }
        count
    }

    #[test]
    fn order_is_a_permutation_with_little_fill() {
        let side = 64;
        let (offsets, columns, values) = rectangular(side);
        let matrix = CsrView::new(&offsets, &columns, &values).unwrap();
        let flat: Vec<f64> = (0..side * side).flat_map(|k| [(k % side) as f64, (k / side) as f64]).collect();
        let order = nested_dissection(matrix, Coordinates::new(2, &flat).unwrap()).unwrap();
        let mut sorted = order.clone();
        sorted.sort_unstable();
        assert!(sorted.iter().enumerate().all(|(i, u)| i == *u as usize));
        let natural: Vec<u32> = (0..(side * side) as u32).collect();
        let (dissected, banded) = (fill(matrix, &order), fill(matrix, &natural));
        // Band: n^1.5 = 262144. Dissection: about 7.75 n log₂ √n for five points (George 1973) = 190000 at most.
        assert!(banded > 250_000 && dissected < 150_000, "{dissected} against {banded}");
    }

    #[test]
    fn order_does_not_depend_on_threads() {
        let side = 200;
        let (offsets, columns, values) = rectangular(side);
        let matrix = CsrView::new(&offsets, &columns, &values).unwrap();
        let flat: Vec<f64> = (0..side * side).flat_map(|k| [(k % side) as f64, (k / side) as f64]).collect();
        let places = Coordinates::new(2, &flat).unwrap();
        let orders: Vec<_> = [1, 2, 3]
            .map(|threads| {
                let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
                pool.install(|| nested_dissection(matrix, places).unwrap())
            })
            .into();
        assert!(orders[0] == orders[1] && orders[1] == orders[2]);
    }

    fn rectangular(side: usize) -> (Vec<usize>, Vec<u32>, Vec<f64>) {
        let (mut offsets, mut columns) = (vec![0], Vec::new());
        for k in 0..side * side {
            let (i, j) = (k % side, k / side);
            let mut row = vec![k];
            row.extend([(i > 0).then(|| k - 1), (i + 1 < side).then_some(k + 1)].into_iter().flatten());
            row.extend([(j > 0).then(|| k - side), (j + 1 < side).then_some(k + side)].into_iter().flatten());
            row.sort_unstable();
            columns.extend(row.iter().map(|c| *c as u32));
            offsets.push(columns.len());
        }
        let values = vec![1.0; columns.len()];
        (offsets, columns, values)
    }
}
