//! A frame with ticks, labels and titles along its lower and left side.

use super::axes::Ticks;
use super::layout::TEXT;
use super::svg::{Anchor, INK, Svg, text_width};

/// One axis: its ticks, its title, and where a value stands on the page.
pub(crate) struct Axis<'a> {
    pub(crate) ticks: &'a Ticks,
    pub(crate) title: String,
    pub(crate) place: &'a dyn Fn(f64) -> f64,
}

/// Draws a frame (left, top, right, bottom) with its two axes.
pub(crate) fn draw(svg: &mut Svg, frame: [f64; 4], x: &Axis<'_>, y: &Axis<'_>) {
    let [left, top, right, bottom] = frame;
    let thin = format!("fill=\"none\" stroke=\"{INK}\" stroke-width=\".8\"");
    svg.path(&format!("M{left:.1} {top:.1}H{right:.1}V{bottom:.1}H{left:.1}Z"), &thin);
    let mut last = f64::NEG_INFINITY;
    for (value, label) in x.ticks.values.iter().zip(&x.ticks.labels) {
        let at = (x.place)(*value);
        svg.line([at, bottom], [at, bottom + 5.0], &thin);
        // In a narrow frame a label may have no room.
        if at - last >= text_width(label, TEXT) + 4.0 {
            svg.text([at, bottom + 18.0], TEXT, Anchor::Middle, label);
            last = at;
        }
    }
    let mut last = f64::INFINITY;
    for (value, label) in y.ticks.values.iter().zip(&y.ticks.labels) {
        let at = (y.place)(*value);
        svg.line([left - 5.0, at], [left, at], &thin);
        if last - at >= TEXT {
            svg.text([left - 8.0, at + 0.35 * TEXT], TEXT, Anchor::End, label);
            last = at;
        }
    }
    svg.text([0.5 * (left + right), bottom + 36.0], TEXT, Anchor::Middle, &x.title);
    svg.upright_text([left - 20.0 - label_room(y.ticks), 0.5 * (top + bottom)], TEXT, &y.title);
}

/// Room for the labels beside an upright axis.
pub(crate) fn label_room(ticks: &Ticks) -> f64 {
    text_width(&"0".repeat(ticks.longest()), TEXT)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_tick_has_its_label_at_its_place() {
        let ticks = Ticks::new(0.0, 1.0, 5);
        let mut svg = Svg::default();
        let x = Axis { ticks: &ticks, title: "x, m".into(), place: &|v| 50.0 + 200.0 * v };
        let y = Axis { ticks: &ticks, title: "u".into(), place: &|v| 150.0 - 100.0 * v };
        draw(&mut svg, [50.0, 50.0, 250.0, 150.0], &x, &y);
        let text = svg.finish(300.0, 200.0);
        assert!(text.contains("<text x=\"90\" y=\"168\" font-size=\"12\" text-anchor=\"middle\" >0.2</text>"));
        assert!(text.contains("x=\"42\" y=\"94.2\"") && text.contains("rotate(-90"));
    }

    #[test]
    fn labels_without_room_are_left_out() {
        let ticks = Ticks::new(0.0, 1.0, 5);
        let mut svg = Svg::default();
        let x = Axis { ticks: &ticks, title: String::new(), place: &|v| 50.0 + 10.0 * v };
        let y = Axis { ticks: &ticks, title: String::new(), place: &|v| 60.0 - 10.0 * v };
        draw(&mut svg, [50.0, 50.0, 60.0, 60.0], &x, &y);
        let text = svg.finish(100.0, 100.0);
        assert_eq!(text.matches(">0.0<").count(), 2);
        assert!(!text.contains(">0.2<") && !text.contains(">1.0<"));
    }
}
