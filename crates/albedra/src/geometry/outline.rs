//! The outline of a planar wall: closed loops in its coordinates.

use super::polygon::{self, Point};
use crate::math::order::{larger, smaller};

/// Closed loops in (u, v): counter-clockwise around the wall, clockwise around its holes.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Outline {
    loops: Vec<Vec<Point>>,
}

/// A rectangle along the axes, borders included.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Bounds {
    /// Least u and v.
    pub(crate) low: Point,
    /// Greatest u and v.
    pub(crate) high: Point,
}

impl Bounds {
    /// Bounds of points; upside down (`low` above `high`) if there are none.
    pub(crate) fn of(points: impl IntoIterator<Item = Point>) -> Self {
        let nothing = Self {
            low: (f64::INFINITY, f64::INFINITY),
            high: (f64::NEG_INFINITY, f64::NEG_INFINITY),
        };
        points.into_iter().fold(nothing, |bounds, (u, v)| Self {
            low: (smaller(bounds.low.0, u), smaller(bounds.low.1, v)),
            high: (larger(bounds.high.0, u), larger(bounds.high.1, v)),
        })
    }

    /// Whether the two rectangles have a point in common.
    pub(crate) fn meets(&self, other: &Self) -> bool {
        self.low.0 <= other.high.0
            && other.low.0 <= self.high.0
            && self.low.1 <= other.high.1
            && other.low.1 <= self.high.1
    }

    /// Length of the diagonal in metres.
    pub(crate) fn diagonal(&self) -> f64 {
        polygon::distance(self.low, self.high)
    }
}

impl Outline {
    /// An outline of these loops, which must not cross each other.
    pub(crate) fn new(loops: Vec<Vec<Point>>) -> Self {
        Self { loops }
    }

    /// The loops, each without a repeated last corner.
    pub(crate) fn loops(&self) -> &[Vec<Point>] {
        &self.loops
    }

    /// All corners of all loops.
    pub(crate) fn corners(&self) -> impl Iterator<Item = Point> + '_ {
        self.loops.iter().flatten().copied()
    }

    /// All edges of all loops.
    pub(crate) fn edges(&self) -> impl Iterator<Item = (Point, Point)> + '_ {
        self.loops
            .iter()
            .flat_map(|corners| polygon::edges(corners))
    }

    /// Enclosed area in m², holes taken off.
    #[cfg(test)]
    pub(crate) fn area(&self) -> f64 {
        let near = self.corners().next().unwrap_or_default();
        self.loops
            .iter()
            .map(|corners| polygon::signed_area(corners, near))
            .sum()
    }

    /// Bounding rectangle.
    pub(crate) fn bounds(&self) -> Bounds {
        Bounds::of(self.corners())
    }

    /// Whether a point lies within the outline and in none of its holes; see [`polygon::ray_crosses`] for the border.
    pub(crate) fn contains(&self, point: Point) -> bool {
        self.edges()
            .filter(|edge| polygon::ray_crosses(*edge, point))
            .count()
            % 2
            == 1
    }

    /// The point of the border that is nearest to a point, or the point itself if there is no border.
    pub(crate) fn nearest_border(&self, point: Point) -> Point {
        let mut best = (f64::INFINITY, point);
        for edge in self.edges() {
            let foot = polygon::nearest_on_segment(edge, point);
            let away = polygon::distance(foot, point);
            if away < best.0 {
                best = (away, foot);
            }
        }
        best.1
    }

    /// How far outside a point lies, in metres; zero inside.
    pub(crate) fn outside_by(&self, point: Point) -> f64 {
        if self.contains(point) {
            0.0
        } else {
            polygon::distance(self.nearest_border(point), point)
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn frame_shaped() -> Outline {
        Outline::new(vec![
            vec![(-2.0, -1.0), (2.0, -1.0), (2.0, 1.0), (-2.0, 1.0)],
            vec![(-1.0, -0.5), (-1.0, 0.5), (1.0, 0.5), (1.0, -0.5)],
        ])
    }

    #[test]
    fn holes_are_taken_off() {
        let outline = frame_shaped();
        assert_eq!(outline.area(), 8.0 - 2.0);
        assert_eq!(
            outline.bounds(),
            Bounds {
                low: (-2.0, -1.0),
                high: (2.0, 1.0)
            }
        );
        assert!(
            outline.contains((-1.5, 0.0))
                && !outline.contains((0.0, 0.0))
                && !outline.contains((0.0, 3.0))
        );
        assert_eq!(outline.outside_by((0.0, 0.25)), 0.25);
        assert_eq!(outline.outside_by((5.0, 5.0)), 5.0);
        assert_eq!(outline.nearest_border((1.75, 0.0)), (2.0, 0.0));
    }

    #[test]
    fn no_loops_hold_nothing() {
        let nothing = Outline::new(Vec::new());
        assert_eq!(nothing.area(), 0.0);
        assert!(!nothing.contains((0.0, 0.0)) && !nothing.bounds().meets(&frame_shaped().bounds()));
    }
}
