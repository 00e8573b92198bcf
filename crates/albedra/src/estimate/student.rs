//! Student's t distribution, for coverage intervals and p-values.

use statrs::function::beta::checked_beta_reg;
use statrs::function::erf::erfc;

/// Above so many degrees of freedom the tail comes from the normal distribution of a transformed t.
const MANY: f64 = 1000.0;

/// Chance that |t| is at least as large, for a positive number of degrees of freedom; NaN for other input.
///
/// # Method
///
/// Regularized incomplete beta functions: I<sub>x</sub>(ν/2, 1/2) with x = ν/(ν + t²), or 1 − I<sub>1−x</sub>(1/2, ν/2)
/// where the chance is large, each used where its continued fraction converges fast.
pub(crate) fn two_sided_p(t: f64, degrees_of_freedom: f64) -> f64 {
    let (t, nu) = (t.abs(), degrees_of_freedom);
    if t.is_nan() || nu.is_nan() || nu <= 0.0 {
        f64::NAN
    } else if t.is_infinite() {
        0.0
    } else if nu > MANY {
        erfc(normal_of(t, nu) / std::f64::consts::SQRT_2)
    } else if is_central(t, nu) {
        1.0 - central_p(t, nu)
    } else {
        let ratio = (nu / t) / t; // not nu / (t * t), which could overflow
        checked_beta_reg(0.5 * nu, 0.5, ratio / (1.0 + ratio)).unwrap_or(f64::NAN)
    }
}

/// The t that |t| stays below with a given chance: the factor from u to half the coverage interval.
///
/// Infinite for a chance of 1 or no degrees of freedom, NaN for a chance outside 0 to 1.
pub(crate) fn coverage_factor(p: f64, degrees_of_freedom: f64) -> f64 {
    if !(0.0..=1.0).contains(&p) || degrees_of_freedom.is_nan() {
        return f64::NAN;
    } else if p == 0.0 {
        return 0.0;
    } else if p == 1.0 || degrees_of_freedom <= 0.0 {
        return f64::INFINITY;
    }
    // Small chances are compared as they are, since their complement has lost digits.
    let exceeds = |t: f64| {
        if degrees_of_freedom <= MANY && is_central(t, degrees_of_freedom) {
            central_p(t, degrees_of_freedom) >= p
        } else {
            two_sided_p(t, degrees_of_freedom) <= 1.0 - p
        }
    };
    // First an upper end with exceeds(high) and a lower one, half of it, without; then sixty halvings fix every bit.
    let mut high = 1.0;
    while high > f64::MIN_POSITIVE && exceeds(high) {
        high *= 0.5;
    }
    while high < f64::MAX && !exceeds(high) {
        high *= 2.0;
    }
    let mut low = 0.5 * high;
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if exceeds(middle) {
            high = middle;
        } else {
            low = middle;
        }
    }
    high
}

/// Says whether |t| is so small that [`central_p`] is the accurate form.
fn is_central(t: f64, nu: f64) -> bool {
    t * t * (nu + 2.0) < 3.0 * nu
}

/// Chance that |t| is smaller, accurate for small t.
fn central_p(t: f64, nu: f64) -> f64 {
    checked_beta_reg(0.5, 0.5 * nu, t * t / (nu + t * t)).unwrap_or(f64::NAN)
}

/// The normal variate that is exceeded with the same chance as t, for many degrees of freedom.
///
/// G. W. Hill, *Algorithm 395: Student's t-distribution*, Communications of the ACM 13 (1970) 617–619, first terms (from
/// memory; held to exact values by a test).
#[expect(clippy::disallowed_methods, reason = "output only")]
fn normal_of(t: f64, nu: f64) -> f64 {
    if nu.is_infinite() {
        return t;
    }
    let a = nu - 0.5;
    let y = a * (t * t / nu).ln_1p();
    y.sqrt() * (1.0 + (y + 3.0) / (48.0 * a * a))
}

#[cfg(test)]
mod tests {
    use approx::assert_relative_eq;

    use super::*;

