//! Orientation tests whose sign is right for any input.
//!
//! Adaptive arithmetic after Shewchuk (Adaptive precision floating-point arithmetic and fast robust geometric
//! predicates, Discrete & Computational Geometry 18, 1997), by the crate `robust`.

use glam::DVec3;
use robust::{Coord, Coord3D, orient2d, orient3d};

/// Positive if `d` lies below the plane of `a`, `b`, `c`, seen from where they run counter-clockwise.
pub(super) fn below([a, b, c]: [DVec3; 3], d: DVec3) -> f64 {
    let at = |p: DVec3| Coord3D {
        x: p.x,
        y: p.y,
        z: p.z,
    };
    orient3d(at(a), at(b), at(c), at(d))
}

/// A view along one axis: which coordinates are kept, in which order.
#[derive(Clone, Copy, Debug)]
pub(super) struct View(usize, usize);

impl View {
    /// The view in which polygons of this normal run counter-clockwise and lose least of their area.
    pub(super) fn along(normal: DVec3) -> Self {
        let size = normal.abs();
        let axis = if size.x >= size.y && size.x >= size.z {
            0
        } else {
            1 + usize::from(size.z > size.y)
        };
        let (u, v) = ((axis + 1) % 3, (axis + 2) % 3);
        if normal[axis] < 0.0 {
            Self(v, u)
        } else {
            Self(u, v)
        }
    }

    /// Positive if `a`, `b`, `c` run counter-clockwise in this view.
    pub(super) fn turn(self, a: DVec3, b: DVec3, c: DVec3) -> f64 {
        let at = |p: DVec3| Coord {
            x: p[self.0],
            y: p[self.1],
        };
        orient2d(at(a), at(b), at(c))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn views_keep_the_direction_of_turning() {
        for normal in [
            DVec3::X,
            DVec3::Y,
            DVec3::Z,
            -DVec3::X,
            -DVec3::Y,
            -DVec3::Z,
            DVec3::new(-1.0, -3.0, 2.0),
        ] {
            let u = normal.any_orthogonal_vector();
            let v = normal.cross(u);
            let origin = DVec3::new(3.0, -2.0, 7.0);
            assert!(
                View::along(normal).turn(origin, origin + u, origin + v) > 0.0,
                "{normal}"
            );
        }
    }

    #[test]
    fn below_is_told_exactly() {
        // 0.1 + 0.2 is not 0.3: a naive determinant of these points is 0 or of either sign.
        let base = [
            DVec3::ZERO,
            DVec3::new(0.1, 0.2, 0.3),
            DVec3::new(0.3, 0.1, 0.2),
        ];
        assert_eq!(below(base, base[1] + base[1]), 0.0);
        let up = (base[1]).cross(base[2]);
        assert!(below(base, -up) > 0.0 && below(base, up) < 0.0);
    }
}
