//! Words and lines of a text file, with the line number at hand for errors.

use super::{ImportError, MeshFormat, Place};

/// A walk through the words of a text.
pub(super) struct Words<'a> {
    format: MeshFormat,
    bytes: &'a [u8],
    at: usize,
    line: usize,
    continued: bool,
}

impl<'a> Words<'a> {
    /// Starts at the first byte of a text; a byte order mark is passed over.
    pub(super) fn new(format: MeshFormat, bytes: &'a [u8]) -> Self {
        let at = if bytes.starts_with(b"\xef\xbb\xbf") {
            3
        } else {
            0
        };
        Self {
            format,
            bytes,
            at,
            line: 1,
            continued: false,
        }
    }

    /// Makes a backslash at the end of a line join it with the next.
    pub(super) fn continued(mut self) -> Self {
        self.continued = true;
        self
    }

    /// The line of the last word.
    pub(super) fn place(&self) -> Place {
        Place::Line(self.line)
    }

    /// Number of bytes passed.
    pub(super) fn at(&self) -> usize {
        self.at
    }

    /// The next word, on this line or a later one.
    pub(super) fn word(&mut self) -> Option<&'a [u8]> {
        self.next_line();
        self.word_in_line()
    }

    /// The next word on this line.
    pub(super) fn word_in_line(&mut self) -> Option<&'a [u8]> {
        self.skip_blanks(false);
        let rest = &self.bytes[self.at..];
        let end = (0..rest.len())
            .find(|&i| blank(rest[i]) || rest[i] == b'\n' || self.joint(&rest[i..]) > 0);
        let word = &rest[..end.unwrap_or(rest.len())];
        self.at += word.len();
        if word.is_empty() { None } else { Some(word) }
    }

    /// What is left of this line without blanks around it, whatever it is.
    pub(super) fn rest_of_line(&mut self) -> &'a [u8] {
        let rest = &self.bytes[self.at..];
        let end = rest
            .iter()
            .position(|&byte| byte == b'\n')
            .unwrap_or(rest.len());
        self.at += end;
        rest[..end].trim_ascii()
    }

    /// Goes to the next word if that is on a later line.
    pub(super) fn next_line(&mut self) {
        self.skip_blanks(true);
    }

    /// Nothing but blanks up to the end of this line.
    pub(super) fn end_of_line(&mut self) -> Result<(), ImportError> {
        match self.word_in_line() {
            None => Ok(()),
            word => Err(self.unexpected("the end of the line", word)),
        }
    }

    /// A coordinate: a finite number.
    pub(super) fn number(&self, word: Option<&[u8]>) -> Result<f64, ImportError> {
        let parsed = word.and_then(|word| std::str::from_utf8(word).ok()?.parse::<f64>().ok());
        match parsed {
            None => Err(self.unexpected("a number", word)),
            Some(number) if number.is_finite() => Ok(number),
            Some(_) => {
                let found = excerpt(word.unwrap_or_default());
                Err(ImportError::NotFinite {
                    format: self.format,
                    place: self.place(),
                    found,
                })
            }
        }
    }

    /// A whole number.
    pub(super) fn integer(
        &self,
        word: Option<&[u8]>,
        required: &'static str,
    ) -> Result<i64, ImportError> {
        let parsed = word.and_then(|word| std::str::from_utf8(word).ok()?.parse().ok());
        parsed.ok_or_else(|| self.unexpected(required, word))
    }

    /// An error about the last word, or about there being none.
    pub(super) fn unexpected(&self, required: &'static str, word: Option<&[u8]>) -> ImportError {
        let found = match word {
            Some(word) => excerpt(word),
            None if self.at < self.bytes.len() => "the end of the line".to_owned(),
            None => "the end of the file".to_owned(),
        };
        ImportError::Unexpected {
            format: self.format,
            place: self.place(),
            required,
            found,
        }
    }

    fn skip_blanks(&mut self, newlines: bool) {
        while let Some(&byte) = self.bytes.get(self.at) {
            let joint = self.joint(&self.bytes[self.at..]);
            let newline = byte == b'\n' && newlines;
            if !(joint > 0 || newline || blank(byte)) {
                return;
            }
            self.at += if joint > 0 { joint } else { 1 };
            self.line += usize::from(joint > 0 || newline);
        }
    }

    /// Length of the backslash and line end that a text begins with, 0 if it does not.
    fn joint(&self, text: &[u8]) -> usize {
        match text {
            [b'\\', b'\n', ..] if self.continued => 2,
            [b'\\', b'\r', b'\n', ..] if self.continued => 3,
            _ => 0,
        }
    }
}

