//! Totals as bytes that are checked when they are read back.

use std::fmt;

use super::{Counters, Fingerprint, FingerprintBuilder, GROUPS, Intervals, IntervalsError, Totals};

const MAGIC: &[u8; 8] = b"albedra\x01";
const VERSION: u32 = 1;

impl Totals {
    /// Gives the totals as bytes, the same on every machine.
    ///
    /// All numbers are little-endian: mark, version, fingerprints, seed, ranges of photons (count, then start and end of
    /// each), sums (count, then 64 of 128 bits each), counters, and a checksum of all that.
    pub fn to_bytes(&self) -> Vec<u8> {
        let mut bytes = Vec::with_capacity(
            128 + 16 * self.photons.iter().len() + 16 * GROUPS * self.groups.len(),
        );
        bytes.extend_from_slice(MAGIC);
        bytes.extend_from_slice(&VERSION.to_le_bytes());
        bytes.extend_from_slice(&self.history.0);
        bytes.extend_from_slice(&self.outputs.0);
        bytes.extend_from_slice(&self.seed.to_le_bytes());
        bytes.extend_from_slice(&(self.photons.iter().len() as u64).to_le_bytes());
        for range in self.photons.iter() {
            bytes.extend_from_slice(&range.start.to_le_bytes());
            bytes.extend_from_slice(&range.end.to_le_bytes());
        }
        bytes.extend_from_slice(&(self.groups.len() as u64).to_le_bytes());
        for sum in self.groups.iter().flatten() {
            bytes.extend_from_slice(&sum.to_le_bytes());
        }
        let Counters {
            strikes,
            flights,
            retried,
            untracked,
        } = self.counters;
        for counter in [strikes, flights, retried, untracked] {
            bytes.extend_from_slice(&counter.to_le_bytes());
        }
        let checksum = checksum(&bytes);
        bytes.extend_from_slice(&checksum.0);
        bytes
    }

    /// Reads totals back from bytes.
    ///
    /// Memory is bounded by a small multiple of the bytes given.
    ///
    /// # Errors
    ///
    /// If the bytes are not what [`Totals::to_bytes`] gives.
    pub fn from_bytes(bytes: &[u8]) -> Result<Self, BytesError> {
        let mut rest = Reader { bytes, at: 0 };
        if rest.take::<8>("mark").ok().as_ref() != Some(MAGIC) {
            return Err(BytesError::NotTotals);
        }
        let version = u32::from_le_bytes(rest.take("version")?);
        if version != VERSION {
            return Err(BytesError::Version { version });
        }
        let history = Fingerprint(rest.take("history")?);
        let outputs = Fingerprint(rest.take("outputs")?);
        let seed = rest.u64("seed")?;
        let mut ranges = Vec::with_capacity(rest.count("photon ranges", 16)?);
        for _ in 0..ranges.capacity() {
            ranges.push((rest.u64("photon ranges")?, rest.u64("photon ranges")?));
        }
        let photons = Intervals::try_from(ranges).map_err(BytesError::Photons)?;
        let mut groups = vec![[0; GROUPS]; rest.count("sums", 16 * GROUPS)?];
        for sum in groups.iter_mut().flatten() {
            *sum = i128::from_le_bytes(rest.take("sums")?);
        }
        let [strikes, flights, retried, untracked] = [(); 4].map(|()| rest.u64("counters"));
        let counters = Counters {
            strikes: strikes?,
            flights: flights?,
            retried: retried?,
            untracked: untracked?,
        };
        let computed = checksum(&bytes[..rest.at]);
        let stored = Fingerprint(rest.take("checksum")?);
        if rest.at != bytes.len() {
            return Err(BytesError::Surplus {
                bytes: bytes.len() - rest.at,
            });
        }
        if stored != computed {
            return Err(BytesError::Checksum { stored, computed });
        }
        Ok(Self {
            history,
            outputs,
            seed,
            photons,
            groups,
            counters,
        })
    }
}

fn checksum(bytes: &[u8]) -> Fingerprint {
    FingerprintBuilder::new("totals").bytes(bytes).finish()
}

/// Takes numbers from the front of bytes.
struct Reader<'a> {
    bytes: &'a [u8],
    at: usize,
}

impl Reader<'_> {
    fn take<const N: usize>(&mut self, part: &'static str) -> Result<[u8; N], BytesError> {
        let taken = self.bytes[self.at..]
            .first_chunk::<N>()
            .copied()
            .ok_or(BytesError::Truncated { part })?;
        self.at += N;
        Ok(taken)
    }

    fn u64(&mut self, part: &'static str) -> Result<u64, BytesError> {
        self.take(part).map(u64::from_le_bytes)
    }

    /// Reads a number of items and makes sure that so many of the given size (bytes) are left.
    fn count(&mut self, part: &'static str, size: usize) -> Result<usize, BytesError> {
        let count = self.u64(part)?;
        let most = (self.bytes.len() - self.at) / size;
        usize::try_from(count)
            .ok()
            .filter(|&count| count <= most)
            .ok_or(BytesError::Truncated { part })
    }
}

