//! Where everything stands in a picture: frame, axes, color bar, captions.

use super::axes::{SHORTEST, Ticks};
use super::frame::{self, Axis, label_room};
use super::svg::{Anchor, Pixel, Svg, text_width, wrap};
use crate::ExportError;

/// Size of ordinary text in pixels.
pub(crate) const TEXT: f64 = 12.0;
/// Size of the title.
const TITLE: f64 = 15.0;
/// Greatest width and height of the domain on the page.
const GREATEST: [f64; 2] = [600.0, 470.0];
/// Free space between the domain and the frame.
const FREE: f64 = 10.0;
/// Space around everything.
pub(crate) const MARGIN: f64 = 14.0;
/// Least width of a picture, so that titles and legends have room.
const LEAST_WIDTH: f64 = 360.0;
/// A frame at least this high has its color bar at the right, a lower one below.
const BAR_BESIDE: f64 = 190.0;
/// Room for a color bar beside the frame and below it.
const BAR_ROOM: [f64; 2] = [114.0, 58.0];

/// The map from the user's coordinates to the page and the places of the parts.
#[derive(Debug, Clone)]
pub(crate) struct Layout {
    /// Corner of the domain's box with the lowest coordinates.
    low: [f64; 2],
    /// Pixels for each unit of length.
    scale: f64,
    /// Left, top, right and bottom of the frame in pixels.
    pub(crate) frame: [f64; 4],
    /// Ticks along x and y.
    ticks: [Ticks; 2],
    title: Vec<String>,
    /// Whether the color bar stands beside the frame.
    pub(crate) bar_beside: bool,
    /// Lower end of everything between frame and notes.
    pub(crate) below: f64,
    width: f64,
}

/// What a layout must leave room for.
#[derive(Debug, Clone, Copy, Default)]
pub(crate) struct Wishes<'a> {
    pub(crate) title: &'a str,
    pub(crate) bar: bool,
    pub(crate) arrow_legend: bool,
}

impl Layout {
    /// A layout for a domain from `low` to `high`, with the same scale along x and y.
    pub(crate) fn new(low: [f64; 2], high: [f64; 2], wishes: Wishes<'_>) -> Result<Self, ExportError> {
        let size = [high[0] - low[0], high[1] - low[1]];
        let scale = (GREATEST[0] / size[0]).min(GREATEST[1] / size[1]);
        if !(scale.is_finite() && scale > 0.0 && size.iter().all(|s| *s > SHORTEST)) {
            return Err(ExportError::Extent { what: "the mesh".into(), low: low.to_vec(), high: high.to_vec() });
        }
        let [w, h] = size.map(|s| s * scale + 2.0 * FREE);
        let ticks_y = Ticks::new(low[1], high[1], ((h - 20.0) / 42.0).clamp(2.0, 9.0) as usize);
        let ticks_x = horizontal_ticks(low[0], high[0], w - 20.0);
        let left = MARGIN + 34.0 + label_room(&ticks_y);
        let bar_beside = wishes.bar && h >= BAR_BESIDE;
        let right_room = if bar_beside { BAR_ROOM[0] } else { 0.0 };
        let width = (left + w + right_room + MARGIN + 10.0).max(LEAST_WIDTH);
        let title = title_lines(wishes.title, width);
        let heading = title_height(&title) + if wishes.arrow_legend { 22.0 } else { 0.0 };
        let top = MARGIN + heading + if heading > 0.0 { 6.0 } else { 0.0 };
        // A narrow frame stands in the middle.
        let left = left + 0.5 * (width - (left + w + right_room + MARGIN + 10.0));
        let frame = [left, top, left + w, top + h];
        let below = frame[3] + 44.0 + if wishes.bar && !bar_beside { BAR_ROOM[1] } else { 0.0 };
        Ok(Self { low, scale, frame, ticks: [ticks_x, ticks_y], title, bar_beside, below, width })
    }

    /// Where a point of the domain stands on the page.
    pub(crate) fn to_pixel(&self, x: [f64; 2]) -> Pixel {
        [
            self.frame[0] + FREE + (x[0] - self.low[0]) * self.scale,
            self.frame[3] - FREE - (x[1] - self.low[1]) * self.scale,
        ]
    }

    /// Left upper corner of the domain's box on the page, and its size.
    pub(crate) fn domain(&self) -> (Pixel, [f64; 2]) {
        let [left, top, right, bottom] = self.frame;
        ([left + FREE, top + FREE], [right - left - 2.0 * FREE, bottom - top - 2.0 * FREE])
    }

