//! Numbers with their uncertainty as text.

use std::fmt;

use super::Estimate;

/// Numbers whose first digit stands from here …
const LOWEST: i32 = -4;
/// … to here are printed without an exponent.
const HIGHEST: i32 = 5;
/// A value has no more than 17 significant digits; a smaller relative uncertainty is printed as this one.
const FINEST: f64 = 1e-15;

/// An estimate that prints with its unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WithUnit<'a> {
    estimate: Estimate,
    unit: &'a str,
}

impl Estimate {
    /// Prints with a unit behind, as in `0.274 13(88) W`; nothing is added for an empty one.
    pub fn with_unit<'a>(&self, unit: &'a str) -> WithUnit<'a> {
        WithUnit {
            estimate: *self,
            unit,
        }
    }
}

impl fmt::Display for Estimate {
    /// Prints `0.274 13(88)`, with `(–)` for an unknown and `(0)` for no uncertainty, or the limit as `< 0.003 0 (95 %)`.
    ///
    /// Width and alignment count as for texts.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.with_unit("").fmt(f)
    }
}

impl fmt::Display for WithUnit<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let unit = if self.unit.is_empty() {
            String::new()
        } else {
            format!(" {}", self.unit)
        };
        let text = match self.estimate.upper {
            Some(upper) => format!("< {}{unit} (95 %)", limit(upper)),
            None => format!("{}{unit}", concise(self.estimate.value, self.estimate.u)),
        };
        // A precision would cut the text.
        if f.precision().is_some() {
            f.write_str(&text)
        } else {
            f.pad(&text)
        }
    }
}

/// Value and uncertainty in the concise notation.
fn concise(value: f64, u: f64) -> String {
    if !value.is_finite() {
        return if value.is_nan() {
            "NaN(–)".to_owned()
        } else {
            format!("{value}(–)")
        };
    }
    if u == 0.0 {
        let (digits, place) = shortest(value);
        // Round numbers such as 1000 are written out, as their zeros are exact.
        let zeros = if place > 0 && place + length(digits.len()) - 1 <= HIGHEST {
            place
        } else {
            0
        };
        let digits = digits + &"0".repeat(zeros.unsigned_abs() as usize);
        let place = place - zeros;
        return place_digits(value < 0.0, &digits, place, "(0)");
    }
    if !u.is_finite() {
        let place = if value == 0.0 {
            0
        } else {
            leading_place(value) - 1
        };
        return place_digits(value < 0.0, &rounded(value, place), place, "(–)");
    }
    let u = u.abs();
    let u = if u < FINEST * value.abs() {
        FINEST * value.abs()
    } else {
        u
    };
    let (bracket, place) = two_digits(u);
    place_digits(
        value < 0.0,
        &rounded(value, place),
        place,
        &format!("({bracket})"),
    )
}

/// A limit with two digits, rounded up.
fn limit(upper: f64) -> String {
    if !upper.is_finite() || upper <= 0.0 {
        return upper.to_string();
    }
    let (mut digits, mut place) = two_digits(upper);
    if format!("{digits}e{place}")
        .parse::<f64>()
        .is_ok_and(|printed| printed < upper)
    {
        digits += 1;
        if digits == 100 {
            (digits, place) = (10, place + 1);
        }
    }
    place_digits(false, &digits.to_string(), place, "")
}

/// Two significant digits of a positive number, and the power of ten of the second.
fn two_digits(x: f64) -> (u32, i32) {
    let (digits, exponent) = scientific(&format!("{x:.1e}"));
    (digits.parse().unwrap_or(0), exponent - 1)
}

/// The fewest digits that tell a number from its neighbours, and the power of ten of the last.
fn shortest(x: f64) -> (String, i32) {
    let (digits, exponent) = scientific(&format!("{:e}", x.abs()));
    let place = exponent - (length(digits.len()) - 1);
    (digits, place)
}

/// Power of ten of the first digit of a number other than 0.
fn leading_place(x: f64) -> i32 {
    scientific(&format!("{:.17e}", x.abs())).1
}

/// Magnitude of a number, rounded to a power of ten (halves to even), as a count of that.
fn rounded(x: f64, place: i32) -> String {
    let leading = leading_place(x);
    if x == 0.0 || leading < place - 1 {
        return "0".to_owned();
    }
    if leading == place - 1 {
        let (digits, _) = scientific(&format!("{:.17e}", x.abs()));
        return if digits.trim_end_matches('0') > "5" {
            "1"
        } else {
            "0"
        }
        .to_owned();
    }
    let precision = (leading - place).unsigned_abs() as usize;
    let (mut digits, exponent) = scientific(&format!("{:.*e}", precision, x.abs()));
    if exponent > leading {
        digits.push('0');
    }
    digits
}

