//! What is wrong with a polygon that somebody has drawn.

use std::fmt;

use super::outline::Bounds;
use super::polygon::{self, Point};

/// Most corners that a polygon may have: the checks take time in proportion to their square.
pub(crate) const MOST_CORNERS: usize = 10_000;

/// Least area of a polygon as a share of the square of its extent. Below it the sign of the area is rounding.
const LEAST_AREA: f64 = 1e-14;

/// Sine of the least reflex turn that counts. A smaller one would make the corners of a rounded convex outline reflex.
const FLAT: f64 = 1e-12;

/// Reason why a list of corners is no polygon. Corners and edges are counted from 1; edge `i` starts at corner `i`.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum OutlineError {
    /// Fewer than 3 corners.
    TooFewCorners {
        /// How many there are.
        corners: usize,
    },
    /// More than 10 000 corners.
    TooManyCorners {
        /// How many there are.
        corners: usize,
    },
    /// A coordinate is infinite or not a number.
    NotFinite {
        /// Which corner.
        corner: usize,
        /// Its coordinates in metres.
        at: (f64, f64),
    },
    /// Two corners are at the same place.
    RepeatedCorner {
        /// The earlier corner.
        first: usize,
        /// The later corner.
        second: usize,
    },
    /// Two edges cross, touch or fold back on each other.
    SelfCrossing {
        /// The earlier edge.
        first: usize,
        /// The later edge.
        second: usize,
    },
    /// All corners lie on one line, or the area is out of the range of `f64`.
    NoArea,
}

impl fmt::Display for OutlineError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::TooFewCorners { corners } => {
                write!(f, "an outline needs at least 3 corners, got {corners}")
            }
            Self::TooManyCorners { corners } => {
                write!(
                    f,
                    "an outline may have at most {MOST_CORNERS} corners, got {corners}"
                )
            }
            Self::NotFinite { corner, at } => {
                write!(
                    f,
                    "corner {corner} of an outline must be finite, got ({:?}, {:?})",
                    at.0, at.1
                )
            }
            Self::RepeatedCorner { first, second } => {
                write!(f, "corners {first} and {second} of an outline must differ")
            }
            Self::SelfCrossing { first, second } => write!(
                f,
                "an outline must not cross or touch itself, but the edges from corner {first} and from corner {second} meet"
            ),
            Self::NoArea => write!(f, "the area of an outline must be positive and finite"),
        }
    }
}

impl std::error::Error for OutlineError {}

/// What is known of a simple polygon.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct OutlineFacts {
    /// Area in m², negative if the corners run clockwise.
    pub(crate) area: f64,
    /// Whether no corner is reflex.
    pub(crate) convex: bool,
}

/// Checks that corners form a simple polygon: finite, no corner twice, no crossing, some area.
///
/// # Errors
///
/// The first reason found, in the order of [`OutlineError`].
pub(crate) fn check_outline(corners: &[Point]) -> Result<OutlineFacts, OutlineError> {
    let count = corners.len();
    if count < 3 {
        return Err(OutlineError::TooFewCorners { corners: count });
    }
    if count > MOST_CORNERS {
        return Err(OutlineError::TooManyCorners { corners: count });
    }
    if let Some(corner) = corners
        .iter()
        .position(|(u, v)| !(u.is_finite() && v.is_finite()))
    {
        return Err(OutlineError::NotFinite {
            corner: corner + 1,
            at: corners[corner],
        });
    }
    check_repeats(corners)?;
    let extent = Bounds::of(corners.iter().copied()).diagonal();
    let area = polygon::signed_area(corners, corners[0]);
    if !(area.is_finite() && area.abs() > LEAST_AREA * extent * extent && extent * extent > 0.0) {
        // A bow tie whose halves cancel is better told as what it is.
        check_crossings(corners)?;
        return Err(OutlineError::NoArea);
    }
    check_crossings(corners)?;
    Ok(OutlineFacts {
        area,
        convex: is_convex(corners, area),
    })
}

fn check_repeats(corners: &[Point]) -> Result<(), OutlineError> {
    let mut order: Vec<usize> = (0..corners.len()).collect();
    // Adding zero makes −0 and 0 one place.
    let key = |i: usize| (corners[i].0 + 0.0, corners[i].1 + 0.0);
    order.sort_by(|&a, &b| {
        key(a)
            .0
            .total_cmp(&key(b).0)
            .then(key(a).1.total_cmp(&key(b).1))
            .then(a.cmp(&b))
    });
    match order.windows(2).find(|pair| key(pair[0]) == key(pair[1])) {
        Some(pair) => Err(OutlineError::RepeatedCorner {
            first: pair[0] + 1,
            second: pair[1] + 1,
        }),
        None => Ok(()),
    }
}

fn check_crossings(corners: &[Point]) -> Result<(), OutlineError> {
    let edges: Vec<(Point, Point)> = polygon::edges(corners).collect();
    let bounds: Vec<Bounds> = edges.iter().map(|&(a, b)| Bounds::of([a, b])).collect();
    for first in 0..edges.len() {
        for second in first + 1..edges.len() {
            if !bounds[first].meets(&bounds[second]) {
                continue;
            }
            let meet = if second == first + 1 {
                folds_back(edges[first].0, edges[second].0, edges[second].1)
            } else if first == 0 && second + 1 == edges.len() {
                folds_back(edges[second].0, edges[first].0, edges[first].1)
            } else {
                segments_meet(edges[first], edges[second])
            };
            if meet {
                return Err(OutlineError::SelfCrossing {
                    first: first + 1,
                    second: second + 1,
                });
            }
        }
    }
    Ok(())
}

