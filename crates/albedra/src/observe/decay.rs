//! When energy left: the pulse response and, from its first moments, the switch curves.

use super::Observable;
use crate::engine::{Block, Level, Loss, Stage};
use crate::math::{ONE, index_below, quanta, wide, wide_quanta};

/// Edges of the time grid as paths, and one bin more for all that is later.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct TimeBins {
    /// Paths in metres, ascending from 0.
    pub(crate) edges: Vec<f64>,
    /// Bins per metre, if the bins are equal.
    pub(crate) per_metre: Option<f64>,
    /// Unit of the last bin's first moment in metres; no photon comes further than 2²⁰ times this.
    pub(crate) beyond: f64,
}

impl TimeBins {
    pub(crate) fn bins(&self) -> usize {
        self.edges.len() - 1
    }

    /// Width of a bin in metres; of the last one, the unit of its first moment.
    pub(crate) fn width(&self, bin: usize) -> f64 {
        if bin < self.bins() {
            self.edges[bin + 1] - self.edges[bin]
        } else {
            self.beyond
        }
    }

    /// Bin of a path, and where in the bin it lies, from 0 to 1; after the last edge, in units of `beyond`.
    #[inline(always)]
    fn place(&self, path: f64) -> (usize, f64) {
        let bins = self.bins();
        let bin = if let Some(per_metre) = self.per_metre {
            index_below(path * per_metre, bins as f64 + 1.0) as usize
        } else {
            let later = self.edges.partition_point(|&edge| edge <= path);
            if later > 0 { later - 1 } else { 0 }
        };
        let share = (path - self.edges[bin]) / self.width(bin);
        let share = if share > 0.0 { share } else { 0.0 };
        (
            bin,
            if share < 1.0 || bin == bins {
                share
            } else {
                1.0
            },
        )
    }
}

/// For each bin, two cells: energy lost, and the same times where in the bin it was lost (0 to 1).
#[derive(Clone, Debug)]
pub(crate) struct DecayBins {
    pub(crate) time: TimeBins,
}

impl Observable for DecayBins {
    fn outputs(&self) -> usize {
        2 * self.time.edges.len()
    }

    fn strike(&self, level: Level, block: &Block, cells: &mut [i128]) {
        let (pairs, _) = cells.as_chunks_mut();
        if let Some(per_metre) = self.time.per_metre {
            level.run(Book {
                time: &self.time,
                per_metre,
                block,
                pairs,
            });
            return;
        }
        for lane in 0..block.live {
            book(&self.time, block, lane, pairs);
        }
    }

    fn losses(&self, losses: &[Loss], cells: &mut [i128]) {
        for loss in losses {
            let (bin, share) = self.time.place(loss.path);
            cells[2 * bin] += i128::from(loss.quanta);
            cells[2 * bin + 1] += wide_quanta(loss.quanta as f64 * (1.0 / ONE as f64) * share);
        }
    }
}

/// Books one strike anywhere.
fn book(time: &TimeBins, block: &Block, lane: usize, pairs: &mut [[i128; 2]]) {
    let (bin, share) = time.place(block.path[lane]);
    pairs[bin][0] += i128::from(block.arriving[lane] - block.leaving[lane]);
    pairs[bin][1] += wide_quanta(block.lost[lane] * share);
}

/// Books the strikes of all lanes, for equal bins.
struct Book<'a> {
    time: &'a TimeBins,
    per_metre: f64,
    block: &'a Block,
    pairs: &'a mut [[i128; 2]],
}

/// Lanes whose bins are found together, in a loop that vectorises.
const CHUNK: usize = 32;

impl Stage for Book<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let Self {
            time,
            per_metre,
            block,
            pairs,
        } = self;
        let last = time.bins();
        let count = last as f64 + 1.0;
        let mut bins = [0; CHUNK];
        let mut moments = [0; CHUNK];
        for first in (0..block.live).step_by(CHUNK) {
            let end = usize::min(first + CHUNK, block.live);
            let (path, lost) = (&block.path[first..end], &block.lost[first..end]);
            let (bins, moments) = (&mut bins[..path.len()], &mut moments[..path.len()]);
            for i in 0..path.len() {
                let scaled = path[i] * per_metre;
                let bin = index_below(scaled, count);
                let share = scaled - f64_of(bin);
                let share = if share > 0.0 { share } else { 0.0 };
                let share = if share < 1.0 { share } else { 1.0 };
                bins[i] = bin;
                moments[i] = quanta(lost[i] * share);
            }
            let (arriving, leaving) = (&block.arriving[first..end], &block.leaving[first..end]);
            for i in 0..path.len() {
                let bin = bins[i] as usize;
                if bin == last {
                    // Later than the last edge moments have another unit.
                    book(time, block, first + i, pairs);
                    continue;
                }
                let pair = &mut pairs[bin];
                pair[0] += wide(arriving[i] - leaving[i]);
                pair[1] += wide(moments[i]);
            }
        }
    }
}

/// A small whole number as `f64`; this conversion vectorises without AVX-512.
#[inline(always)]
fn f64_of(whole: u64) -> f64 {
    const TWO_52: f64 = 4_503_599_627_370_496.0;
    f64::from_bits(whole | TWO_52.to_bits()) - TWO_52
}

#[cfg(test)]
mod tests {
    use super::*;

    fn bins(per_metre: Option<f64>) -> TimeBins {
        TimeBins {
            edges: vec![0.0, 0.5, 1.0, 1.5, 2.0],
            per_metre,
            beyond: 64.0,
        }
    }

    #[test]
    fn equal_bins_and_edges_agree() {
        for k in 0..4000 {
            let path = f64::from(k) * 0.001_3 + 0.000_1;
            let (a, x) = bins(Some(2.0)).place(path);
            let (b, y) = bins(None).place(path);
            assert_eq!(a, b, "{path}");
            assert!((x - y).abs() < 1e-12, "{path}");
        }
        assert_eq!(bins(None).place(34.0), (4, 0.5));
        assert_eq!(bins(Some(2.0)).place(130.0), (4, 2.0));
    }
}
