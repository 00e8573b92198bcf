//! The text form of an experiment: TOML with a version; a mesh is kept beside it.

use std::fmt;

use serde::{Deserialize, Serialize};

use super::{Experiment, Settings};
use crate::enclosure::{Enclosure, EnclosureError, EnclosureForm};
use crate::geometry::Mesh;

/// Version of the text form; readers refuse others.
const VERSION: u32 = 1;

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct ExperimentForm {
    albedra: u32,
    experiment: Settings,
    enclosure: EnclosureForm,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct LoneEnclosureForm {
    albedra: u32,
    enclosure: EnclosureForm,
}

impl Experiment {
    /// The experiment as TOML text. Where the enclosure comes from a mesh, keep [`Experiment::mesh_beside`] with it.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure, Experiment, Source};
    ///
    /// let chamber = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::lambertian(0.9)?);
    /// let experiment = Experiment::new(&chamber, Source::volume()).title("white cube");
    /// let text = experiment.to_text();
    /// assert_eq!(Experiment::from_text(&text, None)?, experiment);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn to_text(&self) -> String {
        text(&ExperimentForm {
            albedra: VERSION,
            experiment: self.settings.clone(),
            enclosure: self.enclosure.to_form(),
        })
    }

    /// The mesh that belongs to the text, if the enclosure comes from one.
    pub fn mesh_beside(&self) -> Option<&Mesh> {
        self.enclosure.mesh_beside()
    }

    /// Reads an experiment from its text form.
    ///
    /// # Errors
    ///
    /// If the text is not of this form and version, or describes an enclosure that cannot be.
    pub fn from_text(text: &str, mesh: Option<Mesh>) -> Result<Self, TextError> {
        let form: ExperimentForm = parse(text, |form: &ExperimentForm| form.albedra)?;
        let enclosure = Enclosure::from_form(form.enclosure, mesh).map_err(TextError::Enclosure)?;
        Ok(Self {
            enclosure,
            settings: form.experiment,
        })
    }
}

impl Enclosure {
    /// The enclosure as TOML text; see [`Experiment::to_text`].
    pub fn to_text(&self) -> String {
        text(&LoneEnclosureForm {
            albedra: VERSION,
            enclosure: self.to_form(),
        })
    }

    /// Reads an enclosure from its text form.
    ///
    /// # Errors
    ///
    /// If the text is not of this form and version, or describes an enclosure that cannot be.
    pub fn from_text(text: &str, mesh: Option<Mesh>) -> Result<Self, TextError> {
        let form: LoneEnclosureForm = parse(text, |form: &LoneEnclosureForm| form.albedra)?;
        Self::from_form(form.enclosure, mesh).map_err(TextError::Enclosure)
    }
}

fn text<T: Serialize>(form: &T) -> String {
    // Descriptions are plain data, which always has a text form.
    toml::to_string(form).unwrap_or_default()
}

fn parse<T: for<'a> Deserialize<'a>>(
    text: &str,
    version: impl Fn(&T) -> u32,
) -> Result<T, TextError> {
    let form: T = toml::from_str(text).map_err(|error| TextError::Form {
        reason: error.to_string(),
    })?;
    match version(&form) {
        VERSION => Ok(form),
        found => Err(TextError::Version { found }),
    }
}

/// A text that describes no experiment.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum TextError {
    /// The text is not of the form.
    Form {
        /// What is wrong, and where.
        reason: String,
    },
    /// The text is of another version.
    Version {
        /// The version found.
        found: u32,
    },
    /// The enclosure cannot be.
    Enclosure(EnclosureError),
}

impl fmt::Display for TextError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Form { reason } => {
                write!(f, "the text does not describe an experiment: {reason}")
            }
            Self::Version { found } => {
                write!(f, "version of the text must be {VERSION}, got {found}")
            }
            Self::Enclosure(error) => error.fmt(f),
        }
    }
}

impl std::error::Error for TextError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        match self {
            Self::Enclosure(error) => Some(error),
            Self::Form { .. } | Self::Version { .. } => None,
        }
    }
}
