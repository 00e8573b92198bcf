//! The cases of `peers/README.md`, and one with dark walls.

use std::fmt;
use std::path::Path;
use std::str::FromStr;

use albedra::{Coating, Enclosure, Experiment, SPEED_OF_LIGHT, Source, TimeGrid, Unit};

/// Photons are followed this long, in s.
const STOP: f64 = 1e-6;

/// Something to be timed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Case {
    /// Cuboid 1.2 m × 0.8 m × 0.5 m, Lambertian 0.98, emission from wall z-.
    Box,
    /// The same, half of the reflected light mirror-like.
    BoxMirror,
    /// The same as the first with a reflectance of 0.5, so that emission counts.
    Dark,
    /// A mesh of a sphere, Lambertian 0.98, emission from all walls; its name.
    Sphere(String),
}

impl Case {
    /// The experiment, with a time grid, a path limit and, where there is a planar wall, a map: all observables.
    ///
    /// # Errors
    ///
    /// If the mesh is not given, cannot be read or is unsound.
    pub fn experiment(
        &self,
        mesh: Option<&Path>,
    ) -> Result<Experiment, Box<dyn std::error::Error>> {
        let grid = TimeGrid::new(STOP, 256)?;
        let experiment = if let Self::Sphere(name) = self {
            let path = mesh.ok_or_else(|| format!("case {name} needs --mesh"))?;
            let white = Coating::lambertian(0.98)?;
            let sphere = Enclosure::load(path, Unit::Metre)?.coated(white);
            Experiment::new(&sphere, Source::walls())
        } else {
            let coating = match self {
                Self::Dark => Coating::lambertian(0.5)?,
                Self::BoxMirror => Coating::mixed(0.98, 0.5)?,
                _ => Coating::lambertian(0.98)?,
            };
            let cuboid = Enclosure::cuboid([1.2, 0.8, 0.5])?.coated(coating);
            Experiment::new(&cuboid, Source::wall("z-")).map("z-", (24, 16))
        };
        Ok(experiment.time(grid).path_limit(SPEED_OF_LIGHT * STOP))
    }
}

impl FromStr for Case {
    type Err = CaseError;

    fn from_str(name: &str) -> Result<Self, CaseError> {
        match name {
            "box" => Ok(Self::Box),
            "box-mirror" => Ok(Self::BoxMirror),
            "dark" => Ok(Self::Dark),
            _ if name.starts_with("sphere-") => Ok(Self::Sphere(name.to_owned())),
            _ => Err(CaseError(name.to_owned())),
        }
    }
}

impl fmt::Display for Case {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Box => f.write_str("box"),
            Self::BoxMirror => f.write_str("box-mirror"),
            Self::Dark => f.write_str("dark"),
            Self::Sphere(name) => f.write_str(name),
        }
    }
}

/// A case that does not exist; its name.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct CaseError(pub String);

impl fmt::Display for CaseError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let name = &self.0;
        write!(
            f,
            "case must be box, box-mirror, dark or sphere-…, got {name}"
        )
    }
}

impl std::error::Error for CaseError {}
