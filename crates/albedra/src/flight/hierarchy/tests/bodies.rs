//! Closed meshes.

use std::collections::HashMap;

use super::super::Triangles;
use super::walk::unit;

/// A unit sphere of 20 · 4^level triangles.
pub(super) fn icosphere(level: u32) -> Triangles {
    let g = (1.0 + 5.0_f64.sqrt()) * 0.5;
    let mut vertices: Vec<[f64; 3]> = [(0, 1), (1, 2), (2, 0)]
        .iter()
        .flat_map(|(a, b)| {
            [(1.0, g), (-1.0, g), (1.0, -g), (-1.0, -g)].map(|(x, y)| {
                let mut vertex = [0.0; 3];
                (vertex[*a], vertex[*b]) = (x, y);
                unit(vertex)
            })
        })
        .collect();
    let mut corners = Vec::new();
    // Faces are the triples at the shortest distance, turned outward.
    let near =
        |a: usize, b: usize| (0..3).map(|k| vertices[a][k] * vertices[b][k]).sum::<f64>() > 0.4;
    for a in 0..12 {
        for b in a + 1..12 {
            for c in b + 1..12 {
                if near(a, b) && near(b, c) && near(a, c) {
                    let outward =
                        super::dot(vertices[a], super::cross(vertices[b], vertices[c])) > 0.0;
                    corners.push(if outward { [a, b, c] } else { [a, c, b] }.map(|k| k as u32));
                }
            }
        }
    }
    assert_eq!(corners.len(), 20);
    for _ in 0..level {
        let mut middles = HashMap::new();
        let mut finer = Vec::with_capacity(4 * corners.len());
        for [a, b, c] in corners {
            let [ab, bc, ca] = [(a, b), (b, c), (c, a)].map(|(p, q): (u32, u32)| {
                *middles.entry((p.min(q), p.max(q))).or_insert_with(|| {
                    vertices.push(unit(
                        [0, 1, 2].map(|k| vertices[p as usize][k] + vertices[q as usize][k]),
                    ));
                    vertices.len() as u32 - 1
                })
            });
            finer.extend([[a, ab, ca], [b, bc, ab], [c, ca, bc], [ab, bc, ca]]);
        }
        corners = finer;
    }
    Triangles { vertices, corners }
}

/// A smooth body with lobes: not convex, every point seen from the centre.
pub(super) fn star(level: u32) -> Triangles {
    let mut mesh = icosphere(level);
    for vertex in &mut mesh.vertices {
        let [x, y, z] = *vertex;
        let radius = 1.0 + 0.5 * (x * x * x - 3.0 * x * y * y) + 0.4 * z * (4.0 * z * z - 3.0);
        *vertex = vertex.map(|x| x * radius);
    }
    mesh
}

/// A body with a random radius at each vertex: spikes and pits.
pub(super) fn spiky(level: u32) -> Triangles {
    let mut mesh = icosphere(level);
    for (k, vertex) in (0_u64..).zip(&mut mesh.vertices) {
        let noise = (k + 1).wrapping_mul(0x9e37_79b9_7f4a_7c15) >> 40;
        let radius = 0.7 + 0.6 * noise as f64 / f64::from(1 << 24);
        *vertex = vertex.map(|x| x * radius);
    }
    mesh
}

/// An L of three unit cubes, [0, 2]² × [0, 1] without [1, 2]²; each square is cut into `cuts` + 1 strips both ways.
pub(super) fn corridor(cuts: usize) -> Triangles {
    let mut mesh = Triangles::default();
    let mut places = HashMap::new();
    let mut square = |corner: [f64; 3], u: [f64; 3], v: [f64; 3]| {
        let n = cuts + 1;
        let mut at = |i: usize, j: usize| {
            // Whole numbers first, so that squares agree on the positions of their common edge.
            let point = [0, 1, 2]
                .map(|k| (corner[k] * n as f64 + i as f64 * u[k] + j as f64 * v[k]) / n as f64);
            *places.entry(point.map(f64::to_bits)).or_insert_with(|| {
                mesh.vertices.push(point);
                mesh.vertices.len() as u32 - 1
            })
        };
        for i in 0..n {
            for j in 0..n {
                let [a, b, c, d] = [at(i, j), at(i + 1, j), at(i + 1, j + 1), at(i, j + 1)];
                // Diagonals both ways, so that vertices have many edges.
                if (i + j) % 2 == 0 {
                    mesh.corners.extend([[a, b, c], [a, c, d]]);
                } else {
                    mesh.corners.extend([[a, b, d], [b, c, d]]);
                }
            }
        }
    };
    let (x, y, z) = ([1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]);
    for base in [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]] {
        square([base[0], base[1], 0.0], y, x);
        square([base[0], base[1], 1.0], x, y);
    }
    // Outward is u × v; walls along the outline, counter-clockwise from above.
    let back = |a: [f64; 3]| a.map(|x| if x == 0.0 { 0.0 } else { -x });
    for (corner, along) in [
        ([0.0, 0.0], x),
        ([1.0, 0.0], x),
        ([2.0, 0.0], y),
        ([2.0, 1.0], back(x)),
        ([1.0, 1.0], y),
        ([1.0, 2.0], back(x)),
        ([0.0, 2.0], back(y)),
        ([0.0, 1.0], back(y)),
    ] {
        square([corner[0], corner[1], 0.0], along, z);
    }
    mesh
}

/// The mesh scaled by `size`, then moved by `offset` along all axes.
pub(super) fn moved(mesh: &Triangles, size: f64, offset: f64) -> Triangles {
    let vertices = mesh
        .vertices
        .iter()
        .map(|vertex| vertex.map(|x| x * size + offset))
        .collect();
    Triangles {
        vertices,
        corners: mesh.corners.clone(),
    }
}

/// Every edge belongs to two triangles that run along it in opposite senses, and the volume is positive.
#[test]
fn bodies_are_closed() {
    for mesh in [
        icosphere(0),
        icosphere(3),
        star(3),
        spiky(3),
        corridor(0),
        corridor(1),
        corridor(4),
    ] {
        let mut edges = HashMap::new();
        let mut volume = 0.0;
        for (k, [a, b, c]) in mesh.corners.iter().enumerate() {
            for edge in [(*a, *b), (*b, *c), (*c, *a)] {
                assert!(edges.insert(edge, k).is_none());
            }
            let [a, b, c] = mesh.of(k);
            volume += super::dot(a, super::cross(b, c)) / 6.0;
        }
        assert!(edges.keys().all(|(a, b)| edges.contains_key(&(*b, *a))));
        assert!(volume > 0.0);
        assert!(
            mesh.vertices.len() > 100 || (volume - 3.0).abs() < 1e-12 || mesh.corners.len() == 20
        );
    }
}
