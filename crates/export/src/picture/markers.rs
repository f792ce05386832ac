//! Marked points with a text: beside the point where there is room, else numbered and listed below.

use super::layout::TEXT;
use super::svg::{Anchor, INK, Pixel, Svg, number, text_width};

/// Distance from a point to its text.
const GAP: f64 = 8.0;

/// A marked point on the page.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Mark<'a> {
    pub(crate) at: Pixel,
    pub(crate) text: &'a str,
}

/// Draws marks inside a frame (left, top, right, bottom), their texts clear of some points where that can be; gives
/// the lines to be listed below the picture.
pub(crate) fn draw(svg: &mut Svg, frame: [f64; 4], marks: &[Mark<'_>], avoid: &[Pixel]) -> Vec<String> {
    let mut taken: Vec<[f64; 4]> = marks.iter().map(|m| around(m.at)).collect();
    let mut listed = Vec::new();
    for mark in marks {
        point(svg, mark.at);
        if mark.text.is_empty() {
            continue;
        }
        let mut open = choices(mark);
        open.retain(|(_, _, room)| {
            within(*room, frame) && taken.iter().all(|other| *other == around(mark.at) || !touch(*room, *other))
        });
        let covered = |room: [f64; 4]| avoid.iter().filter(|p| touch(room, [p[0], p[1], p[0], p[1]])).count();
        // Of equally good rooms the first.
        let free = open.into_iter().min_by_key(|(_, _, room)| covered(*room));
        if let Some((at, anchor, room)) = free {
            svg.rimmed_text(at, TEXT, anchor, mark.text);
            taken.push(room);
        } else {
            listed.push(mark.text.to_string());
            let n = listed.len();
            svg.rimmed_text([mark.at[0] + 6.0, mark.at[1] - 5.0], TEXT, Anchor::Start, &n.to_string());
        }
    }
    listed.iter().enumerate().map(|(i, text)| format!("{}: {text}", i + 1)).collect()
}

/// A ring with a dot, seen on dark and on light colors.
fn point(svg: &mut Svg, at: Pixel) {
    let [x, y] = at.map(number);
    svg.raw(&format!(
        "<circle cx=\"{x}\" cy=\"{y}\" r=\"4.5\" fill=\"#fff\" stroke=\"{INK}\" stroke-width=\"1.2\"/>\
         <circle cx=\"{x}\" cy=\"{y}\" r=\"1.6\"/>"
    ));
}

/// Base points, anchors and rooms of a text: right or left of its point, a little above or below.
fn choices(mark: &Mark<'_>) -> Vec<(Pixel, Anchor, [f64; 4])> {
    let width = text_width(mark.text, TEXT);
    let [x, y] = mark.at;
    let mut all = Vec::new();
    for base in [y - 6.0, y + 14.0, y + 4.0, y - 14.0, y + 22.0] {
        for (anchor, start, left) in [(Anchor::Start, x + GAP, x + GAP), (Anchor::End, x - GAP, x - GAP - width)] {
            all.push(([start, base], anchor, [left - 2.0, base - TEXT, left + width + 2.0, base + 4.0]));
        }
    }
    all
}

/// The room of a point itself.
fn around([x, y]: Pixel) -> [f64; 4] {
    [x - 5.0, y - 5.0, x + 5.0, y + 5.0]
}

fn within(room: [f64; 4], frame: [f64; 4]) -> bool {
    room[0] >= frame[0] && room[1] >= frame[1] && room[2] <= frame[2] && room[3] <= frame[3]
}

fn touch(a: [f64; 4], b: [f64; 4]) -> bool {
    a[0] < b[2] && b[0] < a[2] && a[1] < b[3] && b[1] < a[3]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_text_with_room_stands_beside_its_point() {
        let mut svg = Svg::default();
        let marks = [Mark { at: [50.0, 50.0], text: "a" }, Mark { at: [195.0, 50.0], text: "hot" }];
        assert!(draw(&mut svg, [0.0, 0.0, 200.0, 100.0], &marks, &[]).is_empty());
        let text = svg.finish(200.0, 100.0);
        assert!(text.contains("text-anchor=\"end\""), "near the right border the text goes left");
    }

    #[test]
    fn texts_without_room_are_numbered_and_listed() {
        let marks =
            [Mark { at: [20.0, 50.0], text: "a rather long text" }, Mark { at: [20.0, 80.0], text: "another one" }];
        let listed = draw(&mut Svg::default(), [0.0, 0.0, 40.0, 100.0], &marks, &[]);
        assert_eq!(listed, ["1: a rather long text", "2: another one"]);
    }

    #[test]
    fn a_text_keeps_clear_of_the_curve() {
        let mut svg = Svg::default();
        let rising: Vec<Pixel> = (0..50).map(|i| [50.0 + f64::from(i), 50.0 - f64::from(i)]).collect();
        draw(&mut svg, [0.0, 0.0, 200.0, 100.0], &[Mark { at: [50.0, 50.0], text: "value" }], &rising);
        let text = svg.finish(200.0, 100.0);
        assert!(!text.contains("<text x=\"58\" y=\"44\""), "right above is where the curve is");
    }

    #[test]
    fn texts_do_not_cover_each_other() {
        let marks = [Mark { at: [100.0, 50.0], text: "one two" }, Mark { at: [101.0, 50.0], text: "three" }];
        let mut svg = Svg::default();
        assert!(draw(&mut svg, [0.0, 0.0, 200.0, 100.0], &marks, &[]).is_empty());
        let rooms: Vec<_> = marks.iter().map(|m| choices(m)[0].2).collect();
        assert!(touch(rooms[0], rooms[1]), "the first choices would have touched");
        let text = svg.finish(200.0, 100.0);
        let anchor = |word: &str| text.lines().find(|l| l.contains(word)).unwrap().contains("\"start\"");
        assert!(anchor("one two") && !anchor("three"), "so the second text goes to the left");
    }
}
