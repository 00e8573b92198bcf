//! Polygons cut into triangles.

use glam::DVec3;

use super::outline::Bounds;
use super::outline_check::MOST_CORNERS;
use super::polygon::{Point, distance, turn};
use crate::math::order::larger;

/// Sine of the least angle that counts as one. Corners that lie on a line but for rounding must not make ears, since their
/// slivers could face the wrong way.
const FLAT: f64 = 1e-12;

/// Triangles that fill a simple polygon, as indices of its corners, each running the way the polygon runs.
///
/// Each corner is used, also one between two edges on one line, so that neighbours stay joined. `None` if there are fewer than 3 or
/// more than 10 000 corners, if a number is not finite, or if the polygon is not simple in a way that leaves no ear.
///
/// # Method
///
/// Ear clipping (Meisters 1975, "Polygons have ears", from memory). What a corner was found to be stays true until one of
/// its neighbours is clipped, so that most looks at it are one comparison.
pub(crate) fn triangulate(corners: &[Point]) -> Option<Vec<[u32; 3]>> {
    let count = corners.len();
    if !(3..=MOST_CORNERS).contains(&count)
        || corners
            .iter()
            .any(|(u, v)| !(u.is_finite() && v.is_finite()))
    {
        return None;
    }
    let mut clipper = Clipper::new(corners);
    let mut triangles = Vec::with_capacity(count - 2);
    let (mut at, mut left, mut looks) = (0, count, 0);
    let mut tolerance = FLAT;
    while left > 3 {
        if clipper.is_ear(at, tolerance) {
            triangles.push(clipper.triangle(at)?);
            // Skipping a corner keeps the ears from fanning out of one corner.
            let after = clipper.clip(at);
            at = clipper.next[after];
            (left, looks, tolerance) = (left - 1, 0, FLAT);
        } else {
            at = clipper.next[at];
            looks += 1;
        }
        if looks > left {
            // Once more without the tolerance, then give up.
            if tolerance == 0.0 {
                return None;
            }
            (looks, tolerance) = (0, 0.0);
            clipper.refused.fill(false);
        }
    }
    triangles.push(clipper.triangle(at)?);
    (clipper.turned(at) > 0.0).then_some(triangles)
}

/// What is left of a polygon, as a ring.
struct Clipper<'a> {
    corners: &'a [Point],
    clockwise: bool,
    next: Vec<usize>,
    previous: Vec<usize>,
    /// Corners known to be no ears as long as their neighbours stay the same.
    refused: Vec<bool>,
    /// Corners that were reflex or flat at the start. No others can be the only ones within a triangle.
    bent: Vec<usize>,
}

impl<'a> Clipper<'a> {
    fn new(corners: &'a [Point]) -> Self {
        let count = corners.len();
        let area: f64 = (1..count - 1)
            .map(|i| turn(corners[0], corners[i], corners[i + 1]))
            .sum();
        let mut clipper = Self {
            corners,
            clockwise: area < 0.0,
            next: (0..count).map(|i| (i + 1) % count).collect(),
            previous: (0..count).map(|i| (i + count - 1) % count).collect(),
            refused: vec![false; count],
            bent: Vec::new(),
        };
        clipper.bent = (0..count)
            .filter(|&corner| !clipper.is_convex(corner, FLAT))
            .collect();
        clipper
    }

    /// Twice the area of a triangle, positive if it runs the way the polygon does.
    fn turn(&self, a: usize, b: usize, c: usize) -> f64 {
        let turned = turn(self.corners[a], self.corners[b], self.corners[c]);
        if self.clockwise { -turned } else { turned }
    }

    fn turned(&self, at: usize) -> f64 {
        self.turn(self.previous[at], at, self.next[at])
    }

    fn is_convex(&self, at: usize, tolerance: f64) -> bool {
        self.turned(at)
            > tolerance * self.length(self.previous[at], at) * self.length(at, self.next[at])
    }

    fn length(&self, a: usize, b: usize) -> f64 {
        distance(self.corners[a], self.corners[b])
    }

    fn triangle(&self, at: usize) -> Option<[u32; 3]> {
        let index = |i: usize| u32::try_from(i).ok();
        Some([index(self.previous[at])?, index(at)?, index(self.next[at])?])
    }

    fn is_ear(&mut self, at: usize, tolerance: f64) -> bool {
        if self.refused[at] {
            return false;
        }
        // Set for now; an ear is clipped at once.
        self.refused[at] = true;
        if !self.is_convex(at, tolerance) {
            return false;
        }
        let triangle = [self.previous[at], at, self.next[at]];
        let bounds = Bounds::of(triangle.map(|i| self.corners[i]));
        let slack = tolerance * bounds.diagonal();
        let near = Bounds {
            low: (bounds.low.0 - slack, bounds.low.1 - slack),
            high: (bounds.high.0 + slack, bounds.high.1 + slack),
        };
        !self.bent.iter().any(|&corner| {
            let point = self.corners[corner];
            near.meets(&Bounds {
                low: point,
                high: point,
            }) && self.blocks(corner, triangle, tolerance)
        })
    }

