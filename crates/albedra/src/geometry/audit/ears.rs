//! Cuts a polygon into triangles by taking off its ears.

use glam::DVec3;

use super::exact::View;

/// Why a polygon could not be cut.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Uncut {
    /// No ear is left near this corner, so the outline crosses or touches itself.
    Twisted(usize),
    /// The allowed number of checks ran out.
    OutOfChecks,
}

/// Cuts a polygon with distinct corners; triangles are given by places in `points` and run counter-clockwise in the
/// view, without overlap.
///
/// A corner is taken off only if it stands out by more than `slack` and nothing else comes as near to it: corners of a
/// nearly straight line in a polygon that is planar only up to rounding would else make slivers that point anywhere.
/// If that fails, all is done again without slack, exactly. Every other ear is taken in each round, so that the triangles of a round polygon stay local instead of making a fan
/// across it. `checks` is what may be spent; the cost is corners × inward corners.
pub(super) fn cut(
    points: &[DVec3],
    view: View,
    slack: f64,
    checks: &mut u64,
) -> Result<Vec<[usize; 3]>, Uncut> {
    match attempt(points, view, slack, checks) {
        Err(Uncut::Twisted(_)) if slack > 0.0 => attempt(points, view, 0.0, checks),
        result => result,
    }
}

fn attempt(
    points: &[DVec3],
    view: View,
    slack: f64,
    checks: &mut u64,
) -> Result<Vec<[usize; 3]>, Uncut> {
    let count = points.len();
    let mut next: Vec<usize> = (1..count).chain([0]).collect();
    let mut before: Vec<usize> = [count - 1].into_iter().chain(0..count - 1).collect();
    let turn = |a: usize, b: usize, c: usize| view.turn(points[a], points[b], points[c]);
    let room = |a: usize, b: usize| slack * points[a].distance(points[b]);
    let mut inward: Vec<usize> = (0..count).collect();
    let mut gone = vec![false; count];
    let mut triangles = Vec::with_capacity(count - 2);
    let (mut left, mut at) = (count, 0);
    while left > 3 {
        // Corners that do not turn left clearly; only they can lie in an ear of a simple polygon.
        inward.retain(|&corner| {
            !gone[corner]
                && turn(before[corner], corner, next[corner]) <= room(before[corner], next[corner])
        });
        let start = left;
        for _ in 0..start {
            let (a, c) = (before[at], next[at]);
            *checks = checks.checked_sub(1).ok_or(Uncut::OutOfChecks)?;
            let mut free = turn(a, at, c) > room(a, c);
            if free {
                let cost = inward.len() as u64;
                *checks = checks.checked_sub(cost).ok_or(Uncut::OutOfChecks)?;
                let near = |p: usize, q: usize| (p, q, -room(p, q));
                let sides = [near(c, a), near(a, at), near(at, c)];
                let inside = |corner: usize| {
                    sides
                        .iter()
                        .all(|&(p, q, least)| turn(p, q, corner) >= least)
                };
                free = !inward
                    .iter()
                    .any(|&p| p != a && p != c && !gone[p] && inside(p));
            }
            if free {
                triangles.push([a, at, c]);
                (next[a], before[c], gone[at]) = (c, a, true);
                left -= 1;
                if left == 3 {
                    break;
                }
                at = next[c];
            } else {
                at = c;
            }
        }
        if left == start {
            return Err(Uncut::Twisted(at));
        }
    }
    while gone[at] {
        at = next[at];
    }
    let (a, c) = (before[at], next[at]);
    if turn(a, at, c) > room(a, c) {
        triangles.push([a, at, c]);
        Ok(triangles)
    } else {
        Err(Uncut::Twisted(at))
    }
}

#[cfg(test)]
mod tests {
    use approx::assert_relative_eq;

    use super::*;

    fn area(points: &[DVec3], triangles: &[[usize; 3]]) -> f64 {
        let part =
            |&[a, b, c]: &[usize; 3]| (points[b] - points[a]).cross(points[c] - points[a]).z / 2.0;
        triangles
            .iter()
            .map(|triangle| {
                let area = part(triangle);
                assert!(area > 0.0);
                area
            })
            .sum()
    }

