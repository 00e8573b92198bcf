//! A sound closed body and what is derived from its shape once.

use std::collections::BTreeSet;

use serde::{Deserialize, Serialize};

use super::EnclosureError;
use crate::flight::{Hierarchy, Triangles};
use crate::geometry::{
    self, Audit, ConvexPlane, Mesh, PlanarWall, facet_area_normal, triangulate_facet,
};

/// How the shape was described.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case", deny_unknown_fields)]
pub(crate) enum ShapeForm {
    Cuboid {
        size: [f64; 3],
    },
    Prism {
        sides: u32,
        radius: f64,
        height: f64,
    },
    Extruded {
        outline: Vec<(f64, f64)>,
        height: f64,
    },
    /// The mesh itself is kept beside the text.
    Mesh,
}

/// A body with walls: sound, closed, in one piece.
#[derive(Debug, PartialEq)]
pub(crate) struct Solid {
    pub(crate) form: ShapeForm,
    pub(crate) mesh: Mesh,
    /// m³, m² and m.
    pub(crate) volume: f64,
    pub(crate) area: f64,
    pub(crate) mean_chord: f64,
    /// Diagonal of the bounding box in m.
    pub(crate) diagonal: f64,
    /// Lower and upper corner of the bounding box.
    pub(crate) bounds: [[f64; 3]; 2],
    pub(crate) walls: Vec<SolidWall>,
    /// Planes of a convex body with a few dozen of them, each of one wall.
    pub(crate) convex: Option<Vec<ConvexPlane>>,
    /// All facets as triangles, counter-clockwise seen from outside, and the facet of each.
    pub(crate) triangles: Vec<[u32; 3]>,
    pub(crate) triangle_facets: Vec<u32>,
}

/// What is known of a wall's shape.
#[derive(Debug, PartialEq)]
pub(crate) struct SolidWall {
    pub(crate) area: f64,
    pub(crate) plane: Option<PlanarWall>,
}

impl Solid {
    pub(crate) fn new(form: ShapeForm, mesh: Option<Mesh>) -> Result<Self, EnclosureError> {
        let mesh = match (&form, mesh) {
            (ShapeForm::Cuboid { size }, _) => geometry::cuboid(*size)?,
            (
                ShapeForm::Prism {
                    sides,
                    radius,
                    height,
                },
                _,
            ) => geometry::prism(*sides, *radius, *height)?,
            (ShapeForm::Extruded { outline, height }, _) => geometry::extruded(outline, *height)?,
            (ShapeForm::Mesh, mesh) => mesh.unwrap_or_default(),
        };
        let audit = mesh.audit();
        if !audit.is_sound() {
            return Err(EnclosureError::Unsound(Box::new(audit)));
        }
        Self::from_sound(form, mesh, &audit)
    }

    fn from_sound(form: ShapeForm, mesh: Mesh, audit: &Audit) -> Result<Self, EnclosureError> {
        let mut areas = vec![0.0; mesh.walls.len()];
        let (mut triangles, mut triangle_facets) = (Vec::new(), Vec::new());
        for (facet, number) in (0..mesh.facets()).zip(0_u32..) {
            areas[mesh.facet_walls[facet] as usize] += facet_area_normal(&mesh, facet).0;
            let corners = mesh.corners_of(facet);
            let positions: Vec<_> = mesh.positions_of(facet).collect();
            for triangle in triangulate_facet(&positions).ok_or(EnclosureError::Facet { facet })? {
                triangles.push(triangle.map(|corner| corners[corner as usize]));
                triangle_facets.push(number);
            }
        }
        let mut bounds = [[f64::INFINITY; 3], [f64::NEG_INFINITY; 3]];
        for vertex in &mesh.vertices {
            for axis in 0..3 {
                bounds[0][axis] = crate::math::smaller(bounds[0][axis], vertex[axis]);
                bounds[1][axis] = crate::math::larger(bounds[1][axis], vertex[axis]);
            }
        }
        let sides = [0, 1, 2].map(|axis| bounds[1][axis] - bounds[0][axis]);
        let diagonal = (sides[0] * sides[0] + sides[1] * sides[1] + sides[2] * sides[2]).sqrt();
        check_walls(&mesh, &areas)?;
        let planes = geometry::planar_walls(&mesh);
        let walls = areas
            .into_iter()
            .zip(planes)
            .map(|(area, plane)| SolidWall { area, plane })
            .collect();
        let convex = geometry::convex_planes(&mesh);
        Ok(Self {
            form,
            volume: audit.volume,
            area: audit.area,
            mean_chord: audit.mean_chord,
            diagonal,
            bounds,
            walls,
            convex,
            triangles,
            triangle_facets,
            mesh,
        })
    }

    /// Index of the wall of this name.
    pub(crate) fn wall(&self, name: &str) -> Option<usize> {
        self.mesh.walls.iter().position(|wall| wall == name)
    }

    /// Corners of a triangle, m.
    pub(crate) fn corners(&self, triangle: usize) -> [[f64; 3]; 3] {
        self.triangles[triangle].map(|corner| self.mesh.vertices[corner as usize].to_array())
    }

    pub(crate) fn triangle_wall(&self, triangle: usize) -> u32 {
        self.mesh.facet_walls[self.triangle_facets[triangle] as usize]
    }

    /// Plane n·x = offset of a triangle's facet, outward unit normal.
    pub(crate) fn plane_of(&self, triangle: usize) -> [f64; 4] {
        let [a, b, c] = self.corners(triangle);
        let [p, q] = [b, c].map(|corner| [0, 1, 2].map(|i| corner[i] - a[i]));
        let n = crate::source::unit([
            p[1] * q[2] - p[2] * q[1],
            p[2] * q[0] - p[0] * q[2],
            p[0] * q[1] - p[1] * q[0],
        ]);
        // The mean of the three offsets treats the corners alike.
        let offset = [a, b, c].map(|corner| n[0] * corner[0] + n[1] * corner[1] + n[2] * corner[2]);
        [n[0], n[1], n[2], (offset[0] + offset[1] + offset[2]) / 3.0]
    }

    /// The hierarchy over all triangles; turned round, it finds where rays enter the body.
    pub(crate) fn hierarchy(&self, turned: bool) -> Hierarchy {
        let corners = self
            .triangles
            .iter()
            .map(|&[a, b, c]| if turned { [a, c, b] } else { [a, b, c] })
            .collect();
        let vertices = self
            .mesh
            .vertices
            .iter()
            .map(|vertex| vertex.to_array())
            .collect();
        Hierarchy::new(&Triangles { vertices, corners })
    }
}

/// Every wall must have a name of its own and facets, or its numbers could not be asked for or would mean nothing.
fn check_walls(mesh: &Mesh, areas: &[f64]) -> Result<(), EnclosureError> {
    let mut names = BTreeSet::new();
    for (name, &area) in mesh.walls.iter().zip(areas) {
        if name.is_empty() || !names.insert(name) {
            return Err(EnclosureError::Name { name: name.clone() });
        }
        if !(area > 0.0) {
            return Err(EnclosureError::NoFacets { wall: name.clone() });
        }
    }
    Ok(())
}
