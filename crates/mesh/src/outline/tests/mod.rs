//! Whole outlines to meshes.

mod errors;
mod heaps;
mod quality;

use super::*;
use crate::VertexId;

/// Linear congruential generator with the multiplier and increment of Knuth's MMIX; numbers in [0, 1).
struct Random(u64);

impl Random {
    fn next(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }
}

fn l_shape() -> Outline {
    let mut l = Outline::new();
    l.region("steel", polygon(&[(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0)])).unwrap();
    l
}

/// Smallest angle of all cells, in degrees; also checks orientation.
fn smallest_angle(mesh: &Mesh<2>) -> f64 {
    angles(mesh).into_iter().map(|(angle, _)| angle).fold(180.0, f64::min)
}

/// All angles in degrees, each with its vertex.
fn angles(mesh: &Mesh<2>) -> Vec<(f64, [f64; 2])> {
    let mut all = Vec::new();
    for cell in mesh.cells() {
        let v = mesh.cell_vertices(cell);
        for i in 0..3 {
            let [a, b, c] = [0, 1, 2].map(|k| mesh.point(v[(i + k) % 3]));
            let (u, w) = ([b[0] - a[0], b[1] - a[1]], [c[0] - a[0], c[1] - a[1]]);
            let angle = (u[0] * w[1] - u[1] * w[0]).atan2(u[0] * w[0] + u[1] * w[1]).to_degrees();
            assert!(angle > 0.0, "a cell is inverted");
            all.push((angle, a));
        }
    }
    all
}

fn area_of(mesh: &Mesh<2>, region: &str) -> f64 {
    let region = mesh.find_region(region).unwrap();
    mesh.cells().filter(|c| mesh.region(*c) == region).map(|c| mesh.cell_measure(c)).sum()
}

fn length_of(mesh: &Mesh<2>, side: &str) -> f64 {
    let name = mesh.find_side(side).unwrap();
    mesh.named_sides().iter().filter(|s| s.name == name).map(|s| mesh.side_measure(s.cell, s.local)).sum()
}

#[track_caller]
fn near(value: f64, expected: f64) {
    assert!((value - expected).abs() <= 1e-12 * expected.abs().max(1.0), "{value} instead of {expected}");
}

/// Conforming, without unused vertices, longest side first; V − E + F = parts − holes.
#[track_caller]
fn check_sound(mesh: &Mesh<2>, euler: i64) {
    let topology = mesh.topology();
    for side in (0..topology.side_count() as u32).map(crate::SideId) {
        let (cell, local) = topology.first_cell(side);
        if let Some((other, other_local)) = topology.second_cell(side) {
            let [a, b] = mesh.side_vertices(cell, local);
            assert_eq!(mesh.side_vertices(other, other_local), [b, a], "sides do not match");
        }
    }
    let count = mesh.vertex_count() as i64 - topology.side_count() as i64 + mesh.cell_count() as i64;
    assert_eq!(count, euler, "Euler's formula");
    for v in 0..mesh.vertex_count() as u32 {
        assert!(!topology.cells_around(VertexId(v)).is_empty(), "vertex {v} is unused");
    }
    for side in mesh.named_sides() {
        let number = topology.cell_sides(side.cell)[usize::from(side.local)];
        assert_eq!(topology.first_cell(number).0, side.cell, "a named side is not with the lower cell");
    }
    for cell in mesh.cells() {
        let first = mesh.side_measure(cell, 0);
        assert!(first >= mesh.cell_diameter(cell) * (1.0 - 1e-9), "the longest side is not the first");
    }
}

#[test]
fn a_wall_with_everything() {
    let mut wall = Outline::new();
    wall.region("brick", polygon(&[(0.0, 0.0), (0.24, 0.0), (0.24, 1.0), (0.0, 1.0)])).unwrap();
    wall.region("foam", polygon(&[(0.24, 0.0), (0.24, 1.0), (0.36, 1.0), (0.36, 0.0), (0.24, 0.0)])).unwrap();
    wall.region("anchor", rectangle((0.1, 0.4), (0.3, 0.42))).unwrap();
    wall.hole("duct", rectangle((0.05, 0.7), (0.15, 0.8))).unwrap();
    wall.side("room", between((0.0, 0.0), (0.0, 1.0))).unwrap();
    wall.side("street", between((0.36, 0.25), (0.36, 0.75))).unwrap();
    wall.side("joint", between((0.24, 0.0), (0.24, 1.0))).unwrap();
    wall.size_in("foam", 0.01).unwrap();
    wall.size_near_point((0.24, 0.5), 0.001).unwrap();
    wall.size_near_side("room", 0.005).unwrap();
    let mesh = wall.mesh(0.05).unwrap();
    check_sound(&mesh, 0);
    near(area_of(&mesh, "brick"), 0.24 - 0.14 * 0.02 - 0.01);
    near(area_of(&mesh, "foam"), 0.12 - 0.06 * 0.02);
    near(area_of(&mesh, "anchor"), 0.2 * 0.02);
    near(length_of(&mesh, "room"), 1.0);
    near(length_of(&mesh, "street"), 0.5);
    near(length_of(&mesh, "duct"), 0.4);
    near(length_of(&mesh, "joint"), 1.0);
    assert!(smallest_angle(&mesh) >= 25.0, "{}", smallest_angle(&mesh));
}

