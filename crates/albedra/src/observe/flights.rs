//! Lengths of flights, weighted by the energy at their start.

use super::Observable;
use crate::engine::{Block, LANES, Level, Stage};
use crate::math::{LaneSum, index_below, quanta, wide};

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
    /// Whether the medium absorbs; where it does not, ∫ w ds is the first moment.
    pub(crate) absorbing: bool,
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
            cells[Self::from_surface(k)] += sum;
        }
        cells[Self::PATH] += if self.absorbing {
            level.run(Dwell { rules: self, block })
        } else {
            sums[1]
        };
        let histogram = &mut cells[Self::HISTOGRAM..Self::HISTOGRAM + HISTOGRAM_BINS];
        for (bin, &quanta) in bins.iter().zip(&block.departing[..block.live]) {
            histogram[*bin as usize] += wide(quanta);
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
    type Output = [i128; MOMENTS];

    #[inline(always)]
    fn run(self) -> Self::Output {
        let Self { rules, block, bins } = self;
        let live = block.live;
        let per_metre = 1.0 / rules.unit;
        let bins_per_metre = HISTOGRAM_BINS as f64 / rules.diagonal;
        let (flight, weight) = (&block.flight[..live], &block.start_weight[..live]);
        let (departing, bins) = (&block.departing[..live], &mut bins[..live]);
        let mut zeroth = LaneSum::default();
        let mut higher = [LaneSum::default(); MOMENTS - 1];
        for i in 0..live {
            let length = flight[i] * per_metre;
            zeroth.add_whole(departing[i]);
            let mut scored = weight[i];
            for sum in &mut higher {
                scored *= length;
                sum.add(scored);
            }
            bins[i] = index_below(flight[i] * bins_per_metre, HISTOGRAM_BINS as f64);
        }
        let [first, second, third, fourth] = higher.map(|sum| sum.quanta(live));
        [zeroth.quanta(0), first, second, third, fourth]
    }
}

struct Dwell<'a> {
    rules: &'a FlightMoments,
    block: &'a Block,
}

impl Stage for Dwell<'_> {
    type Output = i128;

    #[inline(always)]
    fn run(self) -> i128 {
        let dwell = &self.block.dwell[..self.block.live];
        let per_metre = 1.0 / self.rules.unit;
        let mut sum = LaneSum::default();
        for length in dwell {
            sum.add(length * per_metre);
        }
        sum.quanta(dwell.len())
    }
}
