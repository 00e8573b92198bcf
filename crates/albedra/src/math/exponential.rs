//! Exponential and natural logarithm.

use super::MAGIC;

const LN2_HIGH: f64 = 6.931_471_803_691_238e-1;
const LN2_LOW: f64 = 1.908_214_929_270_587_7e-10;

/// eˣ for x ≤ 709, relative error below 1e-15; 0 below −708.
#[inline(always)]
pub(crate) fn exp(x: f64) -> f64 {
    let capped = if x > -708.0 { x } else { -708.0 };
    let shifted = capped * std::f64::consts::LOG2_E + MAGIC;
    let k = shifted - MAGIC;
    let r = (capped - k * LN2_HIGH) - k * LN2_LOW;
    let p = 1.0 / 6_227_020_800.0;
    let p = p * r + 1.0 / 479_001_600.0;
    let p = p * r + 1.0 / 39_916_800.0;
    let p = p * r + 1.0 / 3_628_800.0;
    let p = p * r + 1.0 / 362_880.0;
    let p = p * r + 1.0 / 40_320.0;
    let p = p * r + 1.0 / 5_040.0;
    let p = p * r + 1.0 / 720.0;
    let p = p * r + 1.0 / 120.0;
    let p = p * r + 1.0 / 24.0;
    let p = p * r + 1.0 / 6.0;
    let p = p * r + 0.5;
    let p = (p * r) * r + r + 1.0;
    let exponent = shifted
        .to_bits()
        .wrapping_sub(MAGIC.to_bits())
        .wrapping_add(1023)
        << 52;
    if x > -708.0 {
        p * f64::from_bits(exponent)
    } else {
        0.0
    }
}

/// About 2ˣ for |x| < 1000: exact at whole numbers, straight lines between, so at most 6.2 % too large.
///
/// For thresholds that need no more; a fifth of the work of [`exp`].
#[inline(always)]
pub(crate) fn rough_exp2(x: f64) -> f64 {
    // Adding 1.5 · 2³² leaves x in units of 2⁻²⁰ in the low bits, which become exponent and mantissa.
    const SHIFT: f64 = 6_442_450_944.0;
    let fixed = (x + SHIFT).to_bits().wrapping_sub(SHIFT.to_bits());
    f64::from_bits(fixed.wrapping_add(1023 << 20) << 32)
}

/// 1 − e⁻ˣ for x ≥ 0, without the cancellation for small x.
#[inline(always)]
pub(crate) fn one_minus_exp_neg(x: f64) -> f64 {
    let series = x * (1.0 - x * (0.5 - x * (1.0 / 6.0 - x * (1.0 / 24.0 - x * (1.0 / 120.0)))));
    let direct = 1.0 - exp(-x);
    if x < 1.0 / 1024.0 { series } else { direct }
}

/// ln x for positive normal x, relative error below 1e-15 away from 1, absolute error below 1e-16 near it.
#[inline(always)]
pub(crate) fn ln(x: f64) -> f64 {
    // x = m · 2^k with m in [√½, √2).
    let bits = x.to_bits().wrapping_sub(0x3FE6_A09E_667F_3BCD);
    let k = (bits.cast_signed() >> 52) as f64;
    let m = f64::from_bits((bits & 0x000F_FFFF_FFFF_FFFF).wrapping_add(0x3FE6_A09E_667F_3BCD));
    let s = (m - 1.0) / (m + 1.0);
    let q = s * s;
    let p = 1.0 / 21.0;
    let p = p * q + 1.0 / 19.0;
    let p = p * q + 1.0 / 17.0;
    let p = p * q + 1.0 / 15.0;
    let p = p * q + 1.0 / 13.0;
    let p = p * q + 1.0 / 11.0;
    let p = p * q + 1.0 / 9.0;
    let p = p * q + 1.0 / 7.0;
    let p = p * q + 1.0 / 5.0;
    let p = p * q + 1.0 / 3.0;
    let near_one = 2.0 * s + 2.0 * s * q * p;
    k * LN2_HIGH + (near_one + k * LN2_LOW)
}

#[cfg(test)]
#[expect(
    clippy::disallowed_methods,
    reason = "the platform's functions are the oracle here"
)]
mod tests {
    use super::*;

    #[test]
    fn agree_with_the_platform() {
        for i in 0..200_000 {
            let x = -700.0 + f64::from(i) * 0.004;
            assert!((exp(x) / x.exp() - 1.0).abs() < 1e-15, "exp({x})");
        }
        for i in 1..400_000 {
            let x = f64::from(i) * 1e-5;
            assert!(
                (ln(x) - x.ln()).abs() <= 4e-16 * (1.0 + x.ln().abs()),
                "ln({x})"
            );
        }
        assert_eq!(ln(1.0), 0.0);
        assert_eq!(exp(0.0), 1.0);
        assert_eq!(exp(-800.0), 0.0);
        assert!((ln(1e-300) / 1e-300_f64.ln() - 1.0).abs() < 1e-15);
    }

    #[test]
    fn rough_powers_lie_on_straight_lines() {
        for k in -200..200 {
            let (low, x) = (2_f64.powi(k), f64::from(k));
            assert_eq!(rough_exp2(x), low);
            assert_eq!(rough_exp2(x + 0.25), 1.25 * low);
            assert!((rough_exp2(x + 0.7) / (1.7 * low) - 1.0).abs() < 1e-6);
        }
    }

    #[test]
    fn small_losses_keep_their_digits() {
        for x in [
            0.0_f64, 1e-300, 1e-18, 1e-9, 1e-4, 9e-4, 0.5, 3.0, 50.0, 900.0,
        ] {
            let exact = -(-x).exp_m1();
            assert!(
                (one_minus_exp_neg(x) - exact).abs() <= 3e-13 * exact,
                "1 - exp(-{x})"
            );
        }
    }
}
