//! What the benches share: the cases that speed is measured on.
//!
//! `benches/` holds criterion's benches by layer, `src/bin/contender.rs` runs one case for `peers/run_peers.py`, and
//! `peers/` holds the programs that a speed claim is measured against.

mod case;

pub use case::{Case, CaseError};