    fn flat(outline: &[(f64, f64)]) -> Vec<DVec3> {
        outline
            .iter()
            .map(|&(x, y)| DVec3::new(x, y, 0.0))
            .collect()
    }

    fn all(points: &[DVec3]) -> Result<Vec<[usize; 3]>, Uncut> {
        cut(points, View::along(DVec3::Z), 0.0, &mut 10_000_000)
    }

    #[test]
    fn concave_outline_with_corners_on_its_edges_is_covered_once() {
        let comb = flat(&[
            (0.0, 0.0),
            (1.0, 0.0),
            (2.0, 0.0),
            (6.0, 0.0),
            (6.0, 3.0),
            (5.0, 3.0),
            (5.0, 1.0),
            (4.0, 1.0),
            (4.0, 3.0),
            (3.0, 3.0),
            (3.0, 1.0),
            (2.0, 1.0),
            (1.0, 1.0),
            (1.0, 3.0),
            (0.0, 3.0),
            (0.0, 1.5),
        ]);
        let triangles = all(&comb).unwrap();
        assert_eq!(triangles.len(), 14);
        assert_relative_eq!(area(&comb, &triangles), 12.0, max_relative = 1e-15);
    }

    #[test]
    fn corner_on_a_diagonal_keeps_it_from_being_cut() {
        // The first corner would leave a triangle without area.
        let outline = flat(&[(4.0, 0.0), (4.0, 4.0), (2.0, 2.0), (0.0, 0.0)]);
        assert_eq!(all(&outline).map(|triangles| triangles.len()), Ok(2));
    }

    #[test]
    fn crossed_outline_is_refused() {
        let bow = flat(&[(0.0, 0.0), (2.0, 2.0), (2.0, 0.0), (0.0, 2.5)]);
        assert!(matches!(all(&bow), Err(Uncut::Twisted(_))));
        // A corner that touches another edge.
        let touch = flat(&[(0.0, 0.0), (4.0, 0.0), (4.0, 4.0), (2.0, 0.0), (0.0, 4.0)]);
        assert!(matches!(all(&touch), Err(Uncut::Twisted(_))));
    }

    #[test]
    fn large_round_outline_is_quick_and_stays_local() {
        // Rational points of the circle, quarter by quarter: strictly convex without trigonometry.
        let quarter = |place: fn(f64, f64) -> DVec3| {
            let share = (0..12_500).map(|i| f64::from(i) / 12_500.0);
            share.map(move |s| place((1.0 - s * s) / (1.0 + s * s), 2.0 * s / (1.0 + s * s)))
        };
        let points: Vec<DVec3> = quarter(|x, y| DVec3::new(x, y, 0.0))
            .chain(quarter(|x, y| DVec3::new(-y, x, 0.0)))
            .chain(quarter(|x, y| DVec3::new(-x, -y, 0.0)))
            .chain(quarter(|x, y| DVec3::new(y, -x, 0.0)))
            .collect();
        let mut checks = 200_000;
        let triangles = cut(&points, View::along(DVec3::Z), 0.0, &mut checks).unwrap();
        assert_relative_eq!(
            area(&points, &triangles),
            std::f64::consts::PI,
            max_relative = 1e-8
        );
        let long = triangles
            .iter()
            .filter(|[a, _, c]| points[*a].distance(points[*c]) > 0.1)
            .count();
        assert!(long < 150, "{long} long triangles");
    }

    #[test]
    fn checks_are_bounded() {
        let zigzag: Vec<DVec3> = (0..2000)
            .map(|i| DVec3::new(f64::from(i), if i % 2 == 0 { 0.0 } else { -1e4 }, 0.0))
            .chain([DVec3::new(1000.0, 1e9, 0.0)])
            .collect();
        let mut checks = 10_000;
        assert_eq!(
            cut(&zigzag, View::along(DVec3::Z), 0.0, &mut checks),
            Err(Uncut::OutOfChecks)
        );
        assert_eq!(all(&zigzag).map(|triangles| triangles.len()), Ok(1999));
    }
}
