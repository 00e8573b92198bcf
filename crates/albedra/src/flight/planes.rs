//! Convex bodies of a few dozen planes: every plane for every lane, without branches.
//!
//! A convex body always has a next wall: the planes' normals weighted by area add up to nothing, so a direction that
//! leaves one plane runs towards another. Where rounding hides it (a direction within 1e-16 of the plane that it
//! leaves), the plane that the photon turns from least is taken at distance zero, so that no photon is ever lost.

use super::{Flight, Retries};
use crate::engine::{Block, Level, NOWHERE, Stage};

/// Planes n·x = offset with outward unit normals; the body is where n·x ≤ offset for all.
#[derive(Debug)]
pub(crate) struct Planes {
    /// For each plane its inward normal, and its offset along the outward one.
    inward: Vec<[f64; 4]>,
    slabs: Vec<[Slab; GROUP]>,
}

/// Slabs that are unrolled in the loop over lanes, so that the best candidate stays in registers meanwhile.
const GROUP: usize = 3;

/// Two parallel planes: a direction runs towards one of them, so that one candidate serves both.
#[derive(Clone, Copy, Debug)]
struct Slab {
    normal: [f64; 3],
    /// Bits of the offsets along and against the normal.
    offset: [u64; 2],
    /// The planes met along and against the normal.
    plane: [u64; 2],
}

/// Where there is no second plane, it is infinitely far, and never nearer than anything.
const NO_SLAB: Slab = Slab {
    normal: [0.0; 3],
    offset: [f64::INFINITY.to_bits(); 2],
    plane: [NOWHERE; 2],
};

impl Planes {
    /// Planes as `[n.x, n.y, n.z, offset]`; the index is the surface.
    pub(crate) fn new(planes: &[[f64; 4]]) -> Self {
        let mut slabs: Vec<Slab> = Vec::new();
        for (k, &[a, b, c, offset]) in (0_u64..).zip(planes) {
            let opposite =
                |slab: &&mut Slab| slab.plane[1] == NOWHERE && slab.normal == [-a, -b, -c];
            if let Some(slab) = slabs.iter_mut().find(opposite) {
                slab.offset[1] = offset.to_bits();
                slab.plane[1] = k;
            } else {
                slabs.push(Slab {
                    normal: [a, b, c],
                    offset: [offset.to_bits(), NO_SLAB.offset[1]],
                    plane: [k, NOWHERE],
                });
            }
        }
        let mut groups = vec![[NO_SLAB; GROUP]; slabs.len().div_ceil(GROUP)];
        for (k, slab) in slabs.into_iter().enumerate() {
            groups[k / GROUP][k % GROUP] = slab;
        }
        let inward = planes.iter().map(|&[a, b, c, offset]| [-a, -b, -c, offset]);
        Self {
            inward: inward.collect(),
            slabs: groups,
        }
    }
}

impl Flight for Planes {
    fn next(&self, level: Level, block: &mut Block, _: &mut Retries) {
        level.run(Next {
            planes: self,
            block,
        });
    }
}

struct Next<'a> {
    planes: &'a Planes,
    block: &'a mut Block,
}

impl Stage for Next<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let Self { planes, block } = self;
        search(&planes.slabs, block);
        settle(&planes.inward, block);
        arrive(&planes.inward, block);
    }
}

struct Ray {
    at: [f64; 3],
    along: [f64; 3],
    standing: u64,
}

/// The nearest candidate, as gap, speed and plane, of what was found so far and a group of slabs.
#[inline(always)]
fn nearer_of(group: [Slab; GROUP], ray: &Ray, so_far: (f64, f64, u64)) -> (f64, f64, u64) {
    const SIGN: u64 = 1 << 63;
    let (mut gap, mut speed, mut best) = so_far;
    let ([x, y, z], [dx, dy, dz]) = (ray.at, ray.along);
    for slab in group {
        let [a, b, c] = slab.normal;
        let along = a * x + b * y + c * z;
        let closing = a * dx + b * dy + c * dz;
        // Against the normal everything changes its sign: by bits, since a choice of constants would not vectorise.
        let sign = closing.to_bits() & SIGN;
        let against = 0_u64.wrapping_sub(sign >> 63);
        let pick = |[front, back]: [u64; 2]| front ^ (against & (front ^ back));
        let plane = pick(slab.plane);
        let here = f64::from_bits(pick(slab.offset)) - f64::from_bits(along.to_bits() ^ sign);
        let closing = f64::from_bits(closing.to_bits() ^ sign);
        let nearer = (ray.standing != plane) & (closing > 0.0) & (here * speed < gap * closing);
        gap = if nearer { here } else { gap };
        speed = if nearer { closing } else { speed };
        best = if nearer { plane } else { best };
    }
    (gap, speed, best)
}

