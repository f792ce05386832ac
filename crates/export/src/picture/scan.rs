//! Grid points inside a triangle.

use super::svg::Pixel;

/// Calls `visit(i, j, share)` for each point (i, j) with whole coordinates 0 ≤ i < width, 0 ≤ j < height inside a
/// triangle or on its border; `share` are the barycentric coordinates of the point.
pub(crate) fn inside(corners: &[Pixel; 3], width: usize, height: usize, mut visit: impl FnMut(usize, usize, [f64; 3])) {
    let [a, b, c] = *corners;
    let (u, v) = ([b[0] - a[0], b[1] - a[1]], [c[0] - a[0], c[1] - a[1]]);
    let twice_area = u[0] * v[1] - u[1] * v[0];
    if twice_area == 0.0 {
        return;
    }
    // A conversion from float to integer saturates, so that triangles beyond the grid are cut off.
    let range = |d: usize, size: usize| {
        let low = a[d].min(b[d]).min(c[d]).ceil().max(0.0) as usize;
        let high = (a[d].max(b[d]).max(c[d]).floor() + 1.0).max(0.0) as usize;
        low..high.min(size)
    };
    for j in range(1, height) {
        for i in range(0, width) {
            let p = [i as f64 - a[0], j as f64 - a[1]];
            let second = (p[0] * v[1] - p[1] * v[0]) / twice_area;
            let third = (u[0] * p[1] - u[1] * p[0]) / twice_area;
            let share = [1.0 - second - third, second, third];
            if share.iter().all(|s| *s >= -1e-9) {
                visit(i, j, share);
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn points_inside_and_on_the_border_are_found() {
        let mut found = Vec::new();
        inside(&[[0.0, 0.0], [3.0, 0.0], [0.0, 3.0]], 100, 100, |i, j, share| {
            assert!((share[1] * 3.0 - i as f64).abs() < 1e-12 && (share[2] * 3.0 - j as f64).abs() < 1e-12);
            found.push((i, j));
        });
        assert_eq!(found.len(), 10, "{found:?}");
    }

    #[test]
    fn a_grid_smaller_than_the_triangle_is_never_left() {
        let mut count = 0;
        inside(&[[-1e9, -1e9], [2e9, -1e9], [-1e9, 2e9]], 5, 4, |i, j, _| {
            assert!(i < 5 && j < 4);
            count += 1;
        });
        assert_eq!(count, 20);
        inside(&[[0.0, 0.0], [1.0, 1.0], [2.0, 2.0]], 5, 4, |_, _, _| panic!("no area"));
    }
}
