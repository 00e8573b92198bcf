//! Absorption along a flight.

use crate::engine::{Block, Cause, Level, Loss, Stage};
use crate::math::{ln, one_minus_exp_neg, quanta};

/// Takes the medium's share of every flight: the energy exactly, its time by one draw along the flight.
///
/// Booking the loss at the flight's end instead would bias the energy inside by percents.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Passage {
    /// Napierian absorption in m⁻¹.
    pub(crate) absorption: f64,
}

impl Passage {
    pub(crate) fn pass(self, level: Level, block: &mut Block) {
        level.run(Pass {
            absorption: self.absorption,
            block,
        });
    }
}

struct Pass<'a> {
    absorption: f64,
    block: &'a mut Block,
}

impl Stage for Pass<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let Self { absorption, block } = self;
        let live = block.live;
        if absorption == 0.0 {
            block.start_weight[..live].copy_from_slice(&block.weight[..live]);
            block.arriving[..live].copy_from_slice(&block.departing[..live]);
            return;
        }
        let per = 1.0 / absorption;
        let [draws, share] = &mut block.scratch;
        block.streams.draw(live, std::array::from_mut(draws));
        for lane in 0..live {
            let depth = absorption * block.flight[lane];
            let absorbed = one_minus_exp_neg(depth);
            let weight = block.weight[lane];
            block.start_weight[lane] = weight;
            let thin = depth < 1.0 / 1_048_576.0;
            block.dwell[lane] = if thin {
                weight * block.flight[lane] * (1.0 - 0.5 * depth)
            } else {
                weight * absorbed * per
            };
            block.weight[lane] = weight - weight * absorbed;
            block.arriving[lane] = quanta(block.weight[lane]);
            // Where along the flight, by inversion of the truncated exponential law; to first order where it is thin.
            let u = draws[lane];
            let first_order = u * (1.0 - 0.5 * depth * (1.0 - u)) * block.flight[lane];
            let within = -ln(1.0 - u * absorbed) * per;
            share[lane] = if thin { first_order } else { within };
        }
        for lane in 0..live {
            let quanta = block.departing[lane] - block.arriving[lane];
            let path = block.path[lane] + block.scratch[1][lane];
            block.losses.push(Loss {
                quanta,
                path,
                cause: Cause::Medium,
            });
        }
    }
}
