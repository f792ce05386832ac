//! Shading of big meshes: an image of so many pixels, however many cells there are.

use base64::Engine as _;

use super::colors::Scale;
use super::pieces::Piece;
use super::scan;
use super::svg::{Pixel, Svg, number};
use crate::ExportError;

/// Pixels of the image for each pixel of the page, so that it prints well.
const FINENESS: f64 = 2.0;
/// Colors of the image; one more entry of the palette is transparent.
const COLORS: usize = 255;

/// Draws pieces into an image with a corner at `corner` and of `size` pixels of the page.
pub(crate) fn draw(
    svg: &mut Svg,
    pieces: &[Piece],
    scale: &Scale,
    corner: Pixel,
    size: [f64; 2],
) -> Result<(), ExportError> {
    let [width, height] = size.map(|s| (s * FINENESS).ceil().max(1.0) as usize);
    let mut pixels = vec![0_u8; width * height];
    for piece in pieces {
        // The middle of a pixel has whole coordinates.
        let corners = piece.corners.map(|p| [0, 1].map(|d| (p[d] - corner[d]) * FINENESS - 0.5));
        scan::inside(&corners, width, height, |i, j, share| {
            let value: f64 = (0..3).map(|k| share[k] * piece.values[k]).sum();
            let color = (scale.position(value) * COLORS as f64) as usize;
            pixels[j * width + i] = 1 + color.min(COLORS - 1) as u8;
        });
    }
    let png = encode(&pixels, width, height, scale)?;
    let [x, y] = corner.map(number);
    let [w, h] = [width, height].map(|n| number(n as f64 / FINENESS));
    let data = base64::engine::general_purpose::STANDARD.encode(png);
    svg.raw(&format!(
        "<image x=\"{x}\" y=\"{y}\" width=\"{w}\" height=\"{h}\" href=\"data:image/png;base64,{data}\"/>"
    ));
    Ok(())
}

/// A PNG image of colors of a scale; pixels of number 0 are transparent.
fn encode(pixels: &[u8], width: usize, height: usize, scale: &Scale) -> Result<Vec<u8>, ExportError> {
    let mut palette = vec![255, 255, 255];
    palette.extend((0..COLORS).flat_map(|i| scale.rgb((i as f64 + 0.5) / COLORS as f64)));
    let failed = |e: png::EncodingError| ExportError::Raster { reason: e.to_string() };
    let mut bytes = Vec::new();
    let mut encoder = png::Encoder::new(&mut bytes, width as u32, height as u32);
    encoder.set_color(png::ColorType::Indexed);
    encoder.set_depth(png::BitDepth::Eight);
    encoder.set_palette(palette);
    encoder.set_trns(vec![0_u8]);
    let mut writer = encoder.write_header().map_err(failed)?;
    writer.write_image_data(pixels).map_err(failed)?;
    writer.finish().map_err(failed)?;
    Ok(bytes)
}

#[cfg(test)]
mod tests {
    use super::super::colors::Colors;
    use super::*;

    #[test]
    fn pixels_have_the_color_of_the_field_and_are_clear_outside() {
        let mut svg = Svg::default();
        let corners = [[10.0, 10.0], [110.0, 10.0], [10.0, 110.0]];
        let piece = Piece { corners, values: [0.0, 1.0, 0.0] };
        let scale = Scale::new(0.0, 1.0, Colors::Sequential);
        draw(&mut svg, &[piece], &scale, [10.0, 10.0], [100.0, 100.0]).unwrap();
        let text = svg.finish(120.0, 120.0);
        let data = text.split("base64,").nth(1).unwrap().split('"').next().unwrap();
        let png = base64::engine::general_purpose::STANDARD.decode(data).unwrap();
        let mut reader = png::Decoder::new(std::io::Cursor::new(png)).read_info().unwrap();
        let mut pixels = vec![0; reader.output_buffer_size().unwrap()];
        let info = reader.next_frame(&mut pixels).unwrap();
        assert_eq!((info.width, info.height), (200, 200));
        assert_eq!(pixels[199 * 200 + 199], 0, "outside the triangle");
        let middle = pixels[20 * 200 + 100] - 1;
        assert!(middle.abs_diff(128) <= 1, "x = 0.5 has the middle color, not {middle}");
    }
}
