//! Whether two triangles intersect, told exactly.

use glam::DVec3;

use super::exact::{View, below};
use super::limits::FOLDED;
use crate::geometry::facet::largest;

/// A triangle of a facet, on welded vertices.
#[derive(Clone, Copy, Debug)]
pub(super) struct Triangle {
    pub(super) corners: [u32; 3],
    pub(super) facet: u32,
    /// Whether the side from each corner to the next belongs to one facet only.
    pub(super) open: [bool; 3],
}

/// What a comparison of two triangles found, with a measure of its cost.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Contact {
    /// Apart, or no more than neighbours; seen from a quick test.
    Quick,
    /// The same, but exact arithmetic was needed.
    Slow,
    /// They cross, overlap or are folded onto each other at this point.
    Hit(DVec3),
}

/// Compares two triangles that have an area.
///
/// A hit is whatever makes their common points longer than a single point, besides a shared side. Where two sides
/// only lie along each other and one of them is open, that is left to the open edge. Since corners at one position
/// share their number, surfaces that pass through each other at a corner are a hit for some pair of triangles there.
pub(super) fn contact(a: &Triangle, b: &Triangle, points: &[DVec3]) -> Contact {
    let pair = Pair {
        a: a.at(points),
        b: b.at(points),
        in_b: shared(a, b),
        in_a: shared(b, a),
    };
    let common = pair.in_b.iter().flatten().count();
    if common == 3 || (common == 2 && pair.is_folded()) {
        return Contact::Hit(pair.middle());
    }
    if outside(pair.a, pair.b, pair.in_a) || outside(pair.b, pair.a, pair.in_b) {
        return Contact::Quick;
    }
    let Some(heights_a) = heights(pair.b, pair.a, pair.in_b) else {
        return Contact::Slow;
    };
    let Some(heights_b) = heights(pair.a, pair.b, pair.in_a) else {
        return Contact::Slow;
    };
    if heights_a == [0.0; 3] || heights_b == [0.0; 3] {
        return if overlap(pair.a, pair.b) {
            Contact::Hit(pair.middle())
        } else {
            Contact::Slow
        };
    }
    let (Some(lone_a), Some(lone_b), 0..2) = (lone(heights_a), lone(heights_b), common) else {
        return Contact::Slow;
    };
    let (trace_a, trace_b) = (
        Trace::new(pair.a, heights_a, lone_a),
        Trace::new(pair.b, heights_b, lone_b),
    );
    let sides = trace_a.is_side() && trace_b.is_side();
    if sides && (a.open[(lone_a + 1) % 3] || b.open[(lone_b + 1) % 3]) {
        return Contact::Slow;
    }
    trace_a.meets(&trace_b).map_or(Contact::Slow, Contact::Hit)
}

impl Triangle {
    pub(super) fn at(&self, points: &[DVec3]) -> [DVec3; 3] {
        self.corners.map(|corner| points[corner as usize])
    }
}

/// For each corner of one triangle its place in another.
fn shared(of: &Triangle, other: &Triangle) -> [Option<usize>; 3] {
    of.corners
        .map(|corner| other.corners.iter().position(|&same| same == corner))
}

struct Pair {
    a: [DVec3; 3],
    b: [DVec3; 3],
    /// Places of the corners of `a` in `b`, and the reverse.
    in_b: [Option<usize>; 3],
    in_a: [Option<usize>; 3],
}

impl Pair {
    /// Whether two neighbours lie on the same side of their common edge, in one plane up to rounding.
    fn is_folded(&self) -> bool {
        // The normal of a sliver is mostly rounding: those are left to the exact test.
        const SLIVER: f64 = 1e-3;
        let (Some(i), Some(j)) = (
            self.in_b.iter().position(Option::is_none),
            self.in_a.iter().position(Option::is_none),
        ) else {
            return false;
        };
        let (p, edge) = (
            self.a[(i + 1) % 3],
            self.a[(i + 2) % 3] - self.a[(i + 1) % 3],
        );
        let (r, s) = (self.a[i] - p, self.b[j] - p);
        let (u, v) = (edge.cross(r), edge.cross(s));
        let (size_u, size_v) = (u.length(), v.length());
        let broad = size_u > SLIVER * edge.length() * r.length()
            && size_v > SLIVER * edge.length() * s.length();
        broad && u.dot(v) > 0.0 && u.cross(v).length() <= FOLDED * size_u * size_v
    }

