//! Angles, sizes and termination on easy and hard outlines.

use super::*;

/// A star-shaped polygon around a point, with radii between `inner` and 1 times `radius`.
fn random_star(random: &mut Random, center: (f64, f64), radius: f64, inner: f64, corners: usize) -> Polygon {
    let tau = std::f64::consts::TAU;
    let place = |i: usize, random: &mut Random| {
        let angle = tau * (i as f64 + 0.8 * random.next()) / corners as f64;
        let r = radius * (inner + (1.0 - inner) * random.next());
        (center.0 + r * angle.cos(), center.1 + r * angle.sin())
    };
    polygon(&(0..corners).map(|i| place(i, random)).collect::<Vec<_>>())
}

/// The sharpest corner of a loop, in degrees, inside or outside.
fn sharpest(polygon: &Polygon) -> f64 {
    let c = polygon.corners();
    let n = c.len();
    let angle = |i: usize| {
        let (p, a, b) = (c[i], c[(i + 1) % n], c[(i + n - 1) % n]);
        let (u, w) = ([a[0] - p[0], a[1] - p[1]], [b[0] - p[0], b[1] - p[1]]);
        (u[0] * w[1] - u[1] * w[0]).atan2(u[0] * w[0] + u[1] * w[1]).to_degrees().abs()
    };
    (0..n).map(angle).fold(180.0, f64::min)
}

/// Distance of a point from the nearest of some places.
fn away(x: [f64; 2], places: &[[f64; 2]]) -> f64 {
    places.iter().map(|p| (p[0] - x[0]).hypot(p[1] - x[1])).fold(f64::INFINITY, f64::min)
}

/// The largest angle opposite to a side on the boundary, in degrees.
fn largest_angle_at_the_boundary(mesh: &Mesh<2>) -> f64 {
    let topology = mesh.topology();
    let opposite = |side| {
        let (cell, local) = topology.first_cell(side);
        let v = mesh.cell_vertices(cell);
        let [a, b, c] = [0, 1, 2].map(|k| mesh.point(v[(usize::from(local) + k) % 3]));
        let (u, w) = ([a[0] - c[0], a[1] - c[1]], [b[0] - c[0], b[1] - c[1]]);
        (u[0] * w[1] - u[1] * w[0]).atan2(u[0] * w[0] + u[1] * w[1]).to_degrees()
    };
    topology.boundary_sides().map(opposite).fold(0.0, f64::max)
}

/// The largest ratio of a side's length to the size wanted.
fn longest_in_sizes(mesh: &Mesh<2>, size: impl Fn([f64; 2]) -> f64) -> f64 {
    let ratio = |c| mesh.cell_diameter(c) / size(mesh.cell_center(c));
    mesh.cells().map(ratio).fold(0.0, f64::max)
}

#[test]
fn random_polygons_with_an_overlay_and_a_hole() {
    let mut random = Random(7);
    let mut tested = 0;
    for round in 0..150 {
        let center = (0.3, -0.2);
        let corners = 5 + (random.next() * 20.0) as usize;
        let outer = random_star(&mut random, center, 1.0, 0.4, corners);
        let inner = random_star(&mut random, center, 0.25, 0.3, 7);
        let overlay = random_star(&mut random, center, 0.38, 0.85, 9);
        let clear = |p: &Polygon, q: &Polygon| p.sides().all(|s| q.sides().all(|t| !loops::cross(s, t)));
        if !clear(&outer, &overlay) || !clear(&overlay, &inner) {
            continue;
        }
        let mut outline = Outline::new();
        outline.region("outer", outer.clone()).unwrap();
        outline.region("overlay", overlay.clone()).unwrap();
        outline.hole("inner", inner.clone()).unwrap();
        let size = 0.1 + 0.4 * random.next();
        let mesh = outline.mesh(size).unwrap();
        tested += 1;
        check_sound(&mesh, 0);
        near(area_of(&mesh, "outer"), outer.signed_area() - overlay.signed_area());
        near(area_of(&mesh, "overlay"), overlay.signed_area() - inner.signed_area());
        near(length_of(&mesh, "inner"), inner.sides().map(|[a, b]| (a[0] - b[0]).hypot(a[1] - b[1])).sum());
        assert!(longest_in_sizes(&mesh, |_| size) <= 1.45 + 1e-9, "round {round}");
        let sharpest = [&outer, &inner, &overlay].into_iter().map(sharpest).fold(180.0, f64::min);
        if sharpest > 32.0 {
            assert!(smallest_angle(&mesh) >= 27.9, "round {round}: {}", smallest_angle(&mesh));
        }
    }
    assert!(tested > 100, "{tested}");
}

