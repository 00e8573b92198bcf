//! Uncertainties from leaving out one group of photons at a time.

use super::{Estimate, GROUPS, Sums, Totals, student};

/// Fewer photons give no uncertainty: groups of one or two photons say too little about their spread.
const FEWEST_PHOTONS: u64 = 128;

/// Makes estimates from totals.
///
/// # Method
///
/// Delete-one-group jackknife for groups of unequal size m<sub>j</sub> (F. M. T. A. Busing, E. Meijer and
/// R. van der Leeden, *Delete-m jackknife for unequal m*, Statistics and Computing 9 (1999) 3–8; formulas from memory).
/// With g non-empty groups, n photons, h<sub>j</sub> = n/m<sub>j</sub>, the value θ of all photons and
/// θ<sub>(j)</sub> without group j,
///
/// θ<sub>J</sub> = g θ − Σ (1 − m<sub>j</sub>/n) θ<sub>(j)</sub>, and
/// u² = (1/g) Σ (h<sub>j</sub> θ − (h<sub>j</sub> − 1) θ<sub>(j)</sub> − θ<sub>J</sub>)² / (h<sub>j</sub> − 1),
///
/// with g − 1 degrees of freedom. It is computed from the differences θ − θ<sub>(j)</sub>, so that what is equal in
/// all groups has an uncertainty of exactly 0.
///
/// # Undefined values
///
/// Fewer than 128 photons, or photons in a single group, give the plain value with u = ∞. Where a function is not finite
/// for one of the sets, the estimate is NaN with u = ∞.
#[derive(Clone, Debug)]
pub struct Jackknife<'a> {
    totals: &'a Totals,
    exponents: &'a [i32],
    all: Vec<Option<i128>>,
    photons: u64,
    sizes: [u64; GROUPS],
}

/// Values of a curve or a map with their uncertainties.
#[derive(Clone, Debug, PartialEq)]
pub struct Estimates {
    /// The values.
    pub values: Vec<f64>,
    /// The standard uncertainty of each value.
    pub u: Vec<f64>,
    /// Degrees of freedom of the uncertainties.
    pub degrees_of_freedom: f64,
}

impl Estimates {
    /// Half the width of the coverage interval in units of `u`, for a chance of `p` from 0 to 1: the same for all values.
    pub fn coverage_factor(&self, p: f64) -> f64 {
        student::coverage_factor(p, self.degrees_of_freedom)
    }

    /// One of the values with its uncertainty, if there are so many.
    pub fn get(&self, index: usize) -> Option<Estimate> {
        Some(Estimate::new(
            *self.values.get(index)?,
            *self.u.get(index)?,
            self.degrees_of_freedom,
        ))
    }
}

/// How far a function moves when groups are left out.
struct Spread {
    /// Estimated bias of the plain value, of opposite sign: what is added to correct it.
    correction: f64,
    /// Deviation of each group, scaled so that u² is the sum of their squares.
    deviations: Vec<f64>,
}

impl Spread {
    fn u(&self) -> f64 {
        self.deviations
            .iter()
            .map(|deviation| deviation * deviation)
            .sum::<f64>()
            .sqrt()
    }
}

impl<'a> Jackknife<'a> {
    /// Sums the groups of every output.
    pub(crate) fn new(totals: &'a Totals, exponents: &'a [i32]) -> Self {
        let sum = |groups: &[i128; GROUPS]| {
            groups
                .iter()
                .try_fold(0_i128, |sum, &group| sum.checked_add(group))
        };
        let all = totals.groups.iter().map(sum).collect();
        let sizes = totals.photons.group_sizes();
        Self {
            totals,
            exponents,
            all,
            photons: totals.photons.len(),
            sizes,
        }
    }

