//! Heaps of random regions and holes on each other: a sound mesh or an error, never anything else.

use super::*;

/// Rectangles, triangles and quadrilaterals over a plate, with corners on a coarse grid two times out of three, so that
/// many borders run along each other.
fn heap(random: &mut Random, round: usize) -> Outline {
    let steps = (!round.is_multiple_of(3)).then_some(1.0 + (random.next() * 6.0).floor());
    let mut heap = Outline::new();
    heap.region("plate", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    for i in 0..1 + (random.next() * 8.0) as usize {
        let mut coordinate = || steps.map_or(random.next(), |n| (random.next() * n).round() / n);
        let mut corner = || (coordinate(), coordinate());
        let corners = [corner(), corner(), corner(), corner()];
        let shape = match random.next() {
            x if x < 0.5 => rectangle(corners[0], corners[1]),
            _ => polygon(&corners[..3 + i % 2]),
        };
        // Loops that are faulty by themselves are refused here and leave no trace.
        let _ = if random.next() < 0.8 { heap.region(["a", "b", "c"][i % 3], shape) } else { heap.hole("h", shape) };
    }
    if random.next() < 0.3 {
        heap.size_near_point((random.next(), random.next()), 0.003).unwrap();
    }
    heap.max_cells(100_000);
    heap
}

/// What a place belongs to, straight from the statements.
fn owner(heap: &Outline, x: [f64; 2]) -> Option<&str> {
    let around = |hole: bool| heap.stated.iter().rev().find(move |s| s.hole == hole && s.area.contains(x));
    if around(true).is_some() { None } else { around(false).map(|s| s.name.as_str()) }
}

#[test]
fn every_cell_belongs_to_the_last_region_stated_there() {
    let mut random = Random(11);
    let mut sound = 0;
    for round in 0..400 {
        let heap = heap(&mut random, round);
        match heap.mesh(0.05 + 0.5 * random.next()) {
            Ok(mesh) => {
                sound += 1;
                let topology = mesh.topology();
                let euler = mesh.vertex_count() as i64 - topology.side_count() as i64 + mesh.cell_count() as i64;
                check_sound(&mesh, euler); // as many parts and holes as chance will have
                assert!(smallest_angle(&mesh) > 0.0);
                for cell in mesh.cells() {
                    let region = mesh.region_name(mesh.region(cell));
                    assert_eq!(owner(&heap, mesh.cell_center(cell)), Some(region), "round {round}, {cell}");
                }
            }
            Err(MeshError::CrossingLoops { .. } | MeshError::PinchedVertex { .. }) => {}
            Err(MeshError::Loop { fault: LoopFault::Hidden, .. }) => {}
            Err(other) => panic!("round {round}: {other}"),
        }
    }
    assert!(sound > 200, "{sound}");
}
