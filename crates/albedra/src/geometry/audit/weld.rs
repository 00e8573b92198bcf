//! Which vertices are one and the same point.

use glam::DVec3;

/// For each vertex the first one at exactly the same position.
///
/// Files repeat positions; a mesh is judged by where its corners are. Equal bits are asked for (the two zeros count as
/// equal): a tolerance would join what a user meant to be apart.
pub(super) fn weld(vertices: &[DVec3]) -> Vec<u32> {
    let mut order: Vec<([u64; 3], u32)> = (0..)
        .zip(vertices)
        .map(|(index, &at)| ((at + DVec3::ZERO).to_array().map(f64::to_bits), index))
        .collect();
    order.sort_unstable();
    let mut first = vec![0; vertices.len()];
    for same in order.chunk_by(|a, b| a.0 == b.0) {
        for &(_, index) in same {
            first[index as usize] = same[0].1;
        }
    }
    first
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::audit::fixtures::{soup, unit_cube};

    #[test]
    fn equal_positions_share_the_first_index() {
        let points = [
            DVec3::X,
            DVec3::new(0.0, -0.0, 0.0),
            DVec3::X,
            DVec3::ZERO,
            DVec3::X * 1.000_000_1,
        ];
        assert_eq!(weld(&points), [0, 1, 0, 1, 4]);
    }

    #[test]
    fn mesh_whose_facets_share_no_vertex_index_is_sound() {
        let mesh = soup(&unit_cube());
        assert_eq!(mesh.vertices.len(), 24);
        assert!(mesh.audit().is_sound(), "{}", mesh.audit());
    }
}
