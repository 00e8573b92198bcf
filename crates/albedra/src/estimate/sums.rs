//! The sums of a set of photons, as numbers.

use super::Jackknife;

/// What a set of photons has booked: all photons of a run, or all but those of one group.
///
/// This is what the functions see that make estimates; they are called once for each set. A sum that does not exist is
/// NaN.
#[derive(Clone, Copy, Debug)]
pub struct Sums<'a> {
    jackknife: &'a Jackknife<'a>,
    left_out: Option<usize>,
}

impl<'a> Sums<'a> {
    /// The sums of all photons, or of those outside one group.
    pub(crate) fn new(jackknife: &'a Jackknife<'a>, left_out: Option<usize>) -> Self {
        Self {
            jackknife,
            left_out,
        }
    }

    /// Number of photons in the set.
    pub fn photons(&self) -> u64 {
        self.jackknife.photons()
            - self
                .left_out
                .map_or(0, |group| self.jackknife.sizes()[group])
    }

    /// The exact sum of an output in its quanta; `None` if there is no such output or it leaves the range of 128 bits.
    pub fn quanta(&self, output: usize) -> Option<i128> {
        let all = self.jackknife.quanta(output)?;
        match self.left_out {
            Some(group) => all.checked_sub(self.jackknife.totals().groups.get(output)?[group]),
            None => Some(all),
        }
    }

    /// The sum of an output, in the output's own dimensionless unit.
    pub fn sum(&self, output: usize) -> f64 {
        match (self.quanta(output), self.jackknife.exponents().get(output)) {
            // The conversion rounds to nearest, ties to even; the scale is a power of two and does not round again.
            (Some(quanta), Some(&exponent)) => quanta as f64 * power_of_two(exponent),
            _ => f64::NAN,
        }
    }

    /// The sum of an output divided by the number of photons; NaN without photons.
    pub fn mean(&self, output: usize) -> f64 {
        self.sum(output) / self.photons() as f64
    }
}

/// Two to an integer power, exact; 0 or infinite beyond the range of `f64`.
pub(crate) fn power_of_two(exponent: i32) -> f64 {
    match exponent {
        ..=-1075 => 0.0,
        -1074..=-1023 => f64::from_bits(1 << (exponent + 1074)),
        -1022..=1023 => f64::from_bits(u64::from((exponent + 1023).unsigned_abs()) << 52),
        1024.. => f64::INFINITY,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::estimate::{Fingerprint, Totals};

    #[test]
    fn powers_of_two_are_exact() {
        let mut expected = 1.0;
        for exponent in 0..=1100 {
            assert_eq!(power_of_two(exponent), expected);
            expected *= 2.0;
        }
        let mut expected = 1.0;
        for exponent in 0..=1100 {
            assert_eq!(power_of_two(-exponent), expected);
            expected *= 0.5;
        }
        assert_eq!(
            (power_of_two(i32::MIN), power_of_two(i32::MAX)),
            (0.0, f64::INFINITY)
        );
    }

    #[test]
    fn conversion_rounds_once_to_nearest() {
        let mut totals = Totals::empty(Fingerprint([0; 16]), Fingerprint([0; 16]), 0, 1);
        totals.photons.insert(0..128).unwrap();
        // 2^100 + 2^47 is half way between neighbours 2^48 apart: to even, that is down; one quantum more goes up.
        totals.groups[0][0] = 1 << 100;
        totals.groups[0][1] = 1 << 47;
        let exponents = [-100];
        assert_eq!(Sums::new(&totals.jackknife(&exponents), None).sum(0), 1.0);
        totals.groups[0][2] = 1;
        assert_eq!(
            Sums::new(&totals.jackknife(&exponents), None).sum(0),
            1.0 + f64::EPSILON
        );
        assert_eq!(
            Sums::new(&totals.jackknife(&exponents), Some(2)).sum(0),
            1.0
        );
        assert_eq!(
            Sums::new(&totals.jackknife(&exponents), Some(2)).photons(),
            126
        );
    }

    #[test]
    fn what_does_not_exist_is_nan() {
        let mut totals = Totals::empty(Fingerprint([0; 16]), Fingerprint([0; 16]), 0, 2);
        let jackknife = totals.jackknife(&[-60]);
        let sums = Sums::new(&jackknife, None);
        assert!(sums.mean(0).is_nan() && sums.sum(1).is_nan() && sums.sum(2).is_nan());
        assert_eq!(
            (sums.sum(0), sums.quanta(1), sums.quanta(2)),
            (0.0, Some(0), None)
        );
        totals.groups[0] = [i128::MAX; 64];
        assert!(Sums::new(&totals.jackknife(&[-60]), None).sum(0).is_nan());
    }
}
