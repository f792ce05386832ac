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

/// A leaf with no more sources than this is not divided.
const FEW: usize = 3;
/// Squares are not divided more often than this.
const DEPTH: usize = 14;

impl SizeField {
    /// `low` and `width` give a square around all places that will be asked for.
    pub(super) fn new(of_region: Vec<f64>, sources: Vec<Source>, low: [f64; 2], width: f64) -> Self {
        let all = (0..sources.len() as u32).collect();
        let mut field = Self { of_region, sources, nodes: vec![Node::Leaf(Vec::new())], low, width };
        if !field.sources.is_empty() {
            field.divide(0, low, width, all, 0);
        }
        field
    }

    fn divide(&mut self, node: usize, low: [f64; 2], width: f64, candidates: Vec<u32>, depth: usize) {
        // A source cannot rule in a square if another is smaller there by more than the growth across the square.
        let middle = [low[0] + 0.5 * width, low[1] + 0.5 * width];
        let best = candidates.iter().map(|s| self.sources[*s as usize].at(middle)).fold(f64::INFINITY, f64::min);
        let coarsest = self.of_region.iter().copied().fold(0.0, f64::max);
        let margin = GRADING * width * std::f64::consts::SQRT_2;
        let rules = |s: &u32| {
            let size = self.sources[*s as usize].at(middle);
            size <= best + margin && size <= coarsest + 0.5 * margin
        };
        let kept: Vec<u32> = candidates.into_iter().filter(rules).collect();
        if kept.len() <= FEW || depth == DEPTH {
            self.nodes[node] = Node::Leaf(kept);
            return;
        }
        let first = self.nodes.len();
        self.nodes.extend((0..4).map(|_| Node::Leaf(Vec::new())));
        self.nodes[node] = Node::Inner(first as u32);
        let half = 0.5 * width;
        for child in 0..4 {
            let corner = [low[0] + half * (child % 2) as f64, low[1] + half * (child / 2) as f64];
            self.divide(first + child, corner, half, kept.clone(), depth + 1);
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

    /// The size wanted in a region, sources aside.
    pub(super) fn of_region(&self, region: u32) -> f64 {
        if region == NONE { f64::INFINITY } else { self.of_region[region as usize] }
    }

    /// The size wanted at a place in a region.
    pub(super) fn at(&self, x: [f64; 2], region: u32) -> f64 {
        self.of_region(region).min(self.by_sources(x))
    }
}
