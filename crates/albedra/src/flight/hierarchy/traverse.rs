//! From the root to the nearest strike.

use super::build::DEPTH;
use super::node::{BoxRay, Child, WIDTH};
use super::{Hierarchy, Hit, Ray};

/// Children that are still to be visited, for reuse from ray to ray.
///
/// A visit takes one entry off and puts at most eight on, and a path from the root meets at most `DEPTH` nodes. So
/// there are never more than 7 · `DEPTH` + 1 entries. An entry is the distance to the child's box (the bits of a
/// non-negative `f32` are in the order of its values) above the child.
#[derive(Clone, Debug)]
pub(crate) struct Stack([u64; (WIDTH - 1) * DEPTH + 1]);

impl Stack {
    /// Makes a stack.
    #[inline]
    pub(crate) fn new() -> Self {
        Self([0; (WIDTH - 1) * DEPTH + 1])
    }
}

impl Hierarchy {
    /// Finds the next strike as `next` does; what the stack holds before and after does not matter.
    #[inline(always)]
    #[expect(
        clippy::cast_possible_truncation,
        reason = "an entry is two halves of 32 bits"
    )]
    pub(crate) fn next_with(
        &self,
        stack: &mut Stack,
        origin: [f64; 3],
        direction: [f64; 3],
        standing: u32,
    ) -> Option<Hit> {
        let stack = &mut stack.0;
        let ray = Ray::new(origin, direction);
        let box_ray = BoxRay::new(&self.frame, origin, direction);
        let mut best = Hit {
            t: f64::INFINITY,
            triangle: u32::MAX,
        };
        let mut limit = f32::MAX;
        let mut height = 0;
        let mut node = 0;
        loop {
            let children = &self.nodes[node];
            let (enter, mut mask) = children.entered(&box_ray, limit);
            let floor = height;
            while mask != 0 {
                let k = mask.trailing_zeros() as usize % WIDTH;
                mask &= mask - 1;
                let entry = u64::from(enter[k].to_bits()) << 32 | u64::from(children.child[k].0);
                // The nearest comes to lie on top.
                let mut at = height;
                while at > floor && stack[at - 1] < entry {
                    stack[at] = stack[at - 1];
                    at -= 1;
                }
                stack[at] = entry;
                height += 1;
            }
            node = loop {
                if height == 0 {
                    return (best.t < f64::INFINITY).then_some(best);
                }
                height -= 1;
                let entry = stack[height];
                if f32::from_bits((entry >> 32) as u32) > limit {
                    continue;
                }
                match Child(entry as u32).facets() {
                    Err(inner) => break inner,
                    Ok((first, count)) => {
                        for facet in &self.facets[first..first + count] {
                            let Some(t) = ray.strike(self.corners(facet), self.behind) else {
                                continue;
                            };
                            let nearer =
                                (t < best.t) | ((t == best.t) & (facet.triangle < best.triangle));
                            if nearer & (facet.triangle != standing) {
                                best = Hit {
                                    t,
                                    triangle: facet.triangle,
                                };
                                limit = self.frame.length(t);
                            }
                        }
                    }
                }
            };
        }
    }
}
