//! Distribution functions for the tests, with tails that keep their relative accuracy.

use statrs::function::beta::beta_reg;
use statrs::function::erf::{erfc, erfc_inv};
use statrs::function::gamma::{gamma_lr, gamma_ur};

/// Gives the probability that |t| exceeds `t` in size, for Student's t with `nu` degrees of freedom.
///
/// Infinite `nu` means the normal distribution; NaN gives NaN.
pub fn student_two_sided(t: f64, nu: f64) -> f64 {
    if t.is_nan() || nu.is_nan() || nu <= 0.0 {
        return f64::NAN;
    }
    if t.is_infinite() {
        return 0.0;
    }
    if nu.is_infinite() {
        return erfc(t.abs() / std::f64::consts::SQRT_2);
    }
    if t == 0.0 {
        1.0
    } else {
        beta_reg(0.5 * nu, 0.5, nu / (nu + t * t))
    }
}

/// Gives the distribution function of Student's t with `nu` degrees of freedom.
pub fn student_cdf(t: f64, nu: f64) -> f64 {
    let tail = 0.5 * student_two_sided(t, nu);
    if t < 0.0 { tail } else { 1.0 - tail }
}

/// Gives the value that Student's t exceeds in size with the probability `p`, by bisection.
pub fn student_two_sided_quantile(p: f64, nu: f64) -> f64 {
    let (mut low, mut high) = (0.0, 1e6);
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        if student_two_sided(middle, nu) > p {
            low = middle;
        } else {
            high = middle;
        }
    }
    0.5 * (low + high)
}

/// Gives the standard normal value with the same two-sided probability `p` as something else had.
pub fn normal_two_sided_quantile(p: f64) -> f64 {
    std::f64::consts::SQRT_2 * erfc_inv(p)
}

/// Gives P(χ² ≤ x) and P(χ² > x) for `k` degrees of freedom, each with its own accuracy.
pub fn chi_squared(x: f64, k: f64) -> (f64, f64) {
    if x <= 0.0 {
        (0.0, 1.0)
    } else {
        (gamma_lr(0.5 * k, 0.5 * x), gamma_ur(0.5 * k, 0.5 * x))
    }
}

/// Gives the probability that the Kolmogorov statistic √n·D of `n` values exceeds `root_n_d`.
///
/// Limit law with the correction √n + 0.12 + 0.11/√n (M. A. Stephens, J. R. Stat. Soc. B 32 (1970) 115, from memory);
/// pass `n = ∞` for the limit law itself.
pub fn kolmogorov_tail(root_n_d: f64, n: f64) -> f64 {
    if root_n_d.is_nan() {
        return f64::NAN;
    }
    let root = n.sqrt();
    let x = if n.is_finite() {
        root_n_d * (1.0 + 0.12 / root + 0.11 / n)
    } else {
        root_n_d
    };
    if x < 0.2 {
        return 1.0; // The series converges slowly there; the true value is 1 to all digits.
    }
    let mut sum = 0.0;
    for j in 1..=100_i32 {
        let term = (-2.0 * f64::from(j * j) * x * x).exp();
        sum += if j % 2 == 1 { term } else { -term };
    }
    (2.0 * sum).clamp(0.0, 1.0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{record, records};

    #[test]
    fn student_quantiles_match_the_table() {
        for entry in records("stats.t_batch") {
            let nu = entry.number("batches") - 1.0;
            let quantile = student_two_sided_quantile(0.01, nu);
            assert!(
                (quantile - entry.value).abs() < 1e-9,
                "{}: {quantile}",
                entry.id
            );
        }
    }

    #[test]
    fn the_limit_is_4_9_at_63_degrees_of_freedom() {
        let quantile = student_two_sided_quantile(7e-6, 63.0);
        assert!((4.85..4.95).contains(&quantile), "{quantile}");
        assert!(student_two_sided(4.8, 63.0) > 7e-6 && student_two_sided(5.0, 63.0) < 7e-6);
    }

    #[test]
    fn student_with_one_and_two_degrees_of_freedom_has_closed_forms() {
        for t in [0.1_f64, 1.0, 3.0, 40.0] {
            let one = 1.0 - 2.0 / std::f64::consts::PI * t.atan();
            let two = 1.0 - t / (2.0 + t * t).sqrt();
            assert!((student_two_sided(t, 1.0) - one).abs() < 1e-12);
            assert!((student_two_sided(-t, 2.0) - two).abs() < 1e-12);
            assert!((student_cdf(-t, 2.0) + student_cdf(t, 2.0) - 1.0).abs() < 1e-15);
        }
        assert!(student_two_sided(f64::NAN, 63.0).is_nan() && student_two_sided(1.0, 0.0).is_nan());
        assert_eq!(student_two_sided(f64::INFINITY, 63.0), 0.0);
        assert_eq!(student_two_sided(0.0, 63.0), 1.0);
    }

    #[test]
    fn normal_limits_for_many_tests_match_the_table() {
        for entry in records("stats.z_bonferroni") {
            let (m, alpha) = (entry.number("m"), entry.number("alpha"));
            let quantile = normal_two_sided_quantile(alpha / m);
            assert!(
                (quantile - entry.value).abs() < 1e-8,
                "{}: {quantile}",
                entry.id
            );
            assert!((student_two_sided(entry.value, f64::INFINITY) - alpha / m).abs() < 1e-10);
        }
    }

    #[test]
    fn chi_squared_limits_match_the_table() {
        for entry in records("stats.chi2") {
            let (below, above) = chi_squared(entry.value, entry.number("df"));
            let alpha = entry.number("alpha");
            assert!(
                (above - alpha).abs() < 1e-9 * alpha,
                "{}: {above}",
                entry.id
            );
            assert!((below + above - 1.0).abs() < 1e-12);
        }
    }

    #[test]
    fn kolmogorov_limit_matches_the_table() {
        let entry = record("stats.ks_crit_0.01");
        assert!((kolmogorov_tail(entry.value, f64::INFINITY) - entry.number("alpha")).abs() < 1e-8);
        assert!(kolmogorov_tail(entry.value, 400.0) < 0.01);
        assert_eq!(kolmogorov_tail(0.01, 400.0), 1.0);
    }

    #[test]
    fn binomial_standard_error_matches_the_table() {
        let entry = record("stats.binomial_se");
        let (p, n) = (entry.number("p"), entry.number("N"));
        assert!(((p * (1.0 - p) / n).sqrt() - entry.value).abs() <= entry.tolerance);
    }
}
