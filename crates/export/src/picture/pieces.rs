//! A field cut into straight triangles on which it is linear, in pixels.

use hypercircle_mesh::{CellId, Mesh};

use super::svg::Pixel;
use crate::Field;
use crate::nodes::{Nodes, Sampler};

/// Pieces need not be smaller than this many pixels: the eye cannot tell them apart.
const FINEST: f64 = 1.5;

/// Straight pieces along each side of a cell of some order.
fn cuts(corners: &[Pixel; 3], order: usize) -> usize {
    let extent = |d: usize| {
        let c = corners.map(|p| p[d]);
        c[0].max(c[1]).max(c[2]) - c[0].min(c[1]).min(c[2])
    };
    let most = if order == 1 { 1 } else { 2 * order };
    (extent(0).max(extent(1)) / FINEST).ceil().clamp(1.0, most as f64) as usize
}

/// A triangle of the picture with the values at its corners.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Piece {
    pub(crate) corners: [Pixel; 3],
    pub(crate) values: [f64; 3],
}

/// All pieces of a field that was checked: one for a cell of order 1, up to 4k² for a cell of order k.
pub(crate) fn pieces(mesh: &Mesh<2>, field: &Field, nodes: &Nodes, to_pixel: impl Fn([f64; 2]) -> Pixel) -> Vec<Piece> {
    let lattices: Vec<Lattice> = (1..=2 * field.order()).map(|cuts| Lattice::new(nodes, cuts)).collect();
    let mut all = Vec::new();
    for (cell, values) in mesh.cells().zip(field.values().chunks_exact(nodes.reference().len())) {
        let corners = corners(mesh, cell).map(&to_pixel);
        lattices[cuts(&corners, field.order()) - 1].cut(&corners, values, &mut all);
    }
    all
}

/// The reference triangle cut into equal pieces.
struct Lattice {
    points: Vec<[f64; 2]>,
    sampler: Sampler,
    /// Numbers of the corners of each piece.
    pieces: Vec<[usize; 3]>,
}

impl Lattice {
    /// The lattice with some pieces along each side.
    fn new(nodes: &Nodes, cuts: usize) -> Self {
        let row = |j: usize| (0..=cuts - j).map(move |i| [i, j].map(|n| n as f64 / cuts as f64));
        let points: Vec<[f64; 2]> = (0..=cuts).flat_map(row).collect();
        let number = |[i, j]: [usize; 2]| (0..j).map(|r| cuts + 1 - r).sum::<usize>() + i;
        let pieces = (0..cuts * cuts).map(|n| sub_triangle(n, cuts).map(number)).collect();
        Self { sampler: nodes.sampler(&points), points, pieces }
    }

    /// Appends the pieces of a cell with these corners and nodal values.
    fn cut(&self, corners: &[Pixel; 3], values: &[f64], all: &mut Vec<Piece>) {
        let [a, b, c] = corners;
        let at = |[s, t]: &[f64; 2]| [0, 1].map(|d| (1.0 - s - t) * a[d] + s * b[d] + t * c[d]);
        let places: Vec<Pixel> = self.points.iter().map(at).collect();
        let values: Vec<f64> = self.sampler.values(values).collect();
        all.extend(self.pieces.iter().map(|p| Piece { corners: p.map(|n| places[n]), values: p.map(|n| values[n]) }));
    }
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

#[cfg(test)]
mod tests {
    use hypercircle_mesh::Rectangle;

    use super::*;

    /// The pieces with ten pixels for each unit of length.
    fn tenfold(mesh: &Mesh<2>, field: &Field) -> Vec<Piece> {
        pieces(mesh, field, &field.check(mesh).unwrap(), |x| x.map(|c| 10.0 * c))
    }

    #[test]
    fn pieces_cover_each_cell_once() {
        let mesh = Rectangle::new([0.0, 0.0], [2.0, 1.0], [2, 1]).mesh().unwrap();
        for (order, count) in [(1, 4), (2, 64), (3, 144), (12, 4 * 49)] {
            let field = Field::of_function(&mesh, "", "", order, |x| x[0]);
            let all = tenfold(&mesh, &field);
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
        for order in [2, 3, 7] {
            let field = Field::of_function(&mesh, "", "", order, f);
            for piece in tenfold(&mesh, &field) {
                for (x, v) in piece.corners.iter().zip(piece.values) {
                    assert!((f(&x.map(|c| c / 10.0)) - v).abs() < 1e-12);
                }
            }
        }
    }
}
