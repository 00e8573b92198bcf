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
        leaving: Hierarchy,
        entering: Hierarchy,
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
                leaving: solid.hierarchy(false),
                entering: solid.hierarchy(true),
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
            Self::Facets { leaving, slack, .. } => {
                self.is_within(point) || leaving.nearest_triangle(point).0 <= *slack
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
            leaving.next(point, direction, u32::MAX),
            entering.next(point, direction, u32::MAX),
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
        inside: Box<Inside>,
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
                inside: Box::new(Inside::new(solid)),
            };
        }
        let apex = [0, 1, 2].map(|axis| 0.5 * (lower[axis] + upper[axis]));
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
