//! Closed forms, published values and the assertions that hold the core to them.
//!
//! `src/` has the oracles and the statistics, `tests/` the runs. A run has a fast slice that is always on and a long
//! version behind `#[ignore]`. Both fix their seeds and fail where p < 7·10⁻⁶ ([`LIMIT`]).

mod calibration;
mod checks;
pub mod oracle;
mod records;
pub mod rig;
pub mod special;

pub use calibration::{Calibration, calibrate};
pub use checks::{Checks, LIMIT, Measured};
pub use records::{Record, record, records};
pub use rig::Budget;
