//! The triangle nearest to a point, for rays that find no strike.

use super::build::{cross, dot};
use super::node::WIDTH;
use super::{Facet, Hierarchy, Hit};

impl Hierarchy {
    /// Finds the nearest triangle to a point: its distance in metres and its index, the smallest of equally near ones.
    ///
    /// Without triangles the distance is infinite.
    pub(crate) fn nearest_triangle(&self, point: [f64; 3]) -> (f64, u32) {
        let (distance, triangle, _) = self.nearest_of(point, |_, _| true);
        (distance, triangle)
    }

    /// Finds the nearest triangle to a point, as [`Self::nearest_triangle`], and its point nearest to that, in metres.
    ///
    /// Without triangles the point stays where it is.
    pub(crate) fn nearest_point(&self, point: [f64; 3]) -> (u32, [f64; 3]) {
        let (distance, triangle, corners) = self.nearest_of(point, |_, _| true);
        if !distance.is_finite() {
            return (triangle, point);
        }
        let foot = foot_on(point, &corners);
        (triangle, [0, 1, 2].map(|axis| point[axis] + foot[axis]))
    }

    /// Finds the triangle through which a ray without a strike has slipped, as a strike at zero.
    ///
    /// A start on one triangle, at the edge of another, may by rounding lie outside that other. If the ray then runs
    /// inward from the first and outward through the second, the whole line misses the mesh, and standing on the
    /// nearest triangle does not help. So the nearest triangle that faces the ray, within the same distance as for
    /// strikes behind the start, is struck. There is none if the start lies elsewhere.
    pub(crate) fn overtaken(
        &self,
        origin: [f64; 3],
        direction: [f64; 3],
        standing: u32,
    ) -> Option<Hit> {
        self.facing_within(self.behind, origin, direction, standing)
    }

    /// Finds the triangle that a ray without any strike must have met, as a strike at zero: the nearest that faces it,
    /// within 2⁻³⁰ of the largest coordinate.
    ///
    /// On needles the distance to a strike is uncertain by rounding times length over width, so that a wall just ahead
    /// may seem to lie behind.
    pub(crate) fn nearly_met(
        &self,
        origin: [f64; 3],
        direction: [f64; 3],
        standing: u32,
    ) -> Option<Hit> {
        self.facing_within(16_384.0 * self.behind, origin, direction, standing)
    }

    /// The nearest triangle that faces the ray, other than the one stood on, as a strike at zero if it is near enough.
    fn facing_within(
        &self,
        reach: f64,
        origin: [f64; 3],
        direction: [f64; 3],
        standing: u32,
    ) -> Option<Hit> {
        let (distance, triangle, _) = self.nearest_of(origin, |facet, [a, b, c]| {
            facet.triangle != standing && dot(cross(minus(*b, *a), minus(*c, *a)), direction) > 0.0
        });
        (distance <= reach).then_some(Hit { t: 0.0, triangle })
    }

    /// Finds the nearest of the triangles that are accepted: its distance, its index and its corners.
    fn nearest_of(
        &self,
        point: [f64; 3],
        accept: impl Fn(&Facet, &[[f64; 3]; 3]) -> bool,
    ) -> (f64, u32, [[f64; 3]; 3]) {
        let inside = [0, 1, 2].map(|axis| self.frame.inside(point, axis));
        let mut best = (f64::INFINITY, u32::MAX);
        let mut its_corners = [[0.0; 3]; 3];
        let mut open = vec![(0.0, 0)];
        while let Some((distance, node)) = open.pop() {
            // Boxes are wider than what they hold, so one at the same distance holds nothing nearer.
            if distance > best.0 {
                continue;
            }
            let node = &self.nodes[node];
            let floor = open.len();
            for k in (0..WIDTH).filter(|k| node.sides[0][*k] <= node.sides[1][*k]) {
                let gap = [0, 1, 2].map(|axis| {
                    let below = f64::from(node.sides[2 * axis][k]) - inside[axis];
                    let above = inside[axis] - f64::from(node.sides[2 * axis + 1][k]);
                    if below > 0.0 {
                        below
                    } else if above > 0.0 {
                        above
                    } else {
                        0.0
                    }
                });
                let distance = dot(gap, gap).sqrt() / self.frame.scale;
                match node.child[k].facets() {
                    Err(inner) => open.push((distance, inner)),
                    Ok(_) if distance > best.0 => {}
                    Ok((first, count)) => {
                        for facet in &self.facets[first..first + count] {
                            let corners = self.corners(facet).map(|corner| *corner);
                            let found = (distance_to(point, &corners), facet.triangle);
                            if (found.0 < best.0 || (found.0 == best.0 && found.1 < best.1))
                                && accept(facet, &corners)
                            {
                                best = found;
                                its_corners = corners;
                            }
                        }
                    }
                }
            }
            open[floor..].sort_by(|a, b| b.0.total_cmp(&a.0));
        }
        (best.0, best.1, its_corners)
    }
}

/// Distance of a point from a triangle, which may have no area.
pub(super) fn distance_to(point: [f64; 3], corners: &[[f64; 3]; 3]) -> f64 {
    let [a, b, c] = corners.map(|corner| minus(corner, point));
    let across = cross(minus(b, a), minus(c, a));
    let size = dot(across, across);
    let inside = [(a, b), (b, c), (c, a)]
        .iter()
        .all(|(p, q)| dot(cross(*p, *q), across) >= 0.0);
    if inside && size > 0.0 {
        return dot(a, across).abs() / size.sqrt();
    }
    let foot = nearest_foot([a, b, c]);
    dot(foot, foot).sqrt()
}

/// Way from a point to the nearest point of a triangle, which may have no area.
fn foot_on(point: [f64; 3], corners: &[[f64; 3]; 3]) -> [f64; 3] {
    let [a, b, c] = corners.map(|corner| minus(corner, point));
    let across = cross(minus(b, a), minus(c, a));
    let size = dot(across, across);
    let inside = [(a, b), (b, c), (c, a)]
        .iter()
        .all(|(p, q)| dot(cross(*p, *q), across) >= 0.0);
    if inside && size > 0.0 {
        let part = dot(a, across) / size;
        return across.map(|x| part * x);
    }
    nearest_foot([a, b, c])
}

/// Way to the nearest point of the edges between corners that are given from where the way starts.
fn nearest_foot([a, b, c]: [[f64; 3]; 3]) -> [f64; 3] {
    let feet = [(a, b), (b, c), (c, a)].map(|(p, q)| {
        let edge = minus(q, p);
        let length = dot(edge, edge);
        let part = -dot(p, edge);
        let part = if part > 0.0 { part } else { 0.0 };
        let part = if part < length { part / length } else { 1.0 };
        [0, 1, 2].map(|axis| p[axis] + part * edge[axis])
    });
    let mut best = feet[0];
    for foot in &feet[1..] {
        if dot(*foot, *foot) < dot(best, best) {
            best = *foot;
        }
    }
    best
}

fn minus(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}
