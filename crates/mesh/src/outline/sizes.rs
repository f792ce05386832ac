//! How large cells should be at each place.

use super::loops::distance_to_segment;
use super::triangulation::NONE;

/// Growth of the wanted size with the distance from where a smaller one is asked: three tenths of the distance.
pub(super) const GRADING: f64 = 0.3;

/// A segment (or a point, as a segment without length) at which a size is wanted.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Source {
    pub(super) ends: [[f64; 2]; 2],
    pub(super) size: f64,
}

impl Source {
    fn at(&self, x: [f64; 2]) -> f64 {
        self.size + GRADING * distance_to_segment(x, self.ends[0], self.ends[1])
    }
}

/// Wanted edge lengths: h(x) = min(size of the region at x, minₛ (hₛ + 0.3 · distance of x to source s)).
///
/// Sources are kept in a tree of squares, each leaf with the few that matter there.
#[derive(Debug)]
pub(super) struct SizeField {
    of_region: Vec<f64>,
    sources: Vec<Source>,
    nodes: Vec<Node>,
    low: [f64; 2],
    width: f64,
}

#[derive(Debug)]
enum Node {
    /// The first of four children in a row: lower left, lower right, upper left, upper right.
    Inner(u32),
    /// The sources that may rule here.
    Leaf(Vec<u32>),
}

/// A leaf holds no more sources than this. Where more may rule in a square no wider than the size wanted there, the
/// first few at its middle are taken for all.
const FEW: usize = 4;

impl SizeField {
    /// `low` and `width` give a square around all places that will be asked for.
    pub(super) fn new(of_region: Vec<f64>, sources: Vec<Source>, low: [f64; 2], width: f64) -> Self {
        let all = (0..sources.len() as u32).collect();
        let mut field = Self { of_region, sources, nodes: vec![Node::Leaf(Vec::new())], low, width };
        if !field.sources.is_empty() {
            field.divide(0, low, width, all);
        }
        field
    }

    fn divide(&mut self, node: usize, low: [f64; 2], width: f64, candidates: Vec<u32>) {
        // A source cannot rule in a square if another is smaller there by more than the growth across the square.
        let middle = [low[0] + 0.5 * width, low[1] + 0.5 * width];
        let best = candidates.iter().map(|s| self.sources[*s as usize].at(middle)).fold(f64::INFINITY, f64::min);
        let coarsest = self.of_region.iter().copied().fold(0.0, f64::max);
        let margin = GRADING * width * std::f64::consts::SQRT_2;
        let mut kept: Vec<(f64, u32)> =
            candidates.into_iter().map(|s| (self.sources[s as usize].at(middle), s)).collect();
        kept.retain(|(size, _)| *size <= best + margin && *size <= coarsest + 0.5 * margin);
        if width <= best {
            kept.sort_by(|a, b| a.0.total_cmp(&b.0));
            kept.truncate(FEW);
        }
        let kept: Vec<u32> = kept.into_iter().map(|(_, s)| s).collect();
        if kept.len() <= FEW {
            self.nodes[node] = Node::Leaf(kept);
            return;
        }
        let first = self.nodes.len();
        self.nodes.extend((0..4).map(|_| Node::Leaf(Vec::new())));
        self.nodes[node] = Node::Inner(first as u32);
        let half = 0.5 * width;
        for child in 0..4 {
            let corner = [low[0] + half * (child % 2) as f64, low[1] + half * (child / 2) as f64];
            self.divide(first + child, corner, half, kept.clone());
        }
    }

    /// The size that sources ask for, whatever the region; infinite where none matters.
    pub(super) fn by_sources(&self, x: [f64; 2]) -> f64 {
        if self.sources.is_empty() {
            return f64::INFINITY;
        }
        let (mut node, mut low, mut half) = (0_usize, self.low, 0.5 * self.width);
        loop {
            match &self.nodes[node] {
                Node::Inner(first) => {
                    let (right, upper) = (x[0] >= low[0] + half, x[1] >= low[1] + half);
                    low = [low[0] + if right { half } else { 0.0 }, low[1] + if upper { half } else { 0.0 }];
                    node = *first as usize + usize::from(right) + 2 * usize::from(upper);
                    half *= 0.5;
                }
                Node::Leaf(few) => {
                    return few.iter().map(|s| self.sources[*s as usize].at(x)).fold(f64::INFINITY, f64::min);
                }
            }
        }
    }