    #[test]
    fn factors_agree_with_tables() {
        // Two-sided 99 % for 10, 20 and 30 batches: published checks "stats.t_batch.b10", "b20", "b30" (scipy). The others
        // are roots of the regularized incomplete beta function in 40 digits (mpmath 1.3.0).
        let table = [
            (0.99, 9.0, 3.249_835_541_592_126),
            (0.99, 19.0, 2.860_934_606_464_979_4),
            (0.99, 29.0, 2.756_385_903_670_605),
            (0.95, 63.0, 1.998_340_542_520_741_7),
            (0.5, 1.0, 1.0),
        ];
        for (p, nu, expected) in table {
            assert_relative_eq!(coverage_factor(p, nu), expected, max_relative = 1e-12);
        }
    }

    #[test]
    fn tails_agree_with_exact_values() {
        // Regularized incomplete beta function in 40 digits (mpmath 1.3.0).
        let table = [
            (4.9, 63.0, 7.028_350_339_559_643e-6),
            (1.0, 1.0, 0.5),
            (0.001, 63.0, 0.999_205_275_376_080_7),
            (2.0, 3.0, 0.139_325_968_558_843_2),
            (1.7, 999.0, 0.089_442_198_219_931_42),
            (4.9, 999.0, 1.117_569_959_805_597e-6),
            (10.0, 5.0, 0.000_170_947_575_742_963_6),
            (30.0, 63.0, 5.125_911_773_057_613e-39),
            (1e5, 2.0, 9.999_999_998_5e-11),
        ];
        for (t, nu, expected) in table {
            assert_relative_eq!(two_sided_p(t, nu), expected, max_relative = 1e-11);
            assert_eq!(two_sided_p(-t, nu), two_sided_p(t, nu));
        }
        // The transformed normal variate leaves out terms of order ν⁻⁴ and smaller.
        let many = [
            (1.9, 2000.0, 0.057_576_820_559_665_36),
            (4.9, 2000.0, 1.035_450_793_822_779_8e-6),
            (0.5, 1500.0, 0.617_148_416_827_018_4),
            (4.9, 1e5, 9.598_619_447_790_026e-7),
            (3.0, 1e9, 0.002_699_796_129_737_915_7),
        ];
        for (t, nu, expected) in many {
            assert_relative_eq!(two_sided_p(t, nu), expected, max_relative = 1e-8);
        }
        assert_relative_eq!(
            coverage_factor(0.95, 1e4),
            1.960_201_239_890_626_3,
            max_relative = 1e-8
        );
    }

    #[test]
    fn factor_and_tail_are_inverse() {
        for nu in [0.5, 1.0, 2.0, 3.7, 63.0, 1000.0, 1001.0, 1e6, f64::INFINITY] {
            for p in [0.01, 0.3, 0.61, 0.95, 0.999_999] {
                assert_relative_eq!(
                    two_sided_p(coverage_factor(p, nu), nu),
                    1.0 - p,
                    max_relative = 1e-9
                );
            }
        }
        // Density of t at 0 with one degree of freedom is 1/π, so the chance of |t| < x is 2x/π there.
        assert_relative_eq!(
            coverage_factor(1e-12, 1.0),
            0.5e-12 * std::f64::consts::PI,
            max_relative = 1e-12
        );
    }

    #[test]
    fn limits_and_nonsense() {
        assert_eq!(
            (two_sided_p(0.0, 63.0), two_sided_p(f64::INFINITY, 63.0)),
            (1.0, 0.0)
        );
        assert_eq!(
            (two_sided_p(1e200, 63.0), two_sided_p(1e200, f64::INFINITY)),
            (0.0, 0.0)
        );
        assert_eq!(
            (coverage_factor(0.0, 63.0), coverage_factor(1.0, 63.0)),
            (0.0, f64::INFINITY)
        );
        assert_eq!(coverage_factor(0.95, 0.0), f64::INFINITY);
        for (t, nu) in [(f64::NAN, 63.0), (1.0, f64::NAN), (1.0, 0.0), (1.0, -1.0)] {
            assert!(two_sided_p(t, nu).is_nan());
        }
        for (p, nu) in [
            (f64::NAN, 63.0),
            (-0.1, 63.0),
            (1.1, 63.0),
            (0.95, f64::NAN),
        ] {
            assert!(coverage_factor(p, nu).is_nan());
        }
        for (p, nu) in [(1e-300, 1e-300), (1.0 - 1e-16, 1e-3), (0.5, 1e-200)] {
            assert!(coverage_factor(p, nu) >= 0.0);
        }
    }
}
