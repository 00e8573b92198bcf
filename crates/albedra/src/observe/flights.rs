//! Lengths of flights, weighted by the energy at their start.

use super::Observable;
use crate::engine::{Block, LANES, Level, Stage};
use crate::math::{index_below, quanta, split_quanta};

/// Equal bins of the histogram, from 0 to the body's diagonal.
pub(crate) const HISTOGRAM_BINS: usize = 64;

/// Moments 0 to 4.
const MOMENTS: usize = 5;

/// Cells: Σ w lᵏ (k = 0 … 4) of flights that start on a surface; the same of first flights that start inside;
/// Σ ∫ w ds of all; histogram of flights that start on a surface. Lengths are in units of `unit`.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct FlightMoments {
    /// The power of two next above the body's diagonal, metres: no flight is longer.
    pub(crate) unit: f64,
    /// The body's diagonal, metres.
    pub(crate) diagonal: f64,
}

impl FlightMoments {
    /// Cell of the k-th moment of flights that start on a surface.
    pub(crate) const fn from_surface(k: usize) -> usize {
        k
    }

    /// Cell of the k-th moment of first flights that start inside.
    pub(crate) const fn from_inside(k: usize) -> usize {
        MOMENTS + k
    }

    /// Cell of the energy-weighted path of all flights.
    pub(crate) const PATH: usize = 2 * MOMENTS;

    /// Cell of the histogram's first bin.
    pub(crate) const HISTOGRAM: usize = 2 * MOMENTS + 1;
}

impl Observable for FlightMoments {
    fn outputs(&self) -> usize {
        Self::HISTOGRAM + HISTOGRAM_BINS
    }

    fn strike(&self, level: Level, block: &Block, cells: &mut [i128]) {
        let mut bins = [0; LANES];
        let sums = level.run(Moments {
            rules: self,
            block,
            bins: &mut bins,
        });
        for (k, sum) in sums.into_iter().enumerate() {
            let cell = if k < MOMENTS { k } else { Self::PATH };
            cells[cell] += sum;
        }
        let histogram = &mut cells[Self::HISTOGRAM..Self::HISTOGRAM + HISTOGRAM_BINS];
        for lane in 0..block.live {
            histogram[bins[lane] as usize] += i128::from(block.departing[lane]);
        }
        // First flights from inside were counted above like the others; they move to their own cells.
        for &lane in &block.adrift {
            let lane = usize::from(lane);
            let length = block.flight[lane] * (1.0 / self.unit);
            let mut scored = block.start_weight[lane];
            for k in 0..MOMENTS {
                let amount = i128::from(quanta(scored));
                cells[Self::from_surface(k)] -= amount;
                cells[Self::from_inside(k)] += amount;
                scored *= length;
            }
            cells[Self::HISTOGRAM + bins[lane] as usize] -= i128::from(block.departing[lane]);
        }
    }
}

struct Moments<'a> {
    rules: &'a FlightMoments,
    block: &'a Block,
    bins: &'a mut [u64; LANES],
}

impl Stage for Moments<'_> {
    type Output = [i128; MOMENTS + 1];

    #[inline(always)]
    fn run(self) -> Self::Output {
        let Self { rules, block, bins } = self;
        let live = block.live;
        let per_metre = 1.0 / rules.unit;
        let bins_per_metre = HISTOGRAM_BINS as f64 / rules.diagonal;
        let (flight, weight) = (&block.flight[..live], &block.start_weight[..live]);
        let (dwell, bins) = (&block.dwell[..live], &mut bins[..live]);
        // High parts are below 2³¹ and low parts below 2³⁰, so that sums over a block's lanes fit in 64 bits.
        let mut high = [0_i64; MOMENTS + 1];
        let mut low = [0_i64; MOMENTS + 1];
        for i in 0..live {
            let length = flight[i] * per_metre;
            let mut scored = weight[i];
            for k in 0..MOMENTS {
                let (h, l) = split_quanta(scored);
                high[k] = high[k].wrapping_add(h);
                low[k] = low[k].wrapping_add(l);
                scored *= length;
            }
            let (h, l) = split_quanta(dwell[i] * per_metre);
            high[MOMENTS] = high[MOMENTS].wrapping_add(h);
            low[MOMENTS] = low[MOMENTS].wrapping_add(l);
            bins[i] = index_below(flight[i] * bins_per_metre, HISTOGRAM_BINS as f64);
        }
        let mut sums = [0; MOMENTS + 1];
        for k in 0..=MOMENTS {
            sums[k] = (i128::from(high[k]) << 30) + i128::from(low[k]);
        }
        sums
    }
}