/// Finds the next plane of every lane. The best candidate so far is kept as distance = gap / speed, at first none,
/// infinitely far; the gap is kept in `flight`, the speed in the first scratch column, the plane in `marks`.
#[inline(always)]
fn search(slabs: &[[Slab; GROUP]], block: &mut Block) {
    let live = block.live;
    let Block {
        position: [x, y, z],
        direction: [dx, dy, dz],
        surface,
        flight,
        scratch: [speed, _],
        marks: best,
        ..
    } = block;
    let (x, y, z) = (&x[..live], &y[..live], &z[..live]);
    let (dx, dy, dz) = (&dx[..live], &dy[..live], &dz[..live]);
    let standing = &surface[..live];
    let (gap, speed, best) = (&mut flight[..live], &mut speed[..live], &mut best[..live]);
    gap.fill(1.0);
    speed.fill(0.0);
    best.fill(NOWHERE);
    for &group in slabs {
        for i in 0..live {
            let so_far = (gap[i], speed[i], best[i]);
            let ray = Ray {
                at: [x[i], y[i], z[i]],
                along: [dx[i], dy[i], dz[i]],
                standing: standing[i],
            };
            (gap[i], speed[i], best[i]) = nearer_of(group, &ray, so_far);
        }
    }
}

/// Gives lanes that found no plane the one that they turn from least, at distance zero.
#[inline(always)]
fn settle(inward: &[[f64; 4]], block: &mut Block) {
    let best = &mut block.marks[..block.live];
    // No index of a plane has this bit.
    let missing = best.iter().fold(0, |any, plane| any | plane >> 63);
    if missing == 0 {
        return;
    }
    for lane in 0..best.len() {
        if best[lane] == NOWHERE {
            let direction = [0, 1, 2].map(|axis| block.direction[axis][lane]);
            best[lane] = turned_from_least(inward, direction, block.surface[lane]);
            block.flight[lane] = 0.0;
        }
    }
}

/// Moves every lane to its plane.
#[inline(always)]
fn arrive(inward: &[[f64; 4]], block: &mut Block) {
    let live = block.live;
    let Block {
        position: [x, y, z],
        direction: [dx, dy, dz],
        normal: [nx, ny, nz],
        surface,
        flight,
        scratch: [speed, offset],
        marks: best,
        ..
    } = block;
    let (x, y, z) = (&mut x[..live], &mut y[..live], &mut z[..live]);
    let (dx, dy, dz) = (&dx[..live], &dy[..live], &dz[..live]);
    let (nx, ny, nz) = (&mut nx[..live], &mut ny[..live], &mut nz[..live]);
    let (flight, speed, offset) = (&mut flight[..live], &speed[..live], &mut offset[..live]);
    let best = &best[..live];
    surface[..live].copy_from_slice(best);
    // A loop of its own: what is looked up in a table does not vectorise.
    for i in 0..live {
        [nx[i], ny[i], nz[i], offset[i]] = inward[best[i] as usize];
    }
    for i in 0..live {
        // A strike slightly behind is at zero.
        let gap = flight[i];
        let distance = if gap > 0.0 { gap / speed[i] } else { 0.0 };
        let (px, py, pz) = (
            x[i] + distance * dx[i],
            y[i] + distance * dy[i],
            z[i] + distance * dz[i],
        );
        // Back onto the plane, so that rounding does not add up over strikes.
        let off = offset[i] + (nx[i] * px + ny[i] * py + nz[i] * pz);
        x[i] = px - off * nx[i];
        y[i] = py - off * ny[i];
        z[i] = pz - off * nz[i];
        flight[i] = distance;
    }
}

