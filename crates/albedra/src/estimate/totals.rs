//! The exact sums of a run, and how runs are put together.

use std::fmt;

use serde::{Deserialize, Serialize};

use super::{
    Estimate, Estimates, Fingerprint, FingerprintBuilder, Intervals, IntervalsError, Jackknife,
    Sums,
};

/// Number of groups that photons are dealt to; photon `i` belongs to group `i` mod 64.
///
/// Fewer groups would make the uncertainties themselves less certain (their relative spread is about 1/√(2·63) = 9 %),
/// more would take more memory for each output.
pub const GROUPS: usize = 64;

/// What happened on the way, counted over all photons.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Counters {
    /// Strikes on surfaces.
    pub strikes: u64,
    /// Flights.
    pub flights: u64,
    /// Flights for which a wall was found at the second try only.
    pub retried: u64,
    /// Photons for which no wall was found.
    pub untracked: u64,
}

impl Counters {
    /// Adds the counts of both, or names the counter that would overflow.
    ///
    /// # Errors
    ///
    /// If a sum exceeds 2⁶⁴ − 1.
    pub(crate) fn merged(self, other: Self) -> Result<Self, MergeError> {
        let add = |counter, a: u64, b: u64| a.checked_add(b).ok_or(MergeError::Counter { counter });
        Ok(Self {
            strikes: add("strikes", self.strikes, other.strikes)?,
            flights: add("flights", self.flights, other.flights)?,
            retried: add("retried", self.retried, other.retried)?,
            untracked: add("untracked", self.untracked, other.untracked)?,
        })
    }
}

/// Everything that a run has booked, as integers: the raw form of an outcome.
///
/// Sums of integers do not depend on their order, so totals of the same photons are equal bit for bit however the work
/// was divided.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Totals {
    pub(crate) history: Fingerprint,
    pub(crate) outputs: Fingerprint,
    pub(crate) seed: u64,
    pub(crate) photons: Intervals,
    pub(crate) groups: Vec<[i128; GROUPS]>,
    pub(crate) counters: Counters,
}

impl Totals {
    /// Starts totals of no photons for a number of outputs.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{FingerprintBuilder, Totals};
    ///
    /// let history = FingerprintBuilder::new("history").finish();
    /// let outputs = FingerprintBuilder::new("outputs").finish();
    /// let totals = Totals::empty(history, outputs, 7, 3);
    /// assert_eq!(totals.groups().len(), 3);
    /// assert_eq!(Totals::from_bytes(&totals.to_bytes()), Ok(totals));
    /// ```
    pub fn empty(history: Fingerprint, outputs: Fingerprint, seed: u64, count: usize) -> Self {
        let groups = vec![[0; GROUPS]; count];
        Self {
            history,
            outputs,
            seed,
            photons: Intervals::default(),
            groups,
            counters: Counters::default(),
        }
    }

    /// Puts totals together from their parts, as kept in a file of another form than [`Totals::to_bytes`].
    ///
    /// Compare their [`Totals::checksum`] with the one that was kept.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Counters, Fingerprint, Intervals, Totals};
    ///
    /// let (history, outputs) = (Fingerprint([1; 16]), Fingerprint([2; 16]));
    /// let totals = Totals::from_parts(history, outputs, 7, Intervals::default(), vec![[0; 64]; 3], Counters::default());
    /// assert_eq!(totals, Totals::empty(history, outputs, 7, 3));
    /// ```
    pub fn from_parts(
        history: Fingerprint,
        outputs: Fingerprint,
        seed: u64,
        photons: Intervals,
        groups: Vec<[i128; GROUPS]>,
        counters: Counters,
    ) -> Self {
        Self {
            history,
            outputs,
            seed,
            photons,
            groups,
            counters,
        }
    }

    /// Fingerprint of everything in the totals, which tells damaged ones.
    pub fn checksum(&self) -> Fingerprint {
        FingerprintBuilder::new("totals checksum")
            .bytes(&self.to_bytes())
            .finish()
    }

    /// Fingerprint of all that decides what photons do.
    pub fn history(&self) -> Fingerprint {
        self.history
    }

    /// Fingerprint of all that decides what the outputs mean.
    pub fn outputs(&self) -> Fingerprint {
        self.outputs
    }

    /// The seed of the run.
    pub fn seed(&self) -> u64 {
        self.seed
    }

