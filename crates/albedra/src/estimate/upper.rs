//! Upper limits for outputs that hardly any photon reached.

use super::{GROUPS, Jackknife};

/// With hits in fewer groups, a mean and a standard uncertainty say little.
const FEWEST_GROUPS: usize = 5;

/// One-sided 95 % limits on the mean of a Poisson variable of which 0, 1, … 4 were seen: half the 0.95 quantile of χ²
/// with 2 (seen + 1) degrees of freedom (F. Garwood, Biometrika 28 (1936) 437–442, reference from memory; the
/// numbers are roots of the Poisson sum in 30 digits, mpmath 1.3.0, and are checked in the tests).
const POISSON_95: [f64; FEWEST_GROUPS] = [
    2.995_732_273_553_991,
    4.743_864_518_390_578,
    6.295_793_621_871_99,
    7.753_656_527_932_727,
    9.153_519_026_637_573,
];

impl Jackknife<'_> {
    /// Number of groups in which an output has booked anything.
    pub fn groups_hit(&self, output: usize) -> usize {
        self.totals()
            .groups
            .get(output)
            .map_or(0, |groups| groups.iter().filter(|&&sum| sum != 0).count())
    }

    /// Upper 95 % limit of an output's mean where it was booked in fewer than five groups, else `None`.
    ///
    /// `full` is the most that one photon is expected to book, in the output's own unit: 1 for energies. Multiply the limit
    /// by the same scale as the mean.
    ///
    /// # Method
    ///
    /// The limit of a Poisson variable, seen as often as there are groups with bookings, times `full` over the number of
    /// photons. This assumes bookings that are never negative, and hits so rare that each of these groups was hit by one
    /// photon. Where a group has booked more than `full`, by a photon that came back or by several photons, the largest
    /// booking takes the place of `full`; so the limit is never below the mean.
    pub fn upper_limit(&self, output: usize, full: f64) -> Option<f64> {
        let limit = POISSON_95.get(self.groups_hit(output))?;
        let groups = self.totals().groups.get(output)?;
        let quantum = super::sums::power_of_two(*self.exponents().get(output)?);
        let weight = (0..GROUPS)
            .map(|group| groups[group] as f64 * quantum)
            .fold(full, |most, booked| {
                // Not `f64::max`, which would take a NaN for missing.
                if booked > most { booked } else { most }
            });
        (self.photons() > 0).then(|| limit * weight / self.photons() as f64)
    }
}

#[cfg(test)]
mod tests {
    use statrs::function::gamma::gamma_ur;

    use super::*;
    use crate::estimate::{Fingerprint, Totals};

    fn totals(hits: &[(usize, i128)]) -> Totals {
        let mut totals = Totals::empty(Fingerprint([0; 16]), Fingerprint([0; 16]), 0, 1);
        totals.photons.insert(0..1000).unwrap();
        for &(group, quanta) in hits {
            totals.groups[0][group] = quanta;
        }
        totals
    }

    #[test]
    fn limits_leave_five_per_cent() {
        for (seen, limit) in POISSON_95.into_iter().enumerate() {
            // Chance to see so few or fewer: exp(-limit) times the sum of limit^k / k!, which is also the χ² relation.
            let (mut term, mut sum) = (1.0, 0.0);
            for k in 0..=seen {
                sum += term;
                term *= limit / (k + 1) as f64;
            }
            #[expect(clippy::disallowed_methods, reason = "test only")]
            let chance = sum * (-limit).exp();
            approx::assert_relative_eq!(chance, 0.05, max_relative = 1e-13);
            approx::assert_relative_eq!(
                gamma_ur((seen + 1) as f64, limit),
                0.05,
                max_relative = 1e-12
            );
        }
    }

    #[test]
    fn few_hits_have_a_limit_and_more_have_none() {
        let one = 1_i128 << 60;
        let exponents = [-60];
        let limit = |hits: &[(usize, i128)]| totals(hits).jackknife(&exponents).upper_limit(0, 1.0);
        assert_eq!(limit(&[]), Some(POISSON_95[0] / 1000.0));
        assert_eq!(limit(&[(3, one / 2), (9, 1)]), Some(POISSON_95[2] / 1000.0));
        assert_eq!(limit(&[(3, 2 * one)]), Some(2.0 * POISSON_95[1] / 1000.0));
        assert!(limit(&[(1, 1), (2, 1), (3, 1), (4, 1)]).is_some());
        assert_eq!(limit(&[(1, 1), (2, 1), (3, 1), (4, 1), (5, 1)]), None);
        assert_eq!(totals(&[]).jackknife(&exponents).upper_limit(1, 1.0), None);
        let empty = Totals::empty(Fingerprint([0; 16]), Fingerprint([0; 16]), 0, 1);
        assert_eq!(empty.jackknife(&exponents).upper_limit(0, 1.0), None);
    }
}