    /// A point that both have in common, if they lie in one plane: the middle of their overlap.
    fn middle(&self) -> DVec3 {
        let normal = (self.a[1] - self.a[0]).cross(self.a[2] - self.a[0]);
        let mut overlap = self.b.to_vec();
        for i in 0..3 {
            let inward = normal.cross(self.a[(i + 1) % 3] - self.a[i]);
            let height = |at: DVec3| inward.dot(at - self.a[i]);
            let mut kept = Vec::with_capacity(overlap.len() + 1);
            for (k, &to) in overlap.iter().enumerate() {
                let from = overlap[(k + overlap.len() - 1) % overlap.len()];
                let (start, end) = (height(from), height(to));
                if (start > 0.0) != (end > 0.0) {
                    kept.push(from + (to - from) * (start / (start - end)));
                }
                if end > 0.0 {
                    kept.push(to);
                }
            }
            overlap = kept;
        }
        let corners = if overlap.is_empty() {
            &self.b[..]
        } else {
            &overlap
        };
        corners.iter().sum::<DVec3>() / corners.len() as f64
    }
}

/// Whether `b` certainly meets `a` in nothing but shared corners or a shared side.
///
/// That is so if `b` lies on one side of the plane of `a`, or beyond a side of `a`, apart from shared corners that are
/// on the boundary. `false` says nothing.
fn outside(a: [DVec3; 3], b: [DVec3; 3], in_a: [Option<usize>; 3]) -> bool {
    // Bounds on the rounding of sums of 6 and of 12 products of factors that are differences, with ample room, and
    // on what may vanish below the smallest numbers.
    const FACE: f64 = 1e-14;
    const SIDE: f64 = 1e-13;
    const TINY: f64 = 1e-290;
    let (u, v) = (a[1] - a[0], a[2] - a[0]);
    let normal = u.cross(v);
    let size = largest(u) * largest(v);
    let (mut above, mut beneath) = (true, true);
    for k in (0..3).filter(|&k| in_a[k].is_none()) {
        let arm = b[k] - a[0];
        let (height, bound) = (normal.dot(arm), FACE * size * largest(arm) + TINY);
        above &= height > bound;
        beneath &= height < -bound;
    }
    above
        || beneath
        || (0..3).any(|i| {
            let next = (i + 1) % 3;
            let edge = a[next] - a[i];
            let outward = edge.cross(normal);
            let size = size * largest(edge);
            (0..3).all(|k| {
                let arm = b[k] - a[i];
                in_a[k].map_or_else(
                    || outward.dot(arm) > SIDE * size * largest(arm) + TINY,
                    |place| place == i || place == next,
                )
            })
        })
}

/// How far the corners of `of` lie below the plane of `base`, with exact signs; `None` if all lie on one side.
fn heights(base: [DVec3; 3], of: [DVec3; 3], shared: [Option<usize>; 3]) -> Option<[f64; 3]> {
    let mut heights = [0.0; 3];
    for k in 0..3 {
        if shared[k].is_none() {
            heights[k] = below(base, of[k]);
        }
    }
    let one_side = heights.iter().all(|&h| h > 0.0) || heights.iter().all(|&h| h < 0.0);
    (!one_side).then_some(heights)
}

/// The corner that alone lies on its side of a plane, the others being in the plane or beyond; `None` if the triangle
/// meets the plane in no more than a corner.
fn lone(heights: [f64; 3]) -> Option<usize> {
    let above = heights.iter().filter(|&&height| height > 0.0).count();
    let beneath = heights.iter().filter(|&&height| height < 0.0).count();
    match (above, beneath) {
        (1, _) => heights.iter().position(|&height| height > 0.0),
        (_, 1) => heights.iter().position(|&height| height < 0.0),
        _ => None,
    }
}