#[test]
fn the_same_outline_gives_the_same_bits() {
    let mut outline = l_shape();
    outline.hole("duct", regular_polygon((0.5, 0.5), 0.2, 30)).unwrap();
    outline.size_near_side("duct", 0.01).unwrap();
    let (one, two) = (outline.mesh(0.05).unwrap(), outline.mesh(0.05).unwrap());
    let bits = |m: &Mesh<2>| m.points().iter().flatten().map(|x| x.to_bits()).collect::<Vec<_>>();
    assert_eq!(bits(&one), bits(&two));
    assert_eq!(one.connectivity(), two.connectivity());
    assert_eq!(one.named_sides(), two.named_sides());
    assert_eq!(one.regions(), two.regions());
}

#[test]
fn either_orientation_and_a_repeated_first_corner_are_the_same() {
    let corners = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
    let mesh = |corners: &[(f64, f64)]| Outline::new().region("a", polygon(corners)).unwrap().mesh(0.1).unwrap();
    let forward = mesh(&corners);
    let reverse: Vec<_> = corners.iter().rev().copied().collect();
    let closed: Vec<_> = corners.iter().chain(&corners[..1]).copied().collect();
    assert_eq!(forward.points(), mesh(&closed).points());
    near(mesh(&reverse).measure(), 1.0);
    assert_eq!(forward.cell_count(), mesh(&reverse).cell_count());
}

#[test]
fn a_corner_in_the_middle_of_a_slanted_side() {
    // Corners on the line y = x/3 that are not exactly representable, typed on one side only.
    let mut outline = Outline::new();
    outline.region("below", polygon(&[(0.0, 0.0), (3.0, 0.0), (3.0, 1.0)])).unwrap();
    outline.region("left", polygon(&[(0.0, 0.0), (0.7, 0.7 / 3.0), (0.0, 1.0)])).unwrap();
    outline.region("right", polygon(&[(0.7, 0.7 / 3.0), (3.0, 1.0), (0.0, 1.0)])).unwrap();
    outline.side("slope", between((0.0, 0.0), (3.0, 1.0))).unwrap();
    outline.side("half", between((0.0, 1.0), (1.5, 1.0))).unwrap();
    let mesh = outline.mesh(0.2).unwrap();
    check_sound(&mesh, 1);
    near(area_of(&mesh, "below"), 1.5);
    near(area_of(&mesh, "left"), 0.35);
    near(area_of(&mesh, "right"), 1.15);
    near(length_of(&mesh, "slope"), 10.0_f64.sqrt());
    near(length_of(&mesh, "half"), 1.5);
}

