//! Which photons end after a strike: roulette, limits, and nothing left.

use super::block::{Block, Cause, Loss};
use super::level::{Level, Stage};
use crate::math::{exp, quanta, smaller};

/// Chance to survive, and what a survivor's weight is multiplied by: 1/8 and 8.
const SURVIVAL: f64 = 0.125;
const GAIN: f64 = 8.0;

/// When light photons play roulette, and when a photon has gone far enough.
///
/// Below the threshold 2⁻¹² exp(−min(s, S)/σ), never below 2⁻⁴⁰, a photon survives with chance 1/8 and eight times its
/// weight. It falls along the path s as the energy is expected to, so that late times keep photons.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Retirement {
    /// 1/σ in m⁻¹.
    pub(crate) decay_per_metre: f64,
    /// S: path at the stop of the time grid, metres.
    pub(crate) stop: f64,
    /// Path at which photons are cut, metres.
    pub(crate) path_limit: f64,
    pub(crate) strike_limit: u64,
}

impl Retirement {
    /// Prepares the next flight and lists the lanes whose photon ended.
    pub(crate) fn retire(&self, level: Level, block: &mut Block, ended: &mut Vec<u16>) {
        ended.clear();
        level.run(Sift {
            rules: self,
            block,
            ended,
        });
        let mut kept = 0;
        for k in 0..ended.len() {
            let lane = ended[k];
            if self.ends(block, usize::from(lane)) {
                ended[kept] = lane;
                kept += 1;
            }
        }
        ended.truncate(kept);
    }

    /// Decides about one photon that is over a limit or below the threshold.
    fn ends(&self, block: &mut Block, lane: usize) -> bool {
        let before = block.leaving[lane];
        let path = block.path[lane];
        let mut book = |quanta, cause| {
            let loss = Loss {
                quanta,
                path,
                cause,
            };
            block.losses.push(loss);
        };
        if before == 0 {
            return true;
        }
        if path > self.path_limit || block.strikes[lane] >= self.strike_limit {
            book(before, Cause::Cut);
            return true;
        }
        if block.streams.lane(lane).unit() >= SURVIVAL {
            book(before, Cause::Roulette);
            return true;
        }
        let weight = block.weight[lane] * GAIN;
        let after = quanta(weight);
        book(before - after, Cause::Roulette);
        block.weight[lane] = weight;
        block.departing[lane] = after;
        false
    }
}

struct Sift<'a> {
    rules: &'a Retirement,
    block: &'a mut Block,
    ended: &'a mut Vec<u16>,
}

impl Stage for Sift<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        const FIRST: f64 = 1.0 / 4096.0;
        const FLOOR: f64 = 1.0 / 1_099_511_627_776.0;
        let Self {
            rules,
            block,
            ended,
        } = self;
        let live = block.live;
        let [threshold, _] = &mut block.scratch;
        for lane in 0..live {
            let fallen =
                FIRST * exp(-rules.decay_per_metre * smaller(block.path[lane], rules.stop));
            threshold[lane] = if fallen > FLOOR { fallen } else { FLOOR };
            block.departing[lane] = block.leaving[lane];
        }
        for lane in 0..live {
            let light = (block.weight[lane] < threshold[lane]) | (block.leaving[lane] == 0);
            let far =
                (block.path[lane] > rules.path_limit) | (block.strikes[lane] >= rules.strike_limit);
            if light | far {
                ended.push(lane as u16);
            }
        }
    }
}
