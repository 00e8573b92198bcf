//! Sines, cosines and their inverses from + − × ÷ √ alone, for set-up code.
//!
//! All results are within about 1e-15 of the exact value (absolute; angles in radians).

use std::f64::consts::{FRAC_1_SQRT_2, FRAC_PI_2, FRAC_PI_4, PI};

/// Sine and cosine of `2πx`: exact where `x` is a multiple of 1/4, and NaN where `x` is not finite.
///
/// `sin` is exactly odd and `cos` exactly even in `x`.
pub(crate) fn sin_cos_turns(x: f64) -> (f64, f64) {
    if !x.is_finite() {
        return (f64::NAN, f64::NAN);
    }
    let size = x.abs();
    // From 2^53 on every number is a whole number of turns.
    let part = if size < 9_007_199_254_740_992.0 {
        size - size.trunc()
    } else {
        0.0
    };
    let quarters = 4.0 * part;
    let nearest = (quarters + 0.5).trunc();
    // Both differences are exact, so all rounding happens within an eighth of a turn.
    #[expect(
        clippy::cast_possible_truncation,
        clippy::cast_sign_loss,
        reason = "`nearest` is one of 0, 1, 2, 3, 4"
    )]
    let (sin, cos) = in_quadrant(nearest as u64, quarters - nearest);
    (if x < 0.0 { -sin } else { sin }, cos)
}

/// Sine and cosine of the angle `part / parts` of a turn, with the mirror symmetries of the regular polygon kept exactly.
///
/// NaN if `parts` is zero.
pub(crate) fn sin_cos_parts(part: u32, parts: u32) -> (f64, f64) {
    if parts == 0 {
        return (f64::NAN, f64::NAN);
    }
    let (part, parts) = (u64::from(part % parts), u64::from(parts));
    let nearest = (8 * part + parts) / (2 * parts);
    // An integer difference: the only rounding is that of the quotient, whatever the quadrant.
    let offset = if 4 * part >= nearest * parts {
        (4 * part - nearest * parts) as f64
    } else {
        -((nearest * parts - 4 * part) as f64)
    };
    in_quadrant(nearest, offset / parts as f64)
}

/// Sine and cosine of `quadrant + offset` right angles, where `offset` is within ±1/2.
fn in_quadrant(quadrant: u64, offset: f64) -> (f64, f64) {
    let (sin, cos) = if offset.abs() == 0.5 {
        (
            if offset < 0.0 {
                -FRAC_1_SQRT_2
            } else {
                FRAC_1_SQRT_2
            },
            FRAC_1_SQRT_2,
        )
    } else {
        small_sin_cos(offset * FRAC_PI_2)
    };
    // Adding zero turns −0 into 0.
    let (sin, cos) = match quadrant % 4 {
        0 => (sin, cos),
        1 => (cos, -sin),
        2 => (-sin, -cos),
        _ => (-cos, sin),
    };
    (sin + 0.0, cos + 0.0)
}

/// Taylor polynomials of degree 17 and 16 on `|x| ≤ π/4`; the first terms left out are below 1e-18.
fn small_sin_cos(x: f64) -> (f64, f64) {
    const SIN: [f64; 8] = [
        -1.0 / 6.0,
        1.0 / 120.0,
        -1.0 / 5_040.0,
        1.0 / 362_880.0,
        -1.0 / 39_916_800.0,
        1.0 / 6_227_020_800.0,
        -1.0 / 1_307_674_368_000.0,
        1.0 / 355_687_428_096_000.0,
    ];
    const COS: [f64; 8] = [
        -1.0 / 2.0,
        1.0 / 24.0,
        -1.0 / 720.0,
        1.0 / 40_320.0,
        -1.0 / 3_628_800.0,
        1.0 / 479_001_600.0,
        -1.0 / 87_178_291_200.0,
        1.0 / 20_922_789_888_000.0,
    ];
    let square = x * x;
    let horner = |terms: &[f64; 8]| {
        terms
            .iter()
            .rev()
            .fold(0.0, |sum, term| sum * square + term)
    };
    (x + x * (square * horner(&SIN)), 1.0 + square * horner(&COS))
}

/// Angle in radians, in `[−π, π]`, of the point `(x, y)`, with the signs of zeros and infinities as IEEE 754 has them.
pub(crate) fn atan2(y: f64, x: f64) -> f64 {
    if y.is_nan() || x.is_nan() {
        return f64::NAN;
    }
    let (rise, run) = (y.abs(), x.abs());
    let first = if rise == 0.0 && run == 0.0 {
        0.0
    } else if rise == run {
        FRAC_PI_4
    } else if rise < run {
        atan_of_fraction(rise / run)
    } else {
        FRAC_PI_2 - atan_of_fraction(run / rise)
    };
    let angle = if x.is_sign_negative() {
        PI - first
    } else {
        first
    };
    if y.is_sign_negative() { -angle } else { angle }
}

