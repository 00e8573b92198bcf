//! Energy onto each row.

use super::Observable;
use crate::engine::{Block, Level};

/// For each row: incident energy, energy lost there, incident energy straight from the source.
#[derive(Clone, Debug)]
pub(crate) struct FluxRows {
    pub(crate) rows: usize,
}

impl FluxRows {
    /// Cell of a row's incident energy; the next one is what was lost there, then what came straight from the source.
    pub(crate) const fn incident(row: usize) -> usize {
        3 * row
    }

    pub(crate) const fn lost(row: usize) -> usize {
        3 * row + 1
    }

    pub(crate) const fn direct(row: usize) -> usize {
        3 * row + 2
    }
}

impl Observable for FluxRows {
    fn outputs(&self) -> usize {
        3 * self.rows
    }

    fn strike(&self, _: Level, block: &Block, cells: &mut [i128]) {
        for lane in 0..block.live {
            let row = block.row[lane] as usize;
            let (arriving, leaving) = (block.arriving[lane], block.leaving[lane]);
            let pair = &mut cells[3 * row..3 * row + 2];
            pair[0] += i128::from(arriving);
            pair[1] += i128::from(arriving - leaving);
        }
        for &lane in &block.fresh {
            let lane = usize::from(lane);
            cells[Self::direct(block.row[lane] as usize)] += i128::from(block.arriving[lane]);
        }
    }
}
