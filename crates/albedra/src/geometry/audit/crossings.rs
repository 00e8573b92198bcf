//! Facets that cross, overlap or fold onto each other.

use glam::DVec3;

use super::boxes::Boxes;
use super::contact::{Contact, Triangle, contact};
use super::ears::{Uncut, cut};
use super::edges::Edges;
use super::exact::View;
use super::limits::{EAR_CHECKS, HITS, STEPS, STEPS_A_TRIANGLE};
use super::{Found, Problem, structure};
use crate::geometry::Mesh;
use crate::geometry::facet::{higher, lower};

/// What comparing two triangles costs, in steps of the search: by a quick and by an exact test.
const QUICK: u64 = 10;
const SLOW: u64 = 150;

/// Looks for intersections among all facets that have a normal.
pub(super) fn check(
    mesh: &Mesh,
    welded: &[u32],
    normals: &[Option<DVec3>],
    edges: &Edges,
    found: &mut Found,
) {
    // By a power of two, so that no product leaves the range of numbers and nothing is rounded.
    let size = structure::size(mesh);
    let points: Vec<DVec3> = mesh.vertices.iter().map(|&at| at / size).collect();
    let mut cutter = Cutter {
        mesh,
        welded,
        points: &points,
        open: edges.open(mesh),
        checks: EAR_CHECKS,
    };
    let mut triangles = Vec::with_capacity(mesh.corners.len());
    let mut twisted = Vec::new();
    for (facet, normal) in normals.iter().enumerate() {
        let Some(normal) = *normal else { continue };
        match cutter.add(facet, normal, &mut triangles) {
            Ok(()) => {}
            Err(Uncut::Twisted(place)) => {
                twisted.push((facet, mesh.vertices[mesh.corners_of(facet)[place] as usize]));
            }
            Err(Uncut::OutOfChecks) => {
                found.push(Problem::TooManyCorners {
                    facet,
                    corners: mesh.corners_of(facet).len(),
                });
            }
        }
    }
    let (hits, given_up) = search(&triangles, &points);
    for &([a, b], position) in &hits {
        if a == b {
            twisted.push((a, position * size));
        }
    }
    twisted.sort_by_key(|&(facet, _)| facet);
    twisted.dedup_by_key(|&mut (facet, _)| facet);
    found.extend(
        twisted
            .into_iter()
            .map(|(facet, position)| Problem::TwistedFacet { facet, position }),
    );
    if let Some(pairs) = given_up {
        found.push(Problem::TooManyOverlaps { pairs });
    }
    for ([a, b], position) in hits {
        if a != b {
            found.push(Problem::Intersection {
                facets: [a, b],
                position: position * size,
            });
        }
    }
}

/// Two facets and a point that they share.
type Hit = ([usize; 2], DVec3);

/// The first hit of each pair of facets, in rising order, and the number of pairs looked at if that was given up.
fn search(triangles: &[Triangle], points: &[DVec3]) -> (Vec<Hit>, Option<u64>) {
    let around = |triangle: &Triangle| {
        let [a, b, c] = triangle.at(points);
        (lower(lower(a, b), c), higher(higher(a, b), c))
    };
    let mut hits: Vec<Hit> = Vec::new();
    let mut pairs = 0;
    let steps = STEPS + STEPS_A_TRIANGLE * triangles.len() as u64;
    let done = Boxes::new(triangles.iter().map(around)).pairs(steps, |i, j| {
        pairs += 1;
        // In the order of facets, so that positions do not depend on the tree.
        let (i, j) = if i < j { (i, j) } else { (j, i) };
        let (a, b) = (&triangles[i as usize], &triangles[j as usize]);
        match contact(a, b, points) {
            Contact::Quick => Some(QUICK),
            Contact::Slow => Some(SLOW),
            Contact::Hit(position) => {
                hits.push(([a.facet as usize, b.facet as usize], position));
                (hits.len() < HITS).then_some(SLOW)
            }
        }
    });
    hits.sort_by_key(|&(facets, _)| facets);
    hits.dedup_by_key(|&mut (facets, _)| facets);
    (hits, (!done).then_some(pairs))
}

struct Cutter<'a> {
    mesh: &'a Mesh,
    welded: &'a [u32],
    points: &'a [DVec3],
    /// For each corner of the mesh whether the side that starts there is open.
    open: Vec<bool>,
    /// Checks left for all facets together.
    checks: u64,
}

impl Cutter<'_> {
    fn add(
        &mut self,
        facet: usize,
        normal: DVec3,
        triangles: &mut Vec<Triangle>,
    ) -> Result<(), Uncut> {
        let corners = self.mesh.corners_of(facet);
        let start = self.mesh.starts[facet] as usize;
        let cuts = if corners.len() == 3 {
            &[[0, 1, 2]][..]
        } else {
            let outline: Vec<DVec3> = corners
                .iter()
                .map(|&corner| self.points[corner as usize])
                .collect();
            &cut(
                &outline,
                View::along(normal),
                slack(&outline, normal),
                &mut self.checks,
            )?
        };
        for &places in cuts {
            let side = |from: usize, to: usize| {
                to == (from + 1) % corners.len() && self.open[start + from]
            };
            let [a, b, c] = places;
            triangles.push(Triangle {
                corners: places.map(|place| self.welded[corners[place] as usize]),
                facet: u32::try_from(facet).unwrap_or(u32::MAX),
                open: [side(a, b), side(b, c), side(c, a)],
            });
        }
        Ok(())
    }
}

/// How far the corners of a polygon are uncertain within its plane, judged by how far they are off it.
fn slack(outline: &[DVec3], normal: DVec3) -> f64 {
    // Coordinates are of order one here: this is some units in their last place.
    const ROUNDING: f64 = 4e-15;
    const MARGIN: f64 = 4.0;
    let off = outline.iter().map(|&at| normal.dot(at - outline[0]).abs());
    off.fold(ROUNDING, |slack, off| {
        if MARGIN * off > slack {
            MARGIN * off
        } else {
            slack
        }
    })
}

#[cfg(test)]
mod tests;
