//! Are the stated uncertainties right? Zeta scores of many independent runs against Student's t.

use crate::LIMIT;
use crate::special::{
    chi_squared, kolmogorov_tail, normal_two_sided_quantile, student_cdf, student_two_sided,
};

/// How well a set of zeta scores follows Student's t: three probabilities, each small when it does not.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Calibration {
    /// Number of scores.
    pub n: usize,
    /// Kolmogorov–Smirnov of the scores: shift and shape.
    pub ks: f64,
    /// Kolmogorov–Smirnov of their sizes: width, and the tails that a signed test hardly sees.
    pub ks_of_sizes: f64,
    /// χ² of the scores turned into normal ones, two-sided: uncertainties too small fail like those too large.
    pub chi_squared: f64,
    /// Σ z² / n after turning into normal scores: 1 when right, larger when the uncertainties are too small.
    pub ratio: f64,
}

impl Calibration {
    /// Tells whether no probability is below the limit.
    pub fn passes(&self) -> bool {
        [self.ks, self.ks_of_sizes, self.chi_squared]
            .iter()
            .all(|&p| p >= LIMIT)
    }
}

/// Holds zeta scores against Student's t with `nu` degrees of freedom.
///
/// A score that is not finite makes every probability NaN or zero, so that it cannot pass.
pub fn calibrate(scores: &[f64], nu: f64) -> Calibration {
    let n = scores.len() as f64;
    let cdf = |t: f64| student_cdf(t, nu);
    let size_cdf = |t: f64| 1.0 - student_two_sided(t, nu);
    let sizes: Vec<f64> = scores.iter().map(|z| z.abs()).collect();
    let normal = scores
        .iter()
        .map(|&z| normal_two_sided_quantile(student_two_sided(z, nu)));
    let sum: f64 = normal.map(|z| z * z).sum();
    let (below, above) = if sum.is_finite() {
        chi_squared(sum, n)
    } else {
        (1.0, 0.0)
    };
    Calibration {
        n: scores.len(),
        ks: kolmogorov_tail(n.sqrt() * largest_gap(scores, cdf), n),
        ks_of_sizes: kolmogorov_tail(n.sqrt() * largest_gap(&sizes, size_cdf), n),
        chi_squared: 2.0 * if below < above { below } else { above },
        ratio: sum / n,
    }
}

/// Gives the Kolmogorov distance between the values and a distribution function; NaN where a value is not finite.
fn largest_gap(values: &[f64], cdf: impl Fn(f64) -> f64) -> f64 {
    if values.is_empty() || values.iter().any(|value| !value.is_finite()) {
        return f64::NAN;
    }
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    let n = sorted.len() as f64;
    let mut gap = 0.0_f64;
    for (i, &value) in sorted.iter().enumerate() {
        let p = cdf(value);
        gap = gap.max(p - i as f64 / n).max((i + 1) as f64 / n - p);
    }
    gap
}

#[cfg(test)]
mod tests {
    use rand::{RngExt, SeedableRng};
    use rand_xoshiro::Xoshiro256PlusPlus;

    use super::*;

    /// Zeta scores of `n` honest runs: mean of 64 normal values over its standard error, which is t with 63.
    fn honest(seed: u64, n: usize) -> Vec<f64> {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
        let mut normal = || {
            let (a, b): (f64, f64) = (1.0 - rng.random::<f64>(), rng.random());
            (-2.0 * a.ln()).sqrt() * (std::f64::consts::TAU * b).cos()
        };
        let run = |_| {
            let values: Vec<f64> = (0..64).map(|_| normal()).collect();
            let mean = values.iter().sum::<f64>() / 64.0;
            let variance = values.iter().map(|x| (x - mean) * (x - mean)).sum::<f64>() / 63.0;
            mean / (variance / 64.0).sqrt()
        };
        (0..n).map(run).collect()
    }

    #[test]
    fn honest_scores_pass_for_every_one_of_many_seeds() {
        for seed in 0..100 {
            let verdict = calibrate(&honest(seed, 400), 63.0);
            assert!(verdict.passes(), "seed {seed}: {verdict:?}");
        }
    }

    #[test]
    fn probabilities_of_honest_scores_are_evenly_spread() {
        let mut below = [0; 3];
        for seed in 100..500 {
            let Calibration {
                ks,
                ks_of_sizes,
                chi_squared,
                ..
            } = calibrate(&honest(seed, 400), 63.0);
            for (count, p) in below.iter_mut().zip([ks, ks_of_sizes, chi_squared]) {
                *count += i32::from(p < 0.1);
            }
        }
        // 40 of 400 expected, standard deviation 6; 4.9 of them allowed.
        assert!(
            below.iter().all(|count| (11..=69).contains(count)),
            "{below:?}"
        );
    }

    #[test]
    fn uncertainties_wrong_by_three_tenths_fail_on_both_sides() {
        for seed in 0..100 {
            for scale in [1.3, 0.77] {
                let scores: Vec<f64> = honest(seed, 400).iter().map(|z| z * scale).collect();
                let verdict = calibrate(&scores, 63.0);
                assert!(!verdict.passes(), "seed {seed}, scale {scale}: {verdict:?}");
                assert!(
                    verdict.chi_squared < LIMIT,
                    "seed {seed}, scale {scale}: {verdict:?}"
                );
                assert_eq!(verdict.ratio > 1.0, scale > 1.0);
            }
        }
    }

    #[test]
    fn kolmogorov_alone_sees_the_width_in_2000_scores() {
        for scale in [1.3, 0.77] {
            let scores: Vec<f64> = honest(1, 2000).iter().map(|z| z * scale).collect();
            assert!(
                calibrate(&scores, 63.0).ks_of_sizes < LIMIT,
                "scale {scale}"
            );
        }
    }

    #[test]
    fn a_bias_of_half_an_uncertainty_fails() {
        for shift in [0.5, -0.5] {
            let scores: Vec<f64> = honest(2, 400).iter().map(|z| z + shift).collect();
            assert!(calibrate(&scores, 63.0).ks < LIMIT, "shift {shift}");
        }
    }

    #[test]
    fn scores_of_one_size_fail_although_their_squares_add_up() {
        let scores: Vec<f64> = (0..400)
            .map(|i| if i % 2 == 0 { 1.0 } else { -1.0 })
            .collect();
        let verdict = calibrate(&scores, f64::INFINITY);
        assert!(
            (verdict.ratio - 1.0).abs() < 1e-9 && verdict.chi_squared > 0.9,
            "{verdict:?}"
        );
        assert!(!verdict.passes(), "{verdict:?}");
    }

    #[test]
    fn too_few_degrees_of_freedom_show_in_the_squares() {
        // Scores of t with 3 degrees of freedom (16 groups would show less) held against t with 63.
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(3);
        let quantile = |p: f64| {
            let size = crate::special::student_two_sided_quantile(2.0 * p.min(1.0 - p), 3.0);
            if p < 0.5 { -size } else { size }
        };
        let scores: Vec<f64> = (0..400).map(|_| quantile(rng.random())).collect();
        assert!(calibrate(&scores, 3.0).passes());
        assert!(!calibrate(&scores, 63.0).passes());
    }

    #[test]
    fn scores_that_are_no_numbers_do_not_pass() {
        for bad in [f64::NAN, f64::INFINITY] {
            let mut scores = honest(4, 400);
            scores[17] = bad;
            assert!(!calibrate(&scores, 63.0).passes(), "{bad}");
        }
        assert!(!calibrate(&[], 63.0).passes());
    }
}