    /// The totals that estimates are made from.
    pub fn totals(&self) -> &'a Totals {
        self.totals
    }

    /// Number of photons.
    pub fn photons(&self) -> u64 {
        self.photons
    }

    /// The sums of all photons.
    pub fn sums(&self) -> Sums<'_> {
        Sums::new(self, None)
    }

    /// Estimates any function of the sums, with its leading bias removed.
    ///
    /// For ratios, logarithms, fits. The function is called at most 65 times and must depend on its argument alone.
    pub fn estimate(&self, f: impl Fn(&Sums<'_>) -> f64) -> Estimate {
        self.one(f, true)
    }

    /// Estimates a linear function of the means: its plain value, so that parts add up to their sum.
    pub fn estimate_linear(&self, f: impl Fn(&Sums<'_>) -> f64) -> Estimate {
        self.one(f, false)
    }

    /// Estimates many functions of the sums at once, with their leading bias removed.
    ///
    /// All calls must give the same number of values; one that is missing counts as NaN.
    pub fn estimate_many(&self, f: impl Fn(&Sums<'_>) -> Vec<f64>) -> Estimates {
        self.many(f, true)
    }

    /// Estimates many linear functions of the means at once: their plain values, so that parts add up to their sum.
    pub fn estimate_many_linear(&self, f: impl Fn(&Sums<'_>) -> Vec<f64>) -> Estimates {
        self.many(f, false)
    }

    /// Covariance of two functions of the sums; infinite or NaN where an estimate has no uncertainty.
    pub fn covariance(&self, f: impl Fn(&Sums<'_>) -> f64, g: impl Fn(&Sums<'_>) -> f64) -> f64 {
        let pair = self.replicates(|sums| vec![f(sums), g(sums)]);
        match (self.spread(&pair, 0), self.spread(&pair, 1)) {
            (Some(f), Some(g)) => f
                .deviations
                .iter()
                .zip(&g.deviations)
                .map(|(f, g)| f * g)
                .sum(),
            _ => f64::NAN,
        }
    }

    /// Degrees of freedom: the number of non-empty groups less one.
    pub fn degrees_of_freedom(&self) -> f64 {
        self.filled().count().saturating_sub(1) as f64
    }

    /// The exact sum of an output over all photons.
    pub(crate) fn quanta(&self, output: usize) -> Option<i128> {
        *self.all.get(output)?
    }

    /// Binary exponent of each output's quantum.
    pub(crate) fn exponents(&self) -> &'a [i32] {
        self.exponents
    }

    /// Number of photons in each group.
    pub(crate) fn sizes(&self) -> &[u64; GROUPS] {
        &self.sizes
    }

    fn filled(&self) -> impl Iterator<Item = usize> + '_ {
        (0..GROUPS).filter(|&group| self.sizes[group] > 0)
    }

    /// Says whether the photons are enough for an uncertainty.
    fn suffices(&self) -> bool {
        self.photons >= FEWEST_PHOTONS && self.filled().count() > 1
    }

    fn one(&self, f: impl Fn(&Sums<'_>) -> f64, correct: bool) -> Estimate {
        let many = self.many(|sums| vec![f(sums)], correct);
        Estimate::new(many.values[0], many.u[0], many.degrees_of_freedom)
    }

    fn many(&self, f: impl Fn(&Sums<'_>) -> Vec<f64>, correct: bool) -> Estimates {
        let replicates = self.replicates(f);
        let plain = &replicates[0];
        let (values, u) = (0..plain.len())
            .map(|at| match self.spread(&replicates, at) {
                _ if !self.suffices() => (plain[at], f64::INFINITY),
                None => (f64::NAN, f64::INFINITY),
                Some(spread) if correct => (plain[at] + spread.correction, spread.u()),
                Some(spread) => (plain[at], spread.u()),
            })
            .unzip();
        Estimates {
            values,
            u,
            degrees_of_freedom: self.degrees_of_freedom(),
        }
    }

    /// Values for all photons, then, if there are enough of them, without each of the non-empty groups.
    fn replicates(&self, f: impl Fn(&Sums<'_>) -> Vec<f64>) -> Vec<Vec<f64>> {
        let sets = self.filled().map(Some).filter(|_| self.suffices());
        std::iter::once(None)
            .chain(sets)
            .map(|left_out| f(&Sums::new(self, left_out)))
            .collect()
    }

    /// Spread of the values at one place of the replicates; `None` where it is not finite or there are none.
    fn spread(&self, replicates: &[Vec<f64>], at: usize) -> Option<Spread> {
        let (plain, without) = replicates
            .split_first()
            .filter(|(_, without)| !without.is_empty())?;
        let (photons, groups) = (self.photons as f64, without.len() as f64);
        let sizes = || self.filled().map(|group| self.sizes[group] as f64);
        let differences: Vec<f64> = without
            .iter()
            .map(|values| Some(plain.get(at)? - values.get(at)?))
            .collect::<Option<_>>()?;
        let correction: f64 = sizes()
            .zip(&differences)
            .map(|(size, d)| (1.0 - size / photons) * d)
            .sum();
        let deviations: Vec<f64> = sizes()
            .zip(&differences)
            .map(|(size, d)| {
                let others = (photons - size) / size;
                (others * d - correction) / (groups * others).sqrt()
            })
            .collect();
        let spread = Spread {
            correction,
            deviations,
        };
        (plain[at] + spread.correction + spread.u())
            .is_finite()
            .then_some(spread)
    }
}

#[cfg(test)]
mod tests {
    use approx::assert_relative_eq;
    use rand::{RngExt, SeedableRng};
    use rand_xoshiro::Xoshiro256PlusPlus;

    use super::*;
    use crate::estimate::Fingerprint;

    const EXPONENTS: [i32; 2] = [-40, -40];
    const QUANTA: f64 = 1_099_511_627_776.0; // 2^40 in a unit

    /// Totals of two outputs, booked photon by photon.
    #[expect(clippy::cast_possible_truncation, reason = "test values are small")]
    fn totals(photons: impl IntoIterator<Item = (u64, [f64; 2])>) -> Totals {
        let mut totals = Totals::empty(Fingerprint([0; 16]), Fingerprint([0; 16]), 0, 2);
        for (index, booked) in photons {
            totals.photons.insert(index..index + 1).unwrap();
            for (groups, value) in totals.groups.iter_mut().zip(booked) {
                groups[usize::try_from(index % 64).unwrap()] += (value * QUANTA).round() as i128;
            }
        }
        totals
    }

    /// A number from the exponential distribution of mean 1.
    #[expect(
        clippy::disallowed_methods,
        reason = "test data need not be equal on every machine"
    )]
    fn exponential(rng: &mut Xoshiro256PlusPlus) -> f64 {
        -(1.0 - rng.random::<f64>()).ln()
    }

    fn random(seed: u64, photons: u64) -> Totals {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
        totals((0..photons).map(|index| {
            let x = exponential(&mut rng);
            (index, [x, 0.5 * x + exponential(&mut rng)])
        }))
    }

    /// 100, 50 and 10 photons in three groups that book 1, 2 and 5 each.
    fn unequal() -> Totals {
        let group = |group: u64, photons: u64, booked: f64| {
            (0..photons).map(move |k| (64 * k + group, [booked, 1.0]))
        };
        totals(
            group(0, 100, 1.0)
                .chain(group(1, 50, 2.0))
                .chain(group(7, 10, 5.0)),
        )
    }

    #[test]
    fn mean_of_equal_groups_has_the_textbook_standard_error() {
        let totals = random(1, 64 * 5);
        let estimate = totals.estimate_linear(&EXPONENTS, |sums| sums.mean(0));
        let means: Vec<f64> = totals.groups[0]
            .iter()
            .map(|&sum| sum as f64 / QUANTA / 5.0)
            .collect();
        let mean = means.iter().sum::<f64>() / 64.0;
        let variance = means.iter().map(|x| (x - mean) * (x - mean)).sum::<f64>() / 63.0;
        assert_relative_eq!(estimate.value, mean, max_relative = 1e-14);
        assert_relative_eq!(estimate.u, (variance / 64.0).sqrt(), max_relative = 1e-12);
        assert_eq!(estimate.degrees_of_freedom, 63.0);
        // The correction of a linear function vanishes, up to rounding.
        let corrected = totals.estimate(&EXPONENTS, |sums| sums.mean(0));
        assert_relative_eq!(corrected.value, estimate.value, max_relative = 1e-14);
        assert_eq!(corrected.u, estimate.u);
    }

    #[test]
    fn square_of_a_mean_loses_exactly_the_variance() {
        // The mean of x̄² is μ² + var(x̄), and x̄² − u² is free of bias.
        let totals = random(2, 64 * 3);
        let mean = totals.estimate_linear(&EXPONENTS, |sums| sums.mean(0));
        let square = totals.estimate(&EXPONENTS, |sums| sums.mean(0) * sums.mean(0));
        assert_relative_eq!(
            square.value,
            mean.value * mean.value - mean.u * mean.u,
            max_relative = 1e-13
        );
    }

    #[test]
    fn bias_of_a_ratio_is_removed() {
        // 1/x̄ of n exponential variables of mean 1 has the mean n/(n − 1) (reciprocal of a gamma variable).
        let (sets, photons) = (4000, 128);
        let (mut plain, mut corrected, mut squares) = (0.0, 0.0, 0.0);
        for seed in 0..sets {
            let totals = random(seed, photons);
            let jackknife = totals.jackknife(&EXPONENTS);
            let inverse = |sums: &Sums<'_>| 1.0 / sums.mean(0);
            plain += inverse(&jackknife.sums());
            let value = jackknife.estimate(inverse).value;
            corrected += value;
            squares += (value - 1.0) * (value - 1.0);
        }
        let sets = sets as f64;
        let (plain, corrected, error) = (
            plain / sets,
            corrected / sets,
            (squares / sets / sets).sqrt(),
        );
        let bias = 1.0 / (photons as f64 - 1.0);
        assert!(
            (plain - 1.0 - bias).abs() < 4.5 * error,
            "{plain} ± {error}"
        );
        assert!(
            (corrected - 1.0).abs() < 4.5 * error,
            "{corrected} ± {error}"
        );
        // The two can be told apart, so the test can fail.
        assert!(bias > 5.0 * error, "{error}");
        assert_relative_eq!(plain - corrected, bias, max_relative = 0.1);
    }

    #[test]
    fn unequal_groups_follow_the_formula() {
        // By hand: means 1, 2, 5; h = 1.6, 3.2, 16; mean of all 250/160 = 1.5625.
        // u² = (0.5625²/0.6 + 0.4375²/2.2 + 3.4375²/15)/3 = 0.467369.
        let totals = unequal();
        let mean = totals.estimate_linear(&EXPONENTS, |sums| sums.mean(0));
        assert_eq!((mean.value, mean.degrees_of_freedom), (1.5625, 2.0));
        let u2 = (0.316_406_25 / 0.6 + 0.191_406_25 / 2.2 + 11.816_406_25 / 15.0) / 3.0;
        assert_relative_eq!(mean.u, f64::sqrt(u2), max_relative = 1e-13);
        // The square of the mean, in exact fractions from the formula as published:
        // 3·1.5625² − (0.375·2.5² + 0.6875·(15/11)² + 0.9375·(4/3)²) = 2.03539299….
        let square = totals.estimate(&EXPONENTS, |sums| sums.mean(0) * sums.mean(0));
        assert_relative_eq!(square.value, 2.035_392_992_424_242, max_relative = 1e-13);
        assert_relative_eq!(square.u, 2.185_833_533_469_388_4, max_relative = 1e-13);
    }

    #[test]
    fn what_is_equal_everywhere_has_no_uncertainty() {
        let estimate = unequal().estimate(&EXPONENTS, |sums| sums.mean(1));
        assert_eq!((estimate.value, estimate.u), (1.0, 0.0));
    }

    #[test]
    fn few_photons_or_one_group_give_no_uncertainty() {
        let of = |photons: u64| {
            random(3, photons).estimate(&EXPONENTS, |sums| sums.mean(0) / sums.mean(1))
        };
        assert!(of(127).u.is_infinite() && of(127).value.is_finite());
        assert!(of(128).u.is_finite());
        assert_eq!(of(1).degrees_of_freedom, 0.0);
        assert!(of(0).value.is_nan() && of(0).u.is_infinite());
        let one = totals((0..200).map(|k| (64 * k, [k as f64, 1.0])));
        let estimate = one.estimate(&EXPONENTS, |sums| sums.mean(0));
        assert_eq!(
            (estimate.value, estimate.u, estimate.degrees_of_freedom),
            (99.5, f64::INFINITY, 0.0)
        );
        assert!(
            one.jackknife(&EXPONENTS)
                .covariance(|s| s.mean(0), |s| s.mean(1))
                .is_nan()
        );
    }

    #[test]
    fn undefined_values_stay_undefined() {
        let totals = random(4, 640);
        // Defined for all photons, but not where one group is left out.
        let rare = |sums: &Sums<'_>| if sums.photons() == 640 { 1.0 } else { f64::NAN };
        for estimate in [
            totals.estimate(&EXPONENTS, rare),
            totals.estimate_linear(&EXPONENTS, rare),
            totals.estimate(&EXPONENTS, |sums| {
                if sums.photons() == 640 {
                    0.0
                } else {
                    f64::INFINITY
                }
            }),
            totals.estimate(&EXPONENTS, |sums| sums.mean(2)),
        ] {
            assert!(estimate.value.is_nan());
            assert_eq!(estimate.u, f64::INFINITY);
        }
        let many = totals.estimate_many(&EXPONENTS, |sums| {
            if sums.photons() == 640 {
                vec![sums.mean(0), 2.0]
            } else {
                vec![sums.mean(0)]
            }
        });
        assert!(many.values[1].is_nan() && many.u[0].is_finite());
        assert_eq!(many.get(2), None);
    }

    #[test]
    fn many_are_the_same_as_one_by_one() {
        let totals = random(5, 1000);
        let jackknife = totals.jackknife(&EXPONENTS);
        let many = jackknife
            .estimate_many(|sums| vec![sums.mean(0) / sums.mean(1), sums.mean(1) * sums.mean(1)]);
        assert_eq!(
            many.get(0),
            Some(jackknife.estimate(|sums| sums.mean(0) / sums.mean(1)))
        );
        assert_eq!(
            many.get(1),
            Some(jackknife.estimate(|sums| sums.mean(1) * sums.mean(1)))
        );
        let one = many.get(1).unwrap();
        assert_eq!(
            one.coverage_interval(0.9).1,
            one.value + many.coverage_factor(0.9) * one.u
        );
        let linear = jackknife.estimate_many_linear(|sums| vec![sums.mean(0)]);
        assert_eq!(
            linear.get(0),
            Some(jackknife.estimate_linear(|sums| sums.mean(0)))
        );
    }

    #[test]
    fn covariance_makes_the_uncertainty_of_a_sum() {
        let totals = random(6, 1000);
        let jackknife = totals.jackknife(&EXPONENTS);
        let u = |f: &dyn Fn(&Sums<'_>) -> f64| jackknife.estimate_linear(f).u;
        let (a, b) = (u(&|s| s.mean(0)), u(&|s| s.mean(1)));
        let covariance = jackknife.covariance(|s| s.mean(0), |s| s.mean(1));
        assert_relative_eq!(
            jackknife.covariance(|s| s.mean(0), |s| s.mean(0)),
            a * a,
            max_relative = 1e-13
        );
        let sum = u(&|s| s.mean(0) + s.mean(1));
        assert_relative_eq!(
            sum * sum,
            a * a + b * b + 2.0 * covariance,
            max_relative = 1e-12
        );
        // Half of the second output is the first, so they must go together.
        assert!(covariance > 0.25 * a * b);
    }

    #[test]
    fn intervals_cover_the_true_value_as_often_as_they_say() {
        // 2000 small sets; the count of covered values is binomial, and 4.5 of its standard deviations are allowed (p = 7e-6).
        let (sets, photons) = (2000, 640);
        for level in [0.95, 0.5] {
            let mut covered = [0, 0];
            for seed in 0..sets {
                let totals = random(10_000 + seed, photons);
                let jackknife = totals.jackknife(&EXPONENTS);
                let mean = jackknife.estimate_linear(|sums| sums.mean(1));
                let ratio = jackknife.estimate(|sums| sums.mean(0) / sums.mean(1));
                for (count, (estimate, truth)) in
                    covered.iter_mut().zip([(mean, 1.5), (ratio, 1.0 / 1.5)])
                {
                    let (low, high) = estimate.coverage_interval(level);
                    *count += u32::from(low <= truth && truth <= high);
                }
            }
            let sets = sets as f64;
            let allowed = 4.5 * (sets * level * (1.0 - level)).sqrt();
            for count in covered {
                assert!(
                    (f64::from(count) - sets * level).abs() < allowed,
                    "{count} of {sets} at {level}"
                );
            }
        }
    }
}
