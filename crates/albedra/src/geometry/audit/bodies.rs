//! Whether the facets make one body, and whether it faces outward.

use super::edges::Edges;
use super::{Found, Problem};
use crate::geometry::Mesh;
use crate::geometry::facet::{area_vector, bounds};

/// Volume in m³, positive if the facets face outward, and area in m², of a mesh whose lists are in order.
///
/// # Method
///
/// Divergence theorem over the facets, from the middle of the body so that nothing is lost far from the origin.
pub(super) fn measure(mesh: &Mesh) -> (f64, f64) {
    let Some((low, high)) = bounds(
        mesh.corners
            .iter()
            .map(|&corner| mesh.vertices[corner as usize]),
    ) else {
        return (0.0, 0.0);
    };
    let origin = low + (high - low) * 0.5;
    let (mut volume, mut area) = (0.0, 0.0);
    for facet in 0..mesh.facets() {
        let Some(first) = mesh.positions_of(facet).next() else {
            continue;
        };
        let vector = area_vector(mesh.positions_of(facet));
        volume += vector.dot(first - origin);
        area += vector.length();
    }
    (volume / 3.0, area)
}

/// Looks for several bodies, and for a closed one that faces inward.
pub(super) fn check(mesh: &Mesh, edges: &Edges, closed: bool, volume: f64, found: &mut Found) {
    let facets = mesh.facets();
    if closed && volume < 0.0 {
        found.push(Problem::InsideOut { volume });
    }
    let mut joined = Joined::new(facets);
    let mut on_edge = vec![false; facets];
    for mut edge in edges.facets() {
        let Some(first) = edge.next() else { continue };
        on_edge[first] = true;
        for other in edge {
            on_edge[other] = true;
            joined.join(first, other);
        }
    }
    let bodies: Vec<usize> = (0..facets)
        .filter(|&facet| on_edge[facet] && joined.first(facet) == facet)
        .collect();
    if bodies.len() > 1 {
        let corner = |&facet: &usize| mesh.positions_of(facet).next();
        let positions = bodies.iter().filter_map(corner).collect();
        found.push(Problem::SeveralBodies {
            facets: bodies,
            positions,
        });
    }
}

/// Disjoint sets of facets, each known by its lowest member.
struct Joined(Vec<usize>);

impl Joined {
    fn new(count: usize) -> Self {
        Self((0..count).collect())
    }

    fn first(&mut self, mut facet: usize) -> usize {
        while self.0[facet] != facet {
            // Halves the path; ends because a parent is never higher than its child.
            self.0[facet] = self.0[self.0[facet]];
            facet = self.0[facet];
        }
        facet
    }

    fn join(&mut self, a: usize, b: usize) {
        let (a, b) = (self.first(a), self.first(b));
        if a < b { self.0[b] = a } else { self.0[a] = b }
    }
}

#[cfg(test)]
mod tests {
    use approx::assert_relative_eq;
    use glam::DVec3;

    use super::*;
    use crate::geometry::audit::fixtures::{
        cuboid, icosphere, joined, l_prism, reversed, unit_cube, without,
    };

    #[test]
    fn volume_and_area_are_those_of_the_body() {
        let cube = unit_cube().audit();
        assert_eq!(
            (cube.volume, cube.area, cube.mean_chord, cube.facets),
            (1.0, 6.0, 4.0 / 6.0, 6)
        );
        let prism = l_prism(2.0).audit();
        assert_relative_eq!(prism.volume, 6.0, max_relative = 1e-15);
        assert_relative_eq!(prism.area, 2.0 * 3.0 + 8.0 * 2.0, max_relative = 1e-15);
    }

    #[test]
    fn volume_keeps_its_digits_far_from_the_origin() {
        let mut mesh = icosphere(2);
        let far = DVec3::new(1_048_576.0, -2_097_152.0, 524_288.0);
        mesh.vertices.iter_mut().for_each(|at| *at += far);
        let audit = mesh.audit();
        assert!(audit.is_sound(), "{audit}");
        // Positions were rounded on the way there; nothing is on the way back.
        mesh.vertices.iter_mut().for_each(|at| *at -= far);
        let near = mesh.audit();
        assert_relative_eq!(audit.volume, near.volume, max_relative = 1e-14);
        assert_relative_eq!(audit.area, near.area, max_relative = 1e-14);
    }

    #[test]
    fn inside_out_body_has_negative_volume() {
        let found = reversed(&unit_cube()).audit();
        assert_eq!(found.problems, [Problem::InsideOut { volume: -1.0 }]);
        // The volume of an open one says nothing.
        let open = without(&reversed(&unit_cube()), 0).audit();
        assert!(open.volume < 0.0);
        assert!(
            !open
                .problems
                .iter()
                .any(|problem| matches!(problem, Problem::InsideOut { .. })),
            "{open}"
        );
        let volume = icosphere(2).audit().volume;
        assert_eq!(
            reversed(&icosphere(2)).audit().problems,
            [Problem::InsideOut { volume: -volume }]
        );
    }

    /// Two bodies of six facets, each named by its first facet and a corner of that.
    fn two_bodies(mesh: &Mesh) -> Problem {
        let positions = [0, 6].map(|facet| mesh.positions_of(facet).next().expect("corners"));
        Problem::SeveralBodies {
            facets: vec![0, 6],
            positions: positions.to_vec(),
        }
    }

    #[test]
    fn bodies_apart_or_touching_at_a_corner_are_two() {
        for shift in [3.0, 1.0] {
            let mesh = joined(&unit_cube(), &cuboid(DVec3::splat(shift), DVec3::ONE));
            assert_eq!(mesh.audit().problems, [two_bodies(&mesh)], "{shift}");
        }
    }

    #[test]
    fn body_within_a_body_is_named() {
        let mesh = joined(
            &unit_cube(),
            &reversed(&cuboid(DVec3::ZERO, DVec3::splat(0.5))),
        );
        let audit = mesh.audit();
        assert_eq!(audit.volume, 0.875);
        assert_eq!(audit.problems, [two_bodies(&mesh)]);
    }
}
