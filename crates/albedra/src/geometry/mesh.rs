//! Facets that share vertices, and the wall that each belongs to.

use glam::DVec3;

/// Polygonal facets on shared vertices, grouped into named walls.
///
/// Facets are counter-clockwise seen from outside the enclosure. Positions are in metres. A mesh is plain data: what is
/// wrong with it is found by an audit.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Mesh {
    /// Positions in metres.
    pub vertices: Vec<DVec3>,
    /// Vertex indices of all facets, one facet after another.
    pub corners: Vec<u32>,
    /// Facet `i` has the corners `starts[i] .. starts[i + 1]`; one entry more than there are facets (or none at all).
    pub starts: Vec<u32>,
    /// The wall of each facet, an index into `walls`.
    pub facet_walls: Vec<u32>,
    /// Names of the walls.
    pub walls: Vec<String>,
}

impl Mesh {
    /// Number of facets.
    pub fn facets(&self) -> usize {
        self.facet_walls.len()
    }

    /// Vertex indices of a facet, in order.
    ///
    /// # Panics
    ///
    /// If there is no such facet.
    pub fn corners_of(&self, facet: usize) -> &[u32] {
        &self.corners[self.starts[facet] as usize..self.starts[facet + 1] as usize]
    }

    /// Positions of a facet's corners, in order.
    pub fn positions_of(&self, facet: usize) -> impl ExactSizeIterator<Item = DVec3> + Clone + '_ {
        self.corners_of(facet)
            .iter()
            .map(|&corner| self.vertices[corner as usize])
    }

    /// Adds a facet to a wall.
    ///
    /// # Panics
    ///
    /// If the mesh has 2³² corners or more.
    pub fn push_facet(&mut self, corners: &[u32], wall: u32) {
        if self.starts.is_empty() {
            self.starts.push(0);
        }
        self.corners.extend_from_slice(corners);
        self.starts
            .push(u32::try_from(self.corners.len()).expect("fewer than 2^32 corners"));
        self.facet_walls.push(wall);
    }

    /// Index of the wall of this name, added if it is new.
    ///
    /// # Panics
    ///
    /// If the mesh has 2³² walls or more.
    pub fn wall(&mut self, name: &str) -> u32 {
        let found = self
            .walls
            .iter()
            .position(|wall| wall == name)
            .unwrap_or_else(|| {
                self.walls.push(name.to_owned());
                self.walls.len() - 1
            });
        u32::try_from(found).expect("fewer than 2^32 walls")
    }
}
