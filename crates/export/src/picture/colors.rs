//! Colors for values: even to the eye, legible in gray and for color-blind readers.

use colorous::{Gradient, RED_BLUE, VIRIDIS};

use super::axes::SHORTEST;

/// Which colors a field gets.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Colors {
    /// From dark to light, for quantities with a smallest and a largest value.
    #[default]
    Sequential,
    /// From blue over white to red, white at zero, for quantities whose sign matters.
    Diverging,
}

/// The map from values to colors, in a range of positive length.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Scale {
    pub(crate) low: f64,
    pub(crate) high: f64,
    colors: Colors,
}

impl Scale {
    /// The scale for values from `low` to `high`; widened where these are (nearly) equal.
    pub(crate) fn new(low: f64, high: f64, colors: Colors) -> Self {
        let largest = low.abs().max(high.abs());
        let (low, high) = match colors {
            Colors::Diverging if largest > 1e-290 => (-largest, largest),
            Colors::Sequential if high - low > (1e-12 * largest).max(SHORTEST) => (low, high),
            _ if largest > 1e-280 => (low - 0.1 * largest, high + 0.1 * largest),
            _ => (-1.0, 1.0),
        };
        Self { low, high, colors }
    }

    /// Position of a value in the scale, from 0 to 1.
    pub(crate) fn position(&self, value: f64) -> f64 {
        ((value - self.low) / (self.high - self.low)).clamp(0.0, 1.0)
    }

    /// Red, green and blue at a position from 0 to 1.
    pub(crate) fn rgb(&self, position: f64) -> [u8; 3] {
        let (gradient, at): (Gradient, f64) = match self.colors {
            Colors::Sequential => (VIRIDIS, position),
            Colors::Diverging => (RED_BLUE, 1.0 - position),
        };
        let color = gradient.eval_continuous(at.clamp(0.0, 1.0));
        [color.r, color.g, color.b]
    }

    /// A color of lines that shows at a position.
    pub(crate) fn line_color(&self, position: f64) -> &'static str {
        if lightness(self.rgb(position)) < 55.0 { "#fff" } else { "#000" }
    }
}

/// A color as SVG writes it.
pub(crate) fn hex([r, g, b]: [u8; 3]) -> String {
    format!("#{r:02x}{g:02x}{b:02x}")
}

/// Lightness L* of a color, 0 (black) to 100 (white).
///
/// # Source
/// CIE 1976 L*a*b*, with the sRGB transfer function of IEC 61966-2-1.
fn lightness(rgb: [u8; 3]) -> f64 {
    let linear = rgb.map(|c| {
        let c = f64::from(c) / 255.0;
        if c <= 0.04045 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) }
    });
    let y = 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2];
    if y > 216.0 / 24389.0 { 116.0 * y.cbrt() - 16.0 } else { y * 24389.0 / 27.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sequential_colors_grow_lighter_evenly() {
        let scale = Scale::new(0.0, 1.0, Colors::Sequential);
        let light: Vec<f64> = (0..=32).map(|i| lightness(scale.rgb(f64::from(i) / 32.0))).collect();
        let mean = (light[32] - light[0]) / 32.0;
        for pair in light.windows(2) {
            let step = pair[1] - pair[0];
            assert!(step > 0.5 * mean && step < 1.5 * mean, "{step} against {mean}");
        }
    }

    #[test]
    fn diverging_colors_are_lightest_at_zero() {
        let scale = Scale::new(-1.0, 4.0, Colors::Diverging);
        assert_eq!((scale.low, scale.high, scale.position(0.0)), (-4.0, 4.0, 0.5));
        assert!(lightness(scale.rgb(0.5)) > 93.0);
        let (cold, warm) = (scale.rgb(0.1), scale.rgb(0.9));
        assert!(cold[2] > cold[0] && warm[0] > warm[2]);
    }

    #[test]
    fn a_constant_has_a_scale() {
        for value in [0.0, 20.0, -3e-300, 1e200] {
            let scale = Scale::new(value, value, Colors::Sequential);
            assert!(scale.high > scale.low);
            assert!((scale.position(value) - 0.5).abs() < 1e-9);
        }
    }

    #[test]
    fn lightness_of_white_gray_and_black() {
        assert!((lightness([255; 3]) - 100.0).abs() < 1e-9);
        assert!((lightness([119; 3]) - 50.0).abs() < 0.5, "sRGB 119 is middle gray");
        assert_eq!(lightness([0; 3]), 0.0);
    }
}
