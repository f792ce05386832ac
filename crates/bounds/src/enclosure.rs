//! A result with the interval that is guaranteed to hold it.

use std::fmt;

/// How far a bound can be trusted.
#[derive(Debug, Clone, PartialEq)]
#[non_exhaustive]
pub enum Guarantee {
    /// A mathematical bound, up to rounding.
    Full,
    /// As [`Guarantee::Full`] for the data as the quadrature points see them: some coefficient is a closure or a type that
    /// is not known to be constant in each region, so that it is only sampled.
    Sampled,
    /// No bound: the reason why.
    None(String),
}

impl Guarantee {
    /// The weaker of two.
    #[must_use]
    pub fn and(self, other: Self) -> Self {
        match (self, other) {
            (Self::None(why), _) | (_, Self::None(why)) => Self::None(why),
            (Self::Full, Self::Full) => Self::Full,
            _ => Self::Sampled,
        }
    }
}

impl fmt::Display for Guarantee {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Full => f.write_str("guaranteed"),
            Self::Sampled => f.write_str("guaranteed for the sampled data"),
            Self::None(why) => write!(f, "not guaranteed: {why}"),
        }
    }
}

/// A value with a lower and an upper end.
///
/// Arithmetic rounds the ends outwards.
///
/// ```
/// use hypercircle_bounds::{Enclosure, Guarantee};
/// let flow = Enclosure::new(9.4915, 9.49, 9.493, Guarantee::Full);
/// assert!(flow.holds(9.492));
/// assert!((flow.width() - 0.003).abs() < 1e-12);
/// assert!(flow.scaled(-2.0).lower <= -18.986);
/// ```
#[derive(Debug, Clone, PartialEq)]
#[must_use]
pub struct Enclosure {
    /// The best single number.
    pub value: f64,
    /// Lower end.
    pub lower: f64,
    /// Upper end.
    pub upper: f64,
    /// How far the ends can be trusted.
    pub guarantee: Guarantee,
}

impl Enclosure {
    /// From a value and two ends; the ends are moved outwards by one unit in the last place.
    pub fn new(value: f64, lower: f64, upper: f64, guarantee: Guarantee) -> Self {
        Self { value, lower: lower.next_down(), upper: upper.next_up(), guarantee }
    }

    /// Upper less lower end.
    #[must_use]
    pub fn width(&self) -> f64 {
        self.upper - self.lower
    }

    /// Width over the size of the value.
    #[must_use]
    pub fn relative_width(&self) -> f64 {
        self.width() / self.value.abs()
    }

    /// Whether a number lies between the ends.
    #[must_use]
    pub fn holds(&self, number: f64) -> bool {
        self.lower <= number && number <= self.upper
    }

    /// The product with a number.
    pub fn scaled(&self, factor: f64) -> Self {
        let (a, b) = (self.lower * factor, self.upper * factor);
        Self::new(self.value * factor, a.min(b), a.max(b), self.guarantee.clone())
    }
}

impl fmt::Display for Enclosure {
    /// `value [lower, upper]`, with as many decimals as two digits of the width need, or as many as the format asks for; printed ends
    /// never move inwards.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let needed = (1.0 - self.width().log10().floor()).clamp(0.0, 17.0);
        let digits = f.precision().unwrap_or(if needed.is_finite() { needed as usize } else { 6 });
        // Printing rounds to nearest: the ends are nudged by half a unit.
        let half = 0.5 * 10.0_f64.powi(-(digits as i32));
        write!(f, "{:.digits$} [{:.digits$}, {:.digits$}]", self.value, self.lower - half, self.upper + half)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn printed_ends_never_move_inwards() {
        let e = Enclosure::new(1.0, 0.99996, 1.00004, Guarantee::Full);
        assert_eq!(format!("{e:.4}"), "1.0000 [0.9999, 1.0001]");
        assert_eq!(format!("{e}"), "1.000000 [0.999959, 1.000041]");
        let tiny = Enclosure::new(2e-9, 1.99e-9, 2.01e-9, Guarantee::Full);
        assert_eq!(format!("{tiny}"), "0.000000002000 [0.000000001989, 0.000000002011]");
    }

    #[test]
    fn the_weaker_guarantee_wins() {
        assert_eq!(Guarantee::Full.and(Guarantee::Sampled), Guarantee::Sampled);
        assert!(matches!(Guarantee::None("why".into()).and(Guarantee::Full), Guarantee::None(_)));
    }
}
