//! Which photons have been traced.

use std::fmt;
use std::ops::Range;

use serde::{Deserialize, Serialize};

/// A set of photon indices, kept as sorted half-open ranges that neither overlap nor touch.
///
/// # Examples
///
/// ```
/// let mut photons = albedra::Intervals::default();
/// photons.insert(0..1000)?;
/// photons.insert(1000..1500)?;
/// assert_eq!(photons.iter().collect::<Vec<_>>(), [0..1500]);
/// assert!(photons.insert(1499..1600).is_err());
/// # Ok::<(), albedra::IntervalsError>(())
/// ```
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(try_from = "Vec<(u64, u64)>", into = "Vec<(u64, u64)>")]
pub struct Intervals(Vec<(u64, u64)>);

impl Intervals {
    /// Adds a range of indices; an empty range adds nothing.
    ///
    /// # Errors
    ///
    /// If some of them are in the set already, which then stays as it was.
    pub fn insert(&mut self, range: Range<u64>) -> Result<(), IntervalsError> {
        if range.is_empty() {
            return Ok(());
        }
        let at = self.0.partition_point(|&(_, end)| end < range.start);
        // All ranges before `at` end below the new one; those that touch or overlap it start at `at`.
        let touching = self.0[at..].partition_point(|&(start, _)| start <= range.end);
        let (mut start, mut end) = (range.start, range.end);
        for &(known, until) in &self.0[at..at + touching] {
            let overlap = known.max(range.start)..until.min(range.end);
            if !overlap.is_empty() {
                return Err(IntervalsError::Overlap {
                    start: overlap.start,
                    end: overlap.end,
                });
            }
            (start, end) = (start.min(known), end.max(until));
        }
        self.0.splice(at..at + touching, [(start, end)]);
        Ok(())
    }

    /// Gives the indices of both sets.
    ///
    /// # Errors
    ///
    /// If an index is in both; the error names the first range that is.
    pub fn union(&self, other: &Self) -> Result<Self, IntervalsError> {
        let mut all: Vec<(u64, u64)> = self.0.iter().chain(&other.0).copied().collect();
        all.sort_unstable();
        let mut merged: Vec<(u64, u64)> = Vec::with_capacity(all.len());
        for (start, end) in all {
            match merged.last_mut() {
                Some(last) if start < last.1 => {
                    return Err(IntervalsError::Overlap {
                        start,
                        end: end.min(last.1),
                    });
                }
                Some(last) if start == last.1 => last.1 = end,
                _ => merged.push((start, end)),
            }
        }
        Ok(Self(merged))
    }

    /// Number of indices in the set.
    pub fn len(&self) -> u64 {
        // Disjoint ranges below 2^64 cannot hold more than 2^64 - 1 indices.
        self.0.iter().map(|&(start, end)| end - start).sum()
    }

    /// Says whether the set is empty.
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// Says whether an index is in the set.
    pub fn contains(&self, index: u64) -> bool {
        let at = self.0.partition_point(|&(_, end)| end <= index);
        self.0.get(at).is_some_and(|&(start, _)| start <= index)
    }

    /// The ranges in ascending order; no two touch.
    pub fn iter(
        &self,
    ) -> impl ExactSizeIterator<Item = Range<u64>> + DoubleEndedIterator + Clone + '_ {
        self.0.iter().map(|&(start, end)| start..end)
    }

    /// Number of indices in each group; an index belongs to the group of its remainder by 64.
    pub fn group_sizes(&self) -> [u64; 64] {
        let below = |limit: u64, group: u64| limit / 64 + u64::from(limit % 64 > group);
        let mut sizes = [0; 64];
        for &(start, end) in &self.0 {
            for (size, group) in sizes.iter_mut().zip(0..) {
                *size += below(end, group) - below(start, group);
            }
        }
        sizes
    }
}

impl TryFrom<Vec<(u64, u64)>> for Intervals {
    type Error = IntervalsError;

    /// Takes ranges that ascend and neither overlap nor touch, as [`Intervals::iter`] gives them.
    fn try_from(ranges: Vec<(u64, u64)>) -> Result<Self, IntervalsError> {
        for (at, &(start, end)) in ranges.iter().enumerate() {
            if start >= end || (at > 0 && ranges[at - 1].1 >= start) {
                return Err(IntervalsError::Disorder { start, end });
            }
        }
        Ok(Self(ranges))
    }
}

impl From<Intervals> for Vec<(u64, u64)> {
    fn from(intervals: Intervals) -> Self {
        intervals.0
    }
}

/// What is wrong with a set of photon indices.
#[derive(Clone, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum IntervalsError {
    /// Photons that would be counted twice: `start` and all up to but not including `end`.
    Overlap {
        /// First index of the overlap.
        start: u64,
        /// First index after it.
        end: u64,
    },
    /// A range in a list that is empty, or overlaps, touches or precedes the one before.
    Disorder {
        /// First index of the range.
        start: u64,
        /// First index after it.
        end: u64,
    },
}