#[test]
fn usual_outlines_have_no_pointed_cells() {
    let mut plate = Outline::new();
    plate.region("plate", rectangle((0.0, 0.0), (2.0, 1.0))).unwrap();
    for i in 0..3 {
        plate.hole("bolt", regular_polygon((0.4 + 0.6 * i as f64, 0.5), 0.1, 24)).unwrap();
    }
    let mut layers = Outline::new();
    layers.region("brick", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    layers.region("film", rectangle((1.0, 0.0), (1.0 + 1.0 / 60.0, 1.0))).unwrap();
    layers.region("brick", rectangle((1.0 + 1.0 / 60.0, 0.0), (2.0, 1.0))).unwrap();
    let mut triangle = Outline::new();
    triangle.region("equilateral", regular_polygon((0.0, 0.0), 1.0, 3)).unwrap();
    for (outline, euler) in [(l_shape(), 1), (plate, -2), (layers, 1), (triangle, 1)] {
        for size in [0.5, 0.2, 0.07, 0.031] {
            let mesh = outline.mesh(size).unwrap();
            check_sound(&mesh, euler);
            assert!(smallest_angle(&mesh) >= 27.9, "{} at size {size}", smallest_angle(&mesh));
            assert!(largest_angle_at_the_boundary(&mesh) <= 90.0 + 1e-9);
            assert!(longest_in_sizes(&mesh, |_| size) <= 1.45 + 1e-9);
        }
    }
}

#[test]
fn a_corner_near_a_side_splits_it() {
    let mut notched = Outline::new();
    notched.region("plate", polygon(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.5, 0.35), (0.0, 1.0)])).unwrap();
    let mesh = notched.mesh(2.0).unwrap();
    check_sound(&mesh, 1);
    assert!(largest_angle_at_the_boundary(&mesh) <= 90.0 + 1e-9, "{}", largest_angle_at_the_boundary(&mesh));
}

#[test]
fn uniform_cells_are_about_as_long_as_asked() {
    let mesh = l_shape().mesh(0.02).unwrap();
    let lengths = mesh.cells().flat_map(|c| (0..3).map(move |i| (c, i))).map(|(c, i)| mesh.side_measure(c, i));
    let mean = lengths.sum::<f64>() / (3 * mesh.cell_count()) as f64;
    assert!((mean / 0.02 - 1.0).abs() < 0.05, "{mean}");
    let expected = 3.0 * 4.0 / (3.0_f64.sqrt() * 0.02 * 0.02);
    assert!((mesh.cell_count() as f64 / expected - 1.0).abs() < 0.1, "{}", mesh.cell_count());
}

