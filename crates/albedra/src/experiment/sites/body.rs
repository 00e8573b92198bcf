//! The inside of a body.

use super::{Hierarchy, Lane, Site, Solid, Spot};
use crate::engine::NOWHERE;

/// Distance from the boundary, as a share of the diagonal, within which a point counts as inside.
const ON_BOUNDARY: f64 = 1e-9;

/// Tells whether a point is inside.
#[derive(Debug)]
pub(super) enum Inside {
    /// Planes n·x = offset with outward normals.
    Convex { planes: Vec<[f64; 4]>, slack: f64 },
    /// A hierarchy of facets that are met from inside, and one of those met from outside.
    Facets {
        bounds: [[f64; 3]; 2],
        leaving: Box<Hierarchy>,
        entering: Box<Hierarchy>,
        slack: f64,
    },
}

impl Inside {
    pub(super) fn new(solid: &Solid) -> Self {
        let slack = ON_BOUNDARY * solid.diagonal;
        match &solid.convex {
            Some(planes) => {
                let planes = planes
                    .iter()
                    .map(|p| [p.normal.x, p.normal.y, p.normal.z, p.offset])
                    .collect();
                Self::Convex { planes, slack }
            }
            None => Self::Facets {
                bounds: solid.bounds,
                leaving: Box::new(solid.hierarchy(false)),
                entering: Box::new(solid.hierarchy(true)),
                slack,
            },
        }
    }

    /// Whether a point is inside or on the boundary.
    pub(super) fn holds(&self, point: [f64; 3]) -> bool {
        if !point.iter().all(|x| x.is_finite()) {
            return false;
        }
        match self {
            Self::Convex { planes, slack } => planes.iter().all(|[a, b, c, offset]| {
                a * point[0] + b * point[1] + c * point[2] - offset <= *slack
            }),
            Self::Facets {
                bounds: [lower, upper],
                leaving,
                slack,
                ..
            } => {
                (0..3).all(|i| lower[i] - slack <= point[i] && point[i] <= upper[i] + slack)
                    && (self.is_within(point) || leaving.nearest_triangle(point).0 <= *slack)
            }
        }
    }

    /// Whether a ray from the point meets the boundary first from inside.
    fn is_within(&self, point: [f64; 3]) -> bool {
        let Self::Facets {
            leaving, entering, ..
        } = self
        else {
            return self.holds(point);
        };
        // Any direction will do; this one is along no axis.
        let direction = crate::source::unit([0.548, 0.307, 0.778]);
        match (
            leaving.next(point, direction, Hierarchy::NOWHERE),
            entering.next(point, direction, Hierarchy::NOWHERE),
        ) {
            (Some(out), Some(into)) => out.t < into.t,
            (out, _) => out.is_some(),
        }
    }
}

/// The whole volume, uniformly.
#[derive(Debug)]
pub(super) enum VolumeSite {
    /// Tetrahedra from a point inside to every triangle, with the running sum of their volumes' shares.
    Convex {
        apex: [f64; 3],
        triangles: Vec<[[f64; 3]; 3]>,
        shares: Vec<f64>,
    },
    /// The bounding box, with a test.
    Box {
        lower: [f64; 3],
        upper: [f64; 3],
        inside: Inside,
    },
}

/// Tries until a point inside is found: enough for a body that fills 1e-4 of its bounding box.
const TRIES: u32 = 1_000_000;

impl VolumeSite {
    pub(super) fn new(solid: &Solid) -> Self {
        let [lower, upper] = solid.bounds;
        if solid.convex.is_none() {
            return Self::Box {
                lower,
                upper,
                inside: Inside::new(solid),
            };
        }
        // The mean of the vertices is inside a convex body; the middle of its bounding box need not be.
        let vertices = &solid.mesh.vertices;
        let sum = vertices
            .iter()
            .fold(glam::DVec3::ZERO, |sum, vertex| sum + *vertex);
        let apex = (sum / vertices.len() as f64).to_array();
        let triangles: Vec<_> = (0..solid.triangles.len())
            .map(|triangle| solid.corners(triangle))
            .collect();
        let mut volume = 0.0;
        let mut shares: Vec<f64> = triangles
            .iter()
            .map(|corners| {
                volume += tetrahedron(apex, *corners);
                volume
            })
            .collect();
        for share in &mut shares {
            *share /= volume;
        }
        Self::Convex {
            apex,
            triangles,
            shares,
        }
    }
}

