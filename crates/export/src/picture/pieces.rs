//! A field cut into straight triangles on which it is linear, in pixels.

use hypercircle_mesh::{CellId, Mesh};

use super::svg::Pixel;
use crate::Field;

/// Straight pieces along each side of a cell of order 2; fewer where the eye cannot tell them apart.
fn cuts(corners: &[Pixel; 3]) -> usize {
    let extent = |d: usize| {
        let c = corners.map(|p| p[d]);
        c[0].max(c[1]).max(c[2]) - c[0].min(c[1]).min(c[2])
    };
    match extent(0).max(extent(1)) {
        size if size > 6.0 => 4,
        size if size > 2.0 => 2,
        _ => 1,
    }
}

/// A triangle of the picture with the values at its corners.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Piece {
    pub(crate) corners: [Pixel; 3],
    pub(crate) values: [f64; 3],
}

/// All pieces of a checked field: one for a cell of order 1, sixteen for a cell of order 2 that is not tiny.
pub(crate) fn pieces<'a>(
    mesh: &'a Mesh<2>,
    field: &'a Field,
    to_pixel: impl Fn([f64; 2]) -> Pixel + 'a,
) -> impl Iterator<Item = Piece> + 'a {
    let each = field.values().len() / mesh.cell_count().max(1);
    mesh.cells().flat_map(move |cell| {
        let corners = corners(mesh, cell).map(&to_pixel);
        let cuts = if field.order() == 1 { 1 } else { cuts(&corners) };
        let values = &field.values()[cell.index() * each..(cell.index() + 1) * each];
        let at = move |i: usize, j: usize| {
            let share = [cuts - i - j, i, j].map(|n| n as f64 / cuts as f64);
            let place = [0, 1].map(|c| (0..3).map(|k| share[k] * corners[k][c]).sum::<f64>());
            (place, value_at(values, share))
        };
        (0..cuts * cuts).map(move |n| {
            let [a, b, c] = sub_triangle(n, cuts).map(|[i, j]| at(i, j));
            Piece { corners: [a.0, b.0, c.0], values: [a.1, b.1, c.1] }
        })
    })
}

/// Corners of a cell in user's coordinates.
pub(crate) fn corners(mesh: &Mesh<2>, cell: CellId) -> [[f64; 2]; 3] {
    let v = mesh.cell_vertices(cell);
    [mesh.point(v[0]), mesh.point(v[1]), mesh.point(v[2])]
}

/// The corners of piece `n` of a triangle cut `cuts` times along each side, in steps along its sides.
fn sub_triangle(n: usize, cuts: usize) -> [[usize; 2]; 3] {
    let (mut row, mut rest) = (0, n);
    while rest >= 2 * (cuts - row) - 1 {
        rest -= 2 * (cuts - row) - 1;
        row += 1;
    }
    let i = rest / 2;
    if rest % 2 == 0 { [[i, row], [i + 1, row], [i, row + 1]] } else { [[i + 1, row], [i + 1, row + 1], [i, row + 1]] }
}

/// The Lagrange interpolant of order 1 or 2 at barycentric coordinates.
fn value_at(values: &[f64], [a, b, c]: [f64; 3]) -> f64 {
    match *values {
        [u, v, w] => a * u + b * v + c * w,
        [u, v, w, uv, vw, wu] => {
            a * (2.0 * a - 1.0) * u
                + b * (2.0 * b - 1.0) * v
                + c * (2.0 * c - 1.0) * w
                + 4.0 * (a * b * uv + b * c * vw + c * a * wu)
        }
        _ => f64::NAN,
    }
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::Rectangle;

    use super::*;

    #[test]
    fn pieces_cover_each_cell_once() {
        let mesh = Rectangle::new([0.0, 0.0], [2.0, 1.0], [2, 1]).mesh().unwrap();
        for (order, count) in [(1, 4), (2, 64)] {
            let field = Field::of_function(&mesh, "", "", order, |x| x[0]);
            let all: Vec<Piece> = pieces(&mesh, &field, |x| x.map(|c| 10.0 * c)).collect();
            assert_eq!(all.len(), count);
            let area = |p: &Piece| {
                let [a, b, c] = p.corners;
                0.5 * ((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]))
            };
            assert!(all.iter().all(|p| area(p) > 0.0));
            assert!((all.iter().map(area).sum::<f64>() - 200.0).abs() < 1e-10);
        }
    }

    #[test]
    fn a_parabola_is_met_at_the_corners_of_its_pieces() {
        let mesh = Rectangle::new([0.0, 0.0], [2.0, 1.0], [1, 1]).mesh().unwrap();
        let f = |x: &[f64; 2]| x[0] * x[0] - 3.0 * x[0] * x[1] + x[1];
        let field = Field::of_function(&mesh, "", "", 2, f);
        for piece in pieces(&mesh, &field, |x| x.map(|c| 10.0 * c)) {
            for (x, v) in piece.corners.iter().zip(piece.values) {
                assert!((f(&x.map(|c| c / 10.0)) - v).abs() < 1e-13);
            }
        }
    }
}
