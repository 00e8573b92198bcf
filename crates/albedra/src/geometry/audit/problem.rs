//! What can be wrong with a mesh, and how to repair it.

use std::fmt;

use glam::DVec3;

use super::limits::{DEGENERATE, FARTHEST, NON_PLANAR};

/// One thing that is wrong with a mesh.
///
/// Facets and vertices are counted from zero; positions are in metres. `Display` says what is wrong and how to
/// repair it, in one line.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum Problem {
    /// The mesh has no facets at all.
    NoFacets,
    /// `starts`, `corners` and `facet_walls` do not describe the same facets.
    ListsDoNotFit {
        /// Entries of `facet_walls`.
        facets: usize,
        /// Entries of `starts`.
        starts: usize,
        /// Entries of `corners`.
        corners: usize,
    },
    /// A facet names a vertex that does not exist.
    VertexOutOfRange {
        /// The facet.
        facet: usize,
        /// The index that it names.
        vertex: u32,
        /// Number of vertices.
        vertices: usize,
    },
    /// A facet names a wall that does not exist.
    WallOutOfRange {
        /// The facet.
        facet: usize,
        /// The index that it names.
        wall: u32,
        /// Number of walls.
        walls: usize,
    },
    /// A vertex is not a number, infinite, or farther than 10³⁰ m from the origin.
    PositionOutOfRange {
        /// The vertex.
        vertex: usize,
        /// Its position in metres.
        position: DVec3,
    },
    /// All facets together have a negative volume: they face inward.
    InsideOut {
        /// The volume in m³.
        volume: f64,
    },
    /// The facets make several bodies that share no edge.
    SeveralBodies {
        /// The first facet of each body, in rising order.
        facets: Vec<usize>,
        /// A corner of each of these facets, in metres.
        positions: Vec<DVec3>,
    },
    /// A facet has fewer than three corners.
    TooFewCorners {
        /// The facet.
        facet: usize,
        /// Number of corners.
        corners: usize,
    },
    /// A facet visits the same position twice.
    RepeatedCorner {
        /// The facet.
        facet: usize,
        /// The position in metres.
        position: DVec3,
    },
    /// A facet has no area: at most 10⁻¹² of the square of its extent.
    NoArea {
        /// The facet.
        facet: usize,
        /// Its first corner in metres.
        position: DVec3,
        /// Its area over the square of its extent.
        ratio: f64,
    },
    /// The corners of a polygon leave its plane by more than 10⁻⁶ of its extent.
    NotPlanar {
        /// The facet.
        facet: usize,
        /// The corner that is farthest away, in metres.
        position: DVec3,
        /// Its distance over the facet's extent.
        deviation: f64,
    },
    /// The outline of a polygon crosses itself.
    TwistedFacet {
        /// The facet.
        facet: usize,
        /// A corner or point near the crossing, in metres.
        position: DVec3,
    },
    /// A polygon has too many inward corners to be cut into triangles within bounds, so it was not checked.
    TooManyCorners {
        /// The facet.
        facet: usize,
        /// Number of corners.
        corners: usize,
    },
    /// An edge belongs to one facet only, so light could leak out there.
    OpenEdge {
        /// The facet.
        facet: usize,
        /// Start of the edge in metres.
        from: DVec3,
        /// End of the edge in metres.
        to: DVec3,
    },
    /// An edge belongs to more than two facets.
    NonManifoldEdge {
        /// The facets, in rising order.
        facets: Vec<usize>,
        /// Start of the edge in metres.
        from: DVec3,
        /// End of the edge in metres.
        to: DVec3,
    },
    /// Two neighbours run their shared edge in the same direction: one of them is turned over.
    InconsistentFacets {
        /// The two facets, in rising order.
        facets: [usize; 2],
        /// Start of the edge in metres.
        from: DVec3,
        /// End of the edge in metres.
        to: DVec3,
    },
    /// Two facets cross, overlap or fold onto each other.
    Intersection {
        /// The two facets, in rising order.
        facets: [usize; 2],
        /// A point that they share, in metres.
        position: DVec3,
    },
    /// So many facets lie in one place that the search for intersections was given up; some may be missing.
    TooManyOverlaps {
        /// Pairs of triangles that were looked at before.
        pairs: u64,
    },
}

/// Bodies that a message names.
const BODIES_SHOWN: usize = 8;