/// Whether the edge from `b` to `c` runs back along the edge from `a` to `b`.
fn folds_back(a: Point, b: Point, c: Point) -> bool {
    polygon::turn(a, b, c) == 0.0 && (a.0 - b.0) * (c.0 - b.0) + (a.1 - b.1) * (c.1 - b.1) > 0.0
}

/// Whether two segments, ends included, have a point in common.
fn segments_meet((a, b): (Point, Point), (c, d): (Point, Point)) -> bool {
    let (on_first_c, on_first_d) = (polygon::turn(a, b, c), polygon::turn(a, b, d));
    let (on_second_a, on_second_b) = (polygon::turn(c, d, a), polygon::turn(c, d, b));
    let opposite = |x: f64, y: f64| (x > 0.0 && y < 0.0) || (x < 0.0 && y > 0.0);
    if opposite(on_first_c, on_first_d) && opposite(on_second_a, on_second_b) {
        return true;
    }
    let touches = |turned: f64, ends: (Point, Point), point: Point| {
        turned == 0.0
            && Bounds::of([ends.0, ends.1]).meets(&Bounds {
                low: point,
                high: point,
            })
    };
    touches(on_first_c, (a, b), c)
        || touches(on_first_d, (a, b), d)
        || touches(on_second_a, (c, d), a)
        || touches(on_second_b, (c, d), b)
}

fn is_convex(corners: &[Point], area: f64) -> bool {
    let count = corners.len();
    (0..count).all(|i| {
        let (a, b, c) = (
            corners[i],
            corners[(i + 1) % count],
            corners[(i + 2) % count],
        );
        let turned = if area < 0.0 {
            -polygon::turn(a, b, c)
        } else {
            polygon::turn(a, b, c)
        };
        turned >= -FLAT * polygon::distance(a, b) * polygon::distance(b, c)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn square_and_arrow() {
        let square = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
        assert_eq!(
            check_outline(&square),
            Ok(OutlineFacts {
                area: 1.0,
                convex: true
            })
        );
        let reversed: Vec<_> = square.iter().rev().copied().collect();
        assert_eq!(
            check_outline(&reversed),
            Ok(OutlineFacts {
                area: -1.0,
                convex: true
            })
        );
        let arrow = [(0.0, 0.0), (2.0, 0.0), (1.0, 0.5), (2.0, 2.0)];
        assert_eq!(check_outline(&arrow).map(|facts| facts.convex), Ok(false));
        let with_flat_corner = [(0.0, 0.0), (0.3, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
        assert_eq!(
            check_outline(&with_flat_corner),
            Ok(OutlineFacts {
                area: 1.0,
                convex: true
            })
        );
    }

    #[test]
    fn each_error_is_told() {
        use OutlineError as E;
        let check = |corners: &[Point]| check_outline(corners).unwrap_err();
        assert_eq!(
            check(&[(0.0, 0.0), (1.0, 0.0)]),
            E::TooFewCorners { corners: 2 }
        );
        assert_eq!(
            check(&vec![(0.0, 0.0); 10_001]),
            E::TooManyCorners { corners: 10_001 }
        );
        let not_finite = check(&[(0.0, 0.0), (f64::INFINITY, 0.0), (1.0, 1.0)]);
        assert_eq!(
            not_finite,
            E::NotFinite {
                corner: 2,
                at: (f64::INFINITY, 0.0)
            }
        );
        assert!(matches!(
            check(&[(0.0, 0.0), (1.0, 0.0), (1.0, f64::NAN)]),
            E::NotFinite { corner: 3, .. }
        ));
        let repeated = check(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (-0.0, 0.0)]);
        assert_eq!(
            repeated,
            E::RepeatedCorner {
                first: 1,
                second: 4
            }
        );
        let bow_tie = check(&[(0.0, 0.0), (1.0, 1.0), (1.0, 0.0), (0.0, 1.0)]);
        assert_eq!(
            bow_tie,
            E::SelfCrossing {
                first: 1,
                second: 3
            }
        );
        let spike = check(&[(0.0, 0.0), (2.0, 0.0), (1.0, 0.0), (1.0, 1.0)]);
        assert_eq!(
            spike,
            E::SelfCrossing {
                first: 1,
                second: 2
            }
        );
        let touching = check(&[(0.0, 0.0), (2.0, 0.0), (2.0, 2.0), (1.0, 0.0), (0.0, 2.0)]);
        assert_eq!(
            touching,
            E::SelfCrossing {
                first: 1,
                second: 3
            }
        );
        assert_eq!(
            check(&[(0.0, 0.0), (1e-200, 0.0), (0.0, 1e-200)]),
            E::NoArea
        );
        assert_eq!(check(&[(0.0, 0.0), (1e200, 0.0), (0.0, 1e200)]), E::NoArea);
        assert_eq!(
            check(&[(0.0, 0.0), (1.0, 1.0), (3.0, 3.0 + 1e-15)]),
            E::NoArea
        );
    }

    #[test]
    fn a_fold_across_the_first_corner_is_found() {
        let around_the_end = [(2.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 0.0)];
        assert_eq!(
            check_outline(&around_the_end),
            Err(OutlineError::SelfCrossing {
                first: 1,
                second: 4
            })
        );
    }

    #[test]
    fn messages_name_the_culprit() {
        let text = OutlineError::SelfCrossing {
            first: 1,
            second: 3,
        }
        .to_string();
        assert!(
            text.contains("corner 1") && text.contains("corner 3"),
            "{text}"
        );
        assert!(
            OutlineError::TooFewCorners { corners: 2 }
                .to_string()
                .contains("at least 3 corners, got 2")
        );
    }
}
