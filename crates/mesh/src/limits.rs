//! How many entities can be numbered.

use hypercircle_element::Shape;

use crate::MeshError;

/// Checks that vertices, cells and sides all fit the 32-bit index types (the last number stands for "nobody").
pub(crate) fn check_counts(shape: Shape, vertices: usize, cells: usize) -> Result<(), MeshError> {
    let last = u32::MAX as usize - 1;
    let most_cells = last / shape.vertex_count();
    for (what, count, limit) in [("the number of vertices", vertices, last), ("the number of cells", cells, most_cells)]
    {
        if count > limit {
            return Err(MeshError::TooMany { what, count, limit });
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sides_of_the_largest_mesh_can_still_be_numbered() {
        assert!(check_counts(Shape::Triangle, 3, 1_431_655_764).is_ok());
        assert_eq!(
            check_counts(Shape::Triangle, 3, 1_431_655_765),
            Err(MeshError::TooMany { what: "the number of cells", count: 1_431_655_765, limit: 1_431_655_764 })
        );
        assert!(matches!(
            check_counts(Shape::Interval, usize::MAX, 1),
            Err(MeshError::TooMany { what: "the number of vertices", .. })
        ));
    }
}
