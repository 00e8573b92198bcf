//! Nodes of eight children: conservative boxes and cones of normals, tested side by side.

use super::Frame;

/// Children of a node.
pub(super) const WIDTH: usize = 8;

/// One number for each child.
pub(super) type Lanes = [f32; WIDTH];

/// Width added to each side of a box, in the frame's unit.
///
/// The test in `f32` errs by at most 2⁻²⁵ for the start, which is rounded, and by 3 · 2⁻²⁴ of the distance to a side
/// for the difference, the inverse of the direction, which is rounded, and the product. A start inside the mesh is at
/// most two units from a side, so all is as if sides were 7 · 2⁻²⁴ < 2⁻²¹ elsewhere. Another 2⁻²¹ is left for strikes
/// a little behind the start, for directions that are clamped, and for starts a little outside.
pub(super) const MARGIN: f64 = 1.0 / (1 << 20) as f64;

/// Added to the sine of a cone; errors of the `f32` axis, direction and sum stay below 2⁻²¹.
pub(super) const CONE_MARGIN: f32 = 1.0 / (1 << 19) as f32;

/// Smallest component of a direction whose inverse is used; the way along it over the whole mesh is far below the
/// margin.
const SMALLEST: f64 = 1.0 / (1_u64 << 40) as f64;

/// Eight children.
#[derive(Clone, Debug)]
#[repr(align(32))]
pub(super) struct Node {
    /// Boxes: low and high x, low and high y, low and high z.
    pub(super) sides: [Lanes; 6],
    /// Axes of the cones of outward normals.
    pub(super) axis: [Lanes; 3],
    /// Sines of the cones' half-angles, margin included; above one if the child has no such cone.
    pub(super) sine: Lanes,
    /// What the children are.
    pub(super) child: [Child; WIDTH],
}

impl Node {
    /// A node without children.
    pub(super) const EMPTY: Self = Self {
        sides: [
            [1e30; WIDTH],
            [-1e30; WIDTH],
            [1e30; WIDTH],
            [-1e30; WIDTH],
            [1e30; WIDTH],
            [-1e30; WIDTH],
        ],
        axis: [[0.0; WIDTH]; 3],
        sine: [-1.0; WIDTH],
        child: [Child(0); WIDTH],
    };

    /// Distances at which the ray enters the children, and which of them it enters before `limit` (bit k: child k).
    #[inline(always)]
    pub(super) fn entered(&self, ray: &BoxRay, limit: f32) -> (Lanes, u32) {
        let [near_x, near_y, near_z] = ray.near.map(|side| &self.sides[side]);
        let [far_x, far_y, far_z] = ray.near.map(|side| &self.sides[side ^ 1]);
        let mut enter = [0.0; WIDTH];
        let mut mask = [0_u32; WIDTH];
        for k in 0..WIDTH {
            let x = (near_x[k] - ray.start[0]) * ray.inverse[0];
            let y = (near_y[k] - ray.start[1]) * ray.inverse[1];
            let z = (near_z[k] - ray.start[2]) * ray.inverse[2];
            let first = larger(larger(x, y), larger(z, 0.0));
            let x = (far_x[k] - ray.start[0]) * ray.inverse[0];
            let y = (far_y[k] - ray.start[1]) * ray.inverse[1];
            let z = (far_z[k] - ray.start[2]) * ray.inverse[2];
            let last = smaller(smaller(x, y), smaller(z, limit));
            let along = self.axis[0][k] * ray.heading[0]
                + self.axis[1][k] * ray.heading[1]
                + self.axis[2][k] * ray.heading[2];
            enter[k] = first;
            mask[k] = u32::from((first <= last) & (along > -self.sine[k])) << k;
        }
        (enter, mask.iter().fold(0, |all, bit| all | bit))
    }
}

/// A child: a node, or a leaf of one to eight facets.
#[derive(Clone, Copy, Debug)]
pub(super) struct Child(pub(super) u32);

#[expect(
    clippy::cast_possible_truncation,
    reason = "a mesh has at most 2²⁸ triangles, and not more nodes"
)]
impl Child {
    const LEAF: u32 = 1 << 31;

    /// The node of this index, which is below 2³¹.
    pub(super) fn node(index: usize) -> Self {
        debug_assert!(index < 1 << 31);
        Self(index as u32)
    }

    /// The facets from `first`, which is below 2²⁸.
    pub(super) fn leaf(first: usize, facets: usize) -> Self {
        debug_assert!(first < 1 << 28 && (1..=8).contains(&facets));
        Self(Self::LEAF | ((facets - 1) << 28) as u32 | first as u32)
    }

    /// First facet and number of facets, if this is a leaf, else the node.
    #[inline(always)]
    pub(super) fn facets(self) -> Result<(usize, usize), usize> {
        if self.0 & Self::LEAF == 0 {
            Err(self.0 as usize)
        } else {
            Ok((
                (self.0 & ((1 << 28) - 1)) as usize,
                (self.0 >> 28 & 7) as usize + 1,
            ))
        }
    }
}

/// A ray as the boxes see it, in the hierarchy's frame.
#[derive(Clone, Copy, Debug)]
pub(super) struct BoxRay {
    start: [f32; 3],
    heading: [f32; 3],
    inverse: [f32; 3],
    /// Which of a node's sides the ray meets first in each axis.
    near: [usize; 3],
}

impl BoxRay {
    /// Brings a ray into the hierarchy's frame.
    #[inline(always)]
    #[expect(
        clippy::cast_possible_truncation,
        reason = "the margin of the boxes covers it"
    )]
    pub(super) fn new(frame: &Frame, origin: [f64; 3], direction: [f64; 3]) -> Self {
        let mut start = [0.0; 3];
        let mut inverse = [0.0; 3];
        let mut near = [0; 3];
        for axis in 0..3 {
            start[axis] = frame.inside(origin, axis) as f32;
            let d = direction[axis];
            let backwards = d < 0.0;
            let clamped = if d.abs() >= SMALLEST {
                d
            } else if backwards {
                -SMALLEST
            } else {
                SMALLEST
            };
            inverse[axis] = (1.0 / clamped) as f32;
            near[axis] = 2 * axis + usize::from(backwards);
        }
        Self {
            start,
            heading: direction.map(|d| d as f32),
            inverse,
            near,
        }
    }
}

impl Frame {
    /// A coordinate in the frame.
    #[inline(always)]
    pub(super) fn inside(&self, position: [f64; 3], axis: usize) -> f64 {
        (position[axis] - self.centre[axis]) * self.scale
    }

    /// A distance in the frame, rounded up.
    #[inline(always)]
    #[expect(clippy::cast_possible_truncation, reason = "rounded up after")]
    pub(super) fn length(&self, metres: f64) -> f32 {
        ((metres * self.scale) as f32).next_up()
    }
}

/// The smaller of two numbers, the second if they are equal.
#[inline(always)]
pub(super) fn smaller(a: f32, b: f32) -> f32 {
    if a < b { a } else { b }
}

/// The larger of two numbers, the second if they are equal.
#[inline(always)]
pub(super) fn larger(a: f32, b: f32) -> f32 {
    if a > b { a } else { b }
}