/// Why bytes are not totals.
#[derive(Clone, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum BytesError {
    /// The mark at the start is missing.
    NotTotals,
    /// The bytes were written in a form that this version does not know.
    Version {
        /// Version of the form.
        version: u32,
    },
    /// The bytes end too early.
    Truncated {
        /// What could not be read.
        part: &'static str,
    },
    /// The set of photons is not one.
    Photons(IntervalsError),
    /// There is more than totals.
    Surplus {
        /// Number of bytes after the end.
        bytes: usize,
    },
    /// Some bytes have changed since they were written.
    Checksum {
        /// Checksum in the bytes.
        stored: Fingerprint,
        /// Checksum of the bytes.
        computed: Fingerprint,
    },
}

impl fmt::Display for BytesError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::NotTotals => {
                f.write_str("these bytes are not totals: the mark at the start is missing")
            }
            Self::Version { version } => {
                write!(f, "version of totals must be {VERSION}, got {version}")
            }
            Self::Truncated { part } => write!(f, "totals end within their {part}"),
            Self::Photons(error) => error.fmt(f),
            Self::Surplus { bytes } => {
                write!(f, "totals must end where they say, got {bytes} bytes more")
            }
            Self::Checksum { stored, computed } => {
                write!(
                    f,
                    "totals are damaged: checksum must be {stored}, got {computed}"
                )
            }
        }
    }
}

impl std::error::Error for BytesError {}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    fn sample() -> Totals {
        let mut totals = Totals::empty(Fingerprint([1; 16]), Fingerprint([2; 16]), u64::MAX, 3);
        totals.photons.insert(5..900).unwrap();
        totals.photons.insert(1 << 62..(1 << 62) + 9).unwrap();
        totals.groups[0][0] = i128::MAX;
        totals.groups[1][63] = i128::MIN;
        totals.groups[2][7] = -1;
        totals.counters = Counters {
            strikes: 1,
            flights: 2,
            retried: 3,
            untracked: u64::MAX,
        };
        totals
    }

    #[test]
    fn comes_back_as_it_was() {
        for totals in [
            sample(),
            Totals::empty(Fingerprint([0; 16]), Fingerprint([9; 16]), 0, 0),
        ] {
            assert_eq!(Totals::from_bytes(&totals.to_bytes()), Ok(totals));
        }
    }

    #[test]
    fn every_cut_and_every_flipped_byte_is_noticed() {
        let bytes = sample().to_bytes();
        for end in 0..bytes.len() {
            assert!(Totals::from_bytes(&bytes[..end]).is_err(), "cut at {end}");
        }
        let mut damaged = bytes.clone();
        for at in 0..bytes.len() {
            damaged[at] ^= 0x10;
            assert!(Totals::from_bytes(&damaged).is_err(), "flipped at {at}");
            damaged[at] ^= 0x10;
        }
        damaged.push(0);
        assert_eq!(
            Totals::from_bytes(&damaged),
            Err(BytesError::Surplus { bytes: 1 })
        );
    }

    #[test]
    fn a_huge_count_is_refused_before_memory_is_taken() {
        let bytes = sample().to_bytes();
        for (at, part, count) in [
            (52, "photon ranges", u64::MAX),
            (52, "photon ranges", 1 << 40),
            (92, "sums", u64::MAX),
            (92, "sums", 1 << 40),
            (92, "sums", 4),
        ] {
            let mut hostile = bytes.clone();
            hostile[at..at + 8].copy_from_slice(&count.to_le_bytes());
            assert_eq!(
                Totals::from_bytes(&hostile),
                Err(BytesError::Truncated { part })
            );
        }
    }

    #[test]
    fn other_versions_and_other_files_are_told_apart() {
        let mut bytes = sample().to_bytes();
        bytes[8] = 2;
        assert_eq!(
            Totals::from_bytes(&bytes),
            Err(BytesError::Version { version: 2 })
        );
        assert_eq!(Totals::from_bytes(b"solid"), Err(BytesError::NotTotals));
        assert_eq!(Totals::from_bytes(b""), Err(BytesError::NotTotals));
    }

    proptest! {
        #[test]
        fn garbage_never_panics(tail in prop::collection::vec(any::<u8>(), 0..2000), keep in 0_usize..200) {
            let mut bytes = sample().to_bytes();
            bytes.truncate(keep);
            bytes.extend(tail);
            prop_assert!(Totals::from_bytes(&bytes).is_err());
        }
    }
}
