//! Arithmetic that gives the same bits everywhere: only + − × ÷ √, comparisons and our own polynomials.

pub(crate) mod angle;
pub(crate) mod order;
