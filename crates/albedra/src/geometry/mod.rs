//! Shapes without light.

mod boundary;
mod clip;
mod curve;
mod frame;
mod mesh;
mod outline;
mod outline_check;
mod polygon;
mod region;
mod region_shape;
pub(crate) mod solids;
pub(crate) mod triangulate;
pub(crate) mod visible_area;
mod wall_plane;

pub use frame::Frame;
pub use mesh::Mesh;
pub use outline_check::OutlineError;
pub use region::{Region, RegionError};
pub use solids::SolidError;