/// Digits and exponent of a number printed as `1.23e4`.
fn scientific(text: &str) -> (String, i32) {
    let (mantissa, exponent) = text.split_once('e').unwrap_or((text, "0"));
    (mantissa.replace('.', ""), exponent.parse().unwrap_or(0))
}

/// Prints digits of which the last stands for a given power of ten, followed by the bracket and the exponent.
fn place_digits(negative: bool, digits: &str, place: i32, bracket: &str) -> String {
    let digits = digits.trim_start_matches('0');
    let sign = if negative && !digits.is_empty() {
        "-"
    } else {
        ""
    };
    let in_bracket = bracket.bytes().filter(u8::is_ascii_digit).count();
    let shown = digits.len().max(in_bracket).max(1);
    let leading = length(shown) - 1 + place;
    let plain = place <= 0 && (LOWEST..=HIGHEST).contains(&leading);
    let decimals = if plain {
        place.unsigned_abs() as usize
    } else {
        shown - 1
    };
    let padded = format!("{digits:0>width$}", width = decimals + 1);
    let (whole, fraction) = padded.split_at(padded.len() - decimals);
    let mut text = sign.to_owned();
    for (at, digit) in whole.chars().enumerate() {
        if at > 0 && (whole.len() - at).is_multiple_of(3) {
            text.push(' ');
        }
        text.push(digit);
    }
    for (at, digit) in fraction.chars().enumerate() {
        match at {
            0 => text.push('.'),
            _ if at.is_multiple_of(3) => text.push(' '),
            _ => {}
        }
        text.push(digit);
    }
    text.push_str(bracket);
    if !plain {
        text.push('e');
        text.push_str(&leading.to_string());
    }
    text
}

