//! What a run needs, compiled from an experiment.

use std::ops::Range;

use super::retire::Retirement;
use super::surfaces::Surfaces;
use crate::estimate::Fingerprint;
use crate::flight::Flight;
use crate::medium::Passage;
use crate::observe::Observable;
use crate::source::Emission;

/// A compiled experiment: a photon's history is a pure function of this, the seed and the photon's index.
#[derive(Debug)]
pub(crate) struct Plan {
    pub(crate) emission: Box<dyn Emission>,
    pub(crate) flight: Box<dyn Flight>,
    pub(crate) passage: Passage,
    pub(crate) surfaces: Surfaces,
    /// Whether any coating reflects as a mirror.
    pub(crate) mirrors: bool,
    pub(crate) retirement: Retirement,
    /// Observables with the cells that each has.
    pub(crate) observables: Vec<(Range<usize>, Box<dyn Observable>)>,
    /// Decides what photons do.
    pub(crate) history: Fingerprint,
    /// Decides what is counted too.
    pub(crate) totals: Fingerprint,
}

impl Plan {
    /// Number of cells of all observables.
    pub(crate) fn outputs(&self) -> usize {
        self.observables.last().map_or(0, |(cells, _)| cells.end)
    }
}
