//! Units of length that a mesh file may be written in.

use std::fmt;
use std::str::FromStr;

use serde::{Deserialize, Serialize};

/// Unit of length of a mesh file, which the file itself does not say.
///
/// It is written and read (also by serde) as `m`, `cm`, `mm`, `µm`, `in` or `ft`; `um` and the Greek letter in `μm` are
/// read too.
///
/// # Examples
///
/// ```
/// use albedra::Unit;
///
/// let unit: Unit = "mm".parse()?;
/// assert_eq!(unit, Unit::Millimetre);
/// assert_eq!(unit.metres(), 0.001);
/// # Ok::<(), albedra::UnitError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[non_exhaustive]
pub enum Unit {
    /// 1 m.
    #[serde(rename = "m")]
    Metre,
    /// 0.01 m.
    #[serde(rename = "cm")]
    Centimetre,
    /// 0.001 m.
    #[serde(rename = "mm")]
    Millimetre,
    /// 10⁻⁶ m.
    #[serde(rename = "µm", alias = "um", alias = "μm")]
    Micrometre,
    /// 0.0254 m exactly (international yard and pound agreement, 1959; from memory).
    #[serde(rename = "in")]
    Inch,
    /// 0.3048 m exactly (twelve inches).
    #[serde(rename = "ft")]
    Foot,
}

/// Why a text is not a unit.
#[derive(Clone, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum UnitError {
    /// No unit is written like this.
    Unknown {
        /// The text that was given.
        found: String,
    },
}

impl Unit {
    /// Length of the unit in metres.
    pub fn metres(self) -> f64 {
        self.to_metres(1.0)
    }

    /// A length in this unit, in metres.
    ///
    /// By integer factors, so that a whole number of millimetres, say, gives the `f64` nearest to its length in metres.
    pub(super) fn to_metres(self, length: f64) -> f64 {
        let (multiplier, divisor) = match self {
            Self::Metre => (1.0, 1.0),
            Self::Centimetre => (1.0, 100.0),
            Self::Millimetre => (1.0, 1000.0),
            Self::Micrometre => (1.0, 1.0e6),
            Self::Inch => (127.0, 5000.0),
            Self::Foot => (381.0, 1250.0),
        };
        length * multiplier / divisor
    }
}

impl FromStr for Unit {
    type Err = UnitError;

    fn from_str(text: &str) -> Result<Self, UnitError> {
        match text {
            "m" => Ok(Self::Metre),
            "cm" => Ok(Self::Centimetre),
            "mm" => Ok(Self::Millimetre),
            "um" | "µm" | "μm" => Ok(Self::Micrometre),
            "in" => Ok(Self::Inch),
            "ft" => Ok(Self::Foot),
            _ => Err(UnitError::Unknown {
                found: text.to_owned(),
            }),
        }
    }
}

impl fmt::Display for Unit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(match self {
            Self::Metre => "m",
            Self::Centimetre => "cm",
            Self::Millimetre => "mm",
            Self::Micrometre => "µm",
            Self::Inch => "in",
            Self::Foot => "ft",
        })
    }
}

impl fmt::Display for UnitError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self::Unknown { found } = self;
        write!(
            f,
            "unit of length must be m, cm, mm, um (or µm), in or ft, got {found:?}"
        )
    }
}

impl std::error::Error for UnitError {}

#[cfg(test)]
mod tests {
    use super::*;

    const ALL: [(Unit, &str, f64); 6] = [
        (Unit::Metre, "m", 1.0),
        (Unit::Centimetre, "cm", 0.01),
        (Unit::Millimetre, "mm", 0.001),
        (Unit::Micrometre, "µm", 1.0e-6),
        (Unit::Inch, "in", 0.0254),
        (Unit::Foot, "ft", 0.3048),
    ];

    #[test]
    fn every_unit_has_its_length_and_survives_text_and_serde() {
        #[derive(Serialize, Deserialize)]
        struct Table {
            unit: Unit,
        }
        for (unit, text, metres) in ALL {
            assert_eq!(unit.metres(), metres, "{unit}");
            assert_eq!(unit.to_string(), text);
            assert_eq!(text.parse(), Ok(unit));
            let written = toml::to_string(&Table { unit }).unwrap();
            assert_eq!(written.trim(), format!("unit = \"{text}\""));
            assert_eq!(toml::from_str::<Table>(&written).unwrap().unit, unit);
        }
        for text in ["um", "\u{b5}m", "\u{3bc}m"] {
            assert_eq!(text.parse(), Ok(Unit::Micrometre));
            assert_eq!(
                toml::from_str::<Table>(&format!("unit = \"{text}\""))
                    .unwrap()
                    .unit,
                Unit::Micrometre
            );
        }
    }

    #[test]
    fn other_texts_are_refused_by_name() {
        for text in ["", "MM", " mm", "inch", "km", "\""] {
            assert_eq!(
                text.parse::<Unit>(),
                Err(UnitError::Unknown {
                    found: text.to_owned()
                })
            );
        }
        let message = "inch".parse::<Unit>().unwrap_err().to_string();
        assert_eq!(
            message,
            "unit of length must be m, cm, mm, um (or µm), in or ft, got \"inch\""
        );
    }

    #[test]
    fn whole_millimetres_are_rounded_once() {
        assert_eq!(Unit::Millimetre.to_metres(9.0), 0.009);
        assert_ne!(9.0 * 0.001, 0.009, "the reason for dividing");
        assert_eq!(Unit::Inch.to_metres(3.0), 0.0762);
        assert_eq!(Unit::Metre.to_metres(0.1), 0.1);
    }
}
