//! Outcomes as checked bytes.

use std::fmt;

use super::Outcome;
use crate::estimate::{BytesError, Totals};
use crate::experiment::{Experiment, ExperimentError, TextError, compile};
use crate::geometry::Mesh;

impl Outcome {
    /// Puts an outcome together again from its experiment and its totals, as read from a file.
    ///
    /// # Errors
    ///
    /// If the totals are not of this experiment.
    pub fn from_parts(experiment: &Experiment, totals: Totals) -> Result<Self, LoadError> {
        let compiled = compile(experiment).map_err(LoadError::Experiment)?;
        let plan = &compiled.plan;
        let fits = totals.history() == plan.history
            && totals.outputs() == plan.totals
            && totals.groups().len() == compiled.layout.outputs;
        if !fits {
            return Err(LoadError::Foreign);
        }
        Ok(Self::new(experiment, &compiled.layout, totals))
    }

    /// The outcome as bytes that carry their own check.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// assert_eq!(albedra::Outcome::from_bytes(&outcome.to_bytes())?, outcome);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn to_bytes(&self) -> Vec<u8> {
        let text = self.experiment.to_text();
        let mesh = self
            .experiment
            .mesh_beside()
            .map(Mesh::to_bytes)
            .unwrap_or_default();
        let totals = self.totals.to_bytes();
        let mut bytes = MAGIC.to_vec();
        for part in [text.as_bytes(), &mesh, &totals] {
            bytes.extend((part.len() as u64).to_le_bytes());
            bytes.extend(part);
        }
        bytes
    }

    /// Reads an outcome from its bytes.
    ///
    /// # Errors
    ///
    /// If the bytes are damaged, or their parts do not fit together.
    pub fn from_bytes(bytes: &[u8]) -> Result<Self, LoadError> {
        let mut rest = bytes.strip_prefix(&MAGIC).ok_or(LoadError::NotAnOutcome)?;
        let mut part = || {
            let (length, after) = rest.split_first_chunk::<8>()?;
            let length = usize::try_from(u64::from_le_bytes(*length)).ok()?;
            let (part, after) = after.split_at_checked(length)?;
            rest = after;
            Some(part)
        };
        let (Some(text), Some(mesh), Some(totals)) = (part(), part(), part()) else {
            return Err(LoadError::NotAnOutcome);
        };
        if !rest.is_empty() {
            return Err(LoadError::NotAnOutcome);
        }
        let text = std::str::from_utf8(text).map_err(|_| LoadError::NotAnOutcome)?;
        let mesh = if mesh.is_empty() {
            None
        } else {
            Some(Mesh::from_bytes(mesh).ok_or(LoadError::NotAnOutcome)?)
        };
        let experiment = Experiment::from_text(text, mesh).map_err(LoadError::Text)?;
        Self::from_parts(
            &experiment,
            Totals::from_bytes(totals).map_err(LoadError::Totals)?,
        )
    }
}

const MAGIC: [u8; 8] = *b"ALBEDRA1";

/// Bytes or parts that make no outcome.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum LoadError {
    /// The bytes do not begin as an outcome, or end early or late.
    NotAnOutcome,
    /// The totals are damaged.
    Totals(BytesError),
    /// The experiment cannot be read.
    Text(TextError),
    /// The experiment cannot be traced.
    Experiment(ExperimentError),
    /// The totals are of another experiment, or of another version's histories.
    Foreign,
}

impl fmt::Display for LoadError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::NotAnOutcome => write!(f, "the bytes are not a whole outcome"),
            Self::Totals(error) => error.fmt(f),
            Self::Text(error) => error.fmt(f),
            Self::Experiment(error) => error.fmt(f),
            Self::Foreign => write!(
                f,
                "the totals must be of the experiment that they are kept with, but are of another one"
            ),
        }
    }
}

impl std::error::Error for LoadError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        match self {
            Self::Totals(error) => Some(error),
            Self::Text(error) => Some(error),
            Self::Experiment(error) => Some(error),
            Self::NotAnOutcome | Self::Foreign => None,
        }
    }
}
