//! Arithmetic on one closed loop of corners in a plane.

/// Coordinates (u, v) or (x, y) in metres.
pub(crate) type Point = (f64, f64);

/// Twice the signed area of the triangle `a`, `b`, `c`: positive if it runs counter-clockwise.
pub(crate) fn turn(a: Point, b: Point, c: Point) -> f64 {
    (b.0 - a.0) * (c.1 - a.1) - (b.1 - a.1) * (c.0 - a.0)
}

/// Distance between two points.
pub(crate) fn distance(a: Point, b: Point) -> f64 {
    let (du, dv) = (b.0 - a.0, b.1 - a.1);
    (du * du + dv * dv).sqrt()
}

/// The edges of a closed loop, from each corner to the next one.
pub(crate) fn edges(corners: &[Point]) -> impl Iterator<Item = (Point, Point)> + '_ {
    corners
        .iter()
        .zip(corners.iter().cycle().skip(1))
        .map(|(a, b)| (*a, *b))
}

/// Area of a loop, positive if it runs counter-clockwise, computed relative to a point near it.
pub(crate) fn signed_area(corners: &[Point], near: Point) -> f64 {
    edges(corners).map(|(a, b)| 0.5 * turn(near, a, b)).sum()
}

/// Whether a ray from the point towards +u crosses the edge.
///
/// Each edge holds its lower end and not its upper one and is always evaluated upwards. So of two loops that share an edge
/// exactly one holds a point on it, however they run.
pub(crate) fn ray_crosses((a, b): (Point, Point), point: Point) -> bool {
    if (a.1 > point.1) == (b.1 > point.1) {
        return false;
    }
    let (low, high) = if a.1 < b.1 { (a, b) } else { (b, a) };
    turn(low, high, point) > 0.0
}

/// The point of the segment `a`–`b` that is nearest to `point`.
pub(crate) fn nearest_on_segment((a, b): (Point, Point), point: Point) -> Point {
    let (du, dv) = (b.0 - a.0, b.1 - a.1);
    let square = du * du + dv * dv;
    let along = (point.0 - a.0) * du + (point.1 - a.1) * dv;
    if along <= 0.0 || square == 0.0 {
        a
    } else if along >= square {
        b
    } else {
        let t = along / square;
        (a.0 + du * t, a.1 + dv * t)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn area_has_the_sign_of_the_orientation() {
        let triangle = [(0.0, 0.0), (2.0, 0.0), (0.0, 3.0)];
        assert_eq!(signed_area(&triangle, (5.0, 5.0)), 3.0);
        assert_eq!(
            signed_area(&[triangle[0], triangle[2], triangle[1]], triangle[0]),
            -3.0
        );
        assert_eq!(signed_area(&[], (0.0, 0.0)), 0.0);
    }

    #[test]
    fn a_point_on_a_shared_edge_is_in_exactly_one_of_two_loops() {
        let (a, b) = ((0.1, 0.0), (0.7, 0.9));
        let left = [a, b, (-1.0, 0.5)];
        let right = [b, a, (2.0, 0.5)];
        let inside =
            |corners: &[Point], p| edges(corners).filter(|e| ray_crosses(*e, p)).count() % 2 == 1;
        for i in 1..1000 {
            let t = f64::from(i) / 1000.0;
            let p = (a.0 + (b.0 - a.0) * t, a.1 + (b.1 - a.1) * t);
            assert!(inside(&left, p) != inside(&right, p), "{p:?}");
        }
    }

    #[test]
    fn nearest_point_of_a_segment() {
        let segment = ((0.0, 0.0), (2.0, 0.0));
        assert_eq!(nearest_on_segment(segment, (-1.0, 1.0)), (0.0, 0.0));
        assert_eq!(nearest_on_segment(segment, (0.5, 1.0)), (0.5, 0.0));
        assert_eq!(nearest_on_segment(segment, (9.0, 1.0)), (2.0, 0.0));
        assert_eq!(
            nearest_on_segment(((1.0, 1.0), (1.0, 1.0)), (9.0, 1.0)),
            (1.0, 1.0)
        );
    }
}
