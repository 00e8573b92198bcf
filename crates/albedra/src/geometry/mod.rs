//! Shapes without light.

mod mesh;

pub use mesh::Mesh;
