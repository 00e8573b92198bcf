//! A tree of boxes over the triangles of a closed mesh: finds the next strike of a ray that starts inside or on it.
//!
//! Three things are particular to light in a cavity. A ray is stopped only by triangles that it meets from inside, so a
//! child of which every triangle faces away is skipped like one whose box is missed. A ray that starts on a triangle
//! never tests that triangle. And no ray may slip through an edge: `triangle` says why none does.
//!
//! Boxes and cones are in `f32`, in coordinates that are centred on the mesh and scaled to about one, and always too
//! wide, never too narrow; triangles are tested in `f64`. So the answer is that of testing all triangles in turn.

#![expect(
    clippy::inline_always,
    reason = "so that all is compiled for the caller's instruction set"
)]
#![expect(
    clippy::needless_bitwise_bool,
    reason = "one branch, or none, where the outcome cannot be predicted"
)]

mod build;
mod nearest;
mod node;
mod split;
#[cfg(test)]
mod tests;
mod traverse;
mod triangle;

pub(crate) use traverse::Stack;

use node::Node;
use triangle::{Facet, Ray};

/// Triangles on shared vertices, in metres, counter-clockwise seen from outside the enclosure.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct Triangles {
    /// Positions in metres.
    pub(crate) vertices: Vec<[f64; 3]>,
    /// The three vertices of each triangle; every index must exist.
    pub(crate) corners: Vec<[u32; 3]>,
}

impl Triangles {
    /// More triangles than this cannot be numbered; whoever makes the mesh refuses it.
    pub(crate) const AT_MOST: usize = 1 << 28;
}

/// Where a ray strikes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Hit {
    /// Distance in metres, never negative.
    pub(crate) t: f64,
    /// The triangle's index in [`Triangles::corners`].
    pub(crate) triangle: u32,
}

/// Finds the next strike among many triangles.
#[derive(Clone, Debug)]
pub(crate) struct Hierarchy {
    /// Node 0 is the root.
    nodes: Vec<Node>,
    /// In the order of the leaves.
    facets: Vec<Facet>,
    /// In the order in which the leaves need them.
    vertices: Vec<[f64; 3]>,
    frame: Frame,
    behind: f64,
}

/// The centred and scaled coordinates of the boxes.
#[derive(Clone, Copy, Debug)]
struct Frame {
    /// Middle of the mesh's box in metres.
    centre: [f64; 3],
    /// A power of two in m⁻¹ that brings the mesh's box into [-1, 1] in every axis.
    scale: f64,
}

impl Hierarchy {
    /// Standing on no triangle.
    pub(crate) const NOWHERE: u32 = u32::MAX;

    /// Distance behind the ray's start that still counts as a strike at zero, as a part of the largest coordinate.
    ///
    /// A position carries a rounding error of a few 2⁻⁵³ of the largest coordinate, so a ray that starts on one
    /// triangle, close to another, may start just outside that one. 2⁻⁴⁴ leaves room for some hundred such errors. It
    /// must not be large: beside a concave edge the triangle round the corner lies behind a ray that rightly leaves
    /// it, and a start nearer to the edge than this is booked there by mistake, which befalls a share
    /// of strikes of the same order.
    const BEHIND: f64 = 1.0 / (1_u64 << 44) as f64;

    /// Builds the hierarchy; the same triangles always give the same one.
    ///
    /// There may be [`Triangles::AT_MOST`] triangles, and coordinates must be finite.
    ///
    /// # Panics
    ///
    /// If a triangle names a vertex that does not exist.
    pub(crate) fn new(triangles: &Triangles) -> Self {
        build::hierarchy(triangles, build::FREE_DEPTH)
    }

    /// Finds the next strike of the ray from `origin` in metres along `direction`.
    ///
    /// Only triangles whose outward normal has a positive component along the direction count, and `standing`, the
    /// triangle that the ray has just left ([`Self::NOWHERE`] if none), never does. The nearest strike is taken, of
    /// equally near ones that of the smallest index. The direction has unit length, and the origin lies inside the mesh
    /// or on it, both but for rounding.
    ///
    /// Many rays are better served by [`Self::next_with`], since a new stack for each takes time.
    #[inline(always)]
    pub(crate) fn next(&self, origin: [f64; 3], direction: [f64; 3], standing: u32) -> Option<Hit> {
        self.next_with(&mut Stack::new(), origin, direction, standing)
    }

    /// Memory in bytes.
    #[cfg(test)]
    pub(crate) fn bytes(&self) -> usize {
        size_of_val(self.nodes.as_slice())
            + size_of_val(self.facets.as_slice())
            + size_of_val(self.vertices.as_slice())
    }

    /// Positions of a facet's corners.
    #[inline(always)]
    fn corners(&self, facet: &Facet) -> [&[f64; 3]; 3] {
        facet.corners.map(|corner| &self.vertices[corner as usize])
    }
}
