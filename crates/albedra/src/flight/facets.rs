//! Any mesh: the nearest facet that faces the photon, by a hierarchy of boxes.

use super::hierarchy::{Hierarchy, Hit, Stack};
use super::{Flight, Retries};
use crate::engine::{Block, Level, NOWHERE, Stage};

/// Triangles with the hierarchy over them; a triangle's index is the surface.
#[derive(Debug)]
pub(crate) struct Facets {
    hierarchy: Hierarchy,
    /// Plane n·x = offset of each triangle, outward unit normal.
    planes: Vec<[f64; 4]>,
}

impl Facets {
    pub(crate) fn new(hierarchy: Hierarchy, planes: Vec<[f64; 4]>) -> Self {
        Self { hierarchy, planes }
    }

    /// Another try for a photon that found no wall, since rounding has put it a little outside: through the triangle
    /// that it has slipped through already, else from the nearest point of the mesh, or into what lies nearest ahead.
    #[cold]
    fn retry(&self, origin: &mut [f64; 3], direction: [f64; 3], standing: u32) -> Option<Hit> {
        let overtaken = self.hierarchy.overtaken(*origin, direction, standing);
        overtaken.or_else(|| {
            let nearest;
            (nearest, *origin) = self.hierarchy.nearest_point(*origin);
            self.hierarchy
                .next(*origin, direction, nearest)
                .or_else(|| self.hierarchy.nearly_met(*origin, direction, standing))
        })
    }
}

/// A point put back onto a plane, so that rounding does not add up over strikes.
#[inline(always)]
fn onto([x, y, z]: [f64; 3], [a, b, c, offset]: [f64; 4]) -> [f64; 3] {
    let off = offset - (a * x + b * y + c * z);
    [x + off * a, y + off * b, z + off * c]
}

impl Flight for Facets {
    fn next(&self, level: Level, block: &mut Block, retries: &mut Retries) {
        level.run(Next {
            facets: self,
            block,
            retries,
        });
    }
}

struct Next<'a> {
    facets: &'a Facets,
    block: &'a mut Block,
    retries: &'a mut Retries,
}

impl Stage for Next<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let Self {
            facets,
            block,
            retries,
        } = self;
        let mut stack = Stack::new();
        for lane in 0..block.live {
            let mut origin = [
                block.position[0][lane],
                block.position[1][lane],
                block.position[2][lane],
            ];
            let direction = [
                block.direction[0][lane],
                block.direction[1][lane],
                block.direction[2][lane],
            ];
            let surface = block.surface[lane];
            let standing = if surface == NOWHERE {
                Hierarchy::NOWHERE
            } else {
                surface as u32
            };
            let mut hit = facets
                .hierarchy
                .next_with(&mut stack, origin, direction, standing);
            if hit.is_none() {
                retries.retried += 1;
                hit = facets.retry(&mut origin, direction, standing);
            }
            let Some(hit) = hit else {
                block.missed.push(lane as u16);
                continue;
            };
            let plane = facets.planes[hit.triangle as usize];
            let at = onto(
                [0, 1, 2].map(|axis| origin[axis] + hit.t * direction[axis]),
                plane,
            );
            for axis in 0..3 {
                block.position[axis][lane] = at[axis];
                block.normal[axis][lane] = -plane[axis];
            }
            block.flight[lane] = hit.t;
            block.surface[lane] = u64::from(hit.triangle);
        }
    }
}
