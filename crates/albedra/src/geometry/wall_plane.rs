//! A planar wall: its frame, its outline and its area.

use glam::DVec3;

use super::boundary::{boundary_loops, facet_positions};
use super::frame::{Frame, unit};
use super::mesh::Mesh;
use super::outline::Outline;
use super::polygon::Point;
use crate::math::order::{larger, smaller};

/// How far a corner of a planar wall may lie off its plane, as a share of the wall's extent.
const PLANAR: f64 = 1e-6;

/// A wall that lies in one plane.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct PlanarWall {
    /// Where (u, v) start and run; the origin is the area centroid.
    pub(crate) frame: Frame,
    /// Border loops in (u, v), in metres.
    pub(crate) outline: Outline,
    /// Area in m².
    pub(crate) area: f64,
    /// Diagonal of the wall's bounding box in metres; tolerances are shares of it.
    pub(crate) extent: f64,
}

/// The frame, outline and area of a wall, if all its facets lie in one plane within 1e-6 of its extent.
///
/// `None` also where a facet faces the other way, where an edge is used by more than two of its facets, where the wall has no
/// area, and where the mesh's indices are out of range. The frame of a wall across an axis is exact.
#[cfg(test)]
pub(crate) fn planar_wall(mesh: &Mesh, wall: u32) -> Option<PlanarWall> {
    let facets: Option<Vec<_>> = (mesh.facet_walls.iter().enumerate())
        .filter(|&(_, &of)| of == wall)
        .map(|(facet, _)| facet_positions(mesh, facet))
        .collect();
    PlanarWall::from_facets(&facets?)
}

/// [`planar_wall`] of each wall of a mesh, in one pass over the facets.
pub(crate) fn planar_walls(mesh: &Mesh) -> Vec<Option<PlanarWall>> {
    let mut facets: Vec<Option<Vec<Vec<DVec3>>>> = vec![Some(Vec::new()); mesh.walls.len()];
    for (facet, &wall) in mesh.facet_walls.iter().enumerate() {
        let Some(of_wall) = facets.get_mut(wall as usize) else {
            continue;
        };
        match (facet_positions(mesh, facet), of_wall.as_mut()) {
            (Some(positions), Some(of_wall)) => of_wall.push(positions),
            _ => *of_wall = None,
        }
    }
    facets
        .into_iter()
        .map(|facets| PlanarWall::from_facets(&facets?))
        .collect()
}

impl PlanarWall {
    /// The planar wall made of these facets, counter-clockwise seen from outside.
    fn from_facets(facets: &[Vec<DVec3>]) -> Option<Self> {
        let corners = || facets.iter().flatten().copied();
        let first = corners().next()?;
        let (low, high) = corners().fold((first, first), |(low, high), p| {
            (pick(low, p, smaller), pick(high, p, larger))
        });
        // Halves are added, since a sum could overflow. Relative to the middle a symmetric wall gives exact zeros.
        let middle = low * 0.5 + high * 0.5;
        let extent = (high - low).length();
        if !(extent.is_finite() && extent > 0.0) {
            return None;
        }
        let parts: Vec<DVec3> = facets
            .iter()
            .map(|facet| vector_area(facet, middle))
            .collect();
        let outward = unit(parts.iter().fold(DVec3::ZERO, |sum, part| sum + *part))?;
        let area: f64 = parts.iter().map(|part| part.dot(outward)).sum();
        if !(area > 0.0 && parts.iter().all(|part| part.dot(outward) >= -PLANAR * area)) {
            return None;
        }
        let origin = middle + moment(facets, middle, outward) / area;
        let frame = Frame::facing(origin, -outward)?;
        if !corners().all(|p| (p - frame.origin).dot(frame.normal).abs() <= PLANAR * extent) {
            return None;
        }
        // Facets run counter-clockwise seen from outside, loops seen from inside.
        let flatten =
            |ring: Vec<DVec3>| ring.into_iter().rev().map(|p| frame.to_plane(p)).collect();
        let outline = Outline::new(boundary_loops(facets)?.into_iter().map(flatten).collect());
        Some(Self {
            frame,
            outline,
            area,
            extent,
        })
    }

    /// The point (u, v) of the wall that is nearest to a position.
    pub(crate) fn nearest(&self, position: DVec3) -> Point {
        let foot = self.frame.to_plane(position);
        if self.outline.contains(foot) {
            foot
        } else {
            self.outline.nearest_border(foot)
        }
    }
}

