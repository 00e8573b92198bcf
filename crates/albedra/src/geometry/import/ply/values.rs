//! The numbers after the header of a PLY file, in text or binary.

use super::super::words::Words;
use super::super::{ImportError, MeshFormat, Place};
use super::header::{Kind, Shape};

/// A walk through the numbers of a file.
///
/// Whatever is read or passed over takes at least a byte of the file, or is an error.
pub(super) enum Values<'a> {
    /// Words, a line an item.
    Text(Words<'a>),
    /// Bytes, least significant first.
    Binary {
        /// What is left of the file.
        rest: &'a [u8],
        /// Number of bytes before it.
        at: usize,
    },
}

impl<'a> Values<'a> {
    /// Goes on behind the header of a text.
    pub(super) fn text(words: Words<'a>) -> Self {
        Self::Text(words)
    }

    /// Starts at a byte of a binary file.
    pub(super) fn binary(bytes: &'a [u8], at: usize) -> Self {
        Self::Binary {
            rest: bytes.get(at..).unwrap_or_default(),
            at,
        }
    }

    /// The line or byte.
    pub(super) fn place(&self) -> Place {
        match self {
            Self::Text(words) => words.place(),
            Self::Binary { at, .. } => Place::Byte(*at),
        }
    }

    /// The line, or the facet of this number.
    pub(super) fn facet_place(&self, facet: u64) -> Place {
        match self {
            Self::Text(words) => words.place(),
            Self::Binary { .. } => Place::Facet(usize::try_from(facet).unwrap_or(usize::MAX)),
        }
    }

    /// Goes to the line of the next item.
    pub(super) fn begin_item(&mut self) {
        if let Self::Text(words) = self {
            words.next_line();
        }
    }

    /// Requires that the line of the item ends.
    pub(super) fn end_item(&mut self) -> Result<(), ImportError> {
        match self {
            Self::Text(words) => words.end_of_line(),
            Self::Binary { .. } => Ok(()),
        }
    }

    /// Requires that the file ends.
    pub(super) fn end(&mut self) -> Result<(), ImportError> {
        const REQUIRED: &str = "the end of the file";
        match self {
            Self::Text(words) => match words.word() {
                None => Ok(()),
                word => Err(words.unexpected(REQUIRED, word)),
            },
            Self::Binary { rest: [], .. } => Ok(()),
            Self::Binary { rest, at } => {
                let found = format!("{} more bytes", rest.len());
                Err(unexpected(Place::Byte(*at), REQUIRED, found))
            }
        }
    }

    /// A number; in binary it may be infinite or none.
    pub(super) fn number(&mut self, kind: Kind) -> Result<f64, ImportError> {
        if let Self::Text(words) = self {
            let word = words.word_in_line();
            return words.number(word);
        }
        match kind {
            Kind::F32 => Ok(f64::from(f32::from_le_bytes(self.take()?))),
            Kind::F64 => Ok(f64::from_le_bytes(self.take()?)),
            Kind::I32 => Ok(f64::from(i32::from_le_bytes(self.take()?))),
            Kind::U32 => Ok(f64::from(u32::from_le_bytes(self.take()?))),
            Kind::I16 => Ok(f64::from(i16::from_le_bytes(self.take()?))),
            Kind::U16 => Ok(f64::from(u16::from_le_bytes(self.take()?))),
            Kind::I8 => Ok(f64::from(i8::from_le_bytes(self.take()?))),
            Kind::U8 => Ok(f64::from(u8::from_le_bytes(self.take()?))),
        }
    }

    /// A whole number.
    pub(super) fn integer(
        &mut self,
        kind: Kind,
        required: &'static str,
    ) -> Result<i64, ImportError> {
        if let Self::Text(words) = self {
            let word = words.word_in_line();
            return words.integer(word, required);
        }
        match kind {
            Kind::I32 => Ok(i32::from_le_bytes(self.take()?).into()),
            Kind::U32 => Ok(u32::from_le_bytes(self.take()?).into()),
            Kind::I16 => Ok(i16::from_le_bytes(self.take()?).into()),
            Kind::U16 => Ok(u16::from_le_bytes(self.take()?).into()),
            Kind::I8 => Ok(i8::from_le_bytes(self.take()?).into()),
            Kind::U8 => Ok(u8::from_le_bytes(self.take()?).into()),
            // The header is refused before.
            Kind::F32 | Kind::F64 => Err(unexpected(
                self.place(),
                required,
                "a number with a fraction".to_owned(),
            )),
        }
    }

