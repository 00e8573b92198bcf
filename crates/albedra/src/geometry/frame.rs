//! The coordinates of a planar wall.

use glam::DVec3;
use serde::{Deserialize, Serialize};

use crate::math::order::larger;

/// A planar wall's own coordinates (u, v) in metres: where they start and which way they run.
///
/// `u`, `v` and `normal` are unit vectors; `normal` points into the enclosure and is `u × v`, so that seen from inside
/// v is a quarter turn counter-clockwise from u.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Frame {
    /// Area centroid of the wall, in metres.
    pub origin: DVec3,
    /// Direction of growing u, `v × normal`; on a horizontal wall +x projected.
    pub u: DVec3,
    /// Direction of growing v, +z projected on the wall; on a horizontal wall `normal × u`.
    pub v: DVec3,
    /// Inward unit normal.
    pub normal: DVec3,
}

/// A wall counts as horizontal if its normal is within this angle (radians) of ±z. A smaller angle would let the
/// rounding of an imported floor or ceiling choose the axes.
const HORIZONTAL: f64 = 1e-6;

impl Frame {
    /// The frame of a wall with this centroid and this inward normal, which need not be a unit vector.
    ///
    /// `None` if the normal is zero or not finite. A normal along an axis gives axes that are exact.
    pub(crate) fn facing(origin: DVec3, normal: DVec3) -> Option<Self> {
        let normal = unit(normal)?;
        let project = |axis: DVec3| unit(axis - normal * normal.dot(axis));
        let (u, v) = if normal.x.abs() <= HORIZONTAL && normal.y.abs() <= HORIZONTAL {
            let u = project(DVec3::X)?;
            (u, normal.cross(u) + DVec3::ZERO)
        } else {
            let v = project(DVec3::Z)?;
            (v.cross(normal) + DVec3::ZERO, v)
        };
        Some(Self {
            origin,
            u,
            v,
            normal,
        })
    }

    /// Coordinates (u, v) in metres of a position, or of its foot on the wall's plane.
    pub fn to_plane(&self, position: DVec3) -> (f64, f64) {
        let from_origin = position - self.origin;
        (from_origin.dot(self.u), from_origin.dot(self.v))
    }

    /// Position in metres of the point (u, v) of the wall's plane.
    pub fn to_space(&self, (u, v): (f64, f64)) -> DVec3 {
        self.origin + self.u * u + self.v * v
    }
}

/// Unit vector along `vector`, exact along an axis; `None` if it is zero or not finite.
pub(crate) fn unit(vector: DVec3) -> Option<DVec3> {
    let largest = larger(larger(vector.x.abs(), vector.y.abs()), vector.z.abs());
    if !(largest > 0.0 && vector.is_finite()) {
        return None;
    }
    // Scaled first, so that neither tiny nor huge vectors leave the range of f64. Adding zero turns −0 into 0.
    let scaled = vector / largest;
    Some(scaled / scaled.length() + DVec3::ZERO)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn axes_of_a_box_are_exact() {
        let (x, y, z) = (DVec3::X, DVec3::Y, DVec3::Z);
        // Inward normals of x-, x+, y-, y+, z- and z+, each with its u and v worked out by hand from the rule.
        for (normal, u, v) in [
            (x, y, z),
            (-x, -y, z),
            (y, -x, z),
            (-y, x, z),
            (z, x, y),
            (-z, x, -y),
        ] {
            let frame = Frame::facing(DVec3::ONE, normal * 0.3).unwrap();
            assert_eq!(
                frame,
                Frame {
                    origin: DVec3::ONE,
                    u,
                    v,
                    normal
                }
            );
            assert_eq!(frame.u.cross(frame.v), normal);
            for axis in [frame.u, frame.v, frame.normal] {
                assert!(
                    axis.to_array()
                        .iter()
                        .all(|c| *c != 0.0 || c.is_sign_positive())
                );
            }
        }
    }

    #[test]
    fn tilted_frames_are_orthonormal_and_invert() {
        for i in 0..100_i32 {
            let t = f64::from(i);
            let normal = DVec3::new(
                1.0 - t * 0.02,
                (t * 0.37) % 1.0 - 0.51,
                (t * 0.73) % 1.0 - 0.5,
            );
            let frame = Frame::facing(DVec3::new(t, 1.0, -2.0), normal).unwrap();
            assert!((frame.u.cross(frame.v) - frame.normal).length() < 1e-15);
            assert!(frame.v.z > 0.0 && frame.u.dot(frame.v).abs() < 1e-15);
            let (u, v) = frame.to_plane(frame.to_space((0.3, -0.7)));
            assert!((u - 0.3).abs() < 1e-13 && (v + 0.7).abs() < 1e-13);
        }
    }

    #[test]
    fn a_floor_that_is_level_but_for_rounding_has_the_axes_of_a_level_floor() {
        let frame = Frame::facing(DVec3::ZERO, DVec3::new(3e-8, -2e-8, 1.0)).unwrap();
        assert!((frame.u - DVec3::X).length() < 1e-7 && (frame.v - DVec3::Y).length() < 1e-7);
    }

    #[test]
    fn no_frame_without_a_normal() {
        for normal in [DVec3::ZERO, DVec3::NAN, DVec3::new(f64::INFINITY, 0.0, 0.0)] {
            assert_eq!(Frame::facing(DVec3::ZERO, normal), None);
        }
        assert_eq!(unit(DVec3::new(0.0, 1e-300, 0.0)), Some(DVec3::Y));
        assert_eq!(unit(DVec3::new(0.0, 0.0, -1e300)), Some(-DVec3::Z));
    }
}
