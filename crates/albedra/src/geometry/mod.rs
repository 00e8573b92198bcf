//! Shapes without light.

mod import;
mod mesh;

pub use import::{ImportError, MeshFormat, Place, Unit, UnitError};
pub use mesh::Mesh;
