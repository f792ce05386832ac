//! Pictures as a reader of SVG files meets them: well-formed, small, honest about bad input.

use hypercircle_export::{Colors, CurvePicture, ExportError, Field, Picture};
use hypercircle_mesh::{Interval, Mesh, Rectangle};
use quick_xml::events::Event;

/// Reads a picture with an XML parser; gives its texts. Checks that every coordinate of a path is a number.
fn texts(svg: &str) -> Vec<String> {
    let mut reader = quick_xml::Reader::from_str(svg);
    reader.config_mut().check_end_names = true;
    let (mut found, mut current) = (Vec::new(), None::<String>);
    loop {
        match reader.read_event().expect("well-formed XML") {
            Event::Start(e) if e.name().as_ref() == "text" => current = Some(String::new()),
            Event::End(e) if e.name().as_ref() == "text" => found.extend(current.take()),
            Event::Text(t) => current.iter_mut().for_each(|c| c.push_str(&t)),
            Event::GeneralRef(r) => current.iter_mut().for_each(|c| *c += &format!("&{};", &*r)),
            Event::Empty(e) => {
                for attribute in e.attributes() {
                    let value = attribute.expect("well-formed attributes").value;
                    assert!(!value.contains("NaN") && !value.contains("inf"), "{value}");
                }
            }
            Event::Eof => return found,
            _ => {}
        }
    }
}

fn rectangle(w: f64, h: f64, counts: [usize; 2]) -> Mesh<2> {
    Rectangle::new([0.0, 0.0], [w, h], counts).mesh().unwrap()
}

#[test]
fn a_picture_is_xml_whatever_the_texts_are() {
    let mesh = rectangle(1.0, 1.0, [4, 4]);
    let field = Field::of_function(&mesh, "a<b>&\"'", "]]>\u{0}", 2, |x| x[0] - x[1]);
    let flux = vec![[1.0, 0.0]; mesh.cell_count()];
    let svg = Picture::of(&mesh)
        .title("</svg> & <script>")
        .length_unit("<m>")
        .field(&field)
        .colors(Colors::Diverging)
        .contours(5)
        .arrows(&flux, "<&>")
        .marker([0.5, 0.5], "&lt; \u{7}")
        .to_svg()
        .unwrap();
    let all = texts(&svg);
    assert!(all.iter().any(|t| t == "&lt;/svg&gt; &amp; &lt;script&gt;"), "{all:?}");
    assert!(all.iter().any(|t| t == "&amp;lt; "));
}

#[test]
fn any_shape_and_size_of_domain_is_laid_out() {
    for (w, h) in [(1.0, 1.0), (10.0, 1.0), (1.0, 10.0), (300.0, 1.0), (1e-9, 3e-9), (2e12, 1e12)] {
        let mesh = rectangle(w, h, [4, 4]);
        let field = Field::of_function(&mesh, "u", "K", 1, |x| x[0] / w + x[1] / h);
        let all = texts(&Picture::of(&mesh).field(&field).contours(8).length_unit("m").to_svg().unwrap());
        assert!(all.iter().any(|t| t.starts_with("x, ") && t.ends_with('m')), "{all:?}");
    }
}

#[test]
fn constant_fields_of_any_size_have_a_picture() {
    let mesh = rectangle(1.0, 1.0, [2, 2]);
    for value in [0.0, 20.0, 5e-324, -1e-300, 1e300] {
        for colors in [Colors::Sequential, Colors::Diverging] {
            let field = Field::of_function(&mesh, "u", "", 2, |_| value);
            texts(&Picture::of(&mesh).field(&field).colors(colors).contours(8).to_svg().unwrap());
        }
    }
}

#[test]
fn a_picture_of_very_many_cells_stays_small() {
    let mesh = rectangle(3.0, 2.0, [300, 200]);
    let field = Field::of_function(&mesh, "u", "", 2, |x| (9.0 * x[0]).sin() * (7.0 * x[1]).cos());
    let svg = Picture::of(&mesh).field(&field).contours(12).mesh_lines(true).to_svg().unwrap();
    assert!(svg.len() < 2_000_000, "{}", svg.len());
    assert!(svg.contains("data:image/png;base64,"));
}