    /// Whether a corner lies in the triangle or on its border.
    fn blocks(&self, corner: usize, [a, b, c]: [usize; 3], tolerance: f64) -> bool {
        // Corners in the same place as a corner of the triangle belong to touching loops; they do not block.
        if [a, b, c]
            .iter()
            .any(|&i| self.corners[i] == self.corners[corner])
        {
            return false;
        }
        [(a, b), (b, c), (c, a)].iter().all(|&(from, to)| {
            let side = self.length(from, to);
            let reach = larger(side, self.length(from, corner));
            self.turn(from, to, corner) >= -tolerance * side * reach
        })
    }

    /// Takes a corner off and gives the corner after it.
    fn clip(&mut self, at: usize) -> usize {
        let (a, c) = (self.previous[at], self.next[at]);
        self.next[a] = c;
        self.previous[c] = a;
        self.refused[a] = false;
        self.refused[c] = false;
        c
    }
}

/// Triangles that fill a nearly planar facet, as indices of its corners, each running the way the facet runs.
///
/// `None` where [`triangulate`] gives none, and for a facet without area.
pub(crate) fn triangulate_facet(positions: &[DVec3]) -> Option<Vec<[u32; 3]>> {
    let first = *positions.first()?;
    let area = positions.windows(2).fold(DVec3::ZERO, |sum, p| {
        sum + (p[0] - first).cross(p[1] - first)
    });
    let size = area.abs();
    if !(area.is_finite() && size != DVec3::ZERO) {
        return None;
    }
    // Leaving out the coordinate along the largest component distorts least and rounds nothing.
    let flatten = |p: &DVec3| {
        if size.x >= size.y && size.x >= size.z {
            (p.y, p.z)
        } else if size.y >= size.z {
            (p.z, p.x)
        } else {
            (p.x, p.y)
        }
    };
    triangulate(&positions.iter().map(flatten).collect::<Vec<_>>())
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;
    use crate::geometry::outline_check::check_outline;
    use crate::geometry::polygon::signed_area;
    use crate::math::angle::sin_cos_turns;

    /// Checks that the triangles all run the polygon's way, use all corners, and fill its area; gives their number.
    fn check(corners: &[Point]) -> usize {
        let area = signed_area(corners, corners[0]);
        let triangles = triangulate(corners).expect("a simple polygon");
        let parts = triangles.iter().map(|t| {
            let [a, b, c] = t.map(|i| corners[i as usize]);
            let part = 0.5 * turn(a, b, c);
            assert!(part * area > 0.0, "{t:?} has {part:e}");
            part
        });
        let sum: f64 = parts.sum();
        assert!((sum / area - 1.0).abs() < 1e-11, "{sum} for {area}");
        for corner in 0..u32::try_from(corners.len()).unwrap() {
            assert!(
                triangles.iter().any(|t| t.contains(&corner)),
                "corner {corner} is unused"
            );
        }
        // No two triangles overlap: the middle of each is in no other one.
        for (i, t) in triangles.iter().enumerate().take(200) {
            let [a, b, c] = t.map(|i| corners[i as usize]);
            let middle = ((a.0 + b.0 + c.0) / 3.0, (a.1 + b.1 + c.1) / 3.0);
            for (j, other) in triangles.iter().enumerate() {
                let [a, b, c] = other.map(|i| corners[i as usize]);
                let within = [(a, b), (b, c), (c, a)]
                    .iter()
                    .all(|&(p, q)| turn(p, q, middle) * area > 0.0);
                assert_eq!(within, i == j);
            }
        }
        triangles.len()
    }

    fn star(radii: &[f64]) -> Vec<Point> {
        let count = radii.len() as f64;
        let at = |(i, radius): (usize, &f64)| {
            let (sin, cos) = sin_cos_turns(i as f64 / count);
            (radius * cos, radius * sin)
        };
        radii.iter().enumerate().map(at).collect()
    }

    #[test]
    fn flat_corners_are_joined_to_triangles() {
        let mut square = Vec::new();
        for (side, along) in (0..4).flat_map(|side| (0..5).map(move |i| (side, f64::from(i) * 0.2)))
        {
            square.push(
                [
                    (along, 0.0),
                    (1.0, along),
                    (1.0 - along, 1.0),
                    (0.0, 1.0 - along),
                ][side],
            );
        }
        assert_eq!(check(&square), 18);
        let tilted: Vec<Point> = square
            .iter()
            .map(|(u, v)| (0.8 * u - 0.6 * v, 0.6 * u + 0.8 * v))
            .collect();
        assert_eq!(check(&tilted), 18);
        square.reverse();
        assert_eq!(check(&square), 18);
    }

    #[test]
    fn combs_and_spirals() {
        let mut comb = vec![(50.0, 2.0), (0.0, 2.0)];
        comb.extend((0..100).map(|i| (0.5 * f64::from(i), f64::from(i % 2))));
        assert_eq!(check(&comb), 100);
        let arm = |inner: f64, i: i32| {
            let t = f64::from(i) / 40.0;
            let (sin, cos) = sin_cos_turns(t);
            ((t + inner) * cos, (t + inner) * sin)
        };
        let spiral: Vec<Point> = (20..200)
            .map(|i| arm(0.5, i))
            .chain((20..200).rev().map(|i| arm(0.0, i)))
            .collect();
        assert_eq!(check(&spiral), 358);
    }

    #[test]
    fn needles_thinner_than_the_tolerance_are_cut_too() {
        assert_eq!(
            check(&[(0.0, 0.0), (1.0, -1e-14), (2.0, 0.0), (1.0, 1e-14)]),
            2
        );
    }

    #[test]
    fn large_polygons_end_soon() {
        let jagged: Vec<f64> = (0..10_000)
            .map(|i| 1.0 + 0.3 * f64::from(i * 7919 % 101) / 101.0)
            .collect();
        assert_eq!(check(&star(&jagged)), 9_998);
        assert_eq!(check(&star(&vec![1.0; 10_000])), 9_998);
        assert_eq!(triangulate(&star(&vec![1.0; 10_001])), None);
    }

    #[test]
    fn what_is_no_polygon_gets_none() {
        assert_eq!(triangulate(&[]), None);
        assert_eq!(triangulate(&[(0.0, 0.0), (1.0, 0.0)]), None);
        assert_eq!(triangulate(&[(0.0, 0.0), (1.0, 0.0), (2.0, 0.0)]), None);
        assert_eq!(
            triangulate(&[(0.0, 0.0), (1.0, 0.0), (2.0, 0.0), (3.0, 0.0)]),
            None
        );
        assert_eq!(
            triangulate(&[(0.0, 0.0), (f64::NAN, 0.0), (1.0, 1.0)]),
            None
        );
        assert_eq!(triangulate(&[(0.0, 0.0); 20]), None);
    }

    #[test]
    fn facets_keep_their_orientation_in_space() {
        let flat = [(0.0, 0.0), (2.0, 0.0), (2.0, 2.0), (1.0, 0.5), (0.0, 2.0)];
        for (u, v) in [
            (DVec3::X, DVec3::Y),
            (DVec3::Y, DVec3::X),
            (DVec3::Z, DVec3::X),
            (DVec3::new(0.6, 0.0, 0.8), DVec3::Y),
        ] {
            let bump = u.cross(v) * 1e-8;
            let facet: Vec<DVec3> = flat
                .iter()
                .map(|p| u * p.0 + v * p.1 + bump * (p.0 * p.1))
                .collect();
            let triangles = triangulate_facet(&facet).unwrap();
            let area: f64 = triangles
                .iter()
                .map(|t| {
                    let [a, b, c] = t.map(|i| facet[i as usize]);
                    let part = (b - a).cross(c - a).dot(u.cross(v)) * 0.5;
                    assert!(part > 0.0);
                    part
                })
                .sum();
            // The square less the notch: 4 − 2 · 1.5 / 2.
            assert!((area - 2.5).abs() < 1e-12 && triangles.len() == 3);
        }
        assert_eq!(triangulate_facet(&[]), None);
        assert_eq!(
            triangulate_facet(&[DVec3::ZERO, DVec3::X, DVec3::X * 2.0]),
            None
        );
        assert_eq!(
            triangulate_facet(&[DVec3::ZERO, DVec3::NAN, DVec3::X]),
            None
        );
    }

    proptest! {
        #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]

        #[test]
        fn stars_are_filled(radii in prop::collection::vec(0.05_f64..1.0, 5..60), clockwise: bool) {
            let mut corners = star(&radii);
            if clockwise {
                corners.reverse();
            }
            prop_assert_eq!(check(&corners), corners.len() - 2);
        }

        #[test]
        fn any_simple_polygon_of_small_integers_is_filled(
            points in prop::collection::vec((0_i32..6, 0_i32..6), 3..9),
        ) {
            let corners: Vec<Point> = points.iter().map(|&(u, v)| (f64::from(u), f64::from(v))).collect();
            match check_outline(&corners) {
                Ok(_) => prop_assert_eq!(check(&corners), corners.len() - 2),
                // Never a panic or an endless loop.
                Err(_) => drop(triangulate(&corners)),
            }
        }
    }
}
