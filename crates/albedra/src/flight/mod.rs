//! Next-strike kernels, one file each.

mod facets;
mod hierarchy;
mod planes;

pub(crate) use facets::Facets;
pub(crate) use hierarchy::{Hierarchy, Triangles};
pub(crate) use planes::Planes;

use crate::engine::{Block, Level};

/// What kernels count besides strikes.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct Retries {
    /// Photons that found a wall only from the nearest surface.
    pub(crate) retried: u64,
}

/// Finds the next surface of every photon.
pub(crate) trait Flight: std::fmt::Debug + Send + Sync {
    /// Moves each live lane's photon to its next strike: sets `flight`, `position` (on the surface), `surface` and the
    /// inward `normal`; lanes that found no wall are listed in `missed`.
    fn next(&self, level: Level, block: &mut Block, retries: &mut Retries);
}
