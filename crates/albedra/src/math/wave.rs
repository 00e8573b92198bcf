//! Sine and cosine of a fraction of a turn.

use super::MAGIC;

/// `(sin 2πx, cos 2πx)` for 0 ≤ x ≤ 1, absolute error below 1e-15; exact at multiples of a quarter.
///
/// # Method
///
/// Reduction to |angle| ≤ π/4 around the nearest quarter turn, Taylor polynomials of degree 15 and 16, swap and signs
/// from the quarter's low bits. There are no branches, so loops over lanes vectorise.
#[inline(always)]
pub(crate) fn sin_cos_turn(x: f64) -> (f64, f64) {
    let shifted = x * 4.0 + MAGIC;
    let quarter = shifted.to_bits();
    let angle = (x * 4.0 - (shifted - MAGIC)) * (0.5 * std::f64::consts::PI);
    let q = angle * angle;

    let s = -1.0 / 1_307_674_368_000.0;
    let s = s * q + 1.0 / 6_227_020_800.0;
    let s = s * q - 1.0 / 39_916_800.0;
    let s = s * q + 1.0 / 362_880.0;
    let s = s * q - 1.0 / 5_040.0;
    let s = s * q + 1.0 / 120.0;
    let s = s * q - 1.0 / 6.0;
    let sine = angle + angle * q * s;

    let c = 1.0 / 20_922_789_888_000.0;
    let c = c * q - 1.0 / 87_178_291_200.0;
    let c = c * q + 1.0 / 479_001_600.0;
    let c = c * q - 1.0 / 3_628_800.0;
    let c = c * q + 1.0 / 40_320.0;
    let c = c * q - 1.0 / 720.0;
    let c = c * q + 1.0 / 24.0;
    let cosine = 1.0 - 0.5 * q + q * q * c;

    // Quarters 1 and 3 swap the two; the sine changes its sign in quarters 2 and 3, the cosine in 1 and 2.
    let swap = 0_u64.wrapping_sub(quarter & 1);
    let (s, c) = (sine.to_bits(), cosine.to_bits());
    let sine_bits = (s & !swap) | (c & swap);
    let cosine_bits = (c & !swap) | (s & swap);
    let sine_sign = (quarter & 2) << 62;
    let cosine_sign = (quarter.wrapping_add(1) & 2) << 62;
    (
        f64::from_bits(sine_bits ^ sine_sign),
        f64::from_bits(cosine_bits ^ cosine_sign),
    )
}

#[cfg(test)]
#[expect(
    clippy::disallowed_methods,
    reason = "the platform's functions are the oracle here"
)]
mod tests {
    use super::*;

    #[test]
    fn agrees_with_the_platform() {
        for i in 0..=1_000_000 {
            let x = f64::from(i) / 1e6;
            let (sine, cosine) = sin_cos_turn(x);
            let (s, c) = (2.0 * std::f64::consts::PI * x).sin_cos();
            assert!(
                (sine - s).abs() < 1.5e-15 && (cosine - c).abs() < 1.5e-15,
                "{x}: {sine} {s}, {cosine} {c}"
            );
        }
        for (quarter, (s, c)) in [(0.0, 1.0), (1.0, 0.0), (0.0, -1.0), (-1.0, 0.0)]
            .into_iter()
            .enumerate()
        {
            assert_eq!(sin_cos_turn(quarter as f64 / 4.0), (s, c));
        }
    }
}