    /// Length of a list.
    pub(super) fn length(&mut self, kind: Kind) -> Result<u64, ImportError> {
        const REQUIRED: &str = "a list length of at least 0";
        let place = self.place();
        let length = self.integer(kind, REQUIRED)?;
        u64::try_from(length).map_err(|_| unexpected(place, REQUIRED, format!("\"{length}\"")))
    }

    /// Passes over a value or a list.
    pub(super) fn skip(&mut self, shape: Shape) -> Result<(), ImportError> {
        let (items, kind) = match shape {
            Shape::Scalar(kind) => (1, kind),
            Shape::List { length, item } => (self.length(length)?, item),
        };
        match self {
            Self::Text(words) => {
                for _ in 0..items {
                    if words.word_in_line().is_none() {
                        return Err(words.unexpected("a value", None));
                    }
                }
                Ok(())
            }
            Self::Binary { rest, at } => {
                let bytes = items.saturating_mul(kind.size() as u64);
                let skipped = usize::try_from(bytes)
                    .ok()
                    .filter(|&bytes| bytes <= rest.len());
                let skipped = skipped.ok_or_else(|| truncated(*at, bytes, rest.len()))?;
                (*rest, *at) = (&rest[skipped..], *at + skipped);
                Ok(())
            }
        }
    }

    /// The next bytes of a binary file.
    fn take<const N: usize>(&mut self) -> Result<[u8; N], ImportError> {
        let Self::Binary { rest, at } = self else {
            return Err(unexpected(self.place(), "binary values", "text".to_owned()));
        };
        let Some((taken, left)) = rest.split_first_chunk() else {
            return Err(truncated(*at, N as u64, rest.len()));
        };
        (*rest, *at) = (left, *at + N);
        Ok(*taken)
    }
}

fn unexpected(place: Place, required: &'static str, found: String) -> ImportError {
    ImportError::Unexpected {
        format: MeshFormat::Ply,
        place,
        required,
        found,
    }
}

fn truncated(at: usize, required: u64, left: usize) -> ImportError {
    ImportError::Truncated {
        format: MeshFormat::Ply,
        place: Place::Byte(at),
        required,
        left: left as u64,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const SIGNED: [Kind; 3] = [Kind::I8, Kind::I16, Kind::I32];
    const UNSIGNED: [Kind; 3] = [Kind::U8, Kind::U16, Kind::U32];

    #[test]
    fn binary_numbers_have_their_sign_and_size() {
        let bytes = [0xfe; 32];
        for (signed, unsigned) in SIGNED.into_iter().zip(UNSIGNED) {
            let expected = 256_i64.pow(u32::try_from(signed.size()).unwrap());
            let mut values = Values::binary(&bytes, 1);
            let found = [signed, unsigned].map(|kind| values.integer(kind, "").unwrap());
            assert_eq!(found[1] - found[0], expected, "{signed:?}");
            assert_eq!(values.place(), Place::Byte(1 + 2 * signed.size()));
            let mut values = Values::binary(&bytes, 1);
            let numbers = [signed, unsigned].map(|kind| values.number(kind).unwrap());
            assert_eq!(numbers, found.map(|whole| whole as f64));
        }
        let bytes = [
            1.5_f32.to_le_bytes().to_vec(),
            (-2.5_f64).to_le_bytes().to_vec(),
        ]
        .concat();
        let mut values = Values::binary(&bytes, 0);
        assert_eq!(
            (values.number(Kind::F32), values.number(Kind::F64)),
            (Ok(1.5), Ok(-2.5))
        );
        assert_eq!(values.end(), Ok(()));
        assert_eq!(values.number(Kind::F32), Err(truncated(12, 4, 0)));
    }

    #[test]
    fn lists_longer_than_the_file_and_of_negative_length_are_errors() {
        let list = Shape::List {
            length: Kind::U32,
            item: Kind::F64,
        };
        let bytes = [0xff; 12];
        assert_eq!(
            Values::binary(&bytes, 0).skip(list),
            Err(truncated(4, 8 * u64::from(u32::MAX), 8))
        );
        let list = Shape::List {
            length: Kind::I8,
            item: Kind::F64,
        };
        let required = "a list length of at least 0";
        assert_eq!(
            Values::binary(&bytes, 2).skip(list),
            Err(unexpected(Place::Byte(2), required, "\"-1\"".to_owned()))
        );
        let mut text = Values::text(Words::new(MeshFormat::Ply, b"9223372036854775807 1\n2"));
        let error = text.skip(list).unwrap_err().to_string();
        assert_eq!(
            error,
            "PLY file, line 1: a value required, got the end of the line"
        );
        assert!(
            Values::binary(&bytes, 99)
                .skip(Shape::Scalar(Kind::I8))
                .is_err()
        );
    }
}
