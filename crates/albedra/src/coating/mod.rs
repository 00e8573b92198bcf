//! What walls do to light.

use std::fmt;

use serde::{Deserialize, Serialize};

/// What a wall does to light: how much it reflects, and how.
///
/// The reflectance is directional–hemispherical and the same at all angles. What is reflected leaves by the cosine law
/// (Lambertian), as from a mirror (regular), or shared between the two (mixed reflection, CIE S 017).
///
/// # Examples
///
/// ```
/// use albedra::Coating;
///
/// let white = Coating::lambertian(0.97)?;
/// assert_eq!(white.reflectance(), 0.97);
/// let satin = Coating::mixed(0.90, 0.3)?;
/// assert_eq!(satin.specular_share(), 0.3);
/// assert!(Coating::mirror(1.2).is_err());
/// # Ok::<(), albedra::CoatingError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "Form", into = "Form")]
pub struct Coating {
    reflectance: f64,
    specular_share: f64,
}

/// The text form, checked on the way in.
#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Form {
    reflectance: f64,
    specular_share: f64,
}

impl TryFrom<Form> for Coating {
    type Error = CoatingError;

    fn try_from(form: Form) -> Result<Self, CoatingError> {
        Self::mixed(form.reflectance, form.specular_share)
    }
}

impl From<Coating> for Form {
    fn from(coating: Coating) -> Self {
        Self {
            reflectance: coating.reflectance,
            specular_share: coating.specular_share,
        }
    }
}

impl Coating {
    /// Reflects by the cosine law.
    ///
    /// # Errors
    ///
    /// If the reflectance is outside [0, 1] or not a number.
    pub fn lambertian(reflectance: f64) -> Result<Self, CoatingError> {
        Self::mixed(reflectance, 0.0)
    }

    /// Reflects as a mirror.
    ///
    /// # Errors
    ///
    /// If the reflectance is outside [0, 1] or not a number.
    pub fn mirror(reflectance: f64) -> Result<Self, CoatingError> {
        Self::mixed(reflectance, 1.0)
    }

    /// Reflects the given share of the reflected light as a mirror and the rest by the cosine law.
    ///
    /// # Errors
    ///
    /// If the reflectance or the share is outside [0, 1] or not a number.
    pub fn mixed(reflectance: f64, specular_share: f64) -> Result<Self, CoatingError> {
        if !(0.0..=1.0).contains(&reflectance) {
            return Err(CoatingError::Reflectance { value: reflectance });
        }
        if !(0.0..=1.0).contains(&specular_share) {
            return Err(CoatingError::SpecularShare {
                value: specular_share,
            });
        }
        // Negative zero becomes zero, so that equal coatings have equal bits.
        Ok(Self {
            reflectance: reflectance + 0.0,
            specular_share: specular_share + 0.0,
        })
    }

    /// Reflects nothing.
    pub fn absorber() -> Self {
        Self {
            reflectance: 0.0,
            specular_share: 0.0,
        }
    }

    /// Directional–hemispherical reflectance, the same at all angles.
    pub fn reflectance(&self) -> f64 {
        self.reflectance
    }

    /// Share of the reflected light that leaves as from a mirror.
    pub fn specular_share(&self) -> f64 {
        self.specular_share
    }
}

impl fmt::Display for Coating {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match (self.reflectance, self.specular_share) {
            (0.0, _) => write!(f, "absorber"),
            (reflectance, 0.0) => write!(f, "lambertian {reflectance}"),
            (reflectance, 1.0) => write!(f, "mirror {reflectance}"),
            (reflectance, share) => write!(f, "mixed {reflectance}, specular share {share}"),
        }
    }
}

/// A coating that cannot be.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum CoatingError {
    /// Reflectance outside [0, 1], or not a number.
    Reflectance {
        /// What was given.
        value: f64,
    },
    /// Specular share outside [0, 1], or not a number.
    SpecularShare {
        /// What was given.
        value: f64,
    },
}

impl fmt::Display for CoatingError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Reflectance { value } => write!(f, "reflectance must lie in [0, 1], got {value}"),
            Self::SpecularShare { value } => {
                write!(f, "specular share must lie in [0, 1], got {value}")
            }
        }
    }
}

impl std::error::Error for CoatingError {}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn limits_are_allowed_and_the_rest_is_not() {
        assert!(Coating::mixed(1.0, 1.0).is_ok() && Coating::mixed(0.0, 0.0).is_ok());
        for value in [-1e-9, 1.000_001, f64::NAN, f64::INFINITY] {
            let error = Coating::lambertian(value).expect_err("outside");
            assert!(
                error
                    .to_string()
                    .starts_with("reflectance must lie in [0, 1], got ")
            );
            assert!(matches!(
                Coating::mixed(0.5, value),
                Err(CoatingError::SpecularShare { .. })
            ));
        }
    }

    #[test]
    fn text_form_is_checked() {
        let white = Coating::mixed(0.97, 0.25).expect("valid");
        let text = toml::to_string(&white).expect("plain data");
        assert_eq!(toml::from_str::<Coating>(&text), Ok(white));
        let wrong = text.replace("0.97", "1.97");
        assert!(
            toml::from_str::<Coating>(&wrong)
                .expect_err("out of range")
                .to_string()
                .contains("got 1.97")
        );
    }
}
