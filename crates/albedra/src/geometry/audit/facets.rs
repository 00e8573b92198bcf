//! Facets that are no proper polygons: too few or repeated corners, no area, not planar.

use glam::DVec3;

use super::limits::{DEGENERATE, NON_PLANAR};
use super::{Found, Problem};
use crate::geometry::Mesh;
use crate::geometry::facet::{area_vector, bounds, split};

/// Looks at each facet by itself; gives for each its unit normal, or `None` if it is degenerate.
pub(super) fn check(mesh: &Mesh, welded: &[u32], found: &mut Found) -> Vec<Option<DVec3>> {
    (0..mesh.facets())
        .map(|facet| match look(mesh, welded, facet) {
            Ok((normal, flaw)) => {
                found.extend(flaw);
                Some(normal)
            }
            Err(problem) => {
                found.push(problem);
                None
            }
        })
        .collect()
}

/// Normal of a facet and, if so, that it is not planar; or why it is degenerate.
fn look(mesh: &Mesh, welded: &[u32], facet: usize) -> Result<(DVec3, Option<Problem>), Problem> {
    let corners = mesh.corners_of(facet).len();
    let (Some((low, high)), 3..) = (bounds(mesh.positions_of(facet)), corners) else {
        return Err(Problem::TooFewCorners { facet, corners });
    };
    if let Some(vertex) = repeated(mesh.corners_of(facet), welded) {
        return Err(Problem::RepeatedCorner {
            facet,
            position: mesh.vertices[vertex as usize],
        });
    }
    let (area, normal) = split(area_vector(mesh.positions_of(facet)));
    let (extent, _) = split(high - low);
    let ratio = area / extent / extent;
    if ratio > DEGENERATE {
        let flaw = if corners > 3 {
            bend(mesh, facet, normal, extent)
        } else {
            None
        };
        Ok((normal, flaw))
    } else {
        // So too if it is not a number, from an extent of zero.
        let position = mesh.vertices[mesh.corners_of(facet)[0] as usize];
        Err(Problem::NoArea {
            facet,
            position,
            ratio,
        })
    }
}

/// The first vertex that a facet visits for the second time.
fn repeated(corners: &[u32], welded: &[u32]) -> Option<u32> {
    if let &[a, b, c] = corners {
        let [a, b, c] = [a, b, c].map(|corner| welded[corner as usize]);
        return if a == b || a == c {
            Some(a)
        } else {
            (b == c).then_some(b)
        };
    }
    let mut order: Vec<(u32, usize)> = corners
        .iter()
        .map(|&corner| welded[corner as usize])
        .zip(0..)
        .collect();
    order.sort_unstable();
    let again = order
        .windows(2)
        .filter(|pair| pair[0].0 == pair[1].0)
        .map(|pair| (pair[1].1, pair[1].0));
    again.min().map(|(_, vertex)| vertex)
}

fn bend(mesh: &Mesh, facet: usize, normal: DVec3, extent: f64) -> Option<Problem> {
    let origin = mesh.vertices[mesh.corners_of(facet)[0] as usize];
    let height = |at: DVec3| normal.dot(at - origin);
    let count = mesh.corners_of(facet).len() as f64;
    let middle = mesh
        .positions_of(facet)
        .fold(0.0, |sum, at| sum + height(at))
        / count;
    let mut worst = (0.0, origin);
    for at in mesh.positions_of(facet) {
        let deviation = (height(at) - middle).abs() / extent;
        if deviation > worst.0 {
            worst = (deviation, at);
        }
    }
    let (deviation, position) = worst;
    (deviation > NON_PLANAR).then_some(Problem::NotPlanar {
        facet,
        position,
        deviation,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::audit::fixtures::{icosphere, octahedron, unit_cube};

    #[test]
    fn facets_with_too_few_corners_are_named() {
        let mut mesh = unit_cube();
        mesh.push_facet(&[0, 1], 0);
        mesh.push_facet(&[], 0);
        let found = mesh.audit().problems;
        assert_eq!(
            found,
            [
                Problem::TooFewCorners {
                    facet: 6,
                    corners: 2
                },
                Problem::TooFewCorners {
                    facet: 7,
                    corners: 0
                }
            ]
        );
    }

    #[test]
    fn repeated_corner_is_named_by_position_and_nothing_else_is() {
        let mut mesh = octahedron();
        let first = mesh.corners_of(0).to_vec();
        let [p, q] = [first[0], first[1]];
        for corners in [[p, p, q], [p, q, p], [q, p, p]] {
            mesh.push_facet(&corners, 0);
        }
        let position = mesh.vertices[p as usize];
        let expected = [8, 9, 10].map(|facet| Problem::RepeatedCorner { facet, position });
        assert_eq!(mesh.audit().problems, expected);

        // The same in a polygon, by another index at the same position.
        let mut mesh = unit_cube();
        let corners = mesh.corners_of(5).to_vec();
        let position = mesh.vertices[corners[1] as usize];
        mesh.vertices.push(position);
        mesh.facet_walls.pop();
        mesh.starts.pop();
        mesh.corners.truncate(20);
        mesh.push_facet(&[corners[0], corners[1], 8, corners[2], corners[3]], 5);
        assert_eq!(
            mesh.audit().problems,
            [Problem::RepeatedCorner { facet: 5, position }]
        );
    }

    #[test]
    fn corners_on_one_line_have_no_area() {
        // A corner is put onto the middle of an edge: facets 0 and 1 share it, and one gets flat.
        let mut mesh = Mesh {
            vertices: vec![DVec3::ZERO, DVec3::X, DVec3::X * 0.5, DVec3::Y],
            ..Mesh::default()
        };
        mesh.walls.push("a".into());
        mesh.push_facet(&[0, 1, 2], 0);
        mesh.push_facet(&[0, 1, 3], 0);
        let found = mesh.audit().problems;
        let ratio = 0.0;
        assert!(
            found.contains(&Problem::NoArea {
                facet: 0,
                position: DVec3::ZERO,
                ratio
            }),
            "{found:?}"
        );
    }

    #[test]
    fn area_limit_does_not_depend_on_the_unit() {
        for scale in [1e-20, 1e-3, 1e20] {
            let mut mesh = icosphere(1);
            mesh.vertices.iter_mut().for_each(|at| *at *= scale);
            assert!(mesh.audit().is_sound(), "{scale}: {}", mesh.audit());
        }
    }

    #[test]
    fn bent_polygon_is_named_with_its_deviation() {
        // Raised by h, one corner of a square leaves it by h/4: the plane follows. The corner moves within x+ and y+.
        let mut mesh = unit_cube();
        mesh.vertices[7].z += 8e-6;
        let found = mesh.audit().problems;
        let [
            Problem::NotPlanar {
                facet: 5,
                position,
                deviation,
            },
        ] = found[..]
        else {
            panic!("{found:?}")
        };
        assert!(
            (deviation - 2e-6 / 2_f64.sqrt()).abs() < 1e-9,
            "{deviation}"
        );
        assert!(mesh.positions_of(5).any(|at| at == position));
        mesh.vertices[7].z = 0.5 + 4e-6;
        assert!(mesh.audit().is_sound(), "{}", mesh.audit());
    }
}
