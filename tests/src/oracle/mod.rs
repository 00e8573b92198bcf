//! Closed forms and short integrals, written apart from the core: nothing here calls it.

pub mod chord;
pub mod mirror;
pub mod quadrature;
pub mod solid;
pub mod view;
