//! The cells of a map over a wall, cut by the wall's outline.

use super::polygon::{Point, signed_area};
use super::wall_plane::PlanarWall;

/// Cells over a wall's bounding rectangle.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Cells {
    /// Edges of the columns in metres, one more than there are columns.
    pub(crate) u_edges: Vec<f64>,
    /// Edges of the rows in metres, one more than there are rows.
    pub(crate) v_edges: Vec<f64>,
    /// Area in m² of each cell that is on the wall, row by row: `[v][u]`.
    pub(crate) areas: Vec<f64>,
}

/// Differences from an empty or a full cell below this share are rounding and are set right.
const ROUNDING: f64 = 1e-12;

impl PlanarWall {
    /// `columns × rows` equal cells over the bounding rectangle, with the area of each that is on the wall.
    ///
    /// Regions are not taken off. Both numbers must be at least 1; zero gives no cells.
    ///
    /// # Method
    ///
    /// Each loop is cut to the columns and then to the rows (Sutherland and Hodgman 1974, from memory). What that leaves of a concave
    /// loop may run back and forth along a cut, which adds nothing to its signed area.
    pub(crate) fn cells(&self, columns: usize, rows: usize) -> Cells {
        let bounds = self.outline.bounds();
        let u_edges = spaced(bounds.low.0, bounds.high.0, columns);
        let v_edges = spaced(bounds.low.1, bounds.high.1, rows);
        let mut areas = vec![0.0; columns * rows];
        for column in 0..columns {
            let (u0, u1) = (u_edges[column], u_edges[column + 1]);
            for corners in self.outline.loops() {
                let strip = cut(
                    &cut(corners, Side::Above(u0), Axis::U),
                    Side::Below(u1),
                    Axis::U,
                );
                for row in 0..rows {
                    let (v0, v1) = (v_edges[row], v_edges[row + 1]);
                    let piece = cut(
                        &cut(&strip, Side::Above(v0), Axis::V),
                        Side::Below(v1),
                        Axis::V,
                    );
                    areas[row * columns + column] += signed_area(&piece, (u0, v0));
                }
            }
            for row in 0..rows {
                let full = (u1 - u0) * (v_edges[row + 1] - v_edges[row]);
                let area = &mut areas[row * columns + column];
                if *area <= ROUNDING * full {
                    *area = 0.0;
                } else if *area > full * (1.0 - ROUNDING) {
                    *area = full;
                }
            }
        }
        Cells {
            u_edges,
            v_edges,
            areas,
        }
    }
}

/// `parts + 1` equally spaced numbers whose ends are exact and which are symmetric where the ends are.
fn spaced(low: f64, high: f64, parts: usize) -> Vec<f64> {
    let at = |i: usize| match i {
        0 => low,
        i if i == parts => high,
        i => (low * (parts - i) as f64 + high * i as f64) / parts as f64,
    };
    (0..=parts).map(at).collect()
}

#[derive(Clone, Copy)]
enum Axis {
    U,
    V,
}

#[derive(Clone, Copy)]
enum Side {
    Above(f64),
    Below(f64),
}

