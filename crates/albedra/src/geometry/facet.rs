//! Area and normal of one polygonal facet.

use glam::DVec3;

use super::Mesh;

/// Area in m² and outward unit normal of a facet, which may be a concave polygon.
///
/// A facet without any area gives zero and a zero vector. The facet of an axis-aligned box has a normal of exactly
/// one unit vector, without a negative zero.
///
/// # Panics
///
/// If there is no such facet, or if it names a vertex that does not exist.
///
/// # Method
///
/// Sum of the cross products of neighbouring corners, taken from the first corner (Newell's method).
pub(crate) fn facet_area_normal(mesh: &Mesh, facet: usize) -> (f64, DVec3) {
    split(area_vector(mesh.positions_of(facet)))
}

/// Area times normal of a polygon, in m²; zero for fewer than three corners.
pub(super) fn area_vector(mut corners: impl Iterator<Item = DVec3>) -> DVec3 {
    let Some(first) = corners.next() else {
        return DVec3::ZERO;
    };
    let mut sum = DVec3::ZERO;
    let mut previous = DVec3::ZERO;
    for corner in corners {
        // From the first corner and not from the origin: a small facet far away keeps its digits.
        let arm = corner - first;
        sum += previous.cross(arm);
        previous = arm;
    }
    sum * 0.5
}

/// Length and direction of an area vector.
pub(super) fn split(vector: DVec3) -> (f64, DVec3) {
    let size = largest(vector);
    if size == 0.0 {
        return (0.0, DVec3::ZERO);
    }
    // Divided by the largest component first, so that squares neither vanish nor overflow.
    let scaled = vector / size;
    let length = scaled.length();
    (size * length, scaled / length)
}

/// The largest magnitude among the components of a vector.
pub(super) fn largest(vector: DVec3) -> f64 {
    let [x, y, z] = vector.abs().to_array();
    let size = if x > y { x } else { y };
    if z > size { z } else { size }
}

/// Lowest and highest coordinates of some points; `None` without any.
pub(super) fn bounds(mut points: impl Iterator<Item = DVec3>) -> Option<(DVec3, DVec3)> {
    let first = points.next()?;
    Some(points.fold((first, first), |(low, high), point| {
        (lower(low, point), higher(high, point))
    }))
}

/// The lower of each coordinate.
pub(super) fn lower(a: DVec3, b: DVec3) -> DVec3 {
    let pick = |a, b| if b < a { b } else { a };
    DVec3::new(pick(a.x, b.x), pick(a.y, b.y), pick(a.z, b.z))
}

/// The higher of each coordinate.
pub(super) fn higher(a: DVec3, b: DVec3) -> DVec3 {
    let pick = |a, b| if b > a { b } else { a };
    DVec3::new(pick(a.x, b.x), pick(a.y, b.y), pick(a.z, b.z))
}

#[cfg(test)]
mod tests {
    use approx::assert_relative_eq;

    use super::*;
    use crate::geometry::audit::fixtures::{cuboid, l_prism};

    #[test]
    fn cuboid_facets_have_exact_normals() {
        let mesh = cuboid(DVec3::new(0.1, 0.7, -3.3), DVec3::new(0.3, 1.3, 1e-7));
        let normals = [
            DVec3::NEG_X,
            DVec3::X,
            DVec3::NEG_Y,
            DVec3::Y,
            DVec3::NEG_Z,
            DVec3::Z,
        ];
        for (facet, normal) in normals.into_iter().enumerate() {
            let (area, found) = facet_area_normal(&mesh, facet);
            assert!(area > 0.0);
            assert_eq!(found, normal, "facet {facet}");
            assert!(
                found
                    .to_array()
                    .iter()
                    .all(|&part| part != 0.0 || part.is_sign_positive())
            );
        }
    }

    #[test]
    fn concave_polygon_has_its_own_area() {
        let mesh = l_prism(1.0);
        let bottom = mesh.facets() - 2;
        let (area, normal) = facet_area_normal(&mesh, bottom);
        assert_relative_eq!(area, 3.0, max_relative = 1e-15);
        assert_eq!(normal, DVec3::NEG_Z);
    }

    #[test]
    fn tiny_and_huge_facets_keep_area_and_normal() {
        for size in [1e-90, 1e30] {
            let corners = [DVec3::ZERO, DVec3::X * size, DVec3::Y * size];
            let (area, normal) = split(area_vector(corners.into_iter()));
            assert_relative_eq!(area, size * size / 2.0, max_relative = 1e-15);
            assert_eq!(normal, DVec3::Z);
        }
    }

    #[test]
    fn facet_without_area_has_no_normal() {
        assert_eq!(
            split(area_vector(
                [DVec3::ZERO, DVec3::X, DVec3::X * 2.0].into_iter()
            )),
            (0.0, DVec3::ZERO)
        );
        assert_eq!(split(area_vector(std::iter::empty())), (0.0, DVec3::ZERO));
    }
}
