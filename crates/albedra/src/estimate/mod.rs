//! Exact totals, and numbers with an uncertainty made from them.

mod bytes;
mod fingerprint;
mod format;
mod intervals;
mod jackknife;
mod student;
mod sums;
mod totals;
mod upper;
mod value;

pub use bytes::BytesError;
pub use fingerprint::{Fingerprint, FingerprintBuilder, FingerprintError};
pub use format::WithUnit;
pub use intervals::{Intervals, IntervalsError};
pub use jackknife::{Estimates, Jackknife};
pub use sums::Sums;
pub use totals::{Counters, GROUPS, MergeError, Totals};
pub use value::Estimate;
