//! What is counted, one file an observable.

mod decay;
mod flights;
mod flux;
mod ledger;
mod maps;

pub(crate) use decay::{DecayBins, TimeBins};
pub(crate) use flights::{FlightMoments, HISTOGRAM_BINS};
pub(crate) use flux::FluxRows;
pub(crate) use ledger::LossLedger;
pub(crate) use maps::{MapCells, MapGrid};

use crate::engine::{Block, Level, Loss};

/// Books what it sees of every strike and loss into its own cells, as integers.
pub(crate) trait Observable: std::fmt::Debug + Send + Sync {
    /// Number of cells.
    fn outputs(&self) -> usize;

    /// Books a strike of every live lane.
    fn strike(&self, level: Level, block: &Block, cells: &mut [i128]);

    /// Books energy that left away from strikes.
    fn losses(&self, _losses: &[Loss], _cells: &mut [i128]) {}
}