fn blank(byte: u8) -> bool {
    matches!(byte, b' ' | b'\t' | b'\r' | b'\x0b' | b'\x0c')
}

/// The beginning of a word, in quotes and with whatever cannot be printed escaped.
pub(super) fn excerpt(word: &[u8]) -> String {
    // Longer ones say no more; the length of messages is bounded by this.
    const LONGEST: usize = 40;
    let text = String::from_utf8_lossy(&word[..word.len().min(LONGEST)]);
    let more = if word.len() > LONGEST { "…" } else { "" };
    format!("{text:?}{more}")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn words(text: &[u8]) -> Words<'_> {
        Words::new(MeshFormat::Obj, text)
    }

    #[test]
    fn words_know_their_line() {
        let mut words = words(b"\xef\xbb\xbfa b\r\n\n\tc  d e \r\nf");
        assert_eq!(
            (words.word(), words.place()),
            (Some(&b"a"[..]), Place::Line(1))
        );
        assert_eq!(words.word_in_line(), Some(&b"b"[..]));
        assert_eq!(
            (words.word_in_line(), words.place()),
            (None, Place::Line(1))
        );
        assert_eq!(
            (words.word(), words.place()),
            (Some(&b"c"[..]), Place::Line(3))
        );
        assert_eq!(words.rest_of_line(), b"d e");
        assert_eq!(words.rest_of_line(), b"");
        assert_eq!(
            (words.word(), words.place()),
            (Some(&b"f"[..]), Place::Line(4))
        );
        assert_eq!((words.word(), words.word_in_line()), (None, None));
    }

    #[test]
    fn a_backslash_joins_lines_only_where_asked() {
        let text = b"a\\\nb \\\r\n c\\d\n";
        let mut joined = words(text).continued();
        for (word, line) in [(&b"a"[..], 1), (b"b", 2), (b"c\\d", 3)] {
            assert_eq!(
                (joined.word_in_line(), joined.place()),
                (Some(word), Place::Line(line))
            );
        }
        assert_eq!(joined.word_in_line(), None);
        let mut plain = words(text);
        assert_eq!(plain.word_in_line(), Some(&b"a\\"[..]));
        assert_eq!(plain.word_in_line(), None);
    }

    #[test]
    fn numbers_keep_all_bits_and_must_be_finite() {
        let words = words(b"x");
        assert_eq!(
            words.number(Some(b"0.1234567890123456789")),
            Ok(0.123_456_789_012_345_68)
        );
        assert_eq!(words.number(Some(b"-1.5E-3")), Ok(-0.0015));
        for word in ["nan", "NaN", "inf", "-Infinity", "1e999"] {
            let place = Place::Line(1);
            let expected = ImportError::NotFinite {
                format: MeshFormat::Obj,
                place,
                found: format!("{word:?}"),
            };
            assert_eq!(words.number(Some(word.as_bytes())), Err(expected));
        }
        for word in [&b"1,5"[..], b"0x1", b"1e", b"\xff", b"--1"] {
            assert_eq!(
                words.number(Some(word)),
                Err(words.unexpected("a number", Some(word)))
            );
        }
    }

    #[test]
    fn excerpts_are_short_and_printable() {
        assert_eq!(excerpt(b"a\x00\xff"), "\"a\\0\u{fffd}\"");
        assert_eq!(excerpt(&[b'z'; 1000]).chars().count(), 43);
        let mut end = words(b"a");
        end.word();
        assert!(
            end.unexpected("x", None)
                .to_string()
                .ends_with("got the end of the file")
        );
        assert!(
            words(b"\n")
                .unexpected("x", None)
                .to_string()
                .ends_with("got the end of the line")
        );
    }
}
