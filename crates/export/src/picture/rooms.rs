//! Where in a region there is most room for its name.

use hypercircle_mesh::{Mesh, RegionId};

use super::layout::Layout;
use super::pieces::corners;
use super::scan;
use super::svg::Pixel;

/// Distance of the points at which room for the name of a region is sought.
pub(crate) const GRID: f64 = 4.0;

/// Grid points of the page with their regions.
pub(crate) struct Rooms {
    corner: Pixel,
    columns: usize,
    rows: usize,
    region: Vec<Option<RegionId>>,
    /// Distance, in steps of the grid, to the nearest point of another region or outside.
    depth: Vec<u32>,
}

impl Rooms {
    pub(crate) fn new(layout: &Layout, mesh: &Mesh<2>) -> Self {
        let (corner, size) = layout.domain();
        // A rim of points outside makes every point inside have neighbors.
        let [columns, rows] = size.map(|s| (s / GRID) as usize + 3);
        let mut region = vec![None; columns * rows];
        for cell in mesh.cells() {
            let to_grid = |x| {
                let p = layout.to_pixel(x);
                [0, 1].map(|d| (p[d] - corner[d]) / GRID + 1.0)
            };
            scan::inside(&corners(mesh, cell).map(to_grid), columns, rows, |i, j, _| {
                region[j * columns + i] = Some(mesh.region(cell));
            });
        }
        Self { corner, columns, rows, depth: vec![u32::MAX; region.len()], region }
    }

    /// Leaves out what lies under other texts.
    pub(crate) fn cover(&mut self, boxes: &[[f64; 4]]) {
        for [left, top, right, bottom] in boxes {
            let [x, y] = self.corner;
            let corners = [[left - x, top - y], [right - x, bottom - y]].map(|p| p.map(|c| c / GRID + 1.0));
            let range = |d: usize, size: usize| {
                let from = corners[0][d].ceil().max(0.0) as usize;
                from..((corners[1][d].floor() + 1.0).max(0.0) as usize).min(size)
            };
            for j in range(1, self.rows) {
                for i in range(0, self.columns) {
                    self.region[j * self.columns + i] = None;
                }
            }
        }
    }

    /// Distances by two sweeps, over the eight neighbors of each point.
    ///
    /// # Source
    /// A. Rosenfeld, J. Pfaltz, Sequential operations in digital picture processing, J. ACM 13 (1966).
    pub(crate) fn measure(&mut self) {
        let c = self.columns;
        let inner = |k: &usize| (1..c - 1).contains(&(k % c));
        let all: Vec<usize> = (c..(self.rows - 1) * c).filter(inner).collect();
        for (k, back) in all.iter().map(|k| (*k, true)).chain(all.iter().rev().map(|k| (*k, false))) {
            let near = if back { [k - c - 1, k - c, k - c + 1, k - 1] } else { [k + c - 1, k + c, k + c + 1, k + 1] };
            let at = |n: &usize| if self.region[*n] == self.region[k] { self.depth[*n] } else { 0 };
            let least = near.iter().map(at).min().unwrap_or(0);
            self.depth[k] = self.depth[k].min(least.saturating_add(1));
        }
    }

    /// The middle of a box of this size that lies in a region, as deep as can be and central there; `None` if there is no room.
    pub(crate) fn middle(&self, region: RegionId, size: [f64; 2]) -> Option<Pixel> {
        let [w, h] = size.map(|s| (0.5 * s / GRID).ceil() as usize + 1);
        let own = |k: usize| self.region[k] == Some(region);
        let inside =
            |i: usize, j: usize| (j + 1 - h..j + h).all(|j| (i + 1 - w..i + w).all(|i| own(j * self.columns + i)));
        let mut deepest: (u32, Vec<[usize; 2]>) = (1, Vec::new());
        for j in h..self.rows.saturating_sub(h) {
            for i in w..self.columns.saturating_sub(w) {
                let depth = self.depth[j * self.columns + i];
                if own(j * self.columns + i) && depth >= deepest.0 && inside(i, j) {
                    if depth > deepest.0 {
                        deepest = (depth, Vec::new());
                    }
                    deepest.1.push([i, j]);
                }
            }
        }
        let [i, j] = central(&deepest.1)?;
        Some([self.corner[0] + (i as f64 - 1.0) * GRID, self.corner[1] + (j as f64 - 1.0) * GRID])
    }
}

/// The point nearest to the mean of all.
fn central(points: &[[usize; 2]]) -> Option<[usize; 2]> {
    let mean = [0, 1].map(|d| points.iter().map(|p| p[d] as f64).sum::<f64>() / points.len() as f64);
    let off = |p: &[usize; 2]| (p[0] as f64 - mean[0]).hypot(p[1] as f64 - mean[1]);
    points.iter().copied().min_by(|a, b| off(a).total_cmp(&off(b)))
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::Rectangle;

    use super::super::layout::Wishes;
    use super::*;

    #[test]
    fn a_region_is_named_in_its_middle() {
        let mesh = Rectangle::new([0.0, 0.0], [4.0, 3.0], [4, 3]).region("plate").mesh().unwrap();
        let layout = Layout::new([0.0, 0.0], [4.0, 3.0], Wishes::default()).unwrap();
        let mut rooms = Rooms::new(&layout, &mesh);
        rooms.measure();
        let at = rooms.middle(RegionId(0), [60.0, 20.0]).unwrap();
        let wanted = layout.to_pixel([2.0, 1.5]);
        assert!((at[0] - wanted[0]).hypot(at[1] - wanted[1]) <= 2.0 * GRID, "{at:?}");
        let [x, y] = at;
        let mut rooms = Rooms::new(&layout, &mesh);
        rooms.cover(&[[x - 40.0, y - 10.0, x + 40.0, y + 10.0]]);
        rooms.measure();
        let other = rooms.middle(RegionId(0), [60.0, 20.0]).unwrap();
        assert!((other[1] - y).abs() >= 20.0 || (other[0] - x).abs() >= 70.0, "beside the covered box: {other:?}");
        assert!(rooms.middle(RegionId(0), [700.0, 20.0]).is_none(), "wider than the plate");
    }
}
