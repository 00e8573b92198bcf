//! Kernels that find the next strike.

pub(crate) mod hierarchy;