    /// The photons that are in the sums.
    pub fn photons(&self) -> &Intervals {
        &self.photons
    }

    /// The sums of each output, group by group, in the output's quanta.
    pub fn groups(&self) -> &[[i128; GROUPS]] {
        &self.groups
    }

    /// What happened on the way.
    pub fn counters(&self) -> Counters {
        self.counters
    }

    /// Adds the totals of other photons of the same experiment and seed.
    ///
    /// # Errors
    ///
    /// If the other totals are of another experiment or seed, share a photon with these, or if a sum leaves its range.
    /// Then nothing is changed.
    pub fn merge(&mut self, other: &Self) -> Result<(), MergeError> {
        if self.history != other.history {
            return Err(MergeError::History {
                ours: self.history,
                theirs: other.history,
            });
        }
        if self.outputs != other.outputs {
            return Err(MergeError::Outputs {
                ours: self.outputs,
                theirs: other.outputs,
            });
        }
        if self.seed != other.seed {
            return Err(MergeError::Seed {
                ours: self.seed,
                theirs: other.seed,
            });
        }
        if self.groups.len() != other.groups.len() {
            return Err(MergeError::Count {
                ours: self.groups.len(),
                theirs: other.groups.len(),
            });
        }
        let photons = self
            .photons
            .union(&other.photons)
            .map_err(MergeError::Photons)?;
        let counters = self.counters.merged(other.counters)?;
        for (output, (ours, theirs)) in self.groups.iter().zip(&other.groups).enumerate() {
            if let Some(group) =
                (0..GROUPS).find(|&group| ours[group].checked_add(theirs[group]).is_none())
            {
                return Err(MergeError::Range { output, group });
            }
        }
        for (ours, theirs) in self.groups.iter_mut().zip(&other.groups) {
            for (sum, more) in ours.iter_mut().zip(theirs) {
                *sum += more;
            }
        }
        (self.photons, self.counters) = (photons, counters);
        Ok(())
    }

    /// Adds what a batch of photons booked, which no photon of these totals is among.
    pub(crate) fn absorb(
        &mut self,
        photons: std::ops::Range<u64>,
        groups: &[[i128; GROUPS]],
        counters: Counters,
    ) {
        let disjoint = self.photons.insert(photons);
        debug_assert!(disjoint.is_ok(), "batches follow one another");
        for (ours, theirs) in self.groups.iter_mut().zip(groups) {
            for (sum, more) in ours.iter_mut().zip(theirs) {
                *sum += more;
            }
        }
        self.counters.strikes += counters.strikes;
        self.counters.flights += counters.flights;
        self.counters.retried += counters.retried;
        self.counters.untracked += counters.untracked;
    }

    /// Makes ready for many estimates: sums the groups of every output once.
    ///
    /// `exponents` gives the quantum of each output as a power of two.
    pub fn jackknife<'a>(&'a self, exponents: &'a [i32]) -> Jackknife<'a> {
        Jackknife::new(self, exponents)
    }

    /// Estimates any function of the sums; see [`Jackknife::estimate`].
    pub fn estimate(&self, exponents: &[i32], f: impl Fn(&Sums<'_>) -> f64) -> Estimate {
        self.jackknife(exponents).estimate(f)
    }

    /// Estimates a linear function of the sums; see [`Jackknife::estimate_linear`].
    pub fn estimate_linear(&self, exponents: &[i32], f: impl Fn(&Sums<'_>) -> f64) -> Estimate {
        self.jackknife(exponents).estimate_linear(f)
    }

    /// Estimates many functions of the sums at once; see [`Jackknife::estimate_many`].
    pub fn estimate_many(&self, exponents: &[i32], f: impl Fn(&Sums<'_>) -> Vec<f64>) -> Estimates {
        self.jackknife(exponents).estimate_many(f)
    }
}

/// Why totals cannot be put together.
#[derive(Clone, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum MergeError {
    /// The experiments differ in what photons do.
    History {
        /// Fingerprint here.
        ours: Fingerprint,
        /// Fingerprint there.
        theirs: Fingerprint,
    },
    /// The experiments differ in what they observe.
    Outputs {
        /// Fingerprint here.
        ours: Fingerprint,
        /// Fingerprint there.
        theirs: Fingerprint,
    },
    /// The seeds differ.
    Seed {
        /// Seed here.
        ours: u64,
        /// Seed there.
        theirs: u64,
    },
    /// The numbers of outputs differ, although the fingerprints do not.
    Count {
        /// Number of outputs here.
        ours: usize,
        /// Number of outputs there.
        theirs: usize,
    },
    /// Some photons are in both.
    Photons(IntervalsError),
    /// A sum would leave the range of 128 bits.
    Range {
        /// Index of the output.
        output: usize,
        /// Index of the group.
        group: usize,
    },
    /// A counter would leave the range of 64 bits.
    Counter {
        /// Name of the counter.
        counter: &'static str,
    },
}

impl fmt::Display for MergeError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::History { ours, theirs } => {
                write!(
                    f,
                    "totals of another experiment: history must be {ours}, got {theirs}"
                )
            }
            Self::Outputs { ours, theirs } => {
                write!(
                    f,
                    "totals of other observables: outputs must be {ours}, got {theirs}"
                )
            }
            Self::Seed { ours, theirs } => {
                write!(f, "totals of another seed: must be {ours}, got {theirs}")
            }
            Self::Count { ours, theirs } => {
                write!(f, "number of outputs must be {ours}, got {theirs}")
            }
            Self::Photons(error) => error.fmt(f),
            Self::Range { output, group } => {
                write!(
                    f,
                    "sum of output {output} in group {group} must stay within 128 bits"
                )
            }
            Self::Counter { counter } => write!(f, "counter {counter} must stay below 2^64"),
        }
    }
}

