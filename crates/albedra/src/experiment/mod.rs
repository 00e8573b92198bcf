//! Enclosure, sources and what to observe, put together.

mod compile;
mod error;
mod facts;
mod fingerprint;
mod grid;
mod ground;
mod layout;
mod observing;
mod sites;
mod text;
mod trace;

use serde::{Deserialize, Serialize};

pub(crate) use compile::compile;
pub use error::ExperimentError;
pub use grid::{TimeGrid, TimeGridError};
pub(crate) use layout::Layout;
pub use layout::{Facts, Row};
pub use text::TextError;
pub use trace::{RunError, Trace};

use crate::enclosure::Enclosure;
use crate::source::Source;

/// An enclosure, the sources in it and what to observe: immutable, with no randomness in it.
///
/// Everything is checked when it is traced.
///
/// # Examples
///
/// ```
/// use albedra::{Coating, Enclosure, Experiment, Source, TimeGrid};
///
/// let white = Coating::lambertian(0.9)?;
/// let chamber = Enclosure::cuboid([1.2, 0.8, 0.5])?.coated(white);
/// let lamp = Source::point([0.2, 0.0, 0.0]).flux(5.0);
/// let outcome = Experiment::new(&chamber, lamp)
///     .time(TimeGrid::new(100e-9, 50)?)
///     .map("z-", (12, 8))
///     .trace(20_000)
///     .seed(7)
///     .run()?;
/// assert!(outcome.ledger().closes());
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct Experiment {
    pub(crate) enclosure: Enclosure,
    pub(crate) settings: Settings,
}

/// All of an experiment but its enclosure.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
#[non_exhaustive]
pub struct Settings {
    /// Printed with an outcome; has no influence on it.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub title: String,
    /// Path in metres after which photons end.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub path_limit: Option<f64>,
    /// Memory in bytes that outputs may take.
    pub memory: u64,
    /// The time grid, if one was set.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub time: Option<TimeGrid>,
    /// The sources.
    pub sources: Vec<Source>,
    /// The maps that were asked for.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub maps: Vec<MapRequest>,
}

/// A map that was asked for.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct MapRequest {
    /// The wall.
    pub wall: String,
    /// Cells along u and v.
    pub cells: [usize; 2],
}

/// Memory that outputs may take unless told otherwise: 1 GiB.
const MEMORY: u64 = 1 << 30;

impl Experiment {
    /// Puts a source into an enclosure.
    pub fn new(enclosure: &Enclosure, source: Source) -> Self {
        let settings = Settings {
            title: String::new(),
            path_limit: None,
            memory: MEMORY,
            time: None,
            sources: vec![source],
            maps: Vec::new(),
        };
        Self {
            enclosure: enclosure.clone(),
            settings,
        }
    }

    /// Adds another source; each photon starts from one of them, chosen in proportion to their flux.
    #[must_use]
    pub fn and(mut self, source: Source) -> Self {
        self.settings.sources.push(source);
        self
    }

    /// Sets the time grid. Without one there are 200 bins up to ten times the expected decay time.
    #[must_use]
    pub fn time(mut self, grid: TimeGrid) -> Self {
        self.settings.time = Some(grid);
        self
    }

    /// Asks for a map of the irradiance of a planar wall, with so many cells along its u and v.
    #[must_use]
    pub fn map(mut self, wall: impl Into<String>, (u, v): (usize, usize)) -> Self {
        self.settings.maps.push(MapRequest {
            wall: wall.into(),
            cells: [u, v],
        });
        self
    }

    /// Ends photons at their first strike after this path in metres; what they still carry is booked as cut.
    #[must_use]
    pub fn path_limit(mut self, metres: f64) -> Self {
        self.settings.path_limit = Some(metres);
        self
    }

    /// Sets the memory in bytes that outputs may take; 1 GiB unless told otherwise, and at most 2⁶³ − 1.
    #[must_use]
    pub fn memory(mut self, bytes: u64) -> Self {
        // The text form has no larger integers.
        self.settings.memory = bytes.min(i64::MAX.cast_unsigned());
        self
    }

    /// Gives the experiment a title, which is printed with its outcome and has no influence on it.
    #[must_use]
    pub fn title(mut self, text: impl Into<String>) -> Self {
        self.settings.title = text.into();
        self
    }

    /// The enclosure.
    pub fn enclosure(&self) -> &Enclosure {
        &self.enclosure
    }

    /// Title, sources, time grid, maps and limits.
    pub fn settings(&self) -> &Settings {
        &self.settings
    }

    /// The sources.
    pub fn sources(&self) -> &[Source] {
        &self.settings.sources
    }

    /// Checks everything that would be checked before a run.
    ///
    /// # Errors
    ///
    /// The first thing that is wrong.
    pub fn check(&self) -> Result<(), ExperimentError> {
        compile::compile(self).map(|_| ())
    }

    /// Prepares a run of so many photons.
    #[must_use = "a trace does nothing until it is run"]
    pub fn trace(&self, photons: u64) -> Trace<'_> {
        Trace::new(self, photons)
    }
}
