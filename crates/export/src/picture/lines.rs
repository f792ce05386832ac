//! Segments joined to long lines, thinned to what the eye can see.

use std::collections::BTreeMap;

use super::svg::{Pixel, polyline};

/// Ends closer than this many pixels are one point.
const GRID: f64 = 0.02;
/// Points of a line closer than this many pixels to the last one are left out.
const FINEST: f64 = 0.3;

/// Path data of segments, joined where they meet.
pub(crate) fn joined(segments: &[[Pixel; 2]]) -> String {
    chains(segments).iter().map(|chain| polyline(&thin(chain), false)).collect()
}

/// Lines that use each segment once; a closed line ends where it begins.
pub(crate) fn chains(segments: &[[Pixel; 2]]) -> Vec<Vec<Pixel>> {
    let key = |p: Pixel| p.map(|c| (c / GRID).round() as i64);
    let mut at: BTreeMap<[i64; 2], Vec<usize>> = BTreeMap::new();
    for (i, [a, b]) in segments.iter().enumerate() {
        if key(*a) != key(*b) {
            at.entry(key(*a)).or_default().push(i);
            at.entry(key(*b)).or_default().push(i);
        }
    }
    let mut used: Vec<bool> = segments.iter().map(|[a, b]| key(*a) == key(*b)).collect();
    let mut lines = Vec::new();
    // Lines with ends are begun at an end, then only closed lines are left.
    let ends: Vec<usize> = at.values().filter(|list| list.len() != 2).flatten().copied().collect();
    for first in ends.into_iter().chain(0..segments.len()) {
        if used[first] {
            continue;
        }
        used[first] = true;
        let [mut a, mut b] = segments[first];
        if at.get(&key(a)).is_some_and(|list| list.len() == 2) {
            (a, b) = (b, a);
        }
        let mut line = vec![a, b];
        while let Some(list) = at.get(&key(b)).filter(|list| list.len() == 2) {
            let Some(&next) = list.iter().find(|s| !used[**s]) else { break };
            used[next] = true;
            let [p, q] = segments[next];
            b = if key(p) == key(b) { q } else { p };
            line.push(b);
        }
        lines.push(line);
    }
    lines
}

/// The line without points too close to be seen; its ends stay.
fn thin(line: &[Pixel]) -> Vec<Pixel> {
    let mut kept: Vec<Pixel> = Vec::new();
    for (i, p) in line.iter().enumerate() {
        let far = kept.last().is_none_or(|q| (p[0] - q[0]).hypot(p[1] - q[1]) >= FINEST);
        if far || i + 1 == line.len() {
            kept.push(*p);
        }
    }
    kept
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shuffled_segments_become_one_line() {
        let p = |i: usize| [i as f64, (i * i) as f64];
        let segments = [[p(2), p(1)], [p(3), p(4)], [p(0), p(1)], [p(2), p(3)]];
        let lines = chains(&segments);
        assert_eq!(lines.len(), 1);
        let mut line = lines[0].clone();
        if line[0] != p(0) {
            line.reverse();
        }
        assert_eq!(line, (0..5).map(p).collect::<Vec<_>>());
    }

    #[test]
    fn a_closed_line_ends_where_it_begins() {
        let (a, b, c) = ([0.0, 0.0], [5.0, 0.0], [0.0, 5.0]);
        let lines = chains(&[[a, b], [c, a], [b, c]]);
        assert_eq!(lines.len(), 1);
        assert_eq!((lines[0].len(), lines[0][0]), (4, lines[0][3]));
    }

    #[test]
    fn lines_that_cross_keep_every_segment() {
        let o = [0.0, 0.0];
        let star = [[o, [1.0, 0.0]], [o, [0.0, 1.0]], [[-1.0, 0.0], o], [[0.0, -1.0], o]];
        assert_eq!(chains(&star).iter().map(|l| l.len() - 1).sum::<usize>(), 4);
    }

    #[test]
    fn points_too_close_to_be_seen_are_left_out() {
        let line: Vec<Pixel> = (0..=1000).map(|i| [f64::from(i) * 0.01, 0.0]).collect();
        let kept = thin(&line);
        assert!(kept.len() < 40 && kept.last() == line.last());
    }
}
