//! Bookings are whole numbers of quanta of 2⁻⁶⁰, so that their sums do not depend on the order.

use super::MAGIC;

/// Quanta in 1, the weight that a photon starts with.
pub(crate) const ONE: i64 = 1 << 60;

const HALF_WAY: f64 = (1_u64 << 30) as f64;

/// Rounds `x` (|x| < 2²⁰) to quanta of 2⁻⁶⁰, as a high part in units of 2³⁰ quanta and a low part, |low| ≤ 2²⁹.
#[inline(always)]
fn split_quanta(x: f64) -> (i64, i64) {
    let (high, low) = shifted_quanta(x);
    let integer = |bits: u64| bits.wrapping_sub(MAGIC.to_bits()).cast_signed();
    (integer(high), integer(low))
}

/// The parts of [`split_quanta`], each still with the bits of `MAGIC` on top.
#[inline(always)]
fn shifted_quanta(x: f64) -> (u64, u64) {
    let scaled = x * HALF_WAY;
    let high = scaled + MAGIC;
    let rest = scaled - (high - MAGIC);
    let low = rest * HALF_WAY + MAGIC;
    (high.to_bits(), low.to_bits())
}

/// A sum of quanta in a loop over at most 2²⁰ lanes, in 64 bits so that the loop vectorises.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct LaneSum {
    high: u64,
    low: u64,
}

impl LaneSum {
    /// Adds `x` (|x| < 2²⁰), rounded to quanta.
    #[inline(always)]
    pub(crate) fn add(&mut self, x: f64) {
        let (high, low) = shifted_quanta(x);
        self.high = self.high.wrapping_add(high);
        self.low = self.low.wrapping_add(low);
    }

    /// Adds quanta that are not negative.
    #[inline(always)]
    pub(crate) fn add_whole(&mut self, quanta: i64) {
        let quanta = quanta.cast_unsigned();
        self.high = self.high.wrapping_add(quanta >> 30);
        self.low = self.low.wrapping_add(quanta & ((1 << 30) - 1));
    }

    /// The sum, after `add` was called so many times.
    pub(crate) fn quanta(self, adds: usize) -> i128 {
        let top = MAGIC.to_bits().wrapping_mul(adds as u64);
        let integer = |sum: u64| i128::from(sum.wrapping_sub(top).cast_signed());
        (integer(self.high) << 30) + integer(self.low)
    }
}

/// Rounds `x` (|x| ≤ 1) to the nearest number of quanta of 2⁻⁶⁰, ties to even.
#[inline(always)]
pub(crate) fn quanta(x: f64) -> i64 {
    let (high, low) = split_quanta(x);
    (high << 30).wrapping_add(low)
}

/// Rounds `x` (|x| < 2²⁰) to the nearest number of quanta of 2⁻⁶⁰, ties to even.
#[inline(always)]
pub(crate) fn wide_quanta(x: f64) -> i128 {
    let (high, low) = split_quanta(x);
    (i128::from(high) << 30) + i128::from(low)
}

/// Quanta that are not negative, in 128 bits; spares the loops that book them the sign.
#[inline(always)]
pub(crate) fn wide(quanta: i64) -> i128 {
    i128::from(quanta.cast_unsigned())
}

/// The integer part of `x`, but at most `count` − 1: the index among `count` items; a whole number may give the integer
/// below it.
///
/// `x` must not be negative; what is not a number gives the last index.
#[inline(always)]
pub(crate) fn index_below(x: f64, count: f64) -> u64 {
    // Capped at the whole number instead, half of one less would be a tie, which rounds to `count` where that is even.
    let most = count - 0.75;
    let capped = if x < most { x } else { most };
    let half = capped - 0.5;
    let from = if half > 0.0 { half } else { 0.0 };
    (from + MAGIC).to_bits().wrapping_sub(MAGIC.to_bits())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quanta_are_exact_where_a_number_has_no_finer_bits() {
        assert_eq!(quanta(1.0), ONE);
        assert_eq!(quanta(0.0), 0);
        assert_eq!(quanta(-0.5), -ONE / 2);
        let mut x = 1.0_f64;
        for k in 0..60 {
            assert_eq!(quanta(x), ONE >> k);
            x *= 0.5;
        }
        assert_eq!(quanta(0.49 / ONE as f64), 0);
        assert_eq!(quanta(0.51 / ONE as f64), 1);
    }

    #[test]
    fn quanta_equal_wide_integer_rounding() {
        let mut x = 0.999_f64;
        while x > 1e-20 {
            // x · 2^60 is exact in f64, and whole from 2^52 on.
            let exact = x * (ONE as f64);
            let whole = exact >= 4_503_599_627_370_496.0;
            let up = (exact + 0.5) as i64;
            let tie = !whole && exact - (exact as i64) as f64 == 0.5;
            let nearest = if whole {
                exact as i64
            } else {
                up - i64::from(tie && up % 2 == 1)
            };
            assert_eq!(quanta(x), nearest, "{x}");
            x *= 0.973;
        }
    }

    #[test]
    fn sums_over_lanes_equal_sums_of_quanta() {
        let values = || (0..4000).map(|k| 0.37_f64 * f64::from(k) - 12.3);
        let (mut sum, mut whole) = (LaneSum::default(), LaneSum::default());
        values().for_each(|x| sum.add(x));
        assert_eq!(sum.quanta(4000), values().map(wide_quanta).sum());
        (0..4000).for_each(|k| whole.add_whole(ONE - k));
        assert_eq!(
            whole.quanta(0),
            (0..4000).map(|k| i128::from(ONE - k)).sum()
        );
    }

    #[test]
    fn index_stays_within_its_range() {
        for count in 1..=70_u32 {
            let all = f64::from(count);
            for beyond in [all - 0.1, all, all + 0.25, 2.0 * all, 1e300, f64::NAN] {
                assert_eq!(
                    index_below(beyond, all),
                    u64::from(count - 1),
                    "{beyond} of {count}"
                );
            }
            for k in 0..count {
                assert_eq!(index_below(f64::from(k) + 0.1, all), u64::from(k));
                assert_eq!(index_below(f64::from(k) + 0.9, all), u64::from(k));
                let whole = index_below(f64::from(k), all);
                assert!(whole == u64::from(k) || whole + 1 == u64::from(k));
            }
        }
    }
}
