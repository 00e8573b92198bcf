//! Energy that left away from strikes, by cause.

use super::Observable;
use crate::engine::{Block, Cause, Level, Loss};

/// Cells: medium, cut, untracked, roulette. What walls absorb and openings let out is the sum of their rows.
#[derive(Clone, Debug)]
pub(crate) struct LossLedger;

impl LossLedger {
    /// Cell of a cause.
    pub(crate) const fn cell(cause: Cause) -> usize {
        match cause {
            Cause::Medium => 0,
            Cause::Cut => 1,
            Cause::Untracked => 2,
            Cause::Roulette => 3,
        }
    }
}

impl Observable for LossLedger {
    fn outputs(&self) -> usize {
        4
    }

    fn strike(&self, _: Level, _: &Block, _: &mut [i128]) {}

    fn losses(&self, losses: &[Loss], cells: &mut [i128]) {
        for loss in losses {
            cells[Self::cell(loss.cause)] += i128::from(loss.quanta);
        }
    }
}
