//! The triangle nearest to a point, for rays that find no strike.

use super::build::{cross, dot};
use super::node::WIDTH;
use super::{Facet, Hierarchy, Hit};

impl Hierarchy {
    /// Finds the nearest triangle to a point: its distance in metres and its index, the smallest of equally near ones.
    ///
    /// Without triangles the distance is infinite.
    pub(crate) fn nearest_triangle(&self, point: [f64; 3]) -> (f64, u32) {
        self.nearest_of(point, |_, _| true)
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
        let (distance, triangle) = self.nearest_of(origin, |facet, [a, b, c]| {
            facet.triangle != standing && dot(cross(minus(*b, *a), minus(*c, *a)), direction) > 0.0
        });
        (distance <= self.behind).then_some(Hit { t: 0.0, triangle })
    }

    /// Finds the nearest of the triangles that are accepted.
    fn nearest_of(
        &self,
        point: [f64; 3],
        accept: impl Fn(&Facet, &[[f64; 3]; 3]) -> bool,
    ) -> (f64, u32) {
        let inside = [0, 1, 2].map(|axis| self.frame.inside(point, axis));
        let mut best = (f64::INFINITY, u32::MAX);
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
                            }
                        }
                    }
                }
            }
            open[floor..].sort_by(|a, b| b.0.total_cmp(&a.0));
        }
        best
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
    let edges = [(a, b), (b, c), (c, a)].map(|(p, q)| {
        let edge = minus(q, p);
        let length = dot(edge, edge);
        let part = -dot(p, edge);
        let part = if part > 0.0 { part } else { 0.0 };
        let part = if part < length { part / length } else { 1.0 };
        let foot = [0, 1, 2].map(|axis| p[axis] + part * edge[axis]);
        dot(foot, foot).sqrt()
    });
    edges.iter().fold(
        f64::INFINITY,
        |least, edge| if *edge < least { *edge } else { least },
    )
}

fn minus(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}
