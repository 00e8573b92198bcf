//! Short names for long descriptions: equal fingerprints mean equal content.

use std::fmt;
use std::hash::Hasher as _;
use std::str::FromStr;

use serde::{Deserialize, Serialize};
use siphasher::sip128::{Hasher128 as _, SipHasher13};

/// A 128-bit name of what went into it, printed as 32 hexadecimal digits.
///
/// It tells descriptions apart that differ by accident; it is no protection against somebody who forges one.
///
/// # Examples
///
/// ```
/// use albedra::{Fingerprint, FingerprintBuilder};
///
/// let fingerprint = FingerprintBuilder::new("wall").text("x-").f64(0.97).finish();
/// assert_eq!(fingerprint.to_string().parse::<Fingerprint>(), Ok(fingerprint));
/// ```
#[derive(
    Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize,
)]
#[serde(try_from = "String", into = "String")]
pub struct Fingerprint(pub [u8; 16]);

impl fmt::Display for Fingerprint {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.0.iter().try_for_each(|byte| write!(f, "{byte:02x}"))
    }
}

impl FromStr for Fingerprint {
    type Err = FingerprintError;

    fn from_str(text: &str) -> Result<Self, FingerprintError> {
        let error = || FingerprintError {
            text: text.chars().take(40).collect(),
        };
        let digits: Vec<u8> = text
            .bytes()
            .filter_map(|byte| char::from(byte).to_digit(16)?.try_into().ok())
            .collect();
        if text.len() != 32 || digits.len() != 32 {
            return Err(error());
        }
        let mut bytes = [0; 16];
        for (byte, pair) in bytes.iter_mut().zip(digits.chunks_exact(2)) {
            *byte = 16 * pair[0] + pair[1];
        }
        Ok(Self(bytes))
    }
}

impl TryFrom<String> for Fingerprint {
    type Error = FingerprintError;

    fn try_from(text: String) -> Result<Self, FingerprintError> {
        text.parse()
    }
}

impl From<Fingerprint> for String {
    fn from(fingerprint: Fingerprint) -> Self {
        fingerprint.to_string()
    }
}

/// A text that is not the printed form of a fingerprint.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct FingerprintError {
    /// The text, at most its first 40 characters.
    pub text: String,
}

impl fmt::Display for FingerprintError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "a fingerprint must be 32 hexadecimal digits, got {:?}",
            self.text
        )
    }
}

impl std::error::Error for FingerprintError {}

/// Collects content, value by value, into a [`Fingerprint`].
///
/// Everything is fed as little-endian bytes of a stated width, so the result is the same on every machine. Numbers and
/// bytes carry no mark of their kind or length: feed a count before a list.
#[derive(Clone, Debug)]
pub struct FingerprintBuilder(SipHasher13);

impl FingerprintBuilder {
    /// Starts a fingerprint; equal content in another domain gives another one.
    pub fn new(domain: &str) -> Self {
        let mut builder = Self(SipHasher13::new());
        builder.text(domain);
        builder
    }

    /// Adds bytes as they are, without their number.
    pub fn bytes(&mut self, bytes: &[u8]) -> &mut Self {
        self.0.write(bytes);
        self
    }

    /// Adds an integer.
    pub fn u64(&mut self, value: u64) -> &mut Self {
        self.bytes(&value.to_le_bytes())
    }

    /// Adds the bits of a number; −0 counts as +0, and every NaN as the same.
    pub fn f64(&mut self, value: f64) -> &mut Self {
        let bits = match value {
            0.0 => 0,
            _ if value.is_nan() => 0x7ff8_0000_0000_0000,
            _ => value.to_bits(),
        };
        self.u64(bits)
    }

    /// Adds a text and its length.
    pub fn text(&mut self, text: &str) -> &mut Self {
        self.u64(text.len() as u64).bytes(text.as_bytes())
    }

    /// Gives the fingerprint of all that was added so far.
    pub fn finish(&self) -> Fingerprint {
        let hash = self.0.finish128();
        let mut bytes = [0; 16];
        bytes[..8].copy_from_slice(&hash.h1.to_le_bytes());
        bytes[8..].copy_from_slice(&hash.h2.to_le_bytes());
        Fingerprint(bytes)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn equal_content_gives_equal_fingerprints_however_it_is_cut() {
        let whole = FingerprintBuilder::new("d")
            .bytes(b"abcdefghijk")
            .u64(7)
            .finish();
        let cut = FingerprintBuilder::new("d")
            .bytes(b"abc")
            .bytes(b"")
            .bytes(b"defghijk")
            .u64(7)
            .finish();
        assert_eq!(whole, cut);
    }

    #[test]
    fn any_difference_shows() {
        let all = [
            FingerprintBuilder::new("d").finish(),
            FingerprintBuilder::new("e").finish(),
            FingerprintBuilder::new("d").u64(1).finish(),
            FingerprintBuilder::new("d").f64(1.0).finish(),
            FingerprintBuilder::new("d").f64(-1.0).finish(),
            FingerprintBuilder::new("d").f64(f64::NAN).finish(),
            FingerprintBuilder::new("d").text("ab").text("c").finish(),
            FingerprintBuilder::new("d").text("a").text("bc").finish(),
        ];
        for (i, a) in all.iter().enumerate() {
            assert!(all[..i].iter().all(|b| a != b), "{i}");
        }
    }

    #[test]
    fn signs_of_zero_and_nan_do_not_matter() {
        let of = |value: f64| FingerprintBuilder::new("d").f64(value).finish();
        assert_eq!(of(0.0), of(-0.0));
        assert_eq!(of(f64::NAN), of(-f64::NAN));
    }

    /// SipHash-1-3 with a 128-bit result and a key of zeros must never change, else saved totals could not be merged. The
    /// value was also computed by a second program, written from the published algorithm.
    #[test]
    fn stream_is_stable() {
        let fingerprint = FingerprintBuilder::new("stable").u64(1).f64(0.5).finish();
        assert_eq!(fingerprint.to_string(), "26e458b3d6326bfb6876645e58fe2f8a");
    }

    #[test]
    fn text_form_is_checked() {
        let fingerprint = FingerprintBuilder::new("d").finish();
        assert_eq!(fingerprint.to_string().parse(), Ok(fingerprint));
        for bad in [
            "",
            "0",
            "0123456789abcdef0123456789abcdeg",
            "é123456789abcdef0123456789abcdef",
            "+0123456789abcdef0123456789abcde",
        ] {
            assert_eq!(
                bad.parse::<Fingerprint>(),
                Err(FingerprintError {
                    text: bad.to_owned()
                })
            );
        }
    }
}