/// A number of digits, which is always small.
fn length(digits: usize) -> i32 {
    i32::try_from(digits).unwrap_or(i32::MAX)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn concise_notation() {
        let table = [
            (0.274_131, 0.000_88, "0.274 13(88)"),
            (12.339, 0.56, "12.34(56)"),
            (1.2345e-9, 6.7e-12, "1.234 5(67)e-9"),
            (1.0, 0.1, "1.00(10)"),
            (100.0, 1.0, "100.0(10)"),
            (1000.0, 10.0, "1 000(10)"),
            (-0.5, 0.012, "-0.500(12)"),
            (-12.339, 0.56, "-12.34(56)"),
            (123_456.0, 78.0, "123 456(78)"),
            (12_345.678, 0.89, "12 345.68(89)"),
            (1_234_567.0, 89.0, "1.234 567(89)e6"),
            (12_346.0, 123.0, "1.235(12)e4"),
            (12_344.0, 123.0, "1.234(12)e4"),
            (0.000_274_13, 8.8e-7, "0.000 274 13(88)"),
            (0.000_027_413, 8.8e-8, "2.741 3(88)e-5"),
            (6.022e23, 1.5e20, "6.022 0(15)e23"),
            (1e300, 1e298, "1.000(10)e300"),
            (0.123_456_789_012, 1.1e-11, "0.123 456 789 012(11)"),
        ];
        for (value, u, expected) in table {
            assert_eq!(Estimate::new(value, u, 63.0).to_string(), expected);
        }
    }

    #[test]
    fn rounding_carries_into_new_digits() {
        let table = [
            (0.5, 0.0995, "0.50(10)"),
            (0.5, 0.009_96, "0.500(10)"),
            (9.996, 0.012, "9.996(12)"),
            (9.996, 0.12, "10.00(12)"),
            (0.0995, 0.012, "0.100(12)"),
            (0.9996, 0.012, "1.000(12)"),
            (99_999.96, 1.2, "100 000.0(12)"),
            (999_999.96, 1.2, "1.000 000 0(12)e6"),
            (0.000_099_96, 0.000_001_2, "0.000 100 0(12)"),
            (0.000_099_94, 0.000_001_2, "9.99(12)e-5"),
            (-0.9996, 0.012, "-1.000(12)"),
            (1e23, 1e21, "1.000(10)e23"),
        ];
        for (value, u, expected) in table {
            assert_eq!(Estimate::new(value, u, 63.0).to_string(), expected);
        }
    }

    #[test]
    fn uncertainty_larger_than_the_value() {
        let table = [
            (0.3, 1.2, "0.3(12)"),
            (0.3, 12.0, "0(12)"),
            (-0.3, 12.0, "0(12)"),
            (-0.01, 1.2, "0.0(12)"),
            (0.96, 12.0, "1(12)"),
            (-0.51, 12.0, "-1(12)"),
            (0.0, 0.000_88, "0.000 00(88)"),
            (3e-9, 1.2e-8, "0.3(12)e-8"),
            (0.5, 1e9, "0.0(10)e9"),
            (5.1e7, 1e9, "0.1(10)e9"),
            (4.9e7, 1e9, "0.0(10)e9"),
            (5e7, 1e9, "0.0(10)e9"),
            (0.0, 5e-324, "0.0(49)e-324"),
        ];
        for (value, u, expected) in table {
            assert_eq!(Estimate::new(value, u, 63.0).to_string(), expected);
        }
    }

    #[test]
    fn unknown_and_no_uncertainty() {
        let table = [
            (0.274, f64::INFINITY, "0.27(–)"),
            (0.995, f64::NAN, "0.99(–)"),
            (-12.0, f64::INFINITY, "-12(–)"),
            (1.0, f64::INFINITY, "1.0(–)"),
            (1234.0, f64::INFINITY, "1.2(–)e3"),
            (0.0, f64::INFINITY, "0(–)"),
            (f64::NAN, f64::INFINITY, "NaN(–)"),
            (f64::NEG_INFINITY, 1.0, "-inf(–)"),
            (1.0, 0.0, "1(0)"),
            (0.0, 0.0, "0(0)"),
            (-0.0, 0.0, "0(0)"),
            (-1000.0, 0.0, "-1 000(0)"),
            (0.1, 0.0, "0.1(0)"),
            (299_792_458.0, 0.0, "2.997 924 58(0)e8"),
            (1e6, 0.0, "1(0)e6"),
            // No more digits than the value has: 1e-15 of it, not 1e-30.
            (1.0, 1e-30, "1.000 000 000 000 000 0(10)"),
        ];
        for (value, u, expected) in table {
            assert_eq!(Estimate::new(value, u, 63.0).to_string(), expected);
        }
    }

    #[test]
    fn limits_are_rounded_up() {
        let table = [
            (0.003, "< 0.003 0 (95 %)"),
            (0.002_995_7, "< 0.003 0 (95 %)"),
            (0.003_001, "< 0.003 1 (95 %)"),
            (0.000_994, "< 0.001 0 (95 %)"),
            (2.9957e-6, "< 3.0e-6 (95 %)"),
            (12.1, "< 13 (95 %)"),
            (121.0, "< 1.3e2 (95 %)"),
            (f64::INFINITY, "< inf (95 %)"),
            (0.0, "< 0 (95 %)"),
        ];
        for (upper, expected) in table {
            assert_eq!(
                Estimate::new(0.0, 0.0, 63.0)
                    .with_upper(Some(upper))
                    .to_string(),
                expected
            );
        }
    }

    #[test]
    fn units_and_alignment() {
        let estimate = Estimate::new(0.274_131, 0.000_88, 63.0);
        assert_eq!(estimate.with_unit("W").to_string(), "0.274 13(88) W");
        assert_eq!(
            format!("[{:>16}]", estimate.with_unit("W")),
            "[  0.274 13(88) W]"
        );
        assert_eq!(format!("[{estimate:<13.3}]"), "[0.274 13(88)]");
        assert_eq!(
            estimate.with_upper(Some(0.003)).with_unit("W").to_string(),
            "< 0.003 0 W (95 %)"
        );
        assert_eq!(
            Estimate::new(1.2345e-9, 6.7e-12, 63.0)
                .with_unit("m")
                .to_string(),
            "1.234 5(67)e-9 m"
        );
    }

    proptest::proptest! {
        /// Whatever is printed reads back within half a last digit, and no bits of a number make it panic.
        #[test]
        fn reads_back(value: f64, u: f64, scale in -30_i32..30) {
            let _ = Estimate::new(value, u, 63.0).with_upper(Some(u)).to_string();
            let (value, u) = (value.to_bits() as f64 / 1e19 - 0.9, u.to_bits() as f64 / 1e19);
            proptest::prop_assume!(u > 0.0);
            let text = format!("{value}e{scale}");
            let (value, u) = (text.parse::<f64>().unwrap(), format!("{u}e{scale}").parse::<f64>().unwrap());
            let text = Estimate::new(value, u, 63.0).to_string().replace(' ', "");
            let (number, rest) = text.split_once('(').unwrap();
            let (bracket, exponent) = rest.split_once(')').unwrap();
            let decimals = number.split_once('.').map_or(0, |(_, fraction)| fraction.len());
            let power: i32 = exponent.strip_prefix('e').map_or(0, |power| power.parse().unwrap());
            let unit: f64 = format!("1e{}", power - length(decimals)).parse().unwrap();
            let read: f64 = format!("{number}{exponent}").parse().unwrap();
            proptest::prop_assert!((read - value).abs() <= 0.5001 * unit, "{value} {text}");
            let read: f64 = bracket.parse().unwrap();
            let u = if u < FINEST * value.abs() { FINEST * value.abs() } else { u };
            proptest::prop_assert!((read * unit - u).abs() <= 0.5001 * unit, "{u} {text}");
            proptest::prop_assert!((10.0..=99.0).contains(&read));
        }
    }
}
