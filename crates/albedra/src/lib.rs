//! Where light goes in a closed cavity: Monte Carlo photon transport with an uncertainty on every number.
//!
//! Lengths are metres, times seconds, angles radians, fluxes watts, absorption coefficients m⁻¹ (Napierian).

mod coating;
mod enclosure;
mod engine;
mod estimate;
mod experiment;
mod flight;
mod geometry;
pub(crate) mod math;
mod medium;
mod near;
mod observe;
mod outcome;
mod source;

pub use coating::{Coating, CoatingError};
pub use enclosure::{Enclosure, EnclosureError, WallView};
pub use engine::{Level, Progress};
pub use estimate::{
    BytesError, Counters, Estimate, Estimates, Fingerprint, FingerprintBuilder, FingerprintError,
    GROUPS, Intervals, IntervalsError, Jackknife, MergeError, Sums, Totals, WithUnit,
};
pub use experiment::{
    Experiment, ExperimentError, Facts, MapRequest, Row, RunError, Settings, TextError, TimeGrid,
    TimeGridError, Trace,
};
pub use geometry::{
    Audit, Figure, Frame, ImportError, Mesh, MeshFormat, OutlineError, Place, Problem, Region,
    RegionError, SolidError, Unit, UnitError,
};
pub use medium::{Medium, MediumError, SPEED_OF_LIGHT};
pub use near::Near;
pub use outcome::{
    Curve, Decay, DecayTime, FlightHistogram, Flux, Ledger, LoadError, Map, Outcome, Target,
};
pub use source::{Place as SourcePlace, Source, Spread};

/// The README's example is a test too.
#[cfg(doctest)]
#[doc = include_str!("../../../README.md")]
struct Readme;