    /// Whether no source asks for less than `size` anywhere within a radius.
    pub(super) fn is_uniform(&self, x: [f64; 2], radius: f64, size: f64) -> bool {
        let mut squares = vec![(0, self.low, self.width)];
        while let Some((node, low, width)) = squares.pop() {
            if (0..2).any(|i| x[i] + radius < low[i] || x[i] - radius > low[i] + width) {
                continue;
            }
            match &self.nodes[node] {
                Node::Leaf(few) => {
                    if few.iter().any(|s| self.sources[*s as usize].at(x) - GRADING * radius < size) {
                        return false;
                    }
                }
                Node::Inner(first) => {
                    let half = 0.5 * width;
                    let corner = |c: usize| [low[0] + half * (c % 2) as f64, low[1] + half * (c / 2) as f64];
                    squares.extend((0..4).map(|c| (*first as usize + c, corner(c), half)));
                }
            }
        }
        true
    }

    /// The size wanted in a region, sources aside.
    pub(super) fn of_region(&self, region: u32) -> f64 {
        if region == NONE { f64::INFINITY } else { self.of_region[region as usize] }
    }

    /// The size wanted at a place in a region.
    pub(super) fn at(&self, x: [f64; 2], region: u32) -> f64 {
        self.of_region(region).min(self.by_sources(x))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Sources on a circle of radius 1 around (2, 2), more than a leaf holds.
    fn circle(count: usize, size: f64) -> Vec<Source> {
        let at = |i: usize| {
            let (s, c) = (std::f64::consts::TAU * i as f64 / count as f64).sin_cos();
            [2.0 + c, 2.0 + s]
        };
        (0..count).map(|i| Source { ends: [at(i), at(i + 1)], size }).collect()
    }

    #[test]
    fn a_size_grows_by_three_tenths_of_the_distance_up_to_that_of_the_region() {
        let source = Source { ends: [[1.0, 0.0], [1.0, 2.0]], size: 0.1 };
        let field = SizeField::new(vec![0.5, 0.2], vec![source], [0.0, 0.0], 4.0);
        for (x, region, size) in [
            ([1.0, 1.0], 0, 0.1),
            ([2.0, 1.0], 0, 0.4),
            ([3.0, 1.0], 0, 0.5),
            ([2.0, 1.0], 1, 0.2),
            ([1.0, 2.5], 0, 0.25),
        ] {
            assert!((field.at(x, region) - size).abs() < 1e-15, "{x:?}");
        }
        assert_eq!(field.at([1.0, 1.0], NONE), 0.1);
    }

    #[test]
    fn the_tree_agrees_with_all_sources_asked() {
        let sources = circle(300, 0.01);
        let field = SizeField::new(vec![0.2], sources.clone(), [0.0, 0.0], 4.0);
        let mut largest = 0.0_f64;
        for i in 0..80 {
            for j in 0..80 {
                let x = [0.05 * i as f64 + 0.003, 0.05 * j as f64 + 0.007];
                let exact = sources.iter().map(|s| s.at(x)).fold(0.2, f64::min);
                largest = largest.max((field.at(x, 0) - exact).abs() / exact);
            }
        }
        assert!(largest < 0.05, "{largest}");
    }

    #[test]
    fn uniform_means_that_no_source_reaches() {
        let field = SizeField::new(vec![0.2], circle(300, 0.01), [0.0, 0.0], 4.0);
        assert!(field.is_uniform([2.0, 2.0], 0.1, 0.2));
        assert!(!field.is_uniform([2.0, 2.0], 0.5, 0.2));
        assert!(!field.is_uniform([0.0, 0.0], 4.0, 0.2));
    }
}