/// Volume of a tetrahedron, not negative.
fn tetrahedron(apex: [f64; 3], corners: [[f64; 3]; 3]) -> f64 {
    let [a, b, c] = corners.map(|corner| [0, 1, 2].map(|axis| corner[axis] - apex[axis]));
    let cross = [
        b[1] * c[2] - b[2] * c[1],
        b[2] * c[0] - b[0] * c[2],
        b[0] * c[1] - b[1] * c[0],
    ];
    ((a[0] * cross[0] + a[1] * cross[1] + a[2] * cross[2]) / 6.0).abs()
}

impl Site for VolumeSite {
    fn spot(&self, draw: &mut Lane<'_>) -> Option<Spot> {
        match self {
            Self::Convex {
                apex,
                triangles,
                shares,
            } => {
                let share = draw.unit();
                let chosen = shares.partition_point(|&upper| upper <= share);
                let corners = triangles.get(chosen).or(triangles.last())?;
                // Three sorted uniform numbers cut [0, 1] into uniform barycentric coordinates.
                let mut cuts = [draw.unit(), draw.unit(), draw.unit()];
                for (i, j) in [(0, 1), (1, 2), (0, 1)] {
                    if cuts[i] > cuts[j] {
                        cuts.swap(i, j);
                    }
                }
                let weights = [cuts[0], cuts[1] - cuts[0], cuts[2] - cuts[1], 1.0 - cuts[2]];
                let at = [0, 1, 2].map(|axis| {
                    weights[0] * corners[0][axis]
                        + weights[1] * corners[1][axis]
                        + weights[2] * corners[2][axis]
                        + weights[3] * apex[axis]
                });
                Some((at, NOWHERE, [0.0; 3]))
            }
            Self::Box {
                lower,
                upper,
                inside,
            } => {
                for _ in 0..TRIES {
                    let at = [0, 1, 2]
                        .map(|axis| lower[axis] + draw.unit() * (upper[axis] - lower[axis]));
                    if inside.is_within(at) {
                        return Some((at, NOWHERE, [0.0; 3]));
                    }
                }
                None
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::enclosure::Enclosure;
    use crate::engine::Streams;
    use crate::geometry::Mesh;

    /// A corner of the unit cube: the middle of its bounding box lies outside.
    fn corner() -> Mesh {
        let mut mesh = Mesh::default();
        let wall = mesh.wall("mesh");
        mesh.vertices = [[0.0; 3], [1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]
            .map(glam::DVec3::from_array)
            .to_vec();
        for facet in [[0, 2, 1], [0, 1, 3], [0, 3, 2], [1, 2, 3]] {
            mesh.push_facet(&facet, wall);
        }
        mesh
    }

    #[test]
    fn volume_of_a_tetrahedron_is_filled_evenly() {
        let enclosure = Enclosure::from_mesh(corner()).expect("sound");
        // Both kinds of site must agree.
        let convex = VolumeSite::new(&enclosure.solid);
        let [lower, upper] = enclosure.solid.bounds;
        let inside = Inside::new(&enclosure.solid);
        let tested = VolumeSite::Box {
            lower,
            upper,
            inside,
        };
        let mut streams = Streams::new();
        for site in [convex, tested] {
            let photons = 20_000_u32;
            let mut sums = [0.0; 3];
            for photon in 0..photons {
                streams.seed(0, 3, u64::from(photon));
                let (at, _, _) = site.spot(&mut streams.lane(0)).expect("found");
                assert!(at.iter().all(|&x| x >= 0.0) && at[0] + at[1] + at[2] <= 1.0 + 1e-12);
                for axis in 0..3 {
                    sums[axis] += at[axis];
                }
            }
            // Each coordinate has the mean 1/4 and the variance 3/80 (Dirichlet law with four ones).
            for sum in sums {
                let n = f64::from(photons);
                let zeta = (sum / n - 0.25) / (3.0 / 80.0 / n).sqrt();
                assert!(zeta.abs() < 4.5, "{zeta}");
            }
        }
    }
}
