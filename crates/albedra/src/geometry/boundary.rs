//! The border of a set of facets.

use std::collections::BTreeMap;

use glam::DVec3;

use super::mesh::Mesh;

/// Positions of a facet's corners in order, or `None` if the mesh's indices are out of range.
pub(crate) fn facet_positions(mesh: &Mesh, facet: usize) -> Option<Vec<DVec3>> {
    let (start, end) = (
        *mesh.starts.get(facet)?,
        *mesh.starts.get(facet.checked_add(1)?)?,
    );
    let corners = mesh.corners.get(start as usize..end as usize)?;
    corners
        .iter()
        .map(|&corner| mesh.vertices.get(corner as usize).copied())
        .collect()
}

/// Closed loops along the edges that only one of these facets has, each in the direction in which its facet runs.
///
/// Corners are one vertex where their positions are equal bit for bit (0 and −0 being equal). Loops start in the order of
/// the facets. `None` if an edge is used by more than two facets, or by two that run along it the same way.
pub(crate) fn boundary_loops(facets: &[Vec<DVec3>]) -> Option<Vec<Vec<DVec3>>> {
    let edges = open_edges(facets)?;
    // Outgoing edges of each vertex, in order; a vertex where loops touch has several.
    let mut outgoing: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
    for (index, edge) in edges.iter().enumerate().rev() {
        outgoing.entry(edge.from).or_default().push(index);
    }
    let mut used = vec![false; edges.len()];
    let mut loops = Vec::new();
    for first in 0..edges.len() {
        if used[first] {
            continue;
        }
        let mut corners = Vec::new();
        let mut next = first;
        loop {
            used[next] = true;
            corners.push(edges[next].position);
            let end = edges[next].to;
            if end == edges[first].from {
                break;
            }
            let choices = outgoing.get_mut(&end)?;
            // Each edge is popped at most once, so that the walk ends.
            next = loop {
                let choice = choices.pop()?;
                if !used[choice] {
                    break choice;
                }
            };
        }
        loops.push(corners);
    }
    Some(loops)
}

struct Edge {
    from: usize,
    to: usize,
    position: DVec3,
}

/// The edges that only one facet has, in the order of the facets.
fn open_edges(facets: &[Vec<DVec3>]) -> Option<Vec<Edge>> {
    let mut numbers: BTreeMap<[u64; 3], usize> = BTreeMap::new();
    let mut number = |position: DVec3| {
        let next = numbers.len();
        *numbers
            .entry((position + DVec3::ZERO).to_array().map(f64::to_bits))
            .or_insert(next)
    };
    let mut edges = Vec::new();
    for facet in facets {
        let corners: Vec<usize> = facet.iter().map(|&position| number(position)).collect();
        for (i, &position) in facet.iter().enumerate() {
            let (from, to) = (corners[i], corners[(i + 1) % corners.len()]);
            if from != to {
                edges.push(Edge { from, to, position });
            }
        }
    }
    let mut runs: BTreeMap<(usize, usize), usize> = BTreeMap::new();
    for edge in &edges {
        *runs.entry((edge.from, edge.to)).or_default() += 1;
    }
    if runs.values().any(|&count| count > 1) {
        return None;
    }
    Some(
        edges
            .into_iter()
            .filter(|edge| !runs.contains_key(&(edge.to, edge.from)))
            .collect(),
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(u: i32, v: i32) -> DVec3 {
        DVec3::new(f64::from(u), f64::from(v), 0.0)
    }

    fn square(u: i32, v: i32) -> Vec<DVec3> {
        vec![at(u, v), at(u + 1, v), at(u + 1, v + 1), at(u, v + 1)]
    }

    #[test]
    fn inner_edges_vanish() {
        let loops = boundary_loops(&[square(0, 0), square(1, 0)]).unwrap();
        assert_eq!(
            loops,
            [vec![
                at(0, 0),
                at(1, 0),
                at(2, 0),
                at(2, 1),
                at(1, 1),
                at(0, 1)
            ]]
        );
    }

    #[test]
    fn a_ring_has_two_loops() {
        let ring: Vec<_> = (0..9)
            .filter(|i| *i != 4)
            .map(|i| square(i % 3, i / 3))
            .collect();
        let loops = boundary_loops(&ring).unwrap();
        assert_eq!(loops.iter().map(Vec::len).collect::<Vec<_>>(), [12, 4]);
    }

    #[test]
    fn squares_that_touch_at_a_corner_close() {
        let loops = boundary_loops(&[square(0, 0), square(1, 1)]).unwrap();
        assert_eq!(loops.iter().map(Vec::len).sum::<usize>(), 8);
    }

    #[test]
    fn both_zeros_are_one_place() {
        let mut facets = [square(0, 0), square(-1, 0)];
        for corner in &mut facets[1] {
            *corner = -*corner + DVec3::new(0.0, 1.0, -0.0);
            corner.x = -corner.x;
        }
        facets[1].reverse();
        assert!(
            facets
                .iter()
                .flatten()
                .any(|corner| corner.x == 0.0 && corner.x.is_sign_negative())
        );
        assert_eq!(boundary_loops(&facets).unwrap().len(), 1);
    }

    #[test]
    fn facets_that_run_the_same_way_along_an_edge_have_no_border() {
        assert_eq!(boundary_loops(&[square(0, 0), square(0, 0)]), None);
    }

    #[test]
    fn indices_out_of_range_are_noticed() {
        let mesh = Mesh {
            corners: vec![0, 1, 2],
            starts: vec![0, 3],
            ..Mesh::default()
        };
        assert_eq!(facet_positions(&mesh, 0), None);
        assert_eq!(facet_positions(&mesh, 7), None);
    }
}