/// Whether two triangles of one plane overlap in an area.
fn overlap(mut a: [DVec3; 3], mut b: [DVec3; 3]) -> bool {
    let mut view = (View::along(DVec3::Z), 0.0);
    for axis in DVec3::AXES {
        let turn = View::along(axis).turn(a[0], a[1], a[2]);
        if turn.abs() > view.1 {
            view = (View::along(axis), turn.abs());
        }
    }
    let view = view.0;
    for triangle in [&mut a, &mut b] {
        if view.turn(triangle[0], triangle[1], triangle[2]) < 0.0 {
            triangle.swap(1, 2);
        }
    }
    // Convex figures are apart exactly if a side of one has all of the other beyond it or on its line.
    let parted = |a: [DVec3; 3], b: [DVec3; 3]| {
        (0..3).any(|i| {
            b.iter()
                .all(|&corner| view.turn(a[i], a[(i + 1) % 3], corner) <= 0.0)
        })
    };
    !parted(a, b) && !parted(b, a)
}

/// The part of a triangle that lies in the plane of another: from side `tip`–`left` to side `tip`–`right`.
struct Trace {
    tip: DVec3,
    left: DVec3,
    right: DVec3,
    /// Heights over the other plane, that of the tip positive.
    heights: [f64; 3],
    /// Whether the tip lies on the side that is called positive by the exact test.
    positive: bool,
}

impl Trace {
    fn new(at: [DVec3; 3], heights: [f64; 3], lone: usize) -> Self {
        let [tip, left, right] = [lone, (lone + 1) % 3, (lone + 2) % 3];
        let positive = heights[tip] > 0.0;
        let heights = [tip, left, right].map(|corner| {
            if positive {
                heights[corner]
            } else {
                -heights[corner]
            }
        });
        Self {
            tip: at[tip],
            left: at[left],
            right: at[right],
            heights,
            positive,
        }
    }

    /// Whether it is a whole side of its triangle.
    fn is_side(&self) -> bool {
        self.heights[1] == 0.0 && self.heights[2] == 0.0
    }

    /// The ends, rounded.
    fn ends(&self) -> [DVec3; 2] {
        let [top, left, right] = self.heights;
        [(self.left, left), (self.right, right)]
            .map(|(to, height)| self.tip + (to - self.tip) * (top / (top - height)))
    }

    /// The middle of what two traces have in common, if that is longer than a point.
    ///
    /// # Method
    ///
    /// Both lie on the common line of the two planes, and two orientation tests tell the order of their ends (Guigue
    /// and Devillers, Fast and robust triangle-triangle overlap test using orientation predicates, Journal of Graphics
    /// Tools 8, 2003; formula from memory, held to integer arithmetic by a test).
    fn meets(&self, other: &Self) -> Option<DVec3> {
        // Turned over where needed, so that each tip lies on the positive side of the other triangle.
        let (left, right) = if other.positive {
            (self.left, self.right)
        } else {
            (self.right, self.left)
        };
        let (other_left, other_right) = if self.positive {
            (other.left, other.right)
        } else {
            (other.right, other.left)
        };
        let meets = below([self.tip, left, other.tip], other_left) < 0.0
            && below([self.tip, right, other_right], other.tip) < 0.0;
        if !meets {
            return None;
        }
        let ([a, b], [c, d]) = (self.ends(), other.ends());
        let mut ends = [a, b, c, d].map(|end| ((b - a).dot(end - a), end));
        ends.sort_unstable_by(|a, b| a.0.total_cmp(&b.0));
        Some((ends[1].1 + ends[2].1) * 0.5)
    }
}

#[cfg(test)]
mod tests {
    use rand::{RngExt, SeedableRng};
    use rand_xoshiro::Xoshiro256PlusPlus;

