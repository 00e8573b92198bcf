//! Where light goes in a closed cavity: Monte Carlo photon transport with an uncertainty on every number.
//!
//! Lengths are metres, times seconds, angles radians, fluxes watts, absorption coefficients m⁻¹ (Napierian).

mod estimate;
mod flight;
mod geometry;
pub(crate) mod math;

pub use estimate::{
    BytesError, Counters, Estimate, Estimates, Fingerprint, FingerprintBuilder, FingerprintError,
    GROUPS, Intervals, IntervalsError, Jackknife, MergeError, Sums, Totals, WithUnit,
};
pub use geometry::{
    Audit, Frame, ImportError, Mesh, MeshFormat, OutlineError, Place, Problem, Region, RegionError,
    SolidError, Unit, UnitError,
};
