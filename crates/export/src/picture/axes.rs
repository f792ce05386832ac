//! Round values along an axis, a color bar or a family of contour lines.

/// A shorter range counts as a single value: its steps would be no ordinary numbers.
pub(crate) const SHORTEST: f64 = 1e-290;

/// Round values in a range, with their labels.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Ticks {
    /// The values, ascending: multiples of 1, 2 or 5 times a power of ten.
    pub(crate) values: Vec<f64>,
    /// Their labels, to be multiplied by ten to the [`Self::power`].
    pub(crate) labels: Vec<String>,
    /// The power of ten that all labels share; 0 for numbers that need none.
    pub(crate) power: i32,
}

impl Ticks {
    /// At most `count` round steps (and never more than 400) in a range of finite length.
    pub(crate) fn new(low: f64, high: f64, count: usize) -> Self {
        let span = high - low;
        if !(span > SHORTEST && span.is_finite()) {
            return Self::labelled(vec![low], f64::max(low.abs(), f64::MIN_POSITIVE) * 1e-3);
        }
        let step = round_step(span / count.clamp(1, 400) as f64);
        // A hair of tolerance lets an end that is round up to rounding errors be a tick.
        let first = (low / step - 1e-6).ceil();
        let last = (high / step + 1e-6).floor();
        let number = (last - first).clamp(-1.0, 1000.0) as i64 + 1;
        Self::labelled((0..number).map(|i| multiple(first + i as f64, step)).collect(), step)
    }

    fn labelled(values: Vec<f64>, step: f64) -> Self {
        let largest = values.iter().fold(0.0_f64, |m, v| m.max(v.abs()));
        let top = if largest > 0.0 { largest.log10().floor() as i32 } else { 0 };
        let finest = (step.log10() + 1e-9).floor() as i32;
        let power = if top >= 5 || finest <= -5 || top <= -4 { top } else { 0 };
        let decimals = (power - finest).clamp(0, 15) as usize;
        let labels = values.iter().map(|v| label(v / 10f64.powi(power), decimals)).collect();
        Self { values, labels, power }
    }

    /// The unit of the labels: the shared power of ten, then the unit itself.
    pub(crate) fn unit(&self, unit: &str) -> String {
        match (self.power, unit.is_empty()) {
            (0, _) => unit.into(),
            (p, true) => format!("10{}", superscript(p)),
            (p, false) => format!("10{}\u{A0}{unit}", superscript(p)),
        }
    }

    /// What an axis of this quantity is titled: the name, a comma, the unit of the labels.
    pub(crate) fn title(&self, name: &str, unit: &str) -> String {
        let unit = self.unit(unit);
        match (name.is_empty(), unit.is_empty()) {
            (true, _) => unit,
            (_, true) => name.into(),
            _ => format!("{name}, {unit}"),
        }
    }

    /// The longest label, in characters.
    pub(crate) fn longest(&self) -> usize {
        self.labels.iter().map(|l| l.chars().count()).max().unwrap_or(0)
    }
}

/// The smallest of 1, 2, 5 times a power of ten that is not below `least`.
pub(crate) fn round_step(least: f64) -> f64 {
    let power = least.log10().floor() as i32;
    [1.0, 2.0, 5.0, 10.0].iter().map(|m| power_of_ten(*m, power)).find(|s| *s >= least * (1.0 - 1e-9)).unwrap_or(least)
}

/// `m`·10^power, the double nearest to the decimal number for usual powers.
fn power_of_ten(m: f64, power: i32) -> f64 {
    if power >= 0 { m * 10f64.powi(power) } else { m / 10f64.powi(-power) }
}

/// `k` steps; steps below one are divided out so that 3 · 0.1 prints as 0.3.
fn multiple(k: f64, step: f64) -> f64 {
    if step < 1.0 && step > 1e-15 {
        k / (1.0 / step).round().max(1.0) * ((1.0 / step).round() * step)
    } else {
        k * step
    }
}

/// A number with a true minus sign and without a sign before zero.
fn label(x: f64, decimals: usize) -> String {
    let text = format!("{x:.decimals$}");
    match text.strip_prefix('-') {
        Some(rest) if rest.chars().all(|c| c == '0' || c == '.') => rest.into(),
        Some(rest) => format!("−{rest}"),
        None => text,
    }
}

/// An integer as an exponent.
fn superscript(n: i32) -> String {
    const DIGITS: [char; 10] = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    n.to_string().chars().map(|c| c.to_digit(10).map_or('⁻', |d| DIGITS[d as usize])).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_inside() {
        for i in 1..500_i32 {
            let low = (f64::from(i) * 1.7).sin() * 10f64.powi(i % 13 - 6);
            let high = low + (0.01 + f64::from(i % 7)) * 10f64.powi((i % 11 - 5).max(i % 13 - 11));
            let ticks = Ticks::new(low, high, 8);
            let span = high - low;
            assert!((2..=9).contains(&ticks.values.len()), "{low} {high} {ticks:?}");
            assert!(ticks.values.iter().all(|v| *v >= low - 1e-5 * span && *v <= high + 1e-5 * span));
            let step = ticks.values[1] - ticks.values[0];
            let mantissa = step / 10f64.powf(step.log10().floor());
            let near = |m: f64| (mantissa - m).abs() < 1e-3 * m;
            assert!(near(1.0) || near(2.0) || near(5.0) || near(10.0), "{step} in {ticks:?}");
        }
    }

    #[test]
    fn labels_are_as_short_as_the_step_allows() {
        assert_eq!(Ticks::new(0.0, 1.0, 5).labels, ["0.0", "0.2", "0.4", "0.6", "0.8", "1.0"]);
        assert_eq!(Ticks::new(-10.0, 10.0, 4).labels, ["−10", "−5", "0", "5", "10"]);
    }

    #[test]
    fn very_large_and_small_numbers_share_a_power() {
        let ticks = Ticks::new(0.0, 4.0e-7, 4);
        assert_eq!((ticks.power, ticks.labels[1].as_str()), (-7, "1"));
        assert_eq!(ticks.title("w", "m"), "w, 10⁻⁷\u{A0}m");
        assert_eq!(Ticks::new(0.0, 2.0e8, 4).unit(""), "10⁸");
    }

    #[test]
    fn ranges_at_the_limits_of_numbers_have_few_ticks() {
        for (low, high) in [(0.0, 5e-324), (0.0, 1e-300), (-1.7e308, 1.7e308), (f64::NAN, 1.0), (0.0, f64::INFINITY)] {
            assert_eq!(Ticks::new(low, high, 8).values.len(), 1);
        }
        let many = Ticks::new(0.0, 1.0, usize::MAX).values;
        assert!(many.len() <= 401 && many.last() == Some(&1.0), "the ticks reach the end of the range");
    }

    #[test]
    fn a_range_without_length_has_one_tick() {
        assert_eq!(Ticks::new(20.0, 20.0, 5).labels, ["20.00"]);
        assert_eq!(Ticks::new(0.0, 0.0, 5).values, [0.0]);
    }
}
