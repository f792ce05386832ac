//! The text of an SVG picture, written element by element.

use std::fmt::Write as _;

/// Fonts that one machine or another has; the last one every viewer has.
const FONTS: &str = "Helvetica, Arial, 'Liberation Sans', 'DejaVu Sans', sans-serif";

/// Color of text, frame and borders.
pub(crate) const INK: &str = "#1a1a1a";

/// Size of notes in pixels.
const NOTE: f64 = 12.0;

/// A point of the picture in pixels, y downwards.
pub(crate) type Pixel = [f64; 2];

/// Where a text stands relative to its point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Anchor {
    Start,
    Middle,
    End,
}

/// The elements written so far.
#[derive(Debug, Default)]
pub(crate) struct Svg {
    body: String,
}

impl Svg {
    /// Appends an element that is XML already.
    pub(crate) fn raw(&mut self, element: &str) {
        self.body.push_str(element);
        self.body.push('\n');
    }

    /// A path with its attributes (which are XML already).
    pub(crate) fn path(&mut self, data: &str, attributes: &str) {
        if !data.is_empty() {
            let _ = writeln!(self.body, "<path d=\"{data}\" {attributes}/>");
        }
    }

    /// A straight line.
    pub(crate) fn line(&mut self, a: Pixel, b: Pixel, attributes: &str) {
        self.path(&polyline(&[a, b], false), attributes);
    }

    /// A text in the color of ink.
    pub(crate) fn text(&mut self, at: Pixel, size: f64, anchor: Anchor, text: &str) {
        self.styled_text(at, size, anchor, text, "");
    }

    /// A text with a white rim, legible on any color.
    pub(crate) fn rimmed_text(&mut self, at: Pixel, size: f64, anchor: Anchor, text: &str) {
        let rim = "stroke=\"#fff\" stroke-width=\"3\" stroke-opacity=\".85\" stroke-linejoin=\"round\"";
        self.styled_text(at, size, anchor, text, rim);
        self.text(at, size, anchor, text);
    }

    /// The same in italics around a point, with further attributes (which are XML already).
    pub(crate) fn rimmed_italics(&mut self, at: Pixel, size: f64, text: &str, attributes: &str) {
        let rim = "stroke=\"#fff\" stroke-width=\"3\" stroke-opacity=\".85\" stroke-linejoin=\"round\"";
        for rim in [rim, ""] {
            let style = format!("font-style=\"italic\" {attributes}{rim}");
            self.styled_text(at, size, Anchor::Middle, text, &style);
        }
    }

    /// A text that reads upwards.
    pub(crate) fn upright_text(&mut self, at: Pixel, size: f64, text: &str) {
        let turn = format!("transform=\"rotate(-90 {} {})\"", number(at[0]), number(at[1]));
        self.styled_text(at, size, Anchor::Middle, text, &turn);
    }

    /// A text with further attributes (which are XML already).
    pub(crate) fn styled_text(&mut self, at: Pixel, size: f64, anchor: Anchor, text: &str, attributes: &str) {
        let anchor = match anchor {
            Anchor::Start => "start",
            Anchor::Middle => "middle",
            Anchor::End => "end",
        };
        let (x, y, size, text) = (number(at[0]), number(at[1]), number(size), escape(text));
        let _ = writeln!(
            self.body,
            "<text x=\"{x}\" y=\"{y}\" font-size=\"{size}\" text-anchor=\"{anchor}\" {attributes}>{text}</text>"
        );
    }

    /// Notes below a picture, broken into lines where they are long; gives the height of the picture with them.
    pub(crate) fn notes(&mut self, notes: &[String], left: f64, top: f64, width: f64) -> f64 {
        let mut y = top + 12.0;
        for line in notes.iter().flat_map(|note| wrap(note, NOTE, width - left - 10.0)) {
            self.text([left, y], NOTE, Anchor::Start, &line);
            y += NOTE + 5.0;
        }
        y
    }

    /// The whole picture on white.
    pub(crate) fn finish(self, width: f64, height: f64) -> String {
        let (w, h) = (number(width.ceil()), number(height.ceil()));
        format!(
            "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{w}\" \
             height=\"{h}\" viewBox=\"0 0 {w} {h}\" font-family=\"{FONTS}\" fill=\"{INK}\">\n\
             <rect width=\"{w}\" height=\"{h}\" fill=\"#fff\"/>\n{}</svg>\n",
            self.body
        )
    }
}

/// Path data of a line through points.
pub(crate) fn polyline(points: &[Pixel], closed: bool) -> String {
    let mut data = String::new();
    for (i, p) in points.iter().enumerate() {
        let letter = if i == 0 { 'M' } else { 'L' };
        let _ = write!(data, "{letter}{} {}", number(p[0]), number(p[1]));
    }
    if closed && !data.is_empty() {
        data.push('Z');
    }
    data
}

/// A coordinate with two decimals at most.
pub(crate) fn number(x: f64) -> String {
    let text = format!("{x:.2}");
    let short = text.trim_end_matches('0').trim_end_matches('.');
    if short == "-0" { "0".into() } else { short.into() }
}

/// A guess at the width of a text in pixels, for fonts of usual width.
pub(crate) fn text_width(text: &str, size: f64) -> f64 {
    0.56 * size * text.chars().count() as f64
}

/// Breaks a text at its spaces (not at those marked as unbreakable) into lines of a greatest width.
pub(crate) fn wrap(text: &str, size: f64, width: f64) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for word in text.split([' ', '\t', '\n', '\r']).filter(|word| !word.is_empty()) {
        match lines.last_mut() {
            Some(line) if text_width(line, size) + text_width(word, size) + size < width => {
                line.push(' ');
                line.push_str(word);
            }
            _ => lines.push(word.into()),
        }
    }
    lines
}

/// Text as XML wants it: markup escaped, characters that XML does not allow left out.
pub(crate) fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&apos;"),
            '\t' | '\n' | '\r' => out.push(' '),
            '\u{FFFE}' | '\u{FFFF}' => {}
            c if c < ' ' => {}
            c => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn coordinates_are_short() {
        assert_eq!(number(1.0), "1");
        assert_eq!(number(-0.001), "0");
        assert_eq!(number(12.345), "12.35");
        assert_eq!(number(100.0), "100");
    }

    #[test]
    fn markup_in_a_text_is_escaped() {
        assert_eq!(escape("a<b & \"c\"\u{1}"), "a&lt;b &amp; &quot;c&quot;");
    }

    #[test]
    fn notes_stay_within_the_width_and_above_the_lower_end() {
        let mut svg = Svg::default();
        let height = svg.notes(&["a note of several words that is long".into()], 20.0, 100.0, 150.0);
        let text = svg.finish(150.0, height);
        assert_eq!(text.matches("<text").count(), 3, "{text}");
        assert!(height > 100.0 + 3.0 * NOTE);
    }

    #[test]
    fn long_texts_are_broken_between_words() {
        let lines = wrap("one two three", 10.0, 60.0);
        assert_eq!(lines, ["one two", "three"]);
    }
}