/// The plane, other than the one stood on, that the direction closes in on fastest.
#[cold]
fn turned_from_least(inward: &[[f64; 4]], direction: [f64; 3], standing: u64) -> u64 {
    let mut best = (f64::INFINITY, 0);
    for (k, plane) in (0_u64..).zip(inward) {
        let leaving = plane[0] * direction[0] + plane[1] * direction[1] + plane[2] * direction[2];
        if k != standing && leaving < best.0 {
            best = (leaving, k);
        }
    }
    best.1
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::engine::LANES;
    use crate::math::sin_cos_turn;
    use crate::source::unit;

    /// An upright prism of radius and height 1 as `[n.x, n.y, n.z, offset]`: sides, then the two ends.
    fn prism(sides: u32) -> Vec<[f64; 4]> {
        let side = |k| {
            let (sine, cosine) = sin_cos_turn(f64::from(k) / f64::from(sides));
            [cosine, sine, 0.0, 1.0]
        };
        let ends = [[0.0, 0.0, 1.0, 0.5], [0.0, 0.0, -1.0, 0.5]];
        (0..sides).map(side).chain(ends).collect()
    }

    /// The nearest plane by dividing, one plane at a time.
    fn plain(planes: &[[f64; 4]], at: [f64; 3], along: [f64; 3], standing: u64) -> (f64, u64) {
        let dot = |n: &[f64; 4], x: [f64; 3]| n[0] * x[0] + n[1] * x[1] + n[2] * x[2];
        let mut best = (f64::INFINITY, NOWHERE);
        for (k, plane) in (0_u64..).zip(planes) {
            let closing = dot(plane, along);
            let distance = (plane[3] - dot(plane, at)) / closing;
            if k != standing && closing > 0.0 && distance < best.0 {
                best = (distance, k);
            }
        }
        best
    }

    #[test]
    fn slabs_find_what_single_planes_find() {
        // 4 sides are two slabs, 7 sides are seven with one plane; with the ends 3 and 8 slabs, in 1 and 3 groups.
        assert_eq!(Planes::new(&prism(4)).slabs.len(), 1);
        assert_eq!(Planes::new(&prism(7)).slabs.len(), 3);
        for planes in [prism(3), prism(4), prism(7), prism(12)] {
            let kernel = Planes::new(&planes);
            for level in Level::available() {
                let mut block = Block::new();
                block.live = LANES - 3;
                for lane in 0..block.live {
                    block.streams.seed(lane, 5, lane as u64);
                    let mut draw = block.streams.lane(lane);
                    let mut number = || draw.unit() - 0.5;
                    let (at, along) = ([(); 3].map(|()| number()), [(); 3].map(|()| number()));
                    let along = unit(along);
                    for axis in 0..3 {
                        block.position[axis][lane] = at[axis] * 0.9;
                        block.direction[axis][lane] = along[axis];
                    }
                }
                for _ in 0..50 {
                    let before: Vec<_> = (0..block.live)
                        .map(|lane| {
                            let at = [0, 1, 2].map(|axis| block.position[axis][lane]);
                            let along = [0, 1, 2].map(|axis| block.direction[axis][lane]);
                            plain(&planes, at, along, block.surface[lane])
                        })
                        .collect();
                    kernel.next(level, &mut block, &mut Retries::default());
                    for (lane, (distance, plane)) in before.into_iter().enumerate() {
                        assert_eq!(block.surface[lane], plane);
                        assert!((block.flight[lane] - distance).abs() < 1e-14);
                        let [a, b, c, offset] = planes[plane as usize];
                        let normal = [0, 1, 2].map(|axis| block.normal[axis][lane]);
                        assert_eq!(normal, [-a, -b, -c]);
                        let [x, y, z] = [0, 1, 2].map(|axis| block.position[axis][lane]);
                        assert!((a * x + b * y + c * z - offset).abs() < 1e-15);
                    }
                    for lane in 0..block.live {
                        let normal = [0, 1, 2].map(|axis| block.normal[axis][lane]);
                        let mut draw = block.streams.lane(lane);
                        // Anywhere into the half space, grazing ones too.
                        let free = [(); 3].map(|()| draw.unit() - 0.5);
                        let inward = free.iter().zip(normal).map(|(x, n)| x * n).sum::<f64>();
                        let flip = if inward < 0.0 { -1.0 } else { 1.0 };
                        let along = unit(free.map(|x| flip * x));
                        (0..3).for_each(|axis| block.direction[axis][lane] = along[axis]);
                    }
                }
            }
        }
    }

    /// Flies one photon in the prism of four sides; gives the plane and the distance.
    fn fly(at: [f64; 3], along: [f64; 3], standing: u64) -> (u64, f64) {
        let mut block = Block::new();
        block.live = 1;
        for axis in 0..3 {
            block.position[axis][0] = at[axis];
            block.direction[axis][0] = along[axis];
        }
        block.surface[0] = standing;
        Planes::new(&prism(4)).next(Level::best(), &mut block, &mut Retries::default());
        (block.surface[0], block.flight[0])
    }

    #[test]
    fn rounding_strikes_no_plane_that_is_not_ahead() {
        // Along a wall that the photon is behind of.
        assert_eq!(
            fly([0.0, 1.0 + 2.3e-16, -0.5], [1.0, 0.0, 0.0], 5),
            (0, 1.0)
        );
        // Into the plane that it stands on.
        assert_eq!(fly([1.0, 0.0, -0.5], [1e-17, 0.0, 1.0], 0), (4, 1.0));
        // Towards a wall that it is behind of: struck on the spot.
        assert_eq!(
            fly([0.0, 1.0 + 2.3e-16, -0.5], [0.6, 0.8, 0.0], 5),
            (1, 0.0)
        );
        // Away from all planes but the one that it stands on.
        assert_eq!(fly([1.0, 0.0, 0.0], [1.0, 0.0, 0.0], 0), (1, 0.0));
    }
}
