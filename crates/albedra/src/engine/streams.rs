//! Random numbers: every photon has a generator of its own, seeded from the run's seed and the photon's index.

use std::convert::Infallible;

use rand::rand_core::TryRng;

use super::block::LANES;

/// The increment of `SplitMix64` (Steele, Lea & Flood 2014).
const GAMMA: u64 = 0x9E37_79B9_7F4A_7C15;

/// Version of the way histories draw numbers; a change here changes every result.
pub(crate) const STREAM_VERSION: u64 = 1;

/// The finaliser of `SplitMix64`.
#[inline(always)]
const fn mix(z: u64) -> u64 {
    let z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    let z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    z ^ (z >> 31)
}

/// Four finalisers at positions 4·index + j from the mixed seed. Mixing first keeps seeds that are spaced by `GAMMA`
/// from giving shifted copies of each other. The finaliser is a bijection, so the four words are never all zero.
#[inline(always)]
pub(crate) const fn seeded(seed: u64, photon: u64) -> [u64; 4] {
    let base =
        mix(seed.wrapping_add(GAMMA)).wrapping_add(photon.wrapping_mul(4).wrapping_mul(GAMMA));
    [
        mix(base),
        mix(base.wrapping_add(GAMMA)),
        mix(base.wrapping_add(GAMMA.wrapping_mul(2))),
        mix(base.wrapping_add(GAMMA.wrapping_mul(3))),
    ]
}

/// One step of xoshiro256++ (Blackman & Vigna 2021): the output, and the state moved on.
#[inline(always)]
fn step(s: &mut [u64; 4]) -> u64 {
    let out = s[0].wrapping_add(s[3]).rotate_left(23).wrapping_add(s[0]);
    let t = s[1] << 17;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= t;
    s[3] = s[3].rotate_left(45);
    out
}

/// 53 bits as a number in [0, 1).
#[inline(always)]
fn unit(bits: u64) -> f64 {
    // Both halves are exact conversions that vectorise without AVX-512: 32 high bits and 21 low ones.
    const HIGH: u64 = 0x4530_0000_0000_0000; // 2^84
    const LOW: u64 = 0x4330_0000_0000_0000; // 2^52
    let x = bits >> 11;
    let high = f64::from_bits((x >> 32) | HIGH) - (f64::from_bits(HIGH) + f64::from_bits(LOW));
    let low = f64::from_bits((x & 0xFFFF_FFFF) | LOW);
    (high + low) * (1.0 / 9_007_199_254_740_992.0)
}

/// The generators of a block's lanes.
#[derive(Clone, Debug)]
pub(crate) struct Streams {
    state: [[u64; LANES]; 4],
}

impl Streams {
    pub(crate) fn new() -> Self {
        Self {
            state: [[0; LANES]; 4],
        }
    }

    /// Gives a lane the generator of a photon.
    pub(crate) fn seed(&mut self, lane: usize, seed: u64, photon: u64) {
        self.put(lane, seeded(seed, photon));
    }

    pub(crate) fn copy(&mut self, from: usize, to: usize) {
        self.put(to, self.get(from));
    }

    fn get(&self, lane: usize) -> [u64; 4] {
        [
            self.state[0][lane],
            self.state[1][lane],
            self.state[2][lane],
            self.state[3][lane],
        ]
    }

    fn put(&mut self, lane: usize, state: [u64; 4]) {
        for (column, word) in self.state.iter_mut().zip(state) {
            column[lane] = word;
        }
    }

    /// Draws for each of the first `lanes` lanes as many numbers in [0, 1) as there are columns.
    #[inline(always)]
    pub(crate) fn draw<const N: usize>(&mut self, lanes: usize, out: &mut [[f64; LANES]; N]) {
        let [s0, s1, s2, s3] = self.state.each_mut().map(|column| &mut column[..lanes]);
        let mut out = out.each_mut().map(|column| &mut column[..lanes]);
        for i in 0..lanes {
            let mut s = [s0[i], s1[i], s2[i], s3[i]];
            for column in &mut out {
                column[i] = unit(step(&mut s));
            }
            [s0[i], s1[i], s2[i], s3[i]] = s;
        }
    }

    /// One lane seen as a generator for any sampler of `rand`.
    pub(crate) fn lane(&mut self, lane: usize) -> Lane<'_> {
        Lane {
            state: self.get(lane),
            index: lane,
            streams: self,
        }
    }
}

/// A lane's generator; what it draws is drawn from the lane.
#[derive(Debug)]
pub(crate) struct Lane<'a> {
    state: [u64; 4],
    index: usize,
    streams: &'a mut Streams,
}

impl Lane<'_> {
    /// A number in [0, 1) with 53 bits.
    pub(crate) fn unit(&mut self) -> f64 {
        unit(step(&mut self.state))
    }
}

impl Drop for Lane<'_> {
    fn drop(&mut self) {
        self.streams.put(self.index, self.state);
    }
}

impl TryRng for Lane<'_> {
    type Error = Infallible;

    fn try_next_u32(&mut self) -> Result<u32, Infallible> {
        Ok((step(&mut self.state) >> 32) as u32)
    }

    fn try_next_u64(&mut self) -> Result<u64, Infallible> {
        Ok(step(&mut self.state))
    }

    fn try_fill_bytes(&mut self, out: &mut [u8]) -> Result<(), Infallible> {
        for chunk in out.chunks_mut(8) {
            chunk.copy_from_slice(&step(&mut self.state).to_le_bytes()[..chunk.len()]);
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use rand::{Rng, RngExt, SeedableRng};
    use rand_xoshiro::Xoshiro256PlusPlus;

    use super::*;

    fn library(seed: u64, photon: u64) -> Xoshiro256PlusPlus {
        let mut bytes = [0; 32];
        for (chunk, word) in bytes.chunks_mut(8).zip(seeded(seed, photon)) {
            chunk.copy_from_slice(&word.to_le_bytes());
        }
        Xoshiro256PlusPlus::from_seed(bytes)
    }

    #[test]
    fn lanes_equal_the_library_generator() {
        let mut streams = Streams::new();
        for lane in 0..LANES {
            streams.seed(lane, 7, 1000 + lane as u64);
        }
        let mut drawn = [[0.0; LANES]; 2];
        let mut library: Vec<_> = (0..LANES as u64).map(|i| library(7, 1000 + i)).collect();
        for _ in 0..5 {
            streams.draw(LANES, &mut drawn);
            for (lane, rng) in library.iter_mut().enumerate() {
                assert_eq!(drawn[0][lane], rng.random::<f64>());
                assert_eq!(drawn[1][lane], rng.random::<f64>());
            }
        }
        for (lane, rng) in library.iter_mut().enumerate() {
            assert_eq!(streams.lane(lane).next_u64(), rng.next_u64());
            assert_eq!(streams.lane(lane).unit(), rng.random::<f64>());
        }
    }

    #[test]
    fn seeds_spaced_by_the_increment_do_not_overlap() {
        let a: Vec<_> = (0..1000).map(|i| seeded(3, i)).collect();
        for k in 1..8_u64 {
            for i in 0..1000 {
                assert!(!a.contains(&seeded(3_u64.wrapping_add(GAMMA.wrapping_mul(k)), i)));
            }
        }
    }
}
