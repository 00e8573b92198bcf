//! Arithmetic that gives the same bits everywhere: only + − × ÷ √, comparisons and our own polynomials.

pub(crate) mod angle;
mod exponential;
pub(crate) mod order;
mod quanta;
mod wave;

pub(crate) use exponential::{ln, one_minus_exp_neg, rough_exp2};
pub(crate) use order::{larger, smaller};
pub(crate) use quanta::{LaneSum, ONE, index_below, quanta, wide, wide_quanta};
pub(crate) use wave::sin_cos_turn;

/// Adding and subtracting 1.5 · 2⁵² rounds to an integer, ties to even, without a library call; the low bits of the
/// sum are that integer. Holds for |x| < 2⁵¹.
const MAGIC: f64 = 6_755_399_441_055_744.0;

/// The power of two next above a positive normal number (itself, if it is one).
pub(crate) fn power_of_two_above(x: f64) -> f64 {
    let mantissa = (1 << 52) - 1;
    let floor = f64::from_bits(x.to_bits() & !mantissa);
    if floor == x { x } else { 2.0 * floor }
}
