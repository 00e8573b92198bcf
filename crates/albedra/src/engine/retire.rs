//! Which photons end after a strike: roulette, limits, and nothing left.

use super::block::{Block, Cause, Loss};
use super::level::{Level, Stage};
use crate::math::{quanta, rough_exp2, smaller};

/// Chance to survive, and what a survivor's weight is multiplied by: 1/8 and 8.
const SURVIVAL: f64 = 0.125;
const GAIN: f64 = 8.0;

/// When light photons play roulette, and when a photon has gone far enough.
///
/// Below the threshold 2⁻¹² exp(−min(s, S)/σ), never below 2⁻⁴⁰, a photon survives with chance 1/8 and eight times its
/// weight. It falls along the path s as the energy is expected to, so that late times keep photons. Any threshold is
/// unbiased, so the exponential is taken roughly.
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
        const FLOOR: f64 = -40.0;
        let Self {
            rules,
            block,
            ended,
        } = self;
        let live = block.live;
        let halvings = rules.decay_per_metre * std::f64::consts::LOG2_E;
        let (weight, path) = (&block.weight[..live], &block.path[..live]);
        let over = &mut block.marks[..live];
        let (leaving, strikes) = (&block.leaving[..live], &block.strikes[..live]);
        for i in 0..live {
            let power = -12.0 - halvings * smaller(path[i], rules.stop);
            let threshold = rough_exp2(if power > FLOOR { power } else { FLOOR });
            let light = (weight[i] < threshold) | (leaving[i] == 0);
            let far = (path[i] > rules.path_limit) | (strikes[i] >= rules.strike_limit);
            over[i] = u64::from(light | far);
        }
        block.departing[..live].copy_from_slice(leaving);
        // Few are over, so eight at a time are passed by.
        for (eight, over) in over.chunks(8).enumerate() {
            if over.iter().fold(0, |any, one| any | one) == 0 {
                continue;
            }
            let lanes = (8 * eight as u16..).zip(over);
            ended.extend(lanes.filter(|&(_, &over)| over != 0).map(|(lane, _)| lane));
        }
    }
}
