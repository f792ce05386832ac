//! Whole outlines to meshes.

use super::*;
use crate::VertexId;

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
