//! Energy onto each row.

use super::Observable;
use crate::engine::{Block, Level};
use crate::math::wide;

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
        let live = block.live;
        let (rows, _) = cells.as_chunks_mut::<3>();
        let (row, arriving) = (&block.row[..live], &block.arriving[..live]);
        let leaving = &block.leaving[..live];
        for i in 0..live {
            let [incident, lost, _] = &mut rows[row[i] as usize];
            *incident += wide(arriving[i]);
            *lost += wide(arriving[i] - leaving[i]);
        }
        for &lane in &block.fresh {
            let lane = usize::from(lane);
            cells[Self::direct(block.row[lane] as usize)] += i128::from(block.arriving[lane]);
        }
    }
}
