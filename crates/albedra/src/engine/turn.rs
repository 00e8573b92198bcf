//! New directions after a strike.

use super::block::{Block, LANES};
use super::level::{Level, Stage};
use super::surfaces::Surfaces;
use crate::math::sin_cos_turn;

/// Turns every photon: from a mirror or by the cosine law, as its row's specular share decides. Two draws a lane.
pub(crate) fn turn(level: Level, surfaces: &Surfaces, mirrors: bool, block: &mut Block) {
    level.run(Turn {
        share: &surfaces.specular_share,
        mirrors,
        block,
    });
}

struct Turn<'a> {
    share: &'a [f64],
    mirrors: bool,
    block: &'a mut Block,
}

impl Stage for Turn<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let live = self.block.live;
        let drawn = &mut self.block.scratch;
        self.block.streams.draw(live, drawn);
        if self.mirrors {
            mixed(self.share, self.block);
        } else {
            lambertian(self.block);
        }
    }
}

/// The cosine law about n: drawn about the pole of z that is further from n, then mirrored so that this pole comes to
/// lie on n (Householder 1958). Needs no tangents, and its length is 1 within rounding.
#[inline(always)]
fn cosine_law(normal: [f64; 3], u: f64, v: f64) -> [f64; 3] {
    let [nx, ny, nz] = normal;
    let (radius, height) = (u.sqrt(), (1.0 - u).sqrt());
    let (sine, cosine) = sin_cos_turn(v);
    let (x, y) = (radius * cosine, radius * sine);
    let side = if nz < 0.0 { -1.0 } else { 1.0 };
    let z = -side * height;
    // The mirror's normal is n less the pole, of square 2 (1 + |n.z|).
    let mz = nz + side;
    let along = (x * nx + y * ny + z * mz) / (1.0 + side * nz);
    [x - along * nx, y - along * ny, z - along * mz]
}

/// Number of live lanes; the comparison lets the loops over them go without bounds checks.
#[inline(always)]
fn live_of(block: &Block) -> usize {
    if block.live < LANES {
        block.live
    } else {
        LANES
    }
}

#[inline(always)]
fn lambertian(block: &mut Block) {
    let live = live_of(block);
    let Block {
        scratch: [first, second],
        normal: [nx, ny, nz],
        direction: [dx, dy, dz],
        ..
    } = block;
    for lane in 0..live {
        let [x, y, z] = cosine_law([nx[lane], ny[lane], nz[lane]], first[lane], second[lane]);
        dx[lane] = x;
        dy[lane] = y;
        dz[lane] = z;
    }
}

#[inline(always)]
fn mixed(shares: &[f64], block: &mut Block) {
    let live = live_of(block);
    let Block {
        scratch: [first, second],
        normal: [nx, ny, nz],
        direction: [dx, dy, dz],
        row,
        flight,
        ..
    } = block;
    // The flight is over and booked; its column holds the shares.
    for lane in 0..live {
        flight[lane] = shares[row[lane] as usize];
    }
    for lane in 0..live {
        let share = flight[lane];
        let u = first[lane];
        let mirror = u < share;
        // What is left of the first number, spread over [0, 1) again.
        let rest = (u - share) / (1.0 - share);
        let rest = if mirror { 0.5 } else { rest };
        let normal = [nx[lane], ny[lane], nz[lane]];
        let [x, y, z] = cosine_law(normal, rest, second[lane]);
        let [ax, ay, az] = [dx[lane], dy[lane], dz[lane]];
        let twice = 2.0 * (ax * normal[0] + ay * normal[1] + az * normal[2]);
        let [rx, ry, rz] = [
            ax - twice * normal[0],
            ay - twice * normal[1],
            az - twice * normal[2],
        ];
        // One Newton step keeps the length at 1 over any number of mirror strikes.
        let scale = 1.5 - 0.5 * (rx * rx + ry * ry + rz * rz);
        dx[lane] = if mirror { rx * scale } else { x };
        dy[lane] = if mirror { ry * scale } else { y };
        dz[lane] = if mirror { rz * scale } else { z };
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::engine::streams::Streams;

    #[test]
    fn cosine_law_has_its_moments() {
        // Mean of cos is 2/3 and of cos² is 1/2 for the cosine law; standard errors √(1/18/N), √(1/12/N).
        let mut streams = Streams::new();
        let normal = crate::source::unit([0.3, -0.5, 0.7]);
        let (mut sum, mut squares) = (0.0, 0.0);
        let photons = 400_000_u32;
        for photon in 0..photons {
            streams.seed(0, 11, u64::from(photon));
            let mut draw = streams.lane(0);
            let d = cosine_law(normal, draw.unit(), draw.unit());
            let cosine = d[0] * normal[0] + d[1] * normal[1] + d[2] * normal[2];
            assert!(cosine > 0.0 && (d[0] * d[0] + d[1] * d[1] + d[2] * d[2] - 1.0).abs() < 1e-14);
            sum += cosine;
            squares += cosine * cosine;
        }
        let n = f64::from(photons);
        assert!(((sum / n - 2.0 / 3.0) / (1.0 / 18.0 / n).sqrt()).abs() < 4.5);
        assert!(((squares / n - 0.5) / (1.0 / 12.0 / n).sqrt()).abs() < 4.5);
    }
}
