//! Outer border, borders between regions, and sides of cells.

use hypercircle_mesh::Mesh;

use super::lines::joined;
use super::svg::{INK, Pixel, Svg, polyline};

/// More sides than this are not drawn one by one: they would cover the picture and its file would be large.
pub(crate) const MOST_SIDES: usize = 40_000;

/// Draws the sides of all cells as thin lines, unless there are more than [`MOST_SIDES`].
pub(crate) fn mesh_lines(svg: &mut Svg, mesh: &Mesh<2>, to_pixel: &dyn Fn([f64; 2]) -> Pixel) {
    if mesh.topology().side_count() > MOST_SIDES {
        return;
    }
    let data: String = sides(mesh, to_pixel, |_| true).iter().map(|s| polyline(s, false)).collect();
    svg.path(&data, "fill=\"none\" stroke=\"#000\" stroke-width=\".4\" stroke-opacity=\".45\"");
}

/// Draws borders of regions thinner than the outer border.
pub(crate) fn borders(svg: &mut Svg, mesh: &Mesh<2>, to_pixel: &dyn Fn([f64; 2]) -> Pixel) {
    let style = |width: &str| {
        format!(
            "fill=\"none\" stroke=\"{INK}\" stroke-width=\"{width}\" stroke-linejoin=\"round\" stroke-linecap=\"round\""
        )
    };
    let inner = sides(mesh, to_pixel, |kind| kind == Kind::BetweenRegions);
    svg.path(&joined(&inner), &style("1"));
    let outer = sides(mesh, to_pixel, |kind| kind == Kind::Outer);
    svg.path(&joined(&outer), &style("1.6"));
}

/// What lies at a side of a cell.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Kind {
    Outer,
    BetweenRegions,
    Inner,
}

/// The sides of the wanted kinds, each once.
fn sides(mesh: &Mesh<2>, to_pixel: &dyn Fn([f64; 2]) -> Pixel, wanted: impl Fn(Kind) -> bool) -> Vec<[Pixel; 2]> {
    let topology = mesh.topology();
    let mut found = Vec::new();
    for cell in mesh.cells() {
        for local in 0..3 {
            let kind = match topology.neighbor(cell, local) {
                None => Kind::Outer,
                // The cell with the lower number draws the side.
                Some((other, _)) if other < cell => continue,
                Some((other, _)) if mesh.region(other) != mesh.region(cell) => Kind::BetweenRegions,
                Some(_) => Kind::Inner,
            };
            if wanted(kind) {
                found.push(mesh.side_vertices(cell, local).map(|v| to_pixel(mesh.point(v))));
            }
        }
    }
    found
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::Arrays;

    use super::*;

    #[test]
    fn each_side_is_drawn_once_by_its_kind() {
        let points = vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
        let mesh = Arrays::new(points, &[[0, 1, 2], [0, 2, 3]]).region_of_each_cell(&["a", "b"]).mesh().unwrap();
        assert_eq!(sides(&mesh, &|x| x, |_| true).len(), 5);
        assert_eq!(sides(&mesh, &|x| x, |k| k == Kind::Outer).len(), 4);
        let between = sides(&mesh, &|x| x, |k| k == Kind::BetweenRegions);
        assert_eq!(between.len(), 1);
        assert!(between[0].contains(&[0.0, 0.0]) && between[0].contains(&[1.0, 1.0]));
    }
}