#[test]
fn corners_that_nearly_coincide_are_one() {
    let mut outline = Outline::new();
    outline.region("a", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    outline.region("b", rectangle((1.0 + 1e-13, 1e-14), (2.0, 1.0 - 1e-13))).unwrap();
    let mesh = outline.mesh(0.5).unwrap();
    check_sound(&mesh, 1);
    near(mesh.measure(), 2.0);
    assert_eq!(mesh.topology().boundary_sides().count(), 12);
}

#[test]
fn the_later_region_lies_on_top() {
    let mut outline = Outline::new();
    outline.region("a", rectangle((0.0, 0.0), (2.0, 1.0))).unwrap();
    outline.region("b", rectangle((1.0, 0.0), (3.0, 1.0))).unwrap(); // shares a's rim, so it may overlap in part
    let mesh = outline.mesh(0.25).unwrap();
    near(area_of(&mesh, "a"), 1.0);
    near(area_of(&mesh, "b"), 2.0);
    // Of two regions at the same place nothing but the last would be left: that is told.
    outline.region("c", rectangle((1.0, 0.0), (3.0, 1.0))).unwrap();
    assert!(matches!(outline.mesh(0.25), Err(MeshError::Loop { name, fault: LoopFault::Hidden, .. }) if name == "b"));
}

#[test]
fn parts_of_one_name_grow_together_unless_their_border_has_a_name() {
    let mut outline = Outline::new();
    outline.region("steel", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    outline.region("steel", rectangle((1.0, 0.0), (2.0, 1.0))).unwrap();
    let on_line = |mesh: &Mesh<2>| mesh.points().iter().filter(|p| p[0] == 1.0).count();
    assert!(on_line(&outline.mesh(0.11).unwrap()) < 10);
    outline.side("weld", between((1.0, 0.0), (1.0, 1.0))).unwrap();
    let mesh = outline.mesh(0.11).unwrap();
    check_sound(&mesh, 1);
    near(length_of(&mesh, "weld"), 1.0);
    assert_eq!(mesh.region_names().len(), 1);
    assert_eq!(on_line(&mesh), 11);
}

#[test]
fn borders_holes_and_the_rest_have_names() {
    let mut outline = Outline::new();
    outline.region("air", rectangle((0.0, 0.0), (4.0, 4.0))).unwrap();
    outline.region("copper", rectangle((1.0, 1.0), (2.0, 2.0))).unwrap();
    outline.hole("duct", rectangle((2.5, 2.5), (3.0, 3.0))).unwrap();
    outline.side("ground", between((0.0, 0.0), (4.0, 0.0))).unwrap();
    outline.side("skin", border_of("copper")).unwrap();
    outline.side("rest", rest_of_boundary()).unwrap();
    outline.side("inlet", between((2.5, 2.5), (3.0, 2.5))).unwrap();
    let mesh = outline.mesh(0.3).unwrap();
    check_sound(&mesh, 0);
    for (side, length) in [("ground", 4.0), ("skin", 4.0), ("rest", 12.0), ("inlet", 0.5), ("duct", 1.5)] {
        near(length_of(&mesh, side), length);
    }
    // The whole hole renamed: its own name is gone.
    for line in [((3.0, 2.5), (3.0, 3.0)), ((3.0, 3.0), (2.5, 3.0)), ((2.5, 3.0), (2.5, 2.5))] {
        outline.side("inlet", between(line.0, line.1)).unwrap();
    }
    let mesh = outline.mesh(0.3).unwrap();
    near(length_of(&mesh, "inlet"), 2.0);
    assert_eq!(mesh.side_names().find("duct"), None);
}

#[test]
fn an_opening_may_share_the_rim() {
    let mut outline = Outline::new();
    outline.region("c", rectangle((0.0, 0.0), (2.0, 1.0)).without(rectangle((0.5, 0.0), (1.0, 0.5)))).unwrap();
    outline.side("foot", between((0.0, 0.0), (2.0, 0.0))).unwrap();
    let mesh = outline.mesh(0.2).unwrap();
    check_sound(&mesh, 1);
    near(mesh.measure(), 1.75);
    near(length_of(&mesh, "foot"), 1.5);
}

#[test]
fn separate_parts_and_notches() {
    let mut outline = Outline::new();
    outline.region("a", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    outline.region("b", rectangle((5.0, 0.0), (6.0, 1.0))).unwrap();
    outline.hole("notch", rectangle((0.25, 0.0), (0.5, 0.5))).unwrap(); // on the rim
    let mesh = outline.mesh(0.2).unwrap();
    check_sound(&mesh, 2);
    near(area_of(&mesh, "a"), 0.875);
    near(length_of(&mesh, "notch"), 1.25);
}

#[test]
fn far_from_the_origin_and_very_small() {
    let at = |x: f64, y: f64| (1e6 + 1e-3 * x, -3e5 + 1e-3 * y);
    let mut far = Outline::new();
    far.region("a", rectangle(at(0.0, 0.0), at(1.0, 1.0))).unwrap();
    far.region("b", rectangle(at(1.0, 0.0), at(2.0, 1.0))).unwrap();
    let mesh = far.mesh(2e-4).unwrap();
    check_sound(&mesh, 1);
    assert!((mesh.measure() / 2e-6 - 1.0).abs() < 1e-5);
    let mut small = Outline::new();
    small.region("a", rectangle((0.0, 0.0), (1e-9, 1e-9))).unwrap();
    let mesh = small.mesh(1e-10).unwrap();
    check_sound(&mesh, 1);
    assert!((mesh.measure() / 1e-18 - 1.0).abs() < 1e-12);
}
