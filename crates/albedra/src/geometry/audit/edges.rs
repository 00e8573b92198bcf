//! Edges of the welded facets: how many facets share each, and in which directions.

use super::Problem;
use crate::geometry::Mesh;

/// One side of a facet.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
struct Side {
    /// Welded vertices at its ends, the lower index first.
    ends: [u32; 2],
    facet: u32,
    /// Place of its first corner in the mesh.
    corner: u32,
    /// Runs from the lower to the higher index.
    forward: bool,
}

/// All sides of a mesh, those of the same edge together.
#[derive(Debug)]
pub(super) struct Edges {
    sides: Vec<Side>,
    /// Lengths of the runs of sides that make one edge.
    runs: Vec<u32>,
}

impl Edges {
    /// Collects the sides of a mesh whose lists are in order.
    ///
    /// What a degenerate facet runs both ways itself is left out, so that it does not disturb its neighbours.
    pub(super) fn new(mesh: &Mesh, welded: &[u32]) -> Self {
        let mut all = Vec::with_capacity(mesh.corners.len());
        for (facet, place) in (0..).zip(mesh.starts.windows(2)) {
            let corners = &mesh.corners[place[0] as usize..place[1] as usize];
            let mut from = corners.last().map_or(0, |&last| welded[last as usize]);
            // The side that ends at the first corner starts at the last one.
            let mut corner = place[1].saturating_sub(1);
            for (place, &next) in (place[0]..).zip(corners) {
                let to = welded[next as usize];
                let forward = from < to;
                let ends = if forward { [from, to] } else { [to, from] };
                if from != to {
                    all.push(Side {
                        ends,
                        facet,
                        corner,
                        forward,
                    });
                }
                (from, corner) = (to, place);
            }
        }
        all.sort_unstable();
        let (mut sides, mut runs) = (Vec::with_capacity(all.len()), Vec::new());
        for edge in all.chunk_by(|a, b| a.ends == b.ends) {
            let before = sides.len();
            for own in edge.chunk_by(|a, b| a.facet == b.facet) {
                let surplus = |forward| {
                    let same = own.iter().filter(|side| side.forward == forward);
                    same.clone()
                        .count()
                        .saturating_sub(own.len() - same.count())
                };
                sides.extend(own.iter().filter(|side| side.forward).take(surplus(true)));
                sides.extend(own.iter().filter(|side| !side.forward).take(surplus(false)));
            }
            if sides.len() > before {
                runs.push(u32::try_from(sides.len() - before).unwrap_or(u32::MAX));
            }
        }
        Self { sides, runs }
    }

    /// The sides of each edge, in the order of their welded ends.
    fn groups(&self) -> impl Iterator<Item = &[Side]> {
        let mut rest = &self.sides[..];
        self.runs.iter().map(move |&run| {
            let (edge, others) = rest.split_at(run as usize);
            rest = others;
            edge
        })
    }

    /// The facets of each edge.
    pub(super) fn facets(&self) -> impl Iterator<Item = impl Iterator<Item = usize>> {
        self.groups()
            .map(|edge| edge.iter().map(|side| side.facet as usize))
    }

    /// For each corner of the mesh whether the side that starts there belongs to no other facet.
    pub(super) fn open(&self, mesh: &Mesh) -> Vec<bool> {
        let mut open = vec![false; mesh.corners.len()];
        for edge in self.groups() {
            if let [side] = edge {
                open[side.corner as usize] = true;
            }
        }
        open
    }

    /// What is wrong with the edges, in the order of facets and their corners.
    pub(super) fn problems(&self, mesh: &Mesh) -> Vec<Problem> {
        let wrong = |edge: &&[Side]| !matches!(edge, [a, b] if a.forward != b.forward);
        let mut bad: Vec<&[Side]> = self.groups().filter(wrong).collect();
        bad.sort_unstable_by_key(|edge| (edge[0].facet, edge[0].corner));
        bad.into_iter().map(|edge| judge(mesh, edge)).collect()
    }
}

fn judge(mesh: &Mesh, edge: &[Side]) -> Problem {
    let [low, high] = edge[0].ends.map(|end| mesh.vertices[end as usize]);
    let (from, to) = if edge[0].forward {
        (low, high)
    } else {
        (high, low)
    };
    match edge {
        [side] => Problem::OpenEdge {
            facet: side.facet as usize,
            from,
            to,
        },
        [a, b] => Problem::InconsistentFacets {
            facets: [a.facet as usize, b.facet as usize],
            from,
            to,
        },
        _ => Problem::NonManifoldEdge {
            facets: edge.iter().map(|side| side.facet as usize).collect(),
            from,
            to,
        },
    }
}

#[cfg(test)]
mod tests {
    use glam::DVec3;

