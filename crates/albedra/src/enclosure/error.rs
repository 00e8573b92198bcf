//! What is wrong with an enclosure.

use std::fmt;

use crate::geometry::{Audit, ImportError, RegionError, SolidError};
use crate::near::Near;

/// An enclosure that cannot be.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum EnclosureError {
    /// A number of the shape is out of range.
    Solid(SolidError),
    /// The file cannot be read.
    Import(ImportError),
    /// The mesh does not enclose one body; all problems are listed.
    Unsound(Box<Audit>),
    /// A facet is too crooked to be cut into triangles.
    Facet {
        /// Its index.
        facet: usize,
    },
    /// No wall, region or opening of this name.
    UnknownName {
        /// What was given.
        name: String,
        /// Names like it.
        near: Near,
    },
    /// No wall of this name: regions lie on walls only.
    UnknownWall {
        /// What was given.
        name: String,
        /// Names of walls like it.
        near: Near,
    },
    /// A wall of the mesh has no facets.
    NoFacets {
        /// The wall.
        wall: String,
    },
    /// The name is empty or taken, by a wall or by another region.
    Name {
        /// What was given.
        name: String,
    },
    /// Regions can only be on planar walls.
    NotPlanar {
        /// The wall.
        wall: String,
    },
    /// The region does not fit its wall.
    Region {
        /// Name of the region.
        name: String,
        /// The wall.
        wall: String,
        /// What is wrong.
        error: RegionError,
    },
    /// Later regions would cover this wall or region completely.
    Hidden {
        /// Its name.
        name: String,
    },
}

impl fmt::Display for EnclosureError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Solid(error) => error.fmt(f),
            Self::Import(error) => error.fmt(f),
            Self::Unsound(audit) => write!(f, "the mesh does not enclose one body\n{audit}"),
            Self::Facet { facet } => {
                write!(
                    f,
                    "facet {facet} must be a simple planar polygon with at most 10000 corners"
                )
            }
            Self::UnknownName { name, near } => {
                write!(f, "no wall, region or opening is named \"{name}\"{near}")
            }
            Self::UnknownWall { name, near } => write!(f, "no wall is named \"{name}\"{near}"),
            Self::NoFacets { wall } => {
                write!(f, "wall \"{wall}\" must have facets, but no facet names it")
            }
            Self::Name { name } if name.is_empty() => {
                write!(f, "a wall or region must have a name")
            }
            Self::Name { name } => write!(f, "name \"{name}\" must be new, but is taken already"),
            Self::NotPlanar { wall } => write!(
                f,
                "wall \"{wall}\" must be planar within 1e-6 of its extent and in one piece to carry a region or a map"
            ),
            Self::Region { name, wall, error } => {
                write!(f, "region \"{name}\" on wall \"{wall}\": {error}")
            }
            Self::Hidden { name } => write!(
                f,
                "nothing would be left to see of \"{name}\" beneath later regions"
            ),
        }
    }
}

impl std::error::Error for EnclosureError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        match self {
            Self::Solid(error) => Some(error),
            Self::Import(error) => Some(error),
            Self::Region { error, .. } => Some(error),
            _ => None,
        }
    }
}

impl From<SolidError> for EnclosureError {
    fn from(error: SolidError) -> Self {
        Self::Solid(error)
    }
}

impl From<ImportError> for EnclosureError {
    fn from(error: ImportError) -> Self {
        Self::Import(error)
    }
}
