//! Radiant flux onto each wall, region and opening.

use super::Outcome;
use super::named::RowKind;
use crate::estimate::Estimate;
use crate::experiment::ExperimentError;
use crate::near::Near;

/// Radiant flux of a wall, region or opening in W (for a pulse: energy in J).
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Flux {
    /// Everything that meets it.
    pub incident: Estimate,
    /// What meets it straight from the source.
    pub direct: Estimate,
    /// What it absorbs.
    pub absorbed: Estimate,
    /// What it reflects.
    pub reflected: Estimate,
    /// What leaves through it, if it is an opening.
    pub escaped: Estimate,
}

impl Outcome {
    /// Flux of the wall, region or opening of this name.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let lid = outcome.flux("z+")?;
    /// assert!(lid.incident.value > 0.0 && lid.escaped.value == lid.incident.value);
    /// assert!(outcome.flux("lid").is_err());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is none.
    pub fn flux(&self, name: &str) -> Result<Flux, ExperimentError> {
        Ok(self.flux_of(self.row(name)?))
    }

    /// Flux of each row, in the order of [`Outcome::rows`].
    pub fn fluxes(&self) -> Vec<Flux> {
        (0..self.layout.rows.len())
            .map(|row| self.flux_of(row))
            .collect()
    }

    fn flux_of(&self, row: usize) -> Flux {
        let jackknife = self.jackknife();
        let of = |kind| self.layout.of_row(row, kind).estimate(&jackknife);
        Flux {
            incident: of(RowKind::Incident),
            direct: of(RowKind::Direct),
            absorbed: of(RowKind::Absorbed),
            reflected: of(RowKind::Reflected),
            escaped: of(RowKind::Escaped),
        }
    }

    /// Mean irradiance of the wall, region or opening of this name in W/m² (for a pulse: radiant exposure in J/m²).
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let floor = outcome.irradiance("z-")?;
    /// // The floor has 1 m².
    /// assert_eq!(floor.value, outcome.flux("z-")?.incident.value);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is none.
    pub fn irradiance(&self, name: &str) -> Result<Estimate, ExperimentError> {
        Ok(self.named_estimate(&self.layout.of_row(self.row(name)?, RowKind::Irradiance)))
    }

    /// Index of the row of this name.
    fn row(&self, name: &str) -> Result<usize, ExperimentError> {
        let names = || self.layout.rows.iter().map(|row| row.name.as_str());
        names()
            .position(|row| row == name)
            .ok_or_else(|| ExperimentError::UnknownName {
                name: name.to_owned(),
                near: Near::to(name, names()),
            })
    }
}
