//! Shapes without light.

mod audit;
mod boundary;
mod clip;
mod convex;
mod curve;
mod facet;
mod frame;
mod import;
mod mesh;
mod mesh_bytes;
mod outline;
mod outline_check;
mod polygon;
mod region;
mod region_shape;
mod solids;
mod triangulate;
mod visible_area;
mod wall_plane;

pub use audit::{Audit, Problem};
pub(crate) use convex::{ConvexPlane, convex_planes};
pub(crate) use facet::facet_area_normal;
pub use frame::Frame;
pub use import::{ImportError, MeshFormat, Place, Unit, UnitError};
pub use mesh::Mesh;
pub use outline_check::OutlineError;
pub use region::{Figure, Region, RegionError};
pub(crate) use region_shape::RegionShape;
pub use solids::SolidError;
pub(crate) use solids::{cuboid, extruded, prism};
pub(crate) use triangulate::triangulate_facet;
pub(crate) use visible_area::visible_areas;
pub(crate) use wall_plane::{PlanarWall, planar_walls};
