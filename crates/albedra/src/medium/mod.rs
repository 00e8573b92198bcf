//! What happens between surfaces.

mod passage;

use std::fmt;

use serde::{Deserialize, Serialize};

pub(crate) use passage::Passage;

/// Speed of light in vacuum in m/s (SI Brochure 2019, exact).
pub const SPEED_OF_LIGHT: f64 = 299_792_458.0;

/// What fills an enclosure: a group index, which sets the speed, and a homogeneous absorption.
///
/// The group index, not the phase index, decides when light arrives.
///
/// # Examples
///
/// ```
/// let gas = albedra::Medium::new(1.000_3, 0.02)?;
/// assert_eq!(gas.absorption(), 0.02);
/// assert!(albedra::Medium::new(0.0, 0.0).is_err());
/// # Ok::<(), albedra::MediumError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "Form", into = "Form")]
pub struct Medium {
    group_index: f64,
    absorption: f64,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Form {
    group_index: f64,
    absorption: f64,
}

impl TryFrom<Form> for Medium {
    type Error = MediumError;

    fn try_from(form: Form) -> Result<Self, MediumError> {
        Self::new(form.group_index, form.absorption)
    }
}

impl From<Medium> for Form {
    fn from(medium: Medium) -> Self {
        Self {
            group_index: medium.group_index,
            absorption: medium.absorption,
        }
    }
}

impl Medium {
    /// A medium of this group index and Napierian absorption coefficient in m⁻¹.
    ///
    /// # Errors
    ///
    /// If the index is outside [1e-3, 1e3] or the absorption is negative, infinite or not a number.
    pub fn new(group_index: f64, absorption: f64) -> Result<Self, MediumError> {
        if !(1e-3..=1e3).contains(&group_index) {
            return Err(MediumError::GroupIndex { value: group_index });
        }
        if !(0.0..=f64::MAX).contains(&absorption) {
            return Err(MediumError::Absorption { value: absorption });
        }
        Ok(Self {
            group_index,
            absorption: absorption + 0.0,
        })
    }

    /// Group index: the speed of light in vacuum over that of a pulse in the medium.
    pub fn group_index(&self) -> f64 {
        self.group_index
    }

    /// Napierian absorption coefficient in m⁻¹.
    pub fn absorption(&self) -> f64 {
        self.absorption
    }

    /// Speed of a pulse in m/s.
    pub fn speed(&self) -> f64 {
        SPEED_OF_LIGHT / self.group_index
    }
}

impl Default for Medium {
    /// Vacuum.
    fn default() -> Self {
        Self {
            group_index: 1.0,
            absorption: 0.0,
        }
    }
}

/// A medium that cannot be.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum MediumError {
    /// Group index outside [1e-3, 1e3], or not a number.
    GroupIndex {
        /// What was given.
        value: f64,
    },
    /// Negative or infinite absorption, or not a number.
    Absorption {
        /// What was given, in m⁻¹.
        value: f64,
    },
}

impl fmt::Display for MediumError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::GroupIndex { value } => {
                write!(f, "group index must lie in [0.001, 1000], got {value}")
            }
            Self::Absorption { value } => {
                write!(
                    f,
                    "absorption must be a number of m⁻¹ that is not negative, got {value}"
                )
            }
        }
    }
}

impl std::error::Error for MediumError {}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bad_numbers_are_named() {
        for value in [0.0, -1.0, f64::NAN, 1e9] {
            assert!(matches!(
                Medium::new(value, 0.0),
                Err(MediumError::GroupIndex { .. })
            ));
        }
        for value in [-1e-12, f64::NAN, f64::INFINITY] {
            assert!(matches!(
                Medium::new(1.0, value),
                Err(MediumError::Absorption { .. })
            ));
        }
        assert_eq!(Medium::default().speed(), SPEED_OF_LIGHT);
    }
}
