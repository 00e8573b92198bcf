//! The planes of a convex body.

use glam::DVec3;

use super::Mesh;
use super::facet::{area_vector, bounds, split};

/// Most planes that a body may have to be given by its planes.
const PLANES: usize = 64;

/// How far corners may be off a plane, as a share of the body's extent: rounding of coordinates is about 1e-16 of
/// their distance from the origin. Larger would treat slightly dented bodies as convex.
const TOLERANCE: f64 = 1e-12;

/// One plane of a convex body.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct ConvexPlane {
    /// Outward unit normal.
    pub(crate) normal: DVec3,
    /// Distance from the origin along the normal in metres: inside, `normal · position ≤ offset`.
    pub(crate) offset: f64,
    /// The wall of all its facets.
    pub(crate) wall: u32,
    /// Its facets, in rising order.
    pub(crate) facets: Vec<u32>,
}

/// The planes of a sound mesh that is convex, in the order of their first facets.
///
/// Facets in one plane are joined. `None` if the body is not convex, has more than 64 planes, or if facets of two walls
/// share a plane; corners may be off a plane by 10⁻¹² of the body's extent. An axis-aligned box gives exact planes: unit
/// vectors and coordinates. The mesh must have passed its audit.
pub(crate) fn convex_planes(mesh: &Mesh) -> Option<Vec<ConvexPlane>> {
    let corners = mesh
        .corners
        .iter()
        .map(|&corner| mesh.vertices[corner as usize]);
    let (low, high) = bounds(corners.clone())?;
    let tolerance = TOLERANCE * split(high - low).0;
    let mut order: Vec<(f64, DVec3, u32)> = (0..mesh.facets())
        .zip(0..)
        .map(|(facet, index)| (split(area_vector(mesh.positions_of(facet))), index))
        .map(|((area, normal), index)| (area, normal, index))
        .collect();
    // The largest facet of a plane has its best normal, so it comes first.
    order.sort_unstable_by(|a, b| b.0.total_cmp(&a.0).then(a.2.cmp(&b.2)));
    let mut planes: Vec<ConvexPlane> = Vec::new();
    for (_, normal, facet) in order {
        let wall = mesh.facet_walls[facet as usize];
        let within = |plane: &ConvexPlane| {
            plane.normal.dot(normal) > 0.0
                && mesh
                    .positions_of(facet as usize)
                    .all(|at| (plane.normal.dot(at) - plane.offset).abs() <= tolerance)
        };
        if let Some(plane) = planes.iter_mut().find(|plane| within(plane)) {
            if plane.wall != wall {
                return None;
            }
            plane.facets.push(facet);
        } else {
            let plane = ConvexPlane {
                normal,
                offset: level(mesh, normal, facet)?,
                wall,
                facets: vec![facet],
            };
            if planes.len() == PLANES || !within(&plane) {
                return None;
            }
            planes.push(plane);
        }
    }
    let encloses = |plane: &ConvexPlane| {
        corners
            .clone()
            .all(|at| plane.normal.dot(at) - plane.offset <= tolerance)
    };
    if !planes.iter().all(encloses) {
        return None;
    }
    for plane in &mut planes {
        plane.facets.sort_unstable();
    }
    planes.sort_unstable_by(|a, b| a.facets.cmp(&b.facets));
    Some(planes)
}

/// Middle between the lowest and the highest corner of a facet along its normal: exact if they are equal.
fn level(mesh: &Mesh, normal: DVec3, facet: u32) -> Option<f64> {
    let mut heights = mesh.positions_of(facet as usize).map(|at| normal.dot(at));
    let first = heights.next()?;
    let (low, high) = heights.fold((first, first), |(low, high), height| {
        (
            if height < low { height } else { low },
            if height > high { height } else { high },
        )
    });
    Some(low + (high - low) * 0.5)
}

#[cfg(test)]
mod tests {
    use glam::DQuat;

    use super::*;
    use crate::geometry::audit::fixtures::{
        cuboid, extruded, icosphere, l_prism, octahedron, unit_cube,
    };

    #[test]
    fn box_has_exact_planes() {
        let (middle, size) = (DVec3::new(0.1, -0.7, 12.3), DVec3::new(0.3, 1.1, 0.7));
        let mesh = cuboid(middle, size);
        let planes = convex_planes(&mesh).unwrap();
        let normals = [
            DVec3::NEG_X,
            DVec3::X,
            DVec3::NEG_Y,
            DVec3::Y,
            DVec3::NEG_Z,
            DVec3::Z,
        ];
        assert_eq!(planes.len(), 6);
        for (i, (plane, normal)) in (0..).zip(planes.iter().zip(normals)) {
            assert_eq!(plane.normal, normal);
            let corner = if i % 2 == 0 {
                mesh.vertices[0]
            } else {
                mesh.vertices[7]
            };
            assert_eq!(plane.offset, normal.dot(corner));
            assert_eq!((plane.wall, &plane.facets[..]), (i, &[i][..]));
        }
    }

    #[test]
    fn facets_of_one_plane_are_joined_if_of_one_wall() {
        // z+ of a cube in two triangles.
        let mut mesh = unit_cube();
        mesh.facet_walls.pop();
        mesh.starts.pop();
        mesh.corners.truncate(20);
        mesh.push_facet(&[4, 5, 7], 5);
        mesh.push_facet(&[4, 7, 6], 5);
        assert!(mesh.audit().is_sound());
        for turn in [
            DQuat::IDENTITY,
            DQuat::from_xyzw(0.1, 0.2, 0.3, 0.9).normalize(),
        ] {
            let mut turned = mesh.clone();
            turned.vertices.iter_mut().for_each(|at| *at = turn * *at);
            let planes = convex_planes(&turned).unwrap();
            assert_eq!(
                planes
                    .iter()
                    .map(|plane| &plane.facets[..])
                    .collect::<Vec<_>>(),
                [&[0][..], &[1], &[2], &[3], &[4], &[5, 6]]
            );
        }
        mesh.facet_walls[6] = 4;
        assert_eq!(convex_planes(&mesh), None);
    }

    #[test]
    fn only_convex_bodies_of_few_planes_have_planes() {
        assert_eq!(
            convex_planes(&octahedron()).map(|planes| planes.len()),
            Some(8)
        );
        assert_eq!(
            convex_planes(&icosphere(0)).map(|planes| planes.len()),
            Some(20)
        );
        assert_eq!(convex_planes(&icosphere(1)), None, "80 planes");
        assert_eq!(convex_planes(&l_prism(1.0)), None);
        assert_eq!(convex_planes(&Mesh::default()), None);
        // A dent of 1e-9 of the extent counts, one of 1e-13 does not.
        let dented = |depth: f64| {
            extruded(
                &[(0.0, 0.0), (1.0, depth), (2.0, 0.0), (2.0, 1.0), (0.0, 1.0)],
                1.0,
            )
        };
        assert_eq!(convex_planes(&dented(1e-9)), None);
        assert_eq!(
            convex_planes(&dented(-1e-9)).map(|planes| planes.len()),
            Some(7)
        );
    }
}