    use super::*;

    type Int = [i64; 3];

    fn minus(a: Int, b: Int) -> Int {
        [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
    }

    fn cross(a: Int, b: Int) -> Int {
        [
            a[1] * b[2] - a[2] * b[1],
            a[2] * b[0] - a[0] * b[2],
            a[0] * b[1] - a[1] * b[0],
        ]
    }

    fn dot(a: Int, b: Int) -> i64 {
        a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
    }

    /// Ends of a triangle's part in a plane along a direction, as fractions with positive denominators.
    fn part(at: [Int; 3], normal: Int, origin: Int, along: Int) -> Option<[(i128, i128); 2]> {
        let height = at.map(|p| dot(normal, minus(p, origin)));
        let mut ends = Vec::new();
        for i in 0..3 {
            let (j, (p, q)) = ((i + 1) % 3, (height[i], height[(i + 1) % 3]));
            if p == 0 {
                ends.push((i128::from(dot(along, at[i])), 1));
            }
            if p * q < 0 {
                // Point (q·at[i] − p·at[j]) / (q − p).
                let top = i128::from(q * dot(along, at[i]) - p * dot(along, at[j]));
                let bottom = i128::from(q - p);
                ends.push(if bottom > 0 {
                    (top, bottom)
                } else {
                    (-top, -bottom)
                });
            }
        }
        ends.sort_by(|a, b| (a.0 * b.1).cmp(&(b.0 * a.1)));
        Some([*ends.first()?, *ends.last()?])
    }

    /// Whether the common points are longer than a point and not just along two sides; integers throughout.
    fn oracle(a: [Int; 3], b: [Int; 3]) -> bool {
        let normal = |t: [Int; 3]| cross(minus(t[1], t[0]), minus(t[2], t[0]));
        let (na, nb) = (normal(a), normal(b));
        let along = cross(na, nb);
        let less = |p: (i128, i128), q: (i128, i128)| p.0 * q.1 < q.0 * p.1;
        if along == [0; 3] {
            if dot(na, minus(b[0], a[0])) != 0 {
                return false;
            }
            // One plane: apart if a side of either has the other beyond it, by in-plane normals.
            let parted = |a: [Int; 3], n: Int, b: [Int; 3]| {
                (0..3).any(|i| {
                    let outward = cross(minus(a[(i + 1) % 3], a[i]), n);
                    b.iter().all(|&p| dot(outward, minus(p, a[i])) >= 0)
                })
            };
            return !parted(a, na, b) && !parted(b, nb, a);
        }
        let (Some(p), Some(q)) = (part(a, nb, b[0], along), part(b, na, a[0], along)) else {
            return false;
        };
        less(p[0], p[1]) && less(q[0], q[1]) && less(p[0], q[1]) && less(q[0], p[1])
    }

    fn triangle(corners: [u32; 3]) -> Triangle {
        Triangle {
            corners,
            facet: 0,
            open: [false; 3],
        }
    }

    /// Random triangles on a small grid, so that all sorts of touching occur, also with shared corners.
    #[test]
    fn contact_agrees_with_integer_arithmetic() {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(11);
        let mut seen = [0; 4];
        for size in [2_i64, 3, 5, 9] {
            for _ in 0..60_000 {
                let mut draw = || -> [Int; 3] {
                    [(); 3].map(|()| [(); 3].map(|()| rng.random_range(0..=size)))
                };
                let (a, b) = (draw(), draw());
                let flat = |t: [Int; 3]| cross(minus(t[1], t[0]), minus(t[2], t[0])) == [0; 3];
                if flat(a) || flat(b) {
                    continue;
                }
                let mut points = a.to_vec();
                let corners = b.map(|p| {
                    let place = points.iter().position(|&q| p == q).unwrap_or_else(|| {
                        points.push(p);
                        points.len() - 1
                    });
                    u32::try_from(place).unwrap()
                });
                let common = corners.iter().filter(|&&corner| corner < 3).count();
                let scaled = |unit: f64| -> Vec<DVec3> {
                    points
                        .iter()
                        .map(|p| DVec3::from_array(p.map(|part| part as f64 * unit)))
                        .collect()
                };
                // Eighths are exact; tenths are rounded, which must not panic, whatever they give.
                let exact = scaled(0.125);
                contact(&triangle([0, 1, 2]), &triangle(corners), &scaled(0.1));
                let found = contact(&triangle([0, 1, 2]), &triangle(corners), &exact);
                // Besides a shared side, only an overlap in one plane counts.
                let expected = oracle(a, b) && (common != 2 || in_plane(a, b));
                assert_eq!(
                    matches!(found, Contact::Hit(_)),
                    expected,
                    "{a:?} {b:?} {found:?}"
                );
                let swapped = contact(&triangle(corners), &triangle([0, 1, 2]), &exact);
                assert_eq!(
                    matches!(swapped, Contact::Hit(_)),
                    expected,
                    "{a:?} {b:?}, swapped"
                );
                seen[common] += usize::from(expected);
                if let Contact::Hit(at) = found {
                    assert!(
                        near(at, [0, 1, 2], &exact) && near(at, corners, &exact),
                        "{a:?} {b:?} {at}"
                    );
                }
            }
        }
        assert!(seen.iter().all(|&count| count > 10), "{seen:?}");
    }

    fn in_plane(a: [Int; 3], b: [Int; 3]) -> bool {
        let normal = cross(minus(a[1], a[0]), minus(a[2], a[0]));
        b.iter().all(|&p| dot(normal, minus(p, a[0])) == 0)
    }

    /// Whether a point lies in a triangle, up to rounding.
    fn near(at: DVec3, corners: [u32; 3], points: &[DVec3]) -> bool {
        let [a, b, c] = corners.map(|corner| points[corner as usize]);
        let normal = (b - a).cross(c - a);
        let inside = [(a, b), (b, c), (c, a)]
            .iter()
            .all(|(p, q)| normal.cross(*q - *p).dot(at - *p) > -1e-12);
        inside && normal.dot(at - a).abs() < 1e-12
    }

    #[test]
    fn side_along_an_open_side_is_left_to_the_open_edge() {
        let points = [
            DVec3::ZERO,
            DVec3::X * 2.0,
            DVec3::Y,
            DVec3::X * 0.5,
            DVec3::X,
            DVec3::Z,
        ];
        let (mut a, b) = (triangle([0, 1, 2]), triangle([3, 4, 5]));
        assert!(matches!(contact(&a, &b, &points), Contact::Hit(_)));
        a.open[0] = true;
        assert_eq!(contact(&a, &b, &points), Contact::Slow);
        // The other sides do not matter.
        a.open = [false, true, true];
        assert!(matches!(contact(&a, &b, &points), Contact::Hit(_)));
    }

    #[test]
    fn fold_is_seen_in_any_position() {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(5);
        for _ in 0..200 {
            let mut draw = || DVec3::new(rng.random(), rng.random(), rng.random()) - 0.5;
            let turn = glam::DQuat::from_scaled_axis(draw() * 6.0);
            let shift = draw();
            let flat = [
                DVec3::ZERO,
                DVec3::X,
                DVec3::new(0.3, 0.8, 0.0),
                DVec3::new(0.6, 0.7, 0.0),
            ];
            let points = flat.map(|at| turn * at + shift);
            assert!(matches!(
                contact(&triangle([0, 1, 2]), &triangle([1, 0, 3]), &points),
                Contact::Hit(_)
            ));
            let open =
                [flat[0], flat[1], flat[2], DVec3::new(0.6, 0.7, 1e-6)].map(|at| turn * at + shift);
            assert!(!matches!(
                contact(&triangle([0, 1, 2]), &triangle([1, 0, 3]), &open),
                Contact::Hit(_)
            ));
        }
    }
}