impl fmt::Display for IntervalsError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Overlap { start, end } => write!(
                f,
                "photons {start} to {} are there already",
                end.saturating_sub(1)
            ),
            Self::Disorder { start, end } => {
                write!(
                    f,
                    "photon ranges must ascend with gaps between, but {start}..{end} does not fit its place"
                )
            }
        }
    }
}

impl std::error::Error for IntervalsError {}

#[cfg(test)]
mod tests {
    use std::collections::BTreeSet;

    use proptest::prelude::*;

    use super::*;

    fn of(ranges: &[Range<u64>]) -> Intervals {
        let mut set = Intervals::default();
        for range in ranges {
            set.insert(range.clone()).unwrap();
        }
        set
    }

    #[test]
    fn ranges_that_touch_become_one() {
        assert_eq!(of(&[10..20, 30..40, 20..30]), Intervals(vec![(10, 40)]));
        assert_eq!(
            of(&[10..20, 0..10, 21..22]).iter().collect::<Vec<_>>(),
            [0..20, 21..22]
        );
        assert_eq!(of(&[5..5, 7..7]), Intervals::default());
    }

    #[test]
    fn an_overlap_is_named_and_changes_nothing() {
        let set = of(&[10..20, 30..40]);
        for (range, start, end) in [
            (0..11, 10, 11),
            (19..30, 19, 20),
            (12..15, 12, 15),
            (20..99, 30, 40),
            (0..99, 10, 20),
        ] {
            let mut changed = set.clone();
            assert_eq!(
                changed.insert(range.clone()),
                Err(IntervalsError::Overlap { start, end })
            );
            assert_eq!(changed, set);
            assert_eq!(
                set.union(&Intervals(vec![(range.start, range.end)])),
                Err(IntervalsError::Overlap { start, end })
            );
        }
        let message = IntervalsError::Overlap { start: 10, end: 20 }.to_string();
        assert_eq!(message, "photons 10 to 19 are there already");
    }

    #[test]
    fn large_indices_are_counted_exactly() {
        let set = of(&[0..1 << 63, (1 << 63) + 1..u64::MAX]);
        assert_eq!(set.len(), u64::MAX - 1);
        assert_eq!(set.group_sizes().iter().sum::<u64>(), set.len());
        // 2^64 - 1 indices would give 2^58 to each group but one; index 2^63 (group 0) and 2^64 - 1 (group 63) miss.
        assert_eq!(set.group_sizes()[0], (1 << 58) - 1);
        assert_eq!(set.group_sizes()[1], 1 << 58);
        assert_eq!(set.group_sizes()[63], (1 << 58) - 1);
        assert!(set.contains(u64::MAX - 1) && !set.contains(1 << 63) && !set.contains(u64::MAX));
    }

    #[test]
    fn text_form_is_checked() {
        #[derive(Debug, PartialEq, Serialize, Deserialize)]
        struct Holder {
            photons: Intervals,
        }
        let holder = Holder {
            photons: of(&[3..7, 1 << 62..(1 << 62) + 5]),
        };
        assert_eq!(
            toml::from_str::<Holder>(&toml::to_string(&holder).unwrap()),
            Ok(holder)
        );
        for bad in [
            "[[7, 3]]",
            "[[3, 3]]",
            "[[3, 7], [7, 9]]",
            "[[3, 7], [1, 2]]",
            "[[-1, 7]]",
        ] {
            assert!(
                toml::from_str::<Holder>(&format!("photons = {bad}")).is_err(),
                "{bad}"
            );
        }
    }

    proptest! {
        #[test]
        fn agrees_with_a_plain_set(ranges in prop::collection::vec((0_u64..300, 0_u64..40), 0..30), split in 0_usize..30) {
            let mut plain = BTreeSet::new();
            let (mut set, mut halves) = (Intervals::default(), [Intervals::default(), Intervals::default()]);
            for (at, (start, length)) in ranges.into_iter().enumerate() {
                let range = start..start + length;
                let fresh = range.clone().all(|index| !plain.contains(&index));
                prop_assert_eq!(set.insert(range.clone()).is_ok(), fresh);
                if fresh {
                    plain.extend(range.clone());
                    halves[usize::from(at >= split)].insert(range).unwrap();
                }
            }
            prop_assert_eq!(set.len(), plain.len() as u64);
            prop_assert_eq!(&halves[0].union(&halves[1]).unwrap(), &set);
            prop_assert_eq!(Intervals::try_from(Vec::from(set.clone())), Ok(set.clone()));
            for index in 0..400 {
                prop_assert_eq!(set.contains(index), plain.contains(&index));
            }
            for (group, size) in (0..).zip(set.group_sizes()) {
                prop_assert_eq!(plain.iter().filter(|&index| index % 64 == group).count() as u64, size);
            }
        }
    }
}