    use super::*;
    use crate::geometry::audit::fixtures::{icosphere, octahedron, reversed, unit_cube, without};

    #[test]
    fn missing_facet_opens_its_edges() {
        let cube = unit_cube();
        let (p, q) = (DVec3::splat(-0.5), DVec3::new(0.5, -0.5, -0.5));
        let found = without(&cube, 4).audit().problems;
        assert_eq!(found.len(), 4);
        // z- is gone; facet 2 is y-, which runs along its lower edge from p to q.
        assert!(
            found.contains(&Problem::OpenEdge {
                facet: 2,
                from: p,
                to: q
            }),
            "{found:?}"
        );
        let facets: Vec<_> = found
            .iter()
            .map(|problem| matches!(problem, Problem::OpenEdge { .. }))
            .collect();
        assert_eq!(facets, [true; 4]);
    }

    #[test]
    fn t_junction_shows_as_open_edges_only() {
        // The edge between y- and z- gets a corner in y- alone.
        let mut mesh = unit_cube();
        mesh.vertices.push(DVec3::new(0.0, -0.5, -0.5));
        let corners = mesh.corners_of(2).to_vec();
        let mut split = Mesh {
            vertices: mesh.vertices.clone(),
            walls: mesh.walls.clone(),
            ..Mesh::default()
        };
        for facet in 0..6 {
            if facet == 2 {
                let at = (0..4)
                    .find(|&i| mesh.vertices[corners[i] as usize] == DVec3::splat(-0.5))
                    .unwrap();
                let mut corners = corners.clone();
                corners.insert(at + 1, 8);
                split.push_facet(&corners, 2);
            } else {
                split.push_facet(mesh.corners_of(facet), mesh.facet_walls[facet]);
            }
        }
        let (p, middle, q) = (
            DVec3::splat(-0.5),
            DVec3::new(0.0, -0.5, -0.5),
            DVec3::new(0.5, -0.5, -0.5),
        );
        let found = split.audit().problems;
        assert_eq!(
            found,
            [
                Problem::OpenEdge {
                    facet: 2,
                    from: p,
                    to: middle
                },
                Problem::OpenEdge {
                    facet: 2,
                    from: middle,
                    to: q
                },
                Problem::OpenEdge {
                    facet: 4,
                    from: q,
                    to: p
                },
            ]
        );
    }

    #[test]
    fn turned_facet_disagrees_with_its_neighbours() {
        let mesh = octahedron();
        let mut turned = Mesh {
            vertices: mesh.vertices.clone(),
            walls: mesh.walls.clone(),
            ..Mesh::default()
        };
        for facet in 0..8 {
            let mut corners = mesh.corners_of(facet).to_vec();
            if facet == 3 {
                corners.reverse();
            }
            turned.push_facet(&corners, 0);
        }
        let found = turned.audit().problems;
        assert_eq!(found.len(), 3);
        for problem in &found {
            let Problem::InconsistentFacets {
                facets: [a, b],
                from,
                to,
            } = problem
            else {
                panic!("{found:?}")
            };
            assert!(*a < *b && (*a == 3 || *b == 3));
            assert_ne!(from, to);
            let own: Vec<_> = turned.positions_of(3).collect();
            assert!((0..3).any(|i| own[i] == *from && own[(i + 1) % 3] == *to));
        }
    }

    #[test]
    fn third_facet_at_an_edge_is_non_manifold() {
        let mut mesh = unit_cube();
        let [a, b] = [mesh.corners_of(0)[0], mesh.corners_of(0)[1]];
        let [from, to] = [a, b].map(|corner| mesh.vertices[corner as usize]);
        mesh.vertices.push(DVec3::new(-5.0, -4.0, -3.0));
        mesh.push_facet(&[b, a, 8], 0);
        let found = mesh.audit().problems;
        assert_eq!(found.len(), 3, "{found:?}");
        let Problem::NonManifoldEdge {
            facets,
            from: start,
            to: end,
        } = &found[0]
        else {
            panic!("{found:?}")
        };
        assert_eq!((facets.len(), facets[0], facets[2]), (3, 0, 6));
        assert_eq!((*start, *end), (from, to));
        assert_eq!(
            found[1],
            Problem::OpenEdge {
                facet: 6,
                from,
                to: mesh.vertices[8]
            }
        );
        assert_eq!(
            found[2],
            Problem::OpenEdge {
                facet: 6,
                from: mesh.vertices[8],
                to
            }
        );
    }

    #[test]
    fn inside_out_body_has_sound_edges() {
        let mesh = reversed(&icosphere(1));
        let welded = super::super::weld::weld(&mesh.vertices);
        assert!(Edges::new(&mesh, &welded).problems(&mesh).is_empty());
    }
}
