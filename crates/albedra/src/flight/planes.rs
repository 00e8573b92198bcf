//! Convex bodies of a few dozen planes: every plane for every lane, without branches.
//!
//! A convex body always has a next wall: the planes' normals weighted by area add up to nothing, so a direction that
//! leaves one plane runs towards another. Where rounding hides it (a direction within 1e-16 of the plane that it
//! leaves), the plane that the photon turns from least is taken at distance zero, so that no photon is ever lost.

use super::{Flight, Retries};
use crate::engine::{Block, LANES, Level, NOWHERE, Stage};

/// Planes n·x = offset with outward unit normals; the body is where n·x ≤ offset for all.
#[derive(Debug)]
pub(crate) struct Planes {
    planes: Vec<[f64; 4]>,
}

impl Planes {
    /// Planes as `[n.x, n.y, n.z, offset]`; the index is the surface.
    pub(crate) fn new(planes: Vec<[f64; 4]>) -> Self {
        Self { planes }
    }
}

impl Flight for Planes {
    fn next(&self, level: Level, block: &mut Block, _: &mut Retries) {
        level.run(Next {
            planes: &self.planes,
            block,
        });
    }
}

struct Next<'a> {
    planes: &'a [[f64; 4]],
    block: &'a mut Block,
}

/// Lanes whose best candidate stays in registers while the planes pass by.
const CHUNK: usize = 8;

impl Stage for Next<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let live = self.block.live;
        let mut first = 0;
        while first < live {
            chunk(self.planes, self.block, first);
            first += CHUNK;
        }
    }
}

#[inline(always)]
fn take<T: Copy>(column: &[T; LANES], first: usize) -> [T; CHUNK] {
    let mut out = [column[first]; CHUNK];
    out.copy_from_slice(&column[first..first + CHUNK]);
    out
}

#[inline(always)]
fn chunk(planes: &[[f64; 4]], block: &mut Block, first: usize) {
    let [x, y, z] = [
        take(&block.position[0], first),
        take(&block.position[1], first),
        take(&block.position[2], first),
    ];
    let [dx, dy, dz] = [
        take(&block.direction[0], first),
        take(&block.direction[1], first),
        take(&block.direction[2], first),
    ];
    let standing = take(&block.surface, first);

    // The best candidate so far, as distance = gap / speed: at first none, infinitely far.
    let mut gap = [1.0; CHUNK];
    let mut speed = [0.0; CHUNK];
    let mut best = [NOWHERE; CHUNK];
    for (k, &[a, b, c, offset]) in (0_u64..).zip(planes) {
        for i in 0..CHUNK {
            let here = offset - (a * x[i] + b * y[i] + c * z[i]);
            let closing = a * dx[i] + b * dy[i] + c * dz[i];
            let nearer =
                (standing[i] != k) & (closing > 0.0) & (here * speed[i] < gap[i] * closing);
            gap[i] = if nearer { here } else { gap[i] };
            speed[i] = if nearer { closing } else { speed[i] };
            best[i] = if nearer { k } else { best[i] };
        }
    }
    if best.contains(&NOWHERE) {
        for i in 0..CHUNK {
            if best[i] == NOWHERE {
                best[i] = turned_from_least(planes, [dx[i], dy[i], dz[i]], standing[i]);
                gap[i] = 0.0;
            }
        }
    }
    for i in 0..CHUNK {
        // A strike slightly behind is at zero.
        let distance = if gap[i] > 0.0 { gap[i] / speed[i] } else { 0.0 };
        let lane = first + i;
        let [a, b, c, offset] = planes[best[i] as usize];
        let (px, py, pz) = (
            x[i] + distance * dx[i],
            y[i] + distance * dy[i],
            z[i] + distance * dz[i],
        );
        // Back onto the plane, so that rounding does not add up over strikes.
        let off = offset - (a * px + b * py + c * pz);
        block.position[0][lane] = px + off * a;
        block.position[1][lane] = py + off * b;
        block.position[2][lane] = pz + off * c;
        block.normal[0][lane] = -a;
        block.normal[1][lane] = -b;
        block.normal[2][lane] = -c;
        block.flight[lane] = distance;
        block.surface[lane] = best[i];
    }
}

/// The plane, other than the one stood on, that the direction closes in on fastest.
#[cold]
fn turned_from_least(planes: &[[f64; 4]], direction: [f64; 3], standing: u64) -> u64 {
    let mut best = (f64::NEG_INFINITY, 0);
    for (k, plane) in (0_u64..).zip(planes) {
        let closing = plane[0] * direction[0] + plane[1] * direction[1] + plane[2] * direction[2];
        if k != standing && closing > best.0 {
            best = (closing, k);
        }
    }
    best.1
}
