//! The loop: tasks of photons, a block of lanes, stages that each photon passes once per strike.

mod block;
mod level;
mod plan;
mod retire;
mod run;
mod streams;
mod surfaces;
mod task;
mod turn;

pub(crate) use block::{Block, Cause, LANES, Loss, NOWHERE};
pub use level::Level;
pub(crate) use level::Stage;
pub(crate) use plan::Plan;
pub(crate) use retire::Retirement;
pub use run::Progress;
pub(crate) use run::{EngineError, Order, run};
#[cfg(test)]
pub(crate) use streams::Streams;
pub(crate) use streams::{Lane, STREAM_VERSION};
pub(crate) use surfaces::{Surfaces, WallPlan};
