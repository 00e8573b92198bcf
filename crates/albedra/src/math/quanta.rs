//! Bookings are whole numbers of quanta of 2⁻⁶⁰, so that their sums do not depend on the order.

use super::MAGIC;

/// Quanta in 1, the weight that a photon starts with.
pub(crate) const ONE: i64 = 1 << 60;

const HALF_WAY: f64 = (1_u64 << 30) as f64;

/// Rounds `x` (|x| < 2²⁰) to quanta of 2⁻⁶⁰, as a high part in units of 2³⁰ quanta and a low part, |low| ≤ 2²⁹.
#[inline(always)]
pub(crate) fn split_quanta(x: f64) -> (i64, i64) {
    let scaled = x * HALF_WAY;
    let high = scaled + MAGIC;
    let rest = scaled - (high - MAGIC);
    let low = rest * HALF_WAY + MAGIC;
    let integer = |sum: f64| sum.to_bits().wrapping_sub(MAGIC.to_bits()).cast_signed();
    (integer(high), integer(low))
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
