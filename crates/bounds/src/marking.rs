//! Which cells to refine.

use hypercircle_mesh::CellId;

/// The smallest set of cells that holds at least the share `theta` of the sum of all `shares`, in ascending order.
///
/// Found by selection in linear time; equal shares are told apart by their cells.
///
/// Sources: W. Dörfler, SIAM J. Numer. Anal. 33 (1996); C.-M. Pfeiler, D. Praetorius, Math. Comp. 89 (2020).
///
/// ```
/// use hypercircle_bounds::mark;
/// use hypercircle_mesh::CellId;
/// assert_eq!(mark(&[1.0, 5.0, 0.5, 3.0], 0.7), vec![CellId(1), CellId(3)]);
/// ```
#[must_use]
pub fn mark(shares: &[f64], theta: f64) -> Vec<CellId> {
    let mut goal = theta.clamp(0.0, 1.0) * shares.iter().filter(|s| s.is_finite()).sum::<f64>();
    let mut cells: Vec<u32> = (0..shares.len() as u32).collect();
    let larger_first = |a: &u32, b: &u32| shares[*b as usize].total_cmp(&shares[*a as usize]).then(a.cmp(b));
    // cells[..taken] are in the set, cells[taken..open] may be, the rest is not.
    let (mut taken, mut open) = (0, cells.len());
    while open > taken + 1 {
        let middle = taken + (open - taken) / 2;
        cells[taken..open].select_nth_unstable_by(middle - taken, larger_first);
        let sum: f64 = cells[taken..middle].iter().map(|c| shares[*c as usize]).filter(|s| s.is_finite()).sum();
        if sum < goal {
            goal -= sum;
            taken = middle;
        } else {
            open = middle;
        }
    }
    if goal > 0.0 {
        taken = open;
    }
    let mut marked: Vec<CellId> = cells[..taken].iter().map(|c| CellId(*c)).collect();
    marked.sort_unstable();
    marked
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The same by sorting.
    fn sorted(shares: &[f64], theta: f64) -> usize {
        let mut all = shares.to_vec();
        all.sort_by(|a, b| b.total_cmp(a));
        let goal = theta * all.iter().sum::<f64>();
        let mut sum = 0.0;
        all.iter()
            .take_while(|s| {
                let needed = sum < goal * (1.0 - 1e-12);
                sum += **s;
                needed
            })
            .count()
    }

    #[test]
    fn set_is_sufficient_and_smallest() {
        let mut state = 1_u64;
        for size in [1, 2, 3, 10, 57, 1000] {
            let shares: Vec<f64> = (0..size)
                .map(|_| {
                    state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
                    ((state >> 40) as f64 / 1e6).powi(4)
                })
                .collect();
            for theta in [0.1, 0.5, 0.9] {
                let marked = mark(&shares, theta);
                let sum: f64 = marked.iter().map(|c| shares[c.index()]).sum();
                assert!(sum >= theta * shares.iter().sum::<f64>() * (1.0 - 1e-12));
                assert!(marked.len() <= sorted(&shares, theta) + 1, "{size} {theta}");
            }
        }
    }

    #[test]
    fn equal_shares_go_by_cell() {
        assert_eq!(mark(&[1.0; 4], 0.5), vec![CellId(0), CellId(1)]);
        assert!(mark(&[0.0; 3], 0.5).is_empty());
    }
}