/// The part of a loop on one side of a line along an axis.
fn cut(corners: &[Point], side: Side, axis: Axis) -> Vec<Point> {
    let along = |point: Point| match axis {
        Axis::U => point.0,
        Axis::V => point.1,
    };
    let (Side::Above(line) | Side::Below(line)) = side;
    let kept = |point: Point| match side {
        Side::Above(_) => along(point) >= line,
        Side::Below(_) => along(point) <= line,
    };
    let on_line = |a: Point, b: Point| {
        // Always from the lower end, so that neighbouring cells meet in the same point.
        let (low, high) = if along(a) < along(b) { (a, b) } else { (b, a) };
        let t = (line - along(low)) / (along(high) - along(low));
        match axis {
            Axis::U => (line, low.1 + (high.1 - low.1) * t),
            Axis::V => (low.0 + (high.0 - low.0) * t, line),
        }
    };
    let mut left = Vec::with_capacity(corners.len() + 2);
    let Some(&last) = corners.last() else {
        return left;
    };
    let mut from = last;
    for &to in corners {
        if kept(from) != kept(to) {
            left.push(on_line(from, to));
        }
        if kept(to) {
            left.push(to);
        }
        from = to;
    }
    left
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::outline::Outline;
    use crate::geometry::wall_plane::tests::flat_wall;
    use crate::math::angle::sin_cos_parts;

    fn total(cells: &Cells) -> f64 {
        cells.areas.iter().sum()
    }

    #[test]
    fn cells_of_a_rectangle_are_all_full() {
        let wall = flat_wall(vec![vec![
            (-0.6, -0.4),
            (0.6, -0.4),
            (0.6, 0.4),
            (-0.6, 0.4),
        ]]);
        let cells = wall.cells(7, 3);
        assert_eq!(
            (cells.u_edges.len(), cells.v_edges.len(), cells.areas.len()),
            (8, 4, 21)
        );
        assert_eq!((cells.u_edges[0], cells.u_edges[7]), (-0.6, 0.6));
        for i in 0..=7 {
            assert_eq!(cells.u_edges[i], -cells.u_edges[7 - i]);
        }
        for (i, area) in cells.areas.iter().enumerate() {
            let (column, row) = (i % 7, i / 7);
            let width = cells.u_edges[column + 1] - cells.u_edges[column];
            assert_eq!(*area, width * (cells.v_edges[row + 1] - cells.v_edges[row]));
        }
    }

    #[test]
    fn a_triangle_halves_the_diagonal_cells() {
        let cells = flat_wall(vec![vec![(0.0, 0.0), (4.0, 0.0), (0.0, 4.0)]]).cells(4, 4);
        for (i, area) in cells.areas.iter().enumerate() {
            let expected = match (i % 4 + i / 4).cmp(&3) {
                std::cmp::Ordering::Less => 1.0,
                std::cmp::Ordering::Equal => 0.5,
                std::cmp::Ordering::Greater => 0.0,
            };
            assert_eq!(*area, expected, "cell {i}");
        }
    }

    #[test]
    fn holes_and_notches() {
        // A 3 × 3 square with a hole over its middle cell and a notch that splits the right column.
        let ring = flat_wall(vec![
            vec![
                (0.0, 0.0),
                (3.0, 0.0),
                (3.0, 1.25),
                (2.5, 1.5),
                (3.0, 1.75),
                (3.0, 3.0),
                (0.0, 3.0),
            ],
            vec![(1.0, 1.0), (1.0, 2.0), (2.0, 2.0), (2.0, 1.0)],
        ]);
        let cells = ring.cells(3, 3);
        assert_eq!(cells.areas, [1.0, 1.0, 1.0, 1.0, 0.0, 0.875, 1.0, 1.0, 1.0]);
        // Two arms of a U run through one column of cells.
        let u = flat_wall(vec![vec![
            (0.0, 0.0),
            (3.0, 0.0),
            (3.0, 3.0),
            (2.0, 3.0),
            (2.0, 1.0),
            (1.0, 1.0),
            (1.0, 3.0),
            (0.0, 3.0),
        ]]);
        assert_eq!(u.cells(1, 3).areas, [3.0, 2.0, 2.0]);
        assert_eq!(u.cells(3, 1).areas, [3.0, 1.0, 3.0]);
    }

    #[test]
    fn cells_add_up_and_agree_with_random_points() {
        let polygon: Vec<Point> = (0..11)
            .map(|i| {
                let (sin, cos) = sin_cos_parts(i, 11);
                let radius = if i % 2 == 0 { 1.0 } else { 0.45 };
                (radius * cos, radius * sin)
            })
            .collect();
        let wall = flat_wall(vec![polygon]);
        let cells = wall.cells(24, 17);
        assert!((total(&cells) / wall.area - 1.0).abs() < 1e-13);
        // A fine regular grid in each cell: its error is at most the border length times the spacing.
        for (i, area) in cells.areas.iter().enumerate() {
            let (u0, u1) = (cells.u_edges[i % 24], cells.u_edges[i % 24 + 1]);
            let (v0, v1) = (cells.v_edges[i / 24], cells.v_edges[i / 24 + 1]);
            let at = |low: f64, high: f64, k: i32| low + (high - low) * (f64::from(k) + 0.5) / 50.0;
            let hits = (0..2500)
                .filter(|k| {
                    wall.outline
                        .contains((at(u0, u1, k % 50), at(v0, v1, k / 50)))
                })
                .count();
            let full = (u1 - u0) * (v1 - v0);
            assert!(
                (area / full - hits as f64 / 2500.0).abs() < 0.05,
                "cell {i}"
            );
        }
    }

    #[test]
    fn cells_that_end_on_borders_but_for_rounding_are_full_or_empty() {
        let wall = flat_wall(vec![
            vec![(0.0, 0.0), (0.7, 0.0), (0.7, 0.7), (0.0, 0.7)],
            vec![(0.3, 0.1), (0.3, 0.6), (0.6, 0.6), (0.6, 0.1)],
        ]);
        let cells = wall.cells(7, 7);
        assert!(
            cells.u_edges[3] != 0.3 || cells.u_edges[6] != 0.6,
            "else nothing is tested"
        );
        for (i, area) in cells.areas.iter().enumerate() {
            let (column, row) = (i % 7, i / 7);
            let hole = (3..6).contains(&column) && (1..6).contains(&row);
            let full = (cells.u_edges[column + 1] - cells.u_edges[column])
                * (cells.v_edges[row + 1] - cells.v_edges[row]);
            assert_eq!(*area, if hole { 0.0 } else { full }, "cell {i}");
        }
    }

    #[test]
    fn no_cells_and_no_wall() {
        let wall = flat_wall(vec![vec![(0.0, 0.0), (1.0, 0.0), (0.0, 1.0)]]);
        assert!(wall.cells(0, 5).areas.is_empty());
        let nothing = PlanarWall {
            outline: Outline::new(Vec::new()),
            ..wall
        };
        assert_eq!(nothing.cells(2, 2).areas, [0.0; 4]);
    }
}
