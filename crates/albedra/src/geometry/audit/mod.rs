//! What is wrong with a mesh: all problems at once, each with its place and a way to repair it.

mod bodies;
mod boxes;
mod contact;
mod crossings;
mod ears;
mod edges;
mod exact;
mod facets;
#[cfg(test)]
pub(crate) mod fixtures;
mod limits;
mod problem;
mod structure;
mod table;
mod weld;

pub use problem::Problem;
pub(crate) use problem::Short;

use super::Mesh;

/// Size of a mesh and everything that keeps it from being one closed body.
///
/// `Display` gives a short table.
#[derive(Clone, Debug, Default, PartialEq)]
#[non_exhaustive]
pub struct Audit {
    /// Volume V in m³; negative if the facets face inward, of little meaning if edges are open, and 0 if indices or
    /// positions are out of range.
    pub volume: f64,
    /// Area S of all facets in m².
    pub area: f64,
    /// Mean chord 4V/S in metres; 0 without an area.
    pub mean_chord: f64,
    /// Number of facets.
    pub facets: usize,
    /// The first 1000 problems: lists and positions, whole body, facets, edges, intersections, each by rising facet.
    pub problems: Vec<Problem>,
    /// Number of problems beyond those.
    pub more: usize,
}

impl Audit {
    /// Whether the mesh is one closed body that faces outward, without any problem.
    pub fn is_sound(&self) -> bool {
        self.problems.is_empty() && self.more == 0
    }
}

impl Mesh {
    /// Measures the mesh and looks for everything that keeps it from being one closed body.
    ///
    /// Corners at exactly the same position count as one vertex, so that meshes from files that repeat vertices are
    /// judged right. Intersections are told exactly from the given positions: neighbours are never reported, and
    /// surfaces that pass through each other always are, unless a [`Problem::TooManyOverlaps`] says that the search was
    /// given up. The time is bounded for any mesh. Facets that touch at a single point are sound. If indices or
    /// positions are out of range, nothing else is looked at.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Mesh, Problem};
    ///
    /// let mut mesh = Mesh::default();
    /// let wall = mesh.wall("all");
    /// mesh.vertices = vec![[0., 0., 0.].into(), [1., 0., 0.].into(), [0., 1., 0.].into(), [0., 0., 1.].into()];
    /// for corners in [[0, 2, 1], [0, 1, 3], [1, 2, 3]] {
    ///     mesh.push_facet(&corners, wall);
    /// }
    /// let open = mesh.audit();
    /// assert!(matches!(open.problems[0], Problem::OpenEdge { facet: 0, .. }));
    ///
    /// mesh.push_facet(&[2, 0, 3], wall);
    /// assert!(mesh.audit().is_sound());
    /// assert_eq!(mesh.audit().volume, 1.0 / 6.0);
    /// ```
    pub fn audit(&self) -> Audit {
        let mut found = Found::default();
        let mut audit = Audit {
            facets: self.facets(),
            ..Audit::default()
        };
        if structure::check(self, &mut found) {
            (audit.volume, audit.area) = bodies::measure(self);
            audit.mean_chord = if audit.area > 0.0 {
                4.0 * audit.volume / audit.area
            } else {
                0.0
            };
            let welded = weld::weld(&self.vertices);
            let edges = edges::Edges::new(self, &welded);
            let faults = edges.problems(self);
            bodies::check(self, &edges, faults.is_empty(), audit.volume, &mut found);
            let normals = facets::check(self, &welded, &mut found);
            found.extend(faults);
            crossings::check(self, &welded, &normals, &edges, &mut found);
        }
        (audit.problems, audit.more) = (found.kept, found.more);
        audit
    }
}

/// Problems found so far: the first ones, and the number of the rest.
#[derive(Debug, Default)]
struct Found {
    kept: Vec<Problem>,
    more: usize,
}

impl Found {
    fn push(&mut self, problem: Problem) {
        if self.kept.len() < limits::KEPT {
            self.kept.push(problem);
        } else {
            self.more += 1;
        }
    }

    fn extend(&mut self, problems: impl IntoIterator<Item = Problem>) {
        for problem in problems {
            self.push(problem);
        }
    }

    fn is_empty(&self) -> bool {
        self.kept.is_empty()
    }
}
