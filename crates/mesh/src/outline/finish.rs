//! From the triangulation to the mesh: order along Hilbert's curve, longest side first, names.

use hypercircle_element::Shape;

use super::regions::Plan;
use super::triangulation::{NONE, Triangulation};
use crate::hilbert::hilbert_order;
use crate::longest_side::longest_side_first;
use crate::mesh::{NamedSide, Parts};
use crate::{CellId, Mesh, RegionId, SideNameId, VertexId};

/// Makes the mesh.
pub(super) fn finish(triangles: &Triangulation, plan: Plan) -> Mesh<2> {
    let order = hilbert_order(&triangles.points);
    let mut new_vertex = vec![0_u32; order.len()];
    for (new, old) in order.iter().enumerate() {
        new_vertex[*old as usize] = new as u32;
    }
    let points: Vec<[f64; 2]> = order.iter().map(|old| triangles.points[*old as usize]).collect();
    let centers: Vec<[f64; 2]> = (0..triangles.triangle_count() as u32)
        .map(|t| triangles.corners(t))
        .map(|[a, b, c]| [(a[0] + b[0] + c[0]) / 3.0, (a[1] + b[1] + c[1]) / 3.0])
        .collect();
    let cells = hilbert_order(&centers);

    let mut connectivity = Vec::with_capacity(3 * cells.len());
    let mut named_sides = Vec::new();
    let mut new_cell = vec![0_u32; cells.len()];
    for (new, old) in cells.iter().enumerate() {
        new_cell[*old as usize] = new as u32;
    }
    for (cell, t) in cells.iter().enumerate() {
        let vertices = [0, 1, 2].map(|i| VertexId(new_vertex[triangles.origin[3 * *t as usize + i] as usize]));
        let turned = longest_side_first(&points, vertices);
        connectivity.extend(turned);
        let first = usize::from(vertices[1] == turned[0]) + 2 * usize::from(vertices[2] == turned[0]);
        for i in 0..3 {
            let h = 3 * *t as usize + (first + i) % 3;
            let (segment, mate) = (triangles.segment[h], triangles.mate[h]);
            if segment == NONE || (mate != NONE && new_cell[mate as usize / 3] < cell as u32) {
                continue;
            }
            let name = plan.borders[segment as usize].name;
            if name != NONE {
                named_sides.push(NamedSide { cell: CellId(cell as u32), local: i as u8, name: SideNameId(name) });
            }
        }
    }
    Mesh::from_parts(Parts {
        shape: Shape::Triangle,
        points,
        connectivity,
        regions: cells.iter().map(|t| RegionId(triangles.region[*t as usize])).collect(),
        region_names: plan.region_names,
        side_names: plan.side_names,
        named_sides,
    })
}

#[cfg(test)]
mod tests {
    use crate::hilbert::hilbert_order;
    use crate::{Outline, rectangle};

    #[test]
    fn vertices_and_cells_follow_hilberts_curve() {
        let mesh = Outline::new().region("a", rectangle((0.0, 0.0), (2.0, 1.0))).unwrap().mesh(0.05).unwrap();
        let in_order = |points: &[[f64; 2]]| hilbert_order(points).iter().zip(0..).all(|(k, i)| *k == i);
        assert!(in_order(mesh.points()));
        assert!(in_order(&mesh.cells().map(|c| mesh.cell_center(c)).collect::<Vec<_>>()));
    }
}
