//! Good meshes for tests, and ways to break them.

use std::collections::BTreeMap;

use glam::DVec3;

use crate::geometry::Mesh;

/// A box with the walls x-, x+, y-, y+, z-, z+ as facets 0 to 5; vertex i is on the high side of x, y, z by bits 0, 1, 2.
pub(crate) fn cuboid(middle: DVec3, size: DVec3) -> Mesh {
    let side = |i: usize, bit: usize| if i >> bit & 1 == 1 { 0.5 } else { -0.5 };
    let vertices = (0..8)
        .map(|i| middle + size * DVec3::new(side(i, 0), side(i, 1), side(i, 2)))
        .collect();
    let mut mesh = Mesh {
        vertices,
        ..Mesh::default()
    };
    let facets = [
        [0, 4, 6, 2],
        [1, 3, 7, 5],
        [0, 1, 5, 4],
        [2, 6, 7, 3],
        [0, 2, 3, 1],
        [4, 5, 7, 6],
    ];
    for (name, corners) in ["x-", "x+", "y-", "y+", "z-", "z+"].into_iter().zip(facets) {
        let wall = mesh.wall(name);
        mesh.push_facet(&corners, wall);
    }
    mesh
}

/// A cube of side 1 around the origin.
pub(crate) fn unit_cube() -> Mesh {
    cuboid(DVec3::ZERO, DVec3::ONE)
}

/// The octahedron with its corners on the axes at distance 1, of one wall.
pub(crate) fn octahedron() -> Mesh {
    let axes = [
        DVec3::X,
        DVec3::Y,
        DVec3::NEG_X,
        DVec3::NEG_Y,
        DVec3::Z,
        DVec3::NEG_Z,
    ];
    let mut mesh = Mesh {
        vertices: axes.to_vec(),
        walls: vec!["shell".into()],
        ..Mesh::default()
    };
    for i in 0..4 {
        mesh.push_facet(&[i, (i + 1) % 4, 4], 0);
        mesh.push_facet(&[(i + 1) % 4, i, 5], 0);
    }
    mesh
}

/// An outline extruded from z = 0: a facet and a wall for each side, then the bottom and the top.
pub(crate) fn extruded(outline: &[(f64, f64)], height: f64) -> Mesh {
    let level = |z: f64| outline.iter().map(move |&(x, y)| DVec3::new(x, y, z));
    let mut mesh = Mesh {
        vertices: level(0.0).chain(level(height)).collect(),
        ..Mesh::default()
    };
    let count = u32::try_from(outline.len()).unwrap();
    for i in 0..count {
        let next = (i + 1) % count;
        mesh.walls.push(format!("side {}", i + 1));
        mesh.push_facet(&[i, next, next + count, i + count], i);
    }
    mesh.walls.extend(["bottom".into(), "top".into()]);
    mesh.push_facet(&(0..count).rev().collect::<Vec<_>>(), count);
    mesh.push_facet(&(count..2 * count).collect::<Vec<_>>(), count + 1);
    mesh
}

/// An L of area 3 and perimeter 8, extruded: facets 0 to 5 are its sides, 6 its bottom, 7 its top.
pub(crate) fn l_prism(height: f64) -> Mesh {
    extruded(
        &[
            (0.0, 0.0),
            (2.0, 0.0),
            (2.0, 1.0),
            (1.0, 1.0),
            (1.0, 2.0),
            (0.0, 2.0),
        ],
        height,
    )
}

