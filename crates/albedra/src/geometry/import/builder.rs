//! Gathers vertices, facets and walls of a file, and makes a mesh of those that count.

use std::borrow::Cow;
use std::collections::BTreeMap;

use glam::DVec3;

use super::{ImportError, MeshFormat, Place, Unit};
use crate::geometry::Mesh;

/// Name of the wall of facets that belong to none.
pub(super) const NAMELESS: &[u8] = b"mesh";

/// A mesh in the making.
///
/// Every vertex and every corner takes at least a byte of a file of fewer than 2³² bytes, so their numbers fit a `u32`.
pub(super) struct Builder<'a> {
    format: MeshFormat,
    unit: Unit,
    mesh: Mesh,
    names: BTreeMap<Cow<'a, str>, u32>,
    /// The largest vertex index and where it was met.
    furthest: Option<(u32, Place)>,
}

impl<'a> Builder<'a> {
    pub(super) fn new(format: MeshFormat, unit: Unit) -> Self {
        let mesh = Mesh {
            starts: vec![0],
            ..Mesh::default()
        };
        Self {
            format,
            unit,
            mesh,
            names: BTreeMap::new(),
            furthest: None,
        }
    }

    /// Number of vertices up to now.
    pub(super) fn vertices(&self) -> usize {
        self.mesh.vertices.len()
    }

    /// A position in metres from finite coordinates in the file's unit; −0 becomes +0.
    pub(super) fn position(
        &self,
        coordinates: [f64; 3],
        place: Place,
    ) -> Result<DVec3, ImportError> {
        let position = DVec3::from(coordinates.map(|length| self.unit.to_metres(length) + 0.0));
        if position.is_finite() {
            return Ok(position);
        }
        let found = format!("{coordinates:?} in {}", self.unit);
        Err(ImportError::NotFinite {
            format: self.format,
            place,
            found,
        })
    }

    /// Adds a vertex and gives its index.
    pub(super) fn vertex(&mut self, position: DVec3) -> u32 {
        self.mesh.vertices.push(position);
        number(self.mesh.vertices.len() - 1)
    }

    /// Index of the wall of this name; bytes that are not UTF-8 are replaced.
    pub(super) fn wall(&mut self, name: &'a [u8]) -> u32 {
        let new = number(self.names.len());
        *self
            .names
            .entry(String::from_utf8_lossy(name))
            .or_insert(new)
    }

    /// Adds a corner, counted from 0, to the facet in the making; its vertex may follow later in the file.
    pub(super) fn corner(&mut self, vertex: u32, place: Place) {
        if self.furthest.is_none_or(|(furthest, _)| vertex > furthest) {
            self.furthest = Some((vertex, place));
        }
        self.mesh.corners.push(vertex);
    }

    /// Ends the facet in the making and adds it to a wall.
    pub(super) fn facet(&mut self, wall: u32, place: Place) -> Result<(), ImportError> {
        let end = number(self.mesh.corners.len());
        let corners = (end - self.mesh.starts.last().copied().unwrap_or(0)) as usize;
        if corners < 3 {
            return Err(ImportError::FewCorners {
                format: self.format,
                place,
                corners,
            });
        }
        self.mesh.starts.push(end);
        self.mesh.facet_walls.push(wall);
        Ok(())
    }

    /// The mesh without vertices and walls that no facet uses, in the order of the file.
    pub(super) fn finish(self) -> Result<Mesh, ImportError> {
        let Self {
            format,
            mut mesh,
            names,
            furthest,
            ..
        } = self;
        let Some((index, place)) = furthest else {
            return Err(ImportError::Empty { format });
        };
        let vertices = mesh.vertices.len();
        if index as usize >= vertices {
            let index = i64::from(index) + i64::from(format == MeshFormat::Obj);
            return Err(ImportError::MissingVertex {
                format,
                place,
                index,
                vertices,
            });
        }
        let mut walls = vec![String::new(); names.len()];
        for (name, wall) in names {
            walls[wall as usize] = name.into_owned();
        }
        mesh.walls = walls;
        drop_unused(&mut mesh.vertices, &mut mesh.corners);
        drop_unused(&mut mesh.walls, &mut mesh.facet_walls);
        Ok(mesh)
    }
}

/// Drops items that no index refers to and renumbers the indices.
fn drop_unused<T>(items: &mut Vec<T>, indices: &mut [u32]) {
    let mut renumbered = vec![u32::MAX; items.len()];
    for &index in &*indices {
        renumbered[index as usize] = 0;
    }
    for (kept, new) in (0..).zip(renumbered.iter_mut().filter(|new| **new == 0)) {
        *new = kept;
    }
    let mut old = renumbered.iter();
    items.retain(|_| old.next() != Some(&u32::MAX));
    for index in indices {
        *index = renumbered[*index as usize];
    }
}

fn number(count: usize) -> u32 {
    u32::try_from(count).expect("files have fewer than 2^32 bytes")
}

#[cfg(test)]
mod tests {
    use super::*;

    const PLACE: Place = Place::Line(1);

    fn builder<'a>() -> Builder<'a> {
        Builder::new(MeshFormat::Ply, Unit::Metre)
    }

    #[test]
    fn unused_vertices_and_walls_are_dropped_in_order() {
        let mut builder = builder();
        for x in 0..6 {
            builder.vertex(DVec3::splat(f64::from(x)));
        }
        for name in [&b"empty"[..], b"z", b"", b"a"] {
            builder.wall(name);
        }
        for (corners, wall) in [([5, 1, 4], 3), ([1, 5, 2], 1)] {
            for corner in corners {
                builder.corner(corner, PLACE);
            }
            builder.facet(wall, PLACE).unwrap();
        }
        let mesh = builder.finish().unwrap();
        assert_eq!(mesh.vertices, [1.0, 2.0, 4.0, 5.0].map(DVec3::splat));
        assert_eq!(mesh.corners, [3, 0, 2, 0, 3, 1]);
        assert_eq!(mesh.starts, [0, 3, 6]);
        assert_eq!(mesh.walls, ["z", "a"]);
        assert_eq!(mesh.facet_walls, [1, 0]);
    }

    #[test]
    fn names_that_read_alike_are_one_wall() {
        let mut builder = builder();
        assert_eq!(builder.wall(b"W\xe4nde"), 0);
        assert_eq!(builder.wall(b"W\xf6nde"), 0);
        assert_eq!(builder.wall(b"W"), 1);
    }

    #[test]
    fn lengths_that_overflow_in_metres_are_refused_and_minus_zero_is_zero() {
        let builder = Builder::new(MeshFormat::Stl, Unit::Foot);
        assert!(matches!(
            builder.position([0.0, f64::MAX, 0.0], PLACE),
            Err(ImportError::NotFinite { .. })
        ));
        assert_eq!(
            builder
                .position([-0.0, 1.0, 0.0], PLACE)
                .unwrap()
                .x
                .to_bits(),
            0
        );
    }

    #[test]
    fn facets_need_corners_and_files_need_facets() {
        let format = MeshFormat::Ply;
        assert_eq!(builder().finish(), Err(ImportError::Empty { format }));
        let mut two = builder();
        two.corner(0, PLACE);
        two.corner(1, PLACE);
        assert_eq!(
            two.facet(0, PLACE),
            Err(ImportError::FewCorners {
                format,
                place: PLACE,
                corners: 2
            })
        );
    }
}