impl std::error::Error for MergeError {}

#[cfg(test)]
mod tests {
    use super::*;

    fn totals(range: std::ops::Range<u64>, seed: u64) -> Totals {
        let mut totals = Totals::empty(Fingerprint([1; 16]), Fingerprint([2; 16]), seed, 2);
        totals.photons.insert(range.clone()).unwrap();
        for index in range {
            totals.groups[0][usize::try_from(index % 64).unwrap()] += i128::from(index) << 60;
            totals.groups[1][usize::try_from(index % 64).unwrap()] -= i128::from(index * index);
            totals.counters.strikes += index;
        }
        totals
    }

    #[test]
    fn parts_in_any_order_give_the_whole() {
        let whole = totals(5..1000, 7);
        for order in [[0, 1, 2], [2, 0, 1], [1, 2, 0]] {
            let parts = [totals(5..300, 7), totals(300..301, 7), totals(301..1000, 7)];
            let mut sum = totals(0..0, 7);
            for part in order {
                sum.merge(&parts[part]).unwrap();
            }
            assert_eq!(sum, whole);
        }
    }

    #[test]
    fn what_does_not_belong_together_is_refused_and_changes_nothing() {
        let mut ours = totals(0..100, 7);
        let before = ours.clone();
        let refuse = |ours: &mut Totals, change: &dyn Fn(&mut Totals)| {
            let mut theirs = totals(100..200, 7);
            change(&mut theirs);
            let error = ours.merge(&theirs).unwrap_err();
            assert_eq!(ours, &before);
            error
        };
        let (one, two, other) = (
            Fingerprint([1; 16]),
            Fingerprint([2; 16]),
            Fingerprint([3; 16]),
        );
        let error = refuse(&mut ours, &|t| t.history = other);
        assert_eq!(
            error,
            MergeError::History {
                ours: one,
                theirs: other
            }
        );
        let error = refuse(&mut ours, &|t| t.outputs = other);
        assert_eq!(
            error,
            MergeError::Outputs {
                ours: two,
                theirs: other
            }
        );
        assert_eq!(
            refuse(&mut ours, &|t| t.seed = 8),
            MergeError::Seed { ours: 7, theirs: 8 }
        );
        assert_eq!(
            refuse(&mut ours, &|t| t.groups.truncate(1)),
            MergeError::Count { ours: 2, theirs: 1 }
        );
        let error = refuse(&mut ours, &|t| t.photons.insert(90..95).unwrap());
        assert_eq!(
            error,
            MergeError::Photons(IntervalsError::Overlap { start: 90, end: 95 })
        );
        assert_eq!(
            refuse(&mut ours, &|t| t.groups[1][3] = i128::MIN),
            MergeError::Range {
                output: 1,
                group: 3
            }
        );
        let error = refuse(&mut ours, &|t| t.counters.strikes = u64::MAX);
        assert_eq!(error, MergeError::Counter { counter: "strikes" });
        assert_eq!(error.to_string(), "counter strikes must stay below 2^64");
    }
}
