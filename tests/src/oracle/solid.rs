//! Triangle meshes of known bodies, as plain lists: vertices in metres, triangles counter-clockwise from outside.

use std::collections::BTreeMap;

use glam::DVec3;

/// Vertices and triangles of a closed body.
#[derive(Clone, Debug, PartialEq)]
pub struct Solid {
    /// Vertices, in metres.
    pub vertices: Vec<DVec3>,
    /// Indices of the vertices of each triangle, counter-clockwise from outside.
    pub triangles: Vec<[u32; 3]>,
}

impl Solid {
    /// Builds the convex hull of vertices that has exactly the given triangles, each turned outwards.
    fn outward(vertices: Vec<DVec3>, mut triangles: Vec<[u32; 3]>) -> Self {
        for triangle in &mut triangles {
            let [a, b, c] = triangle.map(|i| vertices[i as usize]);
            if (b - a).cross(c - a).dot(a + b + c) < 0.0 {
                triangle.swap(1, 2);
            }
        }
        Self {
            vertices,
            triangles,
        }
    }

    /// Gives the regular tetrahedron of the given edge around the origin.
    pub fn tetrahedron(edge: f64) -> Self {
        let h = edge / 8_f64.sqrt();
        let corners = [
            [1.0, 1.0, 1.0],
            [1.0, -1.0, -1.0],
            [-1.0, 1.0, -1.0],
            [-1.0, -1.0, 1.0],
        ];
        let vertices = corners.map(|corner| h * DVec3::from(corner)).to_vec();
        Self::outward(vertices, vec![[0, 1, 2], [0, 1, 3], [0, 2, 3], [1, 2, 3]])
    }

    /// Gives the regular octahedron of the given edge around the origin.
    pub fn octahedron(edge: f64) -> Self {
        let h = edge / 2_f64.sqrt();
        let vertices = [
            DVec3::X,
            -DVec3::X,
            DVec3::Y,
            -DVec3::Y,
            DVec3::Z,
            -DVec3::Z,
        ]
        .map(|v| h * v)
        .to_vec();
        let octants = (0..8_u32)
            .map(|bits| [bits & 1, 2 + (bits >> 1 & 1), 4 + (bits >> 2 & 1)])
            .collect();
        Self::outward(vertices, octants)
    }

    /// Gives the icosahedron with vertices on the unit sphere, each triangle split in four `level` times.
    pub fn icosphere(level: u32) -> Self {
        let golden = 0.5 * (1.0 + 5_f64.sqrt());
        let mut vertices = Vec::new();
        for (s, t) in [
            (1.0, golden),
            (1.0, -golden),
            (-1.0, golden),
            (-1.0, -golden),
        ] {
            for corner in [
                DVec3::new(0.0, s, t),
                DVec3::new(s, t, 0.0),
                DVec3::new(t, 0.0, s),
            ] {
                vertices.push(corner.normalize());
            }
        }
        let mut triangles = Vec::new();
        let edge = 2.0 / (1.0 + golden * golden).sqrt();
        let near = |a: u32, b: u32| {
            (vertices[a as usize].distance(vertices[b as usize]) - edge).abs() < 1e-6
        };
        for a in 0..12 {
            for b in a + 1..12 {
                triangles.extend(
                    (b + 1..12)
                        .filter(|&c| near(a, b) && near(b, c) && near(c, a))
                        .map(|c| [a, b, c]),
                );
            }
        }
        let mut solid = Self::outward(vertices, triangles);
        for _ in 0..level {
            solid = solid.split();
        }
        solid
    }

    /// Gives the solid and a copy of every triangle's three midpoints pushed out to the unit sphere.
    fn split(self) -> Self {
        let mut vertices = self.vertices;
        let mut midpoints = BTreeMap::new();
        let mut midpoint = |a: u32, b: u32| {
            *midpoints.entry((a.min(b), a.max(b))).or_insert_with(|| {
                vertices.push((vertices[a as usize] + vertices[b as usize]).normalize());
                u32::try_from(vertices.len() - 1).expect("small mesh")
            })
        };
        let mut triangles = Vec::new();
        for [a, b, c] in self.triangles {
            let (ab, bc, ca) = (midpoint(a, b), midpoint(b, c), midpoint(c, a));
            triangles.extend([[a, ab, ca], [b, bc, ab], [c, ca, bc], [ab, bc, ca]]);
        }
        Self {
            vertices,
            triangles,
        }
    }

    /// Gives the volume and the wall area.
    pub fn volume_and_area(&self) -> (f64, f64) {
        let (mut volume, mut area) = (0.0, 0.0);
        for triangle in &self.triangles {
            let [a, b, c] = triangle.map(|i| self.vertices[i as usize]);
            volume += a.dot(b.cross(c)) / 6.0;
            area += 0.5 * (b - a).cross(c - a).length();
        }
        (volume, area)
    }
}

/// Gives the volume and wall area of a prism over a regular polygon of the given circumradius.
pub fn prism(sides: u32, radius: f64, height: f64) -> (f64, f64) {
    let n = f64::from(sides);
    let base = 0.5 * n * radius * radius * (2.0 * std::f64::consts::PI / n).sin();
    (
        base * height,
        2.0 * base + 2.0 * n * radius * (std::f64::consts::PI / n).sin() * height,
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::oracle::chord;
    use crate::records;

    fn mean_chord(solid: &Solid) -> f64 {
        let (volume, area) = solid.volume_and_area();
        chord::mean(volume, area)
    }

    #[test]
    fn platonic_solids_match_the_records() {
        for (prefix, solid) in [
            ("chord.regular_tetrahedron.edge1", Solid::tetrahedron(1.0)),
            ("chord.regular_octahedron.edge1", Solid::octahedron(1.0)),
        ] {
            let mean = crate::record(&format!("{prefix}.mean"));
            assert!((mean_chord(&solid) - mean.value).abs() < 1e-12, "{prefix}");
        }
        assert_eq!(Solid::octahedron(1.0).triangles.len(), 8);
    }

    #[test]
    fn spheres_of_triangles_match_the_records() {
        for entry in records("mesh.icosphere") {
            let solid = Solid::icosphere(entry.count("level"));
            assert_eq!(
                solid.triangles.len() as f64,
                entry.number("triangles"),
                "{}",
                entry.id
            );
            assert!(
                (mean_chord(&solid) - entry.value).abs() < 1e-10,
                "{}: {}",
                entry.id,
                mean_chord(&solid)
            );
        }
    }

    #[test]
    fn prisms_match_the_records() {
        for entry in records("mesh.prism") {
            let (volume, area) = prism(entry.count("N"), 1.0, 2.0);
            assert!(
                (chord::mean(volume, area) - entry.value).abs() < 1e-12,
                "{}",
                entry.id
            );
        }
    }

    #[test]
    fn every_edge_is_used_once_in_each_direction() {
        for solid in [
            Solid::tetrahedron(1.0),
            Solid::octahedron(2.0),
            Solid::icosphere(2),
        ] {
            let mut edges = BTreeMap::new();
            for [a, b, c] in &solid.triangles {
                for edge in [(a, b), (b, c), (c, a)] {
                    *edges.entry(edge).or_insert(0) += 1;
                }
            }
            assert!(
                edges
                    .iter()
                    .all(|(&(a, b), &count)| count == 1 && edges.get(&(b, a)) == Some(&1))
            );
        }
    }
}
