//! Where the energy went, and what was counted on the way.

use pyo3::prelude::*;

use crate::estimate::Estimate;
use crate::records::{Columns, record};

record! {
    /// Where all the emitted energy went, in W for a steady lamp (J for a pulse).
    ///
    /// Examples
    /// --------
    /// >>> import albedra as al
    /// >>> box = al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.lambertian(0.5))
    /// >>> ledger = al.Experiment(box, al.Source.volume(flux=2.0)).trace(1000).ledger
    /// >>> ledger.emitted, ledger.closes
    /// (2.0, True)
    Ledger {
        /// All of it, in W.
        emitted: f64,
        /// Absorbed by walls and regions, in W.
        absorbed: Estimate,
        /// Left through openings, in W.
        escaped: Estimate,
        /// Absorbed by the medium, in W.
        medium: Estimate,
        /// Still on its way when the path or strike limit ended its photon, in W.
        cut: Estimate,
        /// Lost because no wall was found, in W.
        untracked: Estimate,
        /// Taken less given by roulette, in W; its expectation is 0.
        roulette: Estimate,
        /// Whether everything that was emitted is accounted for, to the last integer.
        closes: bool,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Ledger {
    pub(crate) fn of(ledger: &albedra::Ledger) -> Self {
        let watts = |estimate| Estimate::of(estimate, "W");
        Self {
            emitted: ledger.emitted,
            absorbed: watts(ledger.absorbed),
            escaped: watts(ledger.escaped),
            medium: watts(ledger.medium),
            cut: watts(ledger.cut),
            untracked: watts(ledger.untracked),
            roulette: watts(ledger.roulette),
            closes: ledger.closes(),
        }
    }
}

record! {
    /// Radiant flux of a wall, region or opening in W (for a pulse: energy in J).
    Flux {
        /// Everything that meets it, in W.
        incident: Estimate,
        /// What meets it straight from the source, in W.
        direct: Estimate,
        /// What it absorbs, in W.
        absorbed: Estimate,
        /// What it reflects, in W.
        reflected: Estimate,
        /// What leaves through it, if it is an opening, in W.
        escaped: Estimate,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Flux {
    pub(crate) fn of(flux: &albedra::Flux) -> Self {
        let watts = |estimate| Estimate::of(estimate, "W");
        Self {
            incident: watts(flux.incident),
            direct: watts(flux.direct),
            absorbed: watts(flux.absorbed),
            reflected: watts(flux.reflected),
            escaped: watts(flux.escaped),
        }
    }
}

record! {
    /// What happened on the way, counted over all photons.
    Counters {
        /// Strikes on surfaces.
        strikes: u64,
        /// Flights.
        flights: u64,
        /// Flights for which a wall was found at the second try only.
        retried: u64,
        /// Photons for which no wall was found.
        untracked: u64,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Counters {
    pub(crate) fn of(counters: albedra::Counters) -> Self {
        Self {
            strikes: counters.strikes,
            flights: counters.flights,
            retried: counters.retried,
            untracked: counters.untracked,
        }
    }
}

record! {
    /// What is known before any photon is traced.
    Facts {
        /// Volume in m³.
        volume: f64,
        /// Area of all walls in m².
        area: f64,
        /// Mean chord 4V/S in m.
        mean_chord: f64,
        /// Area of the openings over that of everything.
        opening_fraction: f64,
        /// Reflectance averaged over the area, openings counted as 0.
        mean_reflectance: f64,
        /// Decay time in s expected from 4V/S, the mean reflectance and the medium's absorption.
        expected_decay_time: f64,
        /// Whether flights that start on surfaces must have the mean 4V/S.
        mean_chord_must_hold: bool,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Facts {
    pub(crate) fn of(facts: &albedra::Facts) -> Self {
        Self {
            volume: facts.volume,
            area: facts.area,
            mean_chord: facts.mean_chord,
            opening_fraction: facts.opening_fraction,
            mean_reflectance: facts.mean_reflectance,
            expected_decay_time: facts.expected_decay_time,
            mean_chord_must_hold: facts.mean_chord_must_hold,
        }
    }
}

record! {
    /// The relative uncertainty that was wanted, and what came of it.
    Target {
        /// Name of the output.
        output: String,
        /// Relative standard uncertainty wanted.
        relative: f64,
        /// Relative standard uncertainty reached.
        reached: f64,
        /// Whether the target was met.
        met: bool,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Target {
    pub(crate) fn of(target: &albedra::Target) -> Self {
        Self {
            output: target.output.clone(),
            relative: target.relative,
            reached: target.reached,
            met: target.met(),
        }
    }
}

record! {
    /// How far a run is.
    Progress {
        /// Photons that have ended so far.
        done: u64,
        /// Photons wanted.
        wanted: u64,
        /// Time since the run began, in s.
        elapsed: f64,
        /// Photons a second so far.
        rate: f64,
        /// Expected time until the end, in s; None before the first photon has ended.
        left: Option<f64>,
        /// Relative standard uncertainty so far of the target's output, or of the mean path; None if unknown.
        relative_uncertainty: Option<f64>,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Progress {
    pub(crate) fn of(progress: &albedra::Progress) -> Self {
        Self {
            done: progress.done,
            wanted: progress.wanted,
            elapsed: progress.elapsed.as_secs_f64(),
            rate: progress.rate(),
            left: progress.left().map(|left| left.as_secs_f64()),
            relative_uncertainty: progress.relative_uncertainty,
        }
    }
    /// The last word of a run of so many photons.
    pub(crate) fn ended(photons: u64, last: Option<&albedra::Progress>) -> Self {
        let elapsed = last.map_or(0.0, |last| last.elapsed.as_secs_f64());
        Self {
            done: photons,
            wanted: photons,
            elapsed,
            rate: if elapsed > 0.0 {
                photons as f64 / elapsed
            } else {
                0.0
            },
            left: Some(0.0),
            relative_uncertainty: last.and_then(|last| last.relative_uncertainty),
        }
    }
}