impl fmt::Display for Problem {
    #[expect(
        clippy::too_many_lines,
        reason = "a sentence for each variant, and the compiler checks that none lacks one"
    )]
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::NoFacets => write!(
                f,
                "the mesh has no facets; check that the file holds polygons"
            ),
            Self::ListsDoNotFit {
                facets,
                starts,
                corners,
            } => write!(
                f,
                "{facets} facets need {} rising starts within {corners} corners, got {starts} starts; \
                 add facets by push_facet",
                facets.saturating_add(1)
            ),
            Self::VertexOutOfRange {
                facet,
                vertex,
                vertices,
            } => write!(
                f,
                "facet {facet} names vertex {vertex}, but there are {vertices}, counted from 0; correct the index"
            ),
            Self::WallOutOfRange { facet, wall, walls } => {
                write!(
                    f,
                    "facet {facet} names wall {wall}, but there are {walls}, counted from 0; correct the index"
                )
            }
            Self::PositionOutOfRange { vertex, position } => write!(
                f,
                "vertex {vertex} must lie within {FARTHEST:e} m of the origin, got {}; correct it",
                Metres(*position)
            ),
            Self::InsideOut { volume } => {
                write!(
                    f,
                    "the facets face inward, the volume is {} m³; reverse all facets",
                    Short(*volume)
                )
            }
            Self::SeveralBodies { facets, positions } => {
                write!(f, "there are {} bodies that share no edge;", facets.len())?;
                for (facet, position) in facets.iter().zip(positions).take(BODIES_SHOWN) {
                    write!(
                        f,
                        " one begins with facet {facet} at {};",
                        Metres(*position)
                    )?;
                }
                write!(f, " keep one, or join them")
            }
            Self::TooManyOverlaps { pairs } => write!(
                f,
                "too many facets overlap to check all, {pairs} pairs were looked at; repair what is listed and look \
                 again, or split long narrow facets"
            ),
            Self::TooFewCorners { facet, corners } => {
                write!(
                    f,
                    "facet {facet} must have at least 3 corners, got {corners}; remove it"
                )
            }
            Self::RepeatedCorner { facet, position } => write!(
                f,
                "facet {facet} visits {} more than once; remove the corner, or split the facet there",
                Metres(*position)
            ),
            Self::NoArea {
                facet,
                position,
                ratio,
            } => write!(
                f,
                "facet {facet} at {} must have an area above {DEGENERATE:e} of its extent squared, got {}; \
                 remove it and join its neighbours",
                Metres(*position),
                Short(*ratio)
            ),
            Self::NotPlanar {
                facet,
                position,
                deviation,
            } => write!(
                f,
                "facet {facet} must be planar to {NON_PLANAR:e} of its extent, got {} at {}; split it into triangles",
                Short(*deviation),
                Metres(*position)
            ),
            Self::TwistedFacet { facet, position } => write!(
                f,
                "the outline of facet {facet} crosses itself near {}; put its corners in order",
                Metres(*position)
            ),
            Self::TooManyCorners { facet, corners } => write!(
                f,
                "facet {facet} has {corners} corners, too many to be checked; split it into smaller polygons"
            ),
            Self::OpenEdge { facet, from, to } => write!(
                f,
                "the edge of facet {facet} from {} to {} belongs to no other facet; add what is missing, or make the \
                 corners of its neighbour equal",
                Metres(*from),
                Metres(*to)
            ),
            Self::NonManifoldEdge { facets, from, to } => write!(
                f,
                "the edge from {} to {} belongs to {} facets, {}; leave two of them",
                Metres(*from),
                Metres(*to),
                facets.len(),
                List(facets)
            ),
            Self::InconsistentFacets {
                facets: [first, second],
                from,
                to,
            } => write!(
                f,
                "facets {first} and {second} both run from {} to {}; reverse one of them",
                Metres(*from),
                Metres(*to)
            ),
            Self::Intersection {
                facets: [first, second],
                position,
            } => write!(
                f,
                "facets {first} and {second} cross or overlap at {}; cut them along their common line, or remove one",
                Metres(*position)
            ),
        }
    }
}

/// The first few indices of a list.
struct List<'a>(&'a [usize]);

impl fmt::Display for List<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        const SHOWN: usize = 8; // keeps a line readable; the list itself holds all
        for (place, index) in self.0.iter().take(SHOWN).enumerate() {
            write!(f, "{}{index}", if place == 0 { "" } else { ", " })?;
        }
        if self.0.len() > SHOWN {
            write!(f, " and {} more", self.0.len() - SHOWN)
        } else {
            Ok(())
        }
    }
}

/// A position in metres to six digits.
struct Metres(DVec3);

impl fmt::Display for Metres {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "({}, {}, {}) m",
            Short(self.0.x),
            Short(self.0.y),
            Short(self.0.z)
        )
    }
}

/// A number to six digits, without trailing zeros.
pub(crate) struct Short(pub(crate) f64);

impl fmt::Display for Short {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let rounded: f64 = format!("{:.5e}", self.0).parse().unwrap_or(self.0);
        let size = rounded.abs();
        if size == 0.0 || (1e-4..1e7).contains(&size) || !size.is_finite() {
            write!(f, "{}", rounded + 0.0)
        } else {
            write!(f, "{rounded:e}")
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_hold_indices_positions_and_repair() {
        let edge = Problem::OpenEdge {
            facet: 3,
            from: DVec3::new(0.1 + 0.2, -0.0, 1e-9),
            to: DVec3::new(1.0, 2.5, 1e8),
        };
        assert_eq!(
            edge.to_string(),
            "the edge of facet 3 from (0.3, 0, 1e-9) m to (1, 2.5, 1e8) m belongs to no other facet; add what is \
             missing, or make the corners of its neighbour equal"
        );
        let fan = Problem::NonManifoldEdge {
            facets: (0..10).collect(),
            from: DVec3::ZERO,
            to: DVec3::X,
        };
        assert_eq!(
            fan.to_string(),
            "the edge from (0, 0, 0) m to (1, 0, 0) m belongs to 10 facets, 0, 1, 2, 3, 4, 5, 6, 7 and 2 more; leave \
             two of them"
        );
        let lost = Problem::PositionOutOfRange {
            vertex: 1,
            position: DVec3::new(f64::NAN, f64::INFINITY, 0.0),
        };
        assert_eq!(
            lost.to_string(),
            "vertex 1 must lie within 1e30 m of the origin, got (NaN, inf, 0) m; correct it"
        );
    }
}
