//! Pieces of border that rise monotonically in v: segments and half circles.

use super::outline::{Bounds, Outline};
use super::polygon::{self, Point};
use super::region_shape::RegionShape;
use crate::math::angle::atan2;
use crate::math::order::{larger, smaller};

/// A piece of border on which u is a function of v.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Curve {
    /// A segment from its lower to its upper end.
    Segment { low: Point, high: Point },
    /// The left (`side` −1) or right (`side` 1) half of a circle.
    Arc {
        centre: Point,
        radius: f64,
        side: f64,
    },
}

impl Curve {
    /// The edge between two points; none if it is horizontal, since it then bounds no area sideways.
    fn edge((a, b): (Point, Point)) -> Option<Self> {
        if a.1 < b.1 {
            Some(Self::Segment { low: a, high: b })
        } else {
            (b.1 < a.1).then_some(Self::Segment { low: b, high: a })
        }
    }

    /// Bounding rectangle.
    pub(crate) fn bounds(&self) -> Bounds {
        match *self {
            Self::Segment { low, high } => Bounds {
                low: (smaller(low.0, high.0), low.1),
                high: (larger(low.0, high.0), high.1),
            },
            Self::Arc {
                centre: (u, v),
                radius,
                side,
            } => {
                let tip = u + side * radius;
                Bounds {
                    low: (smaller(u, tip), v - radius),
                    high: (larger(u, tip), v + radius),
                }
            }
        }
    }

    /// u at a height v within the curve's range.
    pub(crate) fn at(&self, v: f64) -> f64 {
        match *self {
            Self::Segment { low, high } => {
                if v == high.1 {
                    high.0
                } else {
                    low.0 + (high.0 - low.0) * ((v - low.1) / (high.1 - low.1))
                }
            }
            Self::Arc {
                centre,
                radius,
                side,
            } => centre.0 + side * half_width(v - centre.1, radius),
        }
    }

    /// Area between the curve and its chord from `v0` to `v1`, positive where the curve is on the side of larger u.
    pub(crate) fn bulge(&self, v0: f64, v1: f64) -> f64 {
        match *self {
            Self::Segment { .. } => 0.0,
            Self::Arc {
                centre,
                radius,
                side,
            } => {
                // The same half widths as in `at`, or chord and bulge would not fit together near the poles.
                let (s0, s1) = (v0 - centre.1, v1 - centre.1);
                let (c0, c1) = (half_width(s0, radius), half_width(s1, radius));
                let angle = atan2(s1, c1) - atan2(s0, c0);
                let square = radius * radius;
                // θ − sin θ cancels for small θ, so there its series up to θ⁹/9! takes over (relative error below 1e-14).
                let excess = if angle < 0.1 {
                    let squared = angle * angle;
                    let tail = 1.0 / 120.0 - squared * (1.0 / 5_040.0 - squared / 362_880.0);
                    angle * squared * (1.0 / 6.0 - squared * tail)
                } else {
                    angle - (s1 * c0 - s0 * c1) / square
                };
                side * 0.5 * square * excess
            }
        }
    }

    /// Calls `found` with each v at which the two curves may cross.
    ///
    /// A v too many does no harm. Of curves that touch, one too few does none either, since there the curves differ by rounding.
    pub(crate) fn crossings(&self, other: &Self, found: &mut impl FnMut(f64)) {
        let (a, b) = (self.bounds(), other.bounds());
        if !a.meets(&b) {
            return;
        }
        match (*self, *other) {
            (Self::Segment { .. }, Self::Segment { .. }) => {
                let (v0, v1) = (larger(a.low.1, b.low.1), smaller(a.high.1, b.high.1));
                let (d0, d1) = (self.at(v0) - other.at(v0), self.at(v1) - other.at(v1));
                if (d0 > 0.0 && d1 < 0.0) || (d0 < 0.0 && d1 > 0.0) {
                    found(v0 + (v1 - v0) * (d0 / (d0 - d1)));
                }
            }
            (Self::Segment { low, high }, Self::Arc { centre, radius, .. })
            | (Self::Arc { centre, radius, .. }, Self::Segment { low, high }) => {
                let length = polygon::distance(low, high);
                let (du, dv) = ((high.0 - low.0) / length, (high.1 - low.1) / length);
                let (u, v) = (centre.0 - low.0, centre.1 - low.1);
                let (along, away) = (u * du + v * dv, u * dv - v * du);
                let half = half_width(away, radius);
                found(low.1 + (along - half) * dv);
                found(low.1 + (along + half) * dv);
            }
            (
                Self::Arc {
                    centre: c,
                    radius: r,
                    ..
                },
                Self::Arc {
                    centre: d,
                    radius: s,
                    ..
                },
            ) => {
                let apart = polygon::distance(c, d);
                if apart > 0.0 {
                    let (du, dv) = ((d.0 - c.0) / apart, (d.1 - c.1) / apart);
                    // (apart² + r² − s²) / (2 apart), without squares that cancel.
                    let along = 0.5 * (apart + (r - s) * ((r + s) / apart));
                    let half = half_width(along, r);
                    found(c.1 + along * dv - half * du);
                    found(c.1 + along * dv + half * du);
                }
            }
        }
    }
}

/// `√(r² − d²)`, zero where `|d| ≥ r`.
fn half_width(d: f64, r: f64) -> f64 {
    let square = (r - d) * (r + d);
    if square > 0.0 { square.sqrt() } else { 0.0 }
}

impl Outline {
    /// The border, horizontal edges left out.
    pub(crate) fn curves(&self) -> Vec<Curve> {
        self.edges().filter_map(Curve::edge).collect()
    }
}

impl RegionShape {
    /// The border, horizontal edges left out.
    pub(crate) fn curves(&self) -> Vec<Curve> {
        match self.as_disk() {
            Some((centre, radius)) => [-1.0, 1.0]
                .map(|side| Curve::Arc {
                    centre,
                    radius,
                    side,
                })
                .to_vec(),
            None => polygon::edges(&self.corners())
                .filter_map(Curve::edge)
                .collect(),
        }
    }
}