#[test]
fn sharp_angles_end_and_spoil_only_their_corner() {
    for degrees in [30.0_f64, 10.0, 5.0, 1.0, 0.1] {
        for length in [1.0, 0.77, 0.3] {
            let at =
                |turn: f64, r: f64| (r * (turn * degrees).to_radians().cos(), r * (turn * degrees).to_radians().sin());
            let mut fan = Outline::new();
            fan.region("air", rectangle((-1.0, -1.0), (2.0, 2.0))).unwrap();
            fan.region("one", polygon(&[(0.0, 0.0), at(0.0, 1.0), at(1.0, length)])).unwrap();
            fan.region("two", polygon(&[(0.0, 0.0), at(1.0, length), at(2.0, 0.5)])).unwrap();
            let mesh = fan.mesh(0.1).unwrap();
            check_sound(&mesh, 1);
            near(mesh.measure(), 9.0);
            near(area_of(&mesh, "one"), 0.5 * length * degrees.to_radians().sin());
            if degrees >= 5.0 {
                let near_fan = |x: [f64; 2]| x[0].hypot(x[1]) < 1.2;
                let pointed = angles(&mesh).into_iter().filter(|(angle, x)| *angle < 27.9 && !near_fan(*x)).count();
                assert_eq!(pointed, 0, "{degrees} {length}");
                assert!(mesh.cell_count() < 4000, "{}", mesh.cell_count());
            }
        }
    }
}

#[test]
fn a_sharp_corner_alone_hardly_spoils_angles_below_its_own() {
    for degrees in [25.0_f64, 10.0, 5.0, 1.0] {
        let (s, c) = degrees.to_radians().sin_cos();
        let mut needle = Outline::new();
        needle.region("needle", polygon(&[(0.0, 0.0), (1.0, 0.0), (c, s)])).unwrap();
        let mesh = needle.mesh(0.1).unwrap();
        check_sound(&mesh, 1);
        assert!(smallest_angle(&mesh) >= 0.8 * degrees, "{} at {degrees}", smallest_angle(&mesh));
    }
}

#[test]
fn sizes_range_over_a_thousand_and_more() {
    let mut outline = l_shape();
    outline.side("left", between((0.0, 0.0), (0.0, 2.0))).unwrap();
    outline.size_near_side("left", 0.05).unwrap().size_near_point((1.0, 1.0), 0.0001).unwrap();
    let mesh = outline.mesh(0.2).unwrap();
    check_sound(&mesh, 1);
    near(mesh.measure(), 3.0);
    assert!(smallest_angle(&mesh) >= 27.9, "{}", smallest_angle(&mesh));
    let size = |x: [f64; 2]| {
        let corner = 0.0001 + 0.3 * away(x, &[[1.0, 1.0]]);
        corner.min(0.05 + 0.3 * x[0]).min(0.2)
    };
    assert!(longest_in_sizes(&mesh, size) <= 1.45 + 1e-9);
    let smallest = mesh.cells().map(|c| mesh.cell_diameter(c)).fold(1.0, f64::min);
    assert!(smallest < 2e-4, "{smallest}");
    assert!(mesh.cell_count() < 4000, "{}", mesh.cell_count());
}

#[test]
fn a_region_may_be_finer_or_coarser_than_the_rest() {
    let mut outline = Outline::new();
    outline.region("plate", rectangle((0.0, 0.0), (4.0, 4.0))).unwrap();
    outline.region("coil", regular_polygon((2.0, 2.0), 0.5, 40)).unwrap();
    for (inside, outside) in [(0.02, 0.5), (0.4, 0.05)] {
        outline.size_in("coil", inside).unwrap();
        let mesh = outline.mesh(outside).unwrap();
        check_sound(&mesh, 1);
        let coil = mesh.find_region("coil").unwrap();
        let size = |x: [f64; 2]| {
            let r = (x[0] - 2.0).hypot(x[1] - 2.0);
            let (own, other) = if r < 0.5 { (inside, outside) } else { (outside, inside) };
            own.min(other + 0.3 * (r - 0.5).abs())
        };
        // The coil is a polygon and sizes between many sources are rounded, hence the margin.
        assert!(longest_in_sizes(&mesh, size) <= 1.5, "{}", longest_in_sizes(&mesh, size));
        let count = mesh.cells().filter(|c| mesh.region(*c) == coil).count();
        assert!(if inside < outside { count > 4000 } else { count < 900 }, "{count}");
        assert!(smallest_angle(&mesh) >= 27.9);
    }
}
