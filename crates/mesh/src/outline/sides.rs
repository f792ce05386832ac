//! Which sides of an outline a name is for.

use super::loops::distance_to_segment;

/// A choice of sides of an outline: made by [`between`], [`border_of`] or [`rest_of_boundary`].
#[derive(Debug, Clone, PartialEq)]
pub struct Sides(pub(super) Choice);

#[derive(Debug, Clone, PartialEq)]
pub(super) enum Choice {
    Between([f64; 2], [f64; 2]),
    BorderOf(String),
    RestOfBoundary,
}

/// All sides, on the boundary and between regions, that lie on the straight line between two points. The points need
/// not be corners: a side that reaches beyond one of them is split there.
#[must_use]
pub fn between(from: (f64, f64), to: (f64, f64)) -> Sides {
    Sides(Choice::Between([from.0, from.1], [to.0, to.1]))
}

/// All sides around a region: on the boundary and to other regions.
#[must_use]
pub fn border_of(region: &str) -> Sides {
    Sides(Choice::BorderOf(region.to_owned()))
}

/// All sides on the boundary that no statement before this one and no hole has named.
#[must_use]
pub fn rest_of_boundary() -> Sides {
    Sides(Choice::RestOfBoundary)
}

impl Sides {
    /// In words, for messages.
    pub(super) fn words(&self) -> String {
        match &self.0 {
            Choice::Between(a, b) => format!("the line from ({}, {}) to ({}, {})", a[0], a[1], b[0], b[1]),
            Choice::BorderOf(region) => format!("the border of region \"{region}\""),
            Choice::RestOfBoundary => "the rest of the boundary".to_owned(),
        }
    }

    /// The points where sides are to be split.
    pub(super) fn marks(&self) -> Vec<[f64; 2]> {
        match &self.0 {
            Choice::Between(a, b) => vec![*a, *b],
            Choice::BorderOf(_) | Choice::RestOfBoundary => Vec::new(),
        }
    }
}

impl Choice {
    /// Whether a side lies on the line; only for [`Choice::Between`].
    pub(super) fn on_line(&self, [a, b]: [[f64; 2]; 2], tolerance: f64) -> bool {
        let Self::Between(from, to) = self else { return false };
        [a, b].iter().all(|end| distance_to_segment(*end, *from, *to) <= tolerance)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_takes_what_lies_on_it_wholly() {
        let line = between((0.0, 0.0), (2.0, 1.0));
        assert!(line.0.on_line([[1.0, 0.5], [0.5, 0.25]], 1e-12));
        assert!(!line.0.on_line([[1.0, 0.5], [3.0, 1.5]], 1e-12), "reaches beyond");
        assert!(!line.0.on_line([[1.0, 0.5], [0.5, 0.3]], 1e-12), "another direction");
        assert!(!border_of("a").0.on_line([[1.0, 0.5], [0.5, 0.25]], 1e-12));
    }
}