#[test]
fn the_same_input_gives_the_same_bytes() {
    let mesh = rectangle(3.0, 2.0, [30, 20]);
    let field = Field::of_function(&mesh, "u", "", 2, |x| x[0] * x[1]);
    let picture = Picture::of(&mesh).field(&field).contours(12);
    assert_eq!(picture.to_svg().unwrap(), picture.to_svg().unwrap());
}

#[test]
fn bad_input_is_told_with_its_place() {
    let mesh = rectangle(1.0, 1.0, [1, 1]);
    let mut values = vec![0.0; 6];
    values[4] = f64::NAN;
    let error = Picture::of(&mesh).field(&Field::new("u", "", 1, values)).to_svg().unwrap_err();
    assert!(matches!(error, ExportError::NotFinite { cell: 1, ref place, .. } if place.len() == 2));
    let error = Picture::of(&mesh).arrows(&[[0.0, f64::INFINITY], [0.0; 2]], "").to_svg().unwrap_err();
    assert!(matches!(error, ExportError::NotFinite { cell: 0, .. }));
    let error = Picture::of(&mesh).arrows(&[[0.0; 2]], "").to_svg().unwrap_err();
    assert!(matches!(error, ExportError::WrongLength { given: 1, expected: 2, .. }));
    for place in [[f64::NAN, 0.0], [0.5, 3.0], [-1e308, 0.5]] {
        let error = Picture::of(&mesh).marker(place, "here").to_svg().unwrap_err();
        assert!(matches!(error, ExportError::Marker { .. }), "{place:?}");
    }
    let huge = Field::new("u", "", 1, vec![1.7e308, -1.7e308, 0.0, 0.0, 0.0, 0.0]);
    let error = Picture::of(&mesh).field(&huge).to_svg().unwrap_err();
    assert!(matches!(error, ExportError::Extent { ref what, .. } if what == "u"));
}

#[test]
fn a_curve_is_xml_with_its_regions_and_values() {
    let wall = Interval::pieces(&[("brick & mortar", 0.0, 0.24, 8), ("foam", 0.24, 0.36, 4)]).mesh().unwrap();
    let field = Field::of_function(&wall, "temperature", "°C", 2, |x| 20.0 - 50.0 * x[0]);
    let picture = CurvePicture::of(&wall, &field).title("Wall").length_unit("m").minimum(true);
    let all = texts(&picture.to_svg().unwrap());
    for wanted in ["brick &amp; mortar", "foam", "largest 20.0 °C", "smallest 2.0 °C", "x, m", "temperature, °C"] {
        assert!(all.iter().any(|t| t == wanted), "{wanted} in {all:?}");
    }
    let short = Field::new("u", "", 2, vec![0.0; 3]);
    assert!(matches!(CurvePicture::of(&wall, &short).to_svg(), Err(ExportError::WrongLength { .. })));
}

#[test]
fn regions_and_sides_are_named_on_request() {
    let mesh = Rectangle::new([0.0, 0.0], [4.0, 3.0], [4, 3]).region("steel <S235>").mesh().unwrap();
    let silent = texts(&Picture::of(&mesh).to_svg().unwrap());
    assert!(!silent.iter().any(|t| t == "steel &lt;S235&gt;" || t == "left"));
    let all = texts(&Picture::of(&mesh).region_names(true).side_names(true).to_svg().unwrap());
    for name in ["steel &lt;S235&gt;", "left", "right", "bottom", "top"] {
        assert!(all.iter().any(|t| t == name), "{name} in {all:?}");
    }
}

#[test]
fn fields_of_high_order_have_pictures() {
    let mesh = rectangle(2.0, 1.0, [2, 1]);
    let line = Interval::uniform(0.0, 1.0, 2).mesh().unwrap();
    for order in 1..=12 {
        let field = Field::of_function(&mesh, "u", "", order, |x| (3.0 * x[0]).sin() * x[1]);
        texts(&Picture::of(&mesh).field(&field).contours(6).to_svg().unwrap());
        let field = Field::of_function(&line, "u", "", order, |x| (6.0 * x[0]).sin());
        texts(&CurvePicture::of(&line, &field).to_svg().unwrap());
    }
}
