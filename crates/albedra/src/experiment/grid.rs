//! The edges of time bins.

use std::fmt;

use serde::{Deserialize, Serialize};

/// The edges of time bins in seconds, from 0 on.
///
/// # Examples
///
/// ```
/// use albedra::TimeGrid;
///
/// let grid = TimeGrid::new(400e-9, 200)?;
/// assert_eq!(grid.edges().len(), 201);
/// let own = TimeGrid::from_edges(vec![0.0, 1e-9, 1e-8, 1e-7])?;
/// assert_eq!(own.stop(), 1e-7);
/// assert!(TimeGrid::new(-1.0, 10).is_err());
/// # Ok::<(), albedra::TimeGridError>(())
/// ```
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "Form", into = "Form")]
pub struct TimeGrid {
    edges: Vec<f64>,
    equal: bool,
}

#[derive(Serialize, Deserialize)]
#[serde(untagged)]
enum Form {
    Equal { stop: f64, bins: usize },
    Edges { edges: Vec<f64> },
}

impl TryFrom<Form> for TimeGrid {
    type Error = TimeGridError;

    fn try_from(form: Form) -> Result<Self, TimeGridError> {
        match form {
            Form::Equal { stop, bins } => Self::new(stop, bins),
            Form::Edges { edges } => Self::from_edges(edges),
        }
    }
}

impl From<TimeGrid> for Form {
    fn from(grid: TimeGrid) -> Self {
        if grid.equal {
            Self::Equal {
                stop: grid.stop(),
                bins: grid.bins(),
            }
        } else {
            Self::Edges { edges: grid.edges }
        }
    }
}

/// More bins than this are taken for a mistake.
const MOST_BINS: usize = 10_000_000;

impl TimeGrid {
    /// Equal bins from 0 to `stop` seconds.
    ///
    /// # Errors
    ///
    /// If there are no bins, more than 10⁷, or if the stop is not a positive number of seconds.
    pub fn new(stop: f64, bins: usize) -> Result<Self, TimeGridError> {
        if !(f64::MIN_POSITIVE..=1e30).contains(&stop) {
            return Err(TimeGridError::Stop { value: stop });
        }
        if !(1..=MOST_BINS).contains(&bins) {
            return Err(TimeGridError::Bins { value: bins });
        }
        let edges = (0..=bins)
            .map(|k| {
                if k == bins {
                    stop
                } else {
                    stop * k as f64 / bins as f64
                }
            })
            .collect();
        Ok(Self { edges, equal: true })
    }

    /// Bins between the given edges in seconds, the first of which is 0.
    ///
    /// # Errors
    ///
    /// If there are fewer than two edges, the first is not 0, or they do not rise.
    pub fn from_edges(edges: Vec<f64>) -> Result<Self, TimeGridError> {
        if !(2..=MOST_BINS).contains(&edges.len()) {
            return Err(TimeGridError::Bins {
                value: edges.len().saturating_sub(1),
            });
        }
        if edges[0] != 0.0 {
            return Err(TimeGridError::Start { value: edges[0] });
        }
        for (k, pair) in edges.windows(2).enumerate() {
            if !(pair[0] < pair[1] && pair[1] <= 1e30) {
                return Err(TimeGridError::Order {
                    edge: k + 1,
                    before: pair[0],
                    value: pair[1],
                });
            }
        }
        Ok(Self {
            edges,
            equal: false,
        })
    }

    /// Edges in seconds.
    pub fn edges(&self) -> &[f64] {
        &self.edges
    }

    /// Number of bins.
    pub fn bins(&self) -> usize {
        self.edges.len() - 1
    }

    /// Last edge in seconds.
    pub fn stop(&self) -> f64 {
        self.edges[self.bins()]
    }

    /// Whether all bins were asked to be equal.
    pub(crate) fn is_equal(&self) -> bool {
        self.equal
    }
}

/// A time grid that cannot be.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum TimeGridError {
    /// The stop is not a positive number of seconds.
    Stop {
        /// What was given, in seconds.
        value: f64,
    },
    /// No bins, or too many.
    Bins {
        /// What was given.
        value: usize,
    },
    /// The first edge is not 0.
    Start {
        /// What was given, in seconds.
        value: f64,
    },
    /// An edge is not above the one before.
    Order {
        /// Its index.
        edge: usize,
        /// The edge before, in seconds.
        before: f64,
        /// What was given, in seconds.
        value: f64,
    },
}

impl fmt::Display for TimeGridError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Stop { value } => write!(
                f,
                "stop of the time grid must be a positive number of seconds, got {value}"
            ),
            Self::Bins { value } => write!(
                f,
                "time grid must have from 1 to {MOST_BINS} bins, got {value}"
            ),
            Self::Start { value } => {
                write!(f, "first edge of the time grid must be 0 s, got {value}")
            }
            Self::Order {
                edge,
                before,
                value,
            } => {
                write!(
                    f,
                    "edge {edge} of the time grid must be above {before} s and finite, got {value}"
                )
            }
        }
    }
}

impl std::error::Error for TimeGridError {}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn empty_and_backward_grids_are_refused() {
        assert!(matches!(
            TimeGrid::new(0.0, 5),
            Err(TimeGridError::Stop { .. })
        ));
        assert!(matches!(
            TimeGrid::new(f64::NAN, 5),
            Err(TimeGridError::Stop { .. })
        ));
        assert!(matches!(
            TimeGrid::new(f64::INFINITY, 5),
            Err(TimeGridError::Stop { .. })
        ));
        assert_eq!(TimeGrid::new(1.0, 0), Err(TimeGridError::Bins { value: 0 }));
        assert_eq!(
            TimeGrid::from_edges(vec![0.0]),
            Err(TimeGridError::Bins { value: 0 })
        );
        assert_eq!(
            TimeGrid::from_edges(vec![0.1, 1.0]),
            Err(TimeGridError::Start { value: 0.1 })
        );
        let backwards = TimeGrid::from_edges(vec![0.0, 2.0, 1.0]);
        assert_eq!(
            backwards,
            Err(TimeGridError::Order {
                edge: 2,
                before: 2.0,
                value: 1.0
            })
        );
        assert!(TimeGrid::from_edges(vec![0.0, f64::NAN]).is_err());
    }

    #[test]
    fn text_form_rebuilds_the_same_edges() {
        for grid in [
            TimeGrid::new(4e-7, 173),
            TimeGrid::from_edges(vec![0.0, 1e-9, 0.3]),
        ] {
            let grid = grid.expect("valid");
            let text = toml::to_string(&grid).expect("plain data");
            assert_eq!(toml::from_str::<TimeGrid>(&text), Ok(grid));
        }
    }
}
