//! What is wrong with an experiment.

use std::fmt;

use crate::near::Near;

/// An experiment that cannot be traced.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum ExperimentError {
    /// A wall has no coating and is no opening.
    Bare {
        /// Its name.
        wall: String,
    },
    /// No wall, region or opening of this name.
    UnknownName {
        /// What was given.
        name: String,
        /// Names like it.
        near: Near,
    },
    /// No wall of this name: maps are of whole walls, with the regions on them.
    UnknownWall {
        /// What was given.
        name: String,
        /// Names of walls like it.
        near: Near,
    },
    /// No such output.
    UnknownOutput {
        /// What was given.
        name: String,
        /// Names like it.
        near: Near,
    },
    /// No source at all, as only a text can have it.
    NoSource,
    /// A source starts outside the enclosure.
    SourceOutside {
        /// Its place in the list of sources.
        source: usize,
        /// The position, in metres.
        position: [f64; 3],
    },
    /// A number of a source is out of range.
    Source {
        /// Its place in the list of sources.
        source: usize,
        /// What must hold.
        required: &'static str,
        /// What came.
        value: f64,
    },
    /// A source's directions do not suit its place.
    SourceDirection {
        /// Its place in the list of sources.
        source: usize,
        /// What must hold.
        required: &'static str,
    },
    /// A map on a wall that is not planar, or with an unreasonable number of cells.
    Map {
        /// The wall.
        wall: String,
        /// What must hold.
        required: &'static str,
        /// The cells asked for.
        cells: [usize; 2],
    },
    /// The path limit is not a positive number of metres.
    PathLimit {
        /// What was given, in metres.
        value: f64,
    },
    /// Light could never be absorbed or leave: the run would not end.
    Endless,
    /// Light loses so little at a strike that the run would hardly end.
    NearlyEndless {
        /// Strikes until the energy is down to 1/e.
        strikes: f64,
    },
    /// The outputs would take more memory than allowed.
    Memory {
        /// Bytes needed.
        needed: u64,
        /// Bytes allowed.
        allowed: u64,
        /// The map that needs most, if there is any.
        largest_map: Option<String>,
    },
}

/// Mean strikes of a photon beyond which a path limit is asked for: seconds of work for each photon.
pub(super) const MOST_STRIKES: f64 = 1e8;

impl fmt::Display for ExperimentError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Bare { wall } => {
                write!(
                    f,
                    "wall \"{wall}\" has no coating: give it one, or make it an opening"
                )
            }
            Self::UnknownName { name, near } => {
                write!(f, "no wall, region or opening is named \"{name}\"{near}")
            }
            Self::UnknownWall { name, near } => {
                write!(f, "a map needs a wall, but none is named \"{name}\"{near}")
            }
            Self::UnknownOutput { name, near } => write!(f, "no output is named \"{name}\"{near}"),
            Self::NoSource => write!(f, "sources must number at least 1, got 0"),
            Self::SourceOutside {
                source,
                position: [x, y, z],
            } => {
                write!(
                    f,
                    "source {source} must start inside the enclosure, but ({x}, {y}, {z}) m lies outside"
                )
            }
            Self::Source {
                source,
                required,
                value,
            } => write!(f, "source {source}: {required}, got {value}"),
            Self::SourceDirection { source, required } => write!(f, "source {source}: {required}"),
            Self::Map {
                wall,
                required,
                cells: [u, v],
            } => {
                write!(f, "map of {u} × {v} cells on wall \"{wall}\": {required}")
            }
            Self::PathLimit { value } => {
                write!(
                    f,
                    "path limit must be a positive number of metres, got {value}"
                )
            }
            Self::NearlyEndless { strikes } => write!(
                f,
                "light in this enclosure lives for about {strikes:.0e} strikes, at most {MOST_STRIKES:.0e} can be traced to \
                 their end: set a path limit"
            ),
            Self::Endless => write!(
                f,
                "light in this enclosure can never be absorbed or leave, so the run would not end: every reflectance is 1, \
                 there is no opening and the medium does not absorb; set a path limit"
            ),
            Self::Memory {
                needed,
                allowed,
                largest_map,
            } => {
                write!(
                    f,
                    "outputs need {needed} bytes of memory, allowed are {allowed}"
                )?;
                match largest_map {
                    Some(map) => write!(f, "; the map of \"{map}\" needs most"),
                    None => write!(f, "; the time grid needs most"),
                }
            }
        }
    }
}

impl std::error::Error for ExperimentError {}