fn pick(a: DVec3, b: DVec3, choose: impl Fn(f64, f64) -> f64) -> DVec3 {
    DVec3::new(choose(a.x, b.x), choose(a.y, b.y), choose(a.z, b.z))
}

fn edges(facet: &[DVec3], middle: DVec3) -> impl Iterator<Item = (DVec3, DVec3)> + '_ {
    let next = facet.iter().cycle().skip(1);
    facet
        .iter()
        .zip(next)
        .map(move |(a, b)| (*a - middle, *b - middle))
}

fn vector_area(facet: &[DVec3], middle: DVec3) -> DVec3 {
    edges(facet, middle).fold(DVec3::ZERO, |sum, (a, b)| sum + a.cross(b) * 0.5)
}

/// First moment of area about `middle`: the sum over triangles to `middle` of area times centroid.
fn moment(facets: &[Vec<DVec3>], middle: DVec3, outward: DVec3) -> DVec3 {
    let all = facets.iter().flat_map(|facet| edges(facet, middle));
    all.fold(DVec3::ZERO, |sum, (a, b)| {
        sum + (a + b) * (a.cross(b).dot(outward) / 6.0)
    })
}

#[cfg(test)]
pub(crate) mod tests {
    use super::*;

    /// A horizontal wall with these loops, for tests that need nothing but an outline.
    pub(crate) fn flat_wall(loops: Vec<Vec<Point>>) -> PlanarWall {
        let outline = Outline::new(loops);
        let (area, extent) = (outline.area(), outline.bounds().diagonal());
        let frame = Frame {
            origin: DVec3::ZERO,
            u: DVec3::X,
            v: DVec3::Y,
            normal: DVec3::Z,
        };
        PlanarWall {
            frame,
            outline,
            area,
            extent,
        }
    }

    /// One wall "w" of these facets, each a list of corners.
    fn wall_of(facets: &[&[DVec3]]) -> Mesh {
        let mut mesh = Mesh::default();
        let wall = mesh.wall("w");
        for facet in facets {
            let start = u32::try_from(mesh.vertices.len()).unwrap();
            mesh.vertices.extend_from_slice(facet);
            let corners: Vec<u32> = (start..).take(facet.len()).collect();
            mesh.push_facet(&corners, wall);
        }
        mesh
    }

    fn p(x: f64, y: f64, z: f64) -> DVec3 {
        DVec3::new(x, y, z)
    }

    #[test]
    fn triangulated_box_wall_is_exact() {
        // x+ of a box 1.2 × 0.8 × 0.5, counter-clockwise seen from outside (+x).
        let (a, b, c, d) = (
            p(0.6, -0.4, -0.25),
            p(0.6, 0.4, -0.25),
            p(0.6, 0.4, 0.25),
            p(0.6, -0.4, 0.25),
        );
        let quad = planar_wall(&wall_of(&[&[a, b, c, d]]), 0).unwrap();
        let triangles = planar_wall(&wall_of(&[&[a, b, c], &[a, c, d]]), 0).unwrap();
        for wall in [&quad, &triangles] {
            assert_eq!(wall.frame.origin, p(0.6, 0.0, 0.0));
            assert_eq!(
                (wall.frame.normal, wall.frame.u, wall.frame.v),
                (-DVec3::X, -DVec3::Y, DVec3::Z)
            );
            assert!((wall.area - 0.4).abs() < 1e-16 && (wall.outline.area() - 0.4).abs() < 1e-16);
            let mut corners: Vec<Point> = wall.outline.corners().collect();
            corners.sort_by(|a, b| a.partial_cmp(b).unwrap());
            assert_eq!(
                corners,
                [(-0.4, -0.25), (-0.4, 0.25), (0.4, -0.25), (0.4, 0.25)]
            );
        }
        assert_eq!(planar_walls(&wall_of(&[&[a, b, c, d]])), [Some(quad)]);
    }

    #[test]
    fn centroid_of_an_l_shape_and_of_a_far_triangle() {
        // Two squares of side 2 and one of side 1 … L: [0,2]×[0,1] ∪ [0,1]×[1,2], seen from above, so the floor faces down.
        let l = [
            p(0.0, 0.0, 3.0),
            p(2.0, 0.0, 3.0),
            p(2.0, 1.0, 3.0),
            p(1.0, 1.0, 3.0),
            p(1.0, 2.0, 3.0),
            p(0.0, 2.0, 3.0),
        ];
        let wall = planar_wall(&wall_of(&[&l]), 0).unwrap();
        // (2·(1, ½) + 1·(½, 3/2)) / 3, by hand.
        assert!((wall.frame.origin - p(5.0 / 6.0, 5.0 / 6.0, 3.0)).length() < 1e-15);
        assert_eq!(wall.frame.normal, -DVec3::Z);
        assert!((wall.area - 3.0).abs() < 1e-15 && (wall.outline.area() - 3.0).abs() < 1e-15);
        let t = [p(1e6, 0.0, 0.0), p(1e6 + 3.0, 0.0, 0.0), p(1e6, 3.0, 0.0)];
        let wall = planar_wall(&wall_of(&[&t]), 0).unwrap();
        assert!((wall.frame.origin - p(1e6 + 1.0, 1.0, 0.0)).length() < 1e-9);
    }

