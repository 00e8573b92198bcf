//! Where all the emitted energy went.

use super::Outcome;
use super::named::LedgerKind;
use crate::engine::Cause;
use crate::estimate::Estimate;
use crate::math::ONE;
use crate::observe::FluxRows;

/// Where all the emitted energy went, in W for a steady lamp (J for a pulse).
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Ledger {
    /// All of it.
    pub emitted: f64,
    /// Absorbed by walls and regions.
    pub absorbed: Estimate,
    /// Left through openings.
    pub escaped: Estimate,
    /// Absorbed by the medium.
    pub medium: Estimate,
    /// Still on its way when the path or strike limit ended its photon.
    pub cut: Estimate,
    /// Lost because no wall was found.
    pub untracked: Estimate,
    /// Taken less given by roulette; its expectation is 0.
    pub roulette: Estimate,
    /// What is emitted less everything else, in quanta of 2⁻⁶⁰ of a photon's energy.
    pub open_quanta: i128,
}

impl Ledger {
    /// Whether everything that was emitted is accounted for, to the last integer.
    pub fn closes(&self) -> bool {
        self.open_quanta == 0
    }
}

impl Outcome {
    /// Where all the emitted energy went.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let ledger = outcome.ledger();
    /// assert!(ledger.closes());
    /// let sum = ledger.absorbed.value + ledger.escaped.value + ledger.roulette.value;
    /// assert!((sum - ledger.emitted).abs() < 1e-12);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn ledger(&self) -> Ledger {
        let jackknife = self.jackknife();
        let of = |kind| self.layout.of_ledger(kind).estimate(&jackknife);
        Ledger {
            emitted: self.layout.watts,
            absorbed: of(LedgerKind::Absorbed),
            escaped: of(LedgerKind::Escaped),
            medium: of(LedgerKind::Loss(Cause::Medium)),
            cut: of(LedgerKind::Loss(Cause::Cut)),
            untracked: of(LedgerKind::Loss(Cause::Untracked)),
            roulette: of(LedgerKind::Loss(Cause::Roulette)),
            open_quanta: self.open_quanta(),
        }
    }

    fn open_quanta(&self) -> i128 {
        let rows = (0..self.layout.rows.len()).map(|row| self.layout.rows_at + FluxRows::lost(row));
        let losses = (0..4).map(|cell| self.layout.losses_at + cell);
        let emitted = i128::from(self.photons()) * i128::from(ONE);
        // No run leaves the range; totals put together by hand may, and must not panic.
        rows.chain(losses)
            .flat_map(|cell| self.totals.groups()[cell])
            .fold(emitted, |open, quanta| open.wrapping_sub(quanta))
    }
}