    /// Width of the picture.
    pub(crate) fn width(&self) -> f64 {
        self.width
    }

    /// Draws title, frame, ticks and the titles of the axes.
    pub(crate) fn draw(&self, svg: &mut Svg, length_unit: &str) {
        draw_title(svg, &self.title, self.frame[0], self.width);
        let [x, y] = &self.ticks;
        let x_place = |value: f64| self.to_pixel([value, self.low[1]])[0];
        let y_place = |value: f64| self.to_pixel([self.low[0], value])[1];
        let x_axis = Axis { ticks: x, title: x.title("x", length_unit), place: &x_place };
        let y_axis = Axis { ticks: y, title: y.title("y", length_unit), place: &y_place };
        frame::draw(svg, self.frame, &x_axis, &y_axis);
    }

    /// The line right above the frame, for the legend of arrows: its right end.
    pub(crate) fn legend_end(&self) -> Pixel {
        [self.frame[2].max(0.5 * self.width), self.frame[1] - 10.0]
    }
}

/// The lines of a title for a picture of this width.
pub(crate) fn title_lines(title: &str, width: f64) -> Vec<String> {
    // Bold letters are wider.
    wrap(title, 1.1 * TITLE, width - 2.0 * MARGIN)
}

/// Height of a title and the space under it.
pub(crate) fn title_height(lines: &[String]) -> f64 {
    lines.len() as f64 * (TITLE + 5.0)
}

/// Draws a title that begins at the left side of the frame, or further left where it needs the room.
pub(crate) fn draw_title(svg: &mut Svg, lines: &[String], left: f64, width: f64) {
    let longest = lines.iter().map(|line| text_width(line, 1.1 * TITLE)).fold(0.0, f64::max);
    let start = left.min(width - MARGIN - longest).max(MARGIN);
    for (i, line) in lines.iter().enumerate() {
        let at = [start, MARGIN + TITLE - 2.0 + i as f64 * (TITLE + 5.0)];
        svg.styled_text(at, TITLE, Anchor::Start, line, "font-weight=\"bold\"");
    }
}

/// Ticks along an axis of `length` pixels whose labels do not touch.
pub(crate) fn horizontal_ticks(low: f64, high: f64, length: f64) -> Ticks {
    let mut count = (length / 60.0).clamp(2.0, 10.0) as usize;
    loop {
        let ticks = Ticks::new(low, high, count);
        let room = length / (ticks.values.len().max(2) - 1) as f64;
        if count <= 1 || room > text_width(&"0".repeat(ticks.longest()), TEXT) + 10.0 {
            return ticks;
        }
        count -= 1;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn layout(w: f64, h: f64) -> Layout {
        Layout::new([1.0, 2.0], [1.0 + w, 2.0 + h], Wishes { bar: true, ..Default::default() }).unwrap()
    }

    #[test]
    fn both_axes_have_one_scale() {
        for (w, h) in [(1.0, 1.0), (10.0, 1.0), (1.0, 10.0), (1e-6, 3e-6)] {
            let layout = layout(w, h);
            let (a, b) = (layout.to_pixel([1.0, 2.0]), layout.to_pixel([1.0 + w, 2.0 + h]));
            let (x, y) = ((b[0] - a[0]) / w, (a[1] - b[1]) / h);
            assert!((x / y - 1.0).abs() < 1e-6, "{x} {y}");
        }
    }

    #[test]
    fn the_frame_stays_on_the_page() {
        for (w, h) in [(1.0, 1.0), (10.0, 1.0), (1.0, 10.0), (50.0, 1.0), (1.0, 50.0)] {
            let layout = layout(w, h);
            let [left, top, right, bottom] = layout.frame;
            assert!(left > 0.0 && top > 0.0 && right < layout.width() && bottom < layout.below);
            assert!(layout.width() < 900.0 && layout.below < 700.0);
        }
    }

    #[test]
    fn a_box_that_cannot_be_scaled_is_told() {
        let error = Layout::new([0.0, 0.0], [0.0, 1.0], Wishes::default()).unwrap_err();
        assert_eq!(error, ExportError::Extent { what: "the mesh".into(), low: vec![0.0, 0.0], high: vec![0.0, 1.0] });
        assert!(Layout::new([-1e308, 0.0], [1e308, 1.0], Wishes::default()).is_err());
        assert!(Layout::new([0.0, 0.0], [1e-304, 1e-310], Wishes::default()).is_err());
    }
}
