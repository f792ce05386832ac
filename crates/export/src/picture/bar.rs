//! The color bar: colors, round values, the quantity and its unit.

use super::axes::Ticks;
use super::colors::{Scale, hex};
use super::layout::{Layout, TEXT, horizontal_ticks};
use super::shade::BANDS;
use super::svg::{Anchor, INK, Pixel, Svg, number, wrap};
use crate::Field;

/// Width of the bar in pixels.
const WIDTH: f64 = 16.0;

/// Where a bar stands.
#[derive(Debug, Clone, Copy)]
struct Bar<'a> {
    scale: &'a Scale,
    /// Left upper corner.
    origin: Pixel,
    length: f64,
    upright: bool,
}

/// Draws the bar of a field, with a line at each level of a contour.
pub(crate) fn draw(svg: &mut Svg, layout: &Layout, field: &Field, scale: &Scale, levels: &[f64]) {
    let [left, top, right, bottom] = layout.frame;
    let upright = layout.bar_beside;
    let (origin, length) = if upright {
        ([right + 22.0, top + 20.0], bottom - top - 20.0)
    } else {
        let length = (right - left).max(240.0);
        ([0.5 * (left + right - length), bottom + 50.0], length)
    };
    let bar = Bar { scale, origin, length, upright };
    bar.draw_colors(svg);
    bar.draw_levels(svg, levels);
    let ticks = bar.draw_ticks(svg);
    caption(svg, layout, &ticks.title(field.name(), field.unit()), &bar);
}

impl Bar<'_> {
    /// The point of the bar at a value and a distance across.
    fn at(&self, value: f64, across: f64) -> Pixel {
        let along = self.length * self.scale.position(value);
        if self.upright {
            [self.origin[0] + across, self.origin[1] + self.length - along]
        } else {
            [self.origin[0] + along, self.origin[1] + across]
        }
    }

    fn draw_colors(&self, svg: &mut Svg) {
        let each = self.length / BANDS as f64;
        let [x, y] = self.origin;
        for band in 0..BANDS {
            // A little overlap closes the seams.
            let (start, end) = (band as f64 * each, ((band + 1) as f64 * each + 0.4).min(self.length));
            let [x, y, w, h] = if self.upright {
                [x, y + self.length - end, WIDTH, end - start]
            } else {
                [x + start, y, end - start, WIDTH]
            }
            .map(number);
            let color = hex(self.scale.rgb((band as f64 + 0.5) / BANDS as f64));
            svg.raw(&format!("<rect x=\"{x}\" y=\"{y}\" width=\"{w}\" height=\"{h}\" fill=\"{color}\"/>"));
        }
        let (w, h) = if self.upright { (WIDTH, self.length) } else { (self.length, WIDTH) };
        let [x, y, w, h] = [x, y, w, h].map(number);
        svg.raw(&format!(
            "<rect x=\"{x}\" y=\"{y}\" width=\"{w}\" height=\"{h}\" fill=\"none\" stroke=\"{INK}\" stroke-width=\".8\"/>"
        ));
    }

    fn draw_levels(&self, svg: &mut Svg, levels: &[f64]) {
        for &level in levels {
            let color = self.scale.line_color(self.scale.position(level));
            let style = format!("stroke=\"{color}\" stroke-width=\".7\" stroke-opacity=\".8\"");
            svg.line(self.at(level, 0.0), self.at(level, WIDTH), &style);
        }
    }

    fn draw_ticks(&self, svg: &mut Svg) -> Ticks {
        let (low, high) = (self.scale.low, self.scale.high);
        let ticks = if self.upright {
            Ticks::new(low, high, (self.length / 34.0).clamp(2.0, 12.0) as usize)
        } else {
            horizontal_ticks(low, high, self.length)
        };
        for (&value, label) in ticks.values.iter().zip(&ticks.labels) {
            let style = format!("stroke=\"{INK}\" stroke-width=\".8\"");
            svg.line(self.at(value, WIDTH), self.at(value, WIDTH + 4.0), &style);
            if self.upright {
                let [x, y] = self.at(value, WIDTH + 7.0);
                svg.text([x, y + 0.35 * TEXT], TEXT, Anchor::Start, label);
            } else {
                svg.text(self.at(value, WIDTH + 17.0), TEXT, Anchor::Middle, label);
            }
        }
        ticks
    }
}

/// The quantity and its unit: above an upright bar, below a lying one.
fn caption(svg: &mut Svg, layout: &Layout, text: &str, bar: &Bar<'_>) {
    let [x, y] = bar.origin;
    if bar.upright {
        let lines = wrap(text, TEXT, layout.width() - x - 4.0);
        for (i, line) in lines.iter().enumerate() {
            let up = (lines.len() - 1 - i) as f64 * (TEXT + 2.0);
            svg.text([x, y - 11.0 - up], TEXT, Anchor::Start, line);
        }
    } else {
        svg.text([x + 0.5 * bar.length, y + WIDTH + 35.0], TEXT, Anchor::Middle, text);
    }
}

#[cfg(test)]
mod tests {
    use super::super::colors::Colors;
    use super::*;

    #[test]
    fn values_grow_upwards_and_to_the_right() {
        let scale = Scale::new(10.0, 30.0, Colors::Sequential);
        let mut bar = Bar { scale: &scale, origin: [5.0, 7.0], length: 100.0, upright: true };
        assert_eq!(bar.at(10.0, 0.0), [5.0, 107.0]);
        assert_eq!(bar.at(25.0, 2.0), [7.0, 32.0]);
        bar.upright = false;
        assert_eq!(bar.at(25.0, 2.0), [80.0, 9.0]);
    }
}