    #[test]
    fn frames_with_holes() {
        let square = |u: f64, v: f64| {
            [
                p(0.0, u, v),
                p(0.0, u, v + 1.0),
                p(0.0, u + 1.0, v + 1.0),
                p(0.0, u + 1.0, v),
            ]
        };
        let cells: Vec<_> = (0..9)
            .filter(|i| *i != 4)
            .map(|i| square(f64::from(i % 3), f64::from(i / 3)))
            .collect();
        let facets: Vec<&[DVec3]> = cells.iter().map(|c| &c[..]).collect();
        let wall = planar_wall(&wall_of(&facets), 0).unwrap();
        assert_eq!(
            (wall.area, wall.outline.area(), wall.outline.loops().len()),
            (8.0, 8.0, 2)
        );
        assert_eq!(wall.frame.origin, p(0.0, 1.5, 1.5));
        assert!(!wall.outline.contains((0.0, 0.0)) && wall.outline.contains((1.0, 0.0)));
        assert_eq!(
            wall.nearest(p(5.0, 1.5 + 0.25, 1.5)),
            wall.frame.to_plane(p(0.0, 2.0, 1.5))
        );
        assert_eq!(
            wall.nearest(p(5.0, 0.5, 1.0)),
            wall.frame.to_plane(p(0.0, 0.5, 1.0))
        );
    }

    #[test]
    fn bent_folded_and_broken_walls_have_no_plane() {
        let bent = |by: f64| {
            wall_of(&[&[
                p(0.0, 0.0, 0.0),
                p(1.0, 0.0, 0.0),
                p(1.0, 1.0, by),
                p(0.0, 1.0, 0.0),
            ]])
        };
        assert!(planar_wall(&bent(1e-7), 0).is_some());
        assert_eq!(planar_wall(&bent(1e-5), 0), None);
        let (a, b, c) = (p(0.0, 0.0, 0.0), p(1.0, 0.0, 0.0), p(0.0, 1.0, 0.0));
        assert_eq!(
            planar_wall(&wall_of(&[&[a, b, c], &[b, a, c * 0.5]]), 0),
            None,
            "folded"
        );
        assert_eq!(
            planar_wall(&wall_of(&[&[a, b, b * 2.0]]), 0),
            None,
            "no area"
        );
        assert_eq!(planar_wall(&wall_of(&[&[a, b, DVec3::NAN]]), 0), None);
        assert_eq!(
            planar_wall(&wall_of(&[&[a, b, c]]), 1),
            None,
            "no such wall"
        );
        let broken = Mesh {
            starts: vec![0, 9],
            facet_walls: vec![0],
            walls: vec!["w".into()],
            ..Mesh::default()
        };
        assert_eq!(
            (planar_wall(&broken, 0), planar_walls(&broken)),
            (None, vec![None])
        );
    }

    #[test]
    fn any_unit_of_length_gives_the_same_outline() {
        let l = [
            p(0.0, 0.0, 0.3),
            p(2.0, 0.0, 0.1),
            p(2.0, 1.0, 0.1),
            p(1.0, 1.0, 0.2),
            p(1.0, 2.0, 0.2),
            p(0.0, 2.0, 0.3),
        ];
        let whole = planar_wall(&wall_of(&[&l]), 0).unwrap();
        let scale = 2.0_f64.sqrt() * 1e-9;
        let small: Vec<DVec3> = l.iter().map(|c| *c * scale).collect();
        let small = planar_wall(&wall_of(&[&small]), 0).unwrap();
        assert!((small.area / (whole.area * scale * scale) - 1.0).abs() < 1e-12);
        for (a, b) in whole.outline.corners().zip(small.outline.corners()) {
            assert!(
                (a.0 * scale - b.0).abs() < 1e-12 * scale
                    && (a.1 * scale - b.1).abs() < 1e-12 * scale
            );
        }
    }
}
