//! Whether the lists of a mesh fit together and all numbers are in range.

use super::limits::FARTHEST;
use super::{Found, Problem};
use crate::geometry::Mesh;
use crate::geometry::facet::largest;

/// Looks for indices and positions out of range; true if facets can be looked up without harm.
pub(super) fn check(mesh: &Mesh, found: &mut Found) -> bool {
    let facets = mesh.facets();
    if facets == 0 {
        found.push(Problem::NoFacets);
        return false;
    }
    if !lists_fit(mesh) {
        let (starts, corners) = (mesh.starts.len(), mesh.corners.len());
        found.push(Problem::ListsDoNotFit {
            facets,
            starts,
            corners,
        });
        return false;
    }
    for (vertex, &position) in mesh.vertices.iter().enumerate() {
        // Written out, since a comparison of maxima could swallow a NaN.
        if !position
            .to_array()
            .iter()
            .all(|part| part.abs() <= FARTHEST)
        {
            found.push(Problem::PositionOutOfRange { vertex, position });
        }
    }
    let (vertices, walls) = (mesh.vertices.len(), mesh.walls.len());
    for facet in 0..facets {
        if let Some(&vertex) = mesh
            .corners_of(facet)
            .iter()
            .find(|&&vertex| vertex as usize >= vertices)
        {
            found.push(Problem::VertexOutOfRange {
                facet,
                vertex,
                vertices,
            });
        }
        let wall = mesh.facet_walls[facet];
        if wall as usize >= walls {
            found.push(Problem::WallOutOfRange { facet, wall, walls });
        }
    }
    found.is_empty()
}

fn lists_fit(mesh: &Mesh) -> bool {
    u32::try_from(mesh.facets()).is_ok()
        && mesh.starts.len() == mesh.facets() + 1
        && mesh.starts.is_sorted()
        && mesh
            .starts
            .last()
            .is_some_and(|&end| end as usize <= mesh.corners.len())
}

/// A power of two not above the largest coordinate of a checked mesh, or one.
pub(super) fn size(mesh: &Mesh) -> f64 {
    let size = mesh.vertices.iter().fold(0.0, |size, &at| {
        if largest(at) > size {
            largest(at)
        } else {
            size
        }
    });
    let power = f64::from_bits(size.to_bits() & f64::INFINITY.to_bits());
    if power > 0.0 { power } else { 1.0 }
}

#[cfg(test)]
mod tests {
    use glam::DVec3;

    use super::*;
    use crate::geometry::audit::fixtures::unit_cube;

    #[test]
    fn mesh_without_facets_is_no_body() {
        assert_eq!(Mesh::default().audit().problems, [Problem::NoFacets]);
    }

    #[test]
    fn lists_that_do_not_fit_are_named_and_nothing_panics() {
        let good = unit_cube();
        let wrong = |change: fn(&mut Mesh)| {
            let mut mesh = good.clone();
            change(&mut mesh);
            let audit = mesh.audit();
            assert_eq!(
                (audit.volume, audit.area, audit.mean_chord),
                (0.0, 0.0, 0.0)
            );
            audit.problems
        };
        let lists = |starts, corners| {
            vec![Problem::ListsDoNotFit {
                facets: 6,
                starts,
                corners,
            }]
        };
        assert_eq!(wrong(|mesh| mesh.starts.clear()), lists(0, 24));
        assert_eq!(wrong(|mesh| mesh.starts[2] = 99), lists(7, 24));
        assert_eq!(wrong(|mesh| mesh.corners.truncate(20)), lists(7, 20));
        assert_eq!(
            wrong(|mesh| mesh.corners[5] = 8),
            [Problem::VertexOutOfRange {
                facet: 1,
                vertex: 8,
                vertices: 8
            }]
        );
        assert_eq!(
            wrong(|mesh| mesh.facet_walls[4] = 6),
            [Problem::WallOutOfRange {
                facet: 4,
                wall: 6,
                walls: 6
            }]
        );
        let far = DVec3::new(0.0, -2e30, 0.0);
        let mut mesh = good.clone();
        mesh.vertices[7] = far;
        assert_eq!(
            mesh.audit().problems,
            [Problem::PositionOutOfRange {
                vertex: 7,
                position: far
            }]
        );
        mesh.vertices[7].y = f64::NAN;
        mesh.vertices[2].x = f64::INFINITY;
        let found = mesh.audit().problems;
        assert!(
            matches!(found[0], Problem::PositionOutOfRange { vertex: 2, .. }),
            "{found:?}"
        );
        assert!(
            matches!(found[1], Problem::PositionOutOfRange { vertex: 7, .. }),
            "{found:?}"
        );
        assert_eq!(found.len(), 2);
    }

    #[test]
    fn size_is_a_power_of_two() {
        let mut mesh = unit_cube();
        mesh.vertices.iter_mut().for_each(|at| *at *= 5.0);
        assert_eq!(size(&mesh), 2.0);
        assert_eq!(size(&Mesh::default()), 1.0);
    }
}