/// Arc tangent of a number in `[0, 1]`.
fn atan_of_fraction(tangent: f64) -> f64 {
    // The limit is tan(π/8), so that the series' argument stays within it.
    let (base, t) = if tangent > 0.414_213_562_373_095_1 {
        (FRAC_PI_4, (tangent - 1.0) / (tangent + 1.0))
    } else {
        (0.0, tangent)
    };
    let square = t * t;
    // Gregory's series up to t⁴¹/41; what is left out is below 1e-17 of the result.
    let sum = (1..=20_u32)
        .rev()
        .fold(0.0, |sum, k| square * (1.0 / f64::from(2 * k + 1) - sum));
    base + (t - t * sum)
}

/// Arc cosine in radians, NaN outside `[−1, 1]`.
#[cfg(test)]
pub(crate) fn acos(x: f64) -> f64 {
    atan2(((1.0 - x) * (1.0 + x)).sqrt(), x)
}

#[cfg(test)]
#[expect(
    clippy::disallowed_methods,
    reason = "the platform's functions are the reference here"
)]
mod tests {
    use super::*;

    #[test]
    fn quarter_turns_are_exact() {
        let quarters = [(0.0, 1.0), (1.0, 0.0), (0.0, -1.0), (-1.0, 0.0)];
        for n in -40_i32..40 {
            let found = sin_cos_turns(f64::from(n) / 4.0);
            assert_eq!(found, quarters[n.rem_euclid(4) as usize], "{n} quarters");
        }
        assert_eq!(sin_cos_turns(4_503_599_627_370_495.5), (0.0, -1.0));
        assert_eq!(sin_cos_turns(1e300), (0.0, 1.0));
        assert_eq!(sin_cos_turns(f64::MIN_POSITIVE / 4.0).1, 1.0);
        assert!(sin_cos_turns(f64::NAN).0.is_nan() && sin_cos_turns(f64::INFINITY).1.is_nan());
    }

    #[test]
    fn sine_and_cosine_agree_with_the_platform() {
        for i in -200_000_i32..=200_000 {
            let x = f64::from(i) / 131_071.0;
            // The reference's argument is reduced first, or its own rounding would show.
            let angle = 2.0 * PI * (x - x.round());
            let (sin, cos) = sin_cos_turns(x);
            assert!(
                (sin - angle.sin()).abs() < 1e-15 && (cos - angle.cos()).abs() < 1e-15,
                "{x}"
            );
            assert!((sin * sin + cos * cos - 1.0).abs() < 1e-15);
            assert_eq!(sin_cos_turns(-x), (-sin, cos));
        }
    }

    #[test]
    fn small_angles_keep_their_relative_precision() {
        for exponent in 1..=300 {
            let x = 10.0_f64.powi(-exponent);
            let (sin, _) = sin_cos_turns(x);
            assert!(
                (sin / (2.0 * PI * x).sin() - 1.0).abs() < 1e-15,
                "{x}: {sin}"
            );
        }
    }

    #[test]
    fn parts_of_a_turn_are_symmetric() {
        for n in 1..=200_u32 {
            for i in 0..n {
                let (sin, cos) = sin_cos_parts(i, n);
                let (s, c) = sin_cos_turns(f64::from(i) / f64::from(n));
                assert!(
                    (sin - s).abs() < 2e-15 && (cos - c).abs() < 2e-15,
                    "{i}/{n}"
                );
                assert_eq!(
                    sin_cos_parts((n - i) % n, n),
                    (if sin == 0.0 { 0.0 } else { -sin }, cos)
                );
                if n % 4 == 0 {
                    let (s, c) = sin_cos_parts((i + n / 4) % n, n);
                    assert_eq!((s, -c), (cos, sin), "{i}/{n}");
                }
            }
        }
        assert_eq!(sin_cos_parts(1, 8), (FRAC_1_SQRT_2, FRAC_1_SQRT_2));
        assert!(sin_cos_parts(0, 0).0.is_nan());
    }

    #[test]
    fn inverses_agree_with_the_platform() {
        for i in -100_000_i32..=100_000 {
            let x = f64::from(i) / 100_000.0;
            assert!((acos(x) - x.acos()).abs() < 1.5e-15, "acos {x}");
            let (y, z) = (
                (f64::from(i) * 0.7).sin() * 3.0,
                (f64::from(i) * 0.3).cos() * 2.0,
            );
            assert!((atan2(y, z) - y.atan2(z)).abs() < 1.5e-15, "atan2 {y} {z}");
        }
        assert!(acos(1.1).is_nan() && acos(-1.1).is_nan());
    }

    #[test]
    fn arc_tangent_of_odd_values() {
        let odd = [
            0.0,
            -0.0,
            1.0,
            -1.0,
            f64::INFINITY,
            f64::NEG_INFINITY,
            f64::MIN_POSITIVE,
            1e300,
            -1e-300,
        ];
        for y in odd {
            for x in odd {
                let (own, std) = (atan2(y, x), y.atan2(x));
                assert!((own - std).abs() < 1e-15, "{y} {x}: {own} {std}");
                assert_eq!(own.is_sign_negative(), std.is_sign_negative(), "{y} {x}");
            }
        }
        assert!(atan2(f64::NAN, 1.0).is_nan() && atan2(1.0, f64::NAN).is_nan());
    }
}