/// A sphere of radius 1 from an icosahedron whose triangles are divided in four, again and again.
pub(crate) fn icosphere(levels: u32) -> Mesh {
    let g = f64::midpoint(1.0, 5_f64.sqrt());
    let mut vertices: Vec<DVec3> = (0..12)
        .map(|i| {
            let (one, gold) = (
                if i & 1 == 0 { 1.0 } else { -1.0 },
                if i & 2 == 0 { g } else { -g },
            );
            [
                DVec3::new(0.0, one, gold),
                DVec3::new(one, gold, 0.0),
                DVec3::new(gold, 0.0, one),
            ][i / 4]
                .normalize()
        })
        .collect();
    let near = |a: usize, b: usize| vertices[a].dot(vertices[b]) > 0.4 && a != b;
    let mut triangles = Vec::new();
    for a in 0..12 {
        for b in a + 1..12 {
            for c in b + 1..12 {
                if near(a, b) && near(b, c) && near(c, a) {
                    let outward = vertices[a].cross(vertices[b]).dot(vertices[c]) > 0.0;
                    triangles.push(if outward { [a, b, c] } else { [a, c, b] });
                }
            }
        }
    }
    for _ in 0..levels {
        let mut middles = BTreeMap::new();
        let mut finer = Vec::new();
        for [a, b, c] in triangles {
            let [d, e, f] = [(a, b), (b, c), (c, a)].map(|(p, q)| {
                *middles
                    .entry(if p < q { (p, q) } else { (q, p) })
                    .or_insert_with(|| {
                        vertices.push((vertices[p] + vertices[q]).normalize());
                        vertices.len() - 1
                    })
            });
            finer.extend([[a, d, f], [d, b, e], [f, e, c], [d, e, f]]);
        }
        triangles = finer;
    }
    let mut mesh = Mesh {
        vertices,
        walls: vec!["shell".into()],
        ..Mesh::default()
    };
    for triangle in triangles {
        mesh.push_facet(&triangle.map(|corner| u32::try_from(corner).unwrap()), 0);
    }
    mesh
}

/// The facets of a mesh that pass a filter, each with its corners changed.
fn changed(mesh: &Mesh, keep: impl Fn(usize) -> bool, change: impl Fn(&mut Vec<u32>)) -> Mesh {
    let mut copy = Mesh {
        vertices: mesh.vertices.clone(),
        walls: mesh.walls.clone(),
        ..Mesh::default()
    };
    for facet in (0..mesh.facets()).filter(|&facet| keep(facet)) {
        let mut corners = mesh.corners_of(facet).to_vec();
        change(&mut corners);
        copy.push_facet(&corners, mesh.facet_walls[facet]);
    }
    copy
}

/// The same mesh with every facet turned over.
pub(crate) fn reversed(mesh: &Mesh) -> Mesh {
    changed(mesh, |_| true, |corners| corners.reverse())
}

/// The same mesh without one facet.
pub(crate) fn without(mesh: &Mesh, facet: usize) -> Mesh {
    changed(mesh, |other| other != facet, |_| ())
}

/// Two meshes in one, the second after the first, with its walls added to those of the first.
pub(crate) fn joined(first: &Mesh, second: &Mesh) -> Mesh {
    let mut mesh = first.clone();
    let shift = u32::try_from(first.vertices.len()).unwrap();
    mesh.vertices.extend(&second.vertices);
    for facet in 0..second.facets() {
        let wall = mesh.wall(&second.walls[second.facet_walls[facet] as usize]);
        let corners: Vec<u32> = second
            .corners_of(facet)
            .iter()
            .map(|corner| corner + shift)
            .collect();
        mesh.push_facet(&corners, wall);
    }
    mesh
}

/// The same mesh with vertices of its own for each facet, as files without shared vertices have it.
pub(crate) fn soup(mesh: &Mesh) -> Mesh {
    let mut copy = Mesh {
        walls: mesh.walls.clone(),
        ..Mesh::default()
    };
    for facet in 0..mesh.facets() {
        let start = u32::try_from(copy.vertices.len()).unwrap();
        copy.vertices.extend(mesh.positions_of(facet));
        let end = u32::try_from(copy.vertices.len()).unwrap();
        copy.push_facet(&(start..end).collect::<Vec<_>>(), mesh.facet_walls[facet]);
    }
    copy
}
