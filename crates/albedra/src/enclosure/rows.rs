//! The disjoint pieces of the boundary.

use super::{Enclosure, Finish};
use crate::coating::Coating;
use crate::geometry::Frame;

/// What is known of a wall.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct WallView {
    /// Its name.
    pub name: String,
    /// Area in m² with the regions on it.
    pub area: f64,
    /// Its coating, if it has one.
    pub coating: Option<Coating>,
    /// Whether the whole wall is an opening.
    pub is_opening: bool,
    /// Where its (u, v) start and run, if it is planar.
    pub frame: Option<Frame>,
    /// Names of the regions and openings on it, in the order in which they were painted.
    pub regions: Vec<String>,
}

/// A disjoint piece of the boundary: a wall without its regions, or the visible part of a region.
#[derive(Clone, Debug)]
pub(crate) struct Piece<'a> {
    pub(crate) name: &'a str,
    pub(crate) wall: usize,
    /// Index of the region, if it is one.
    pub(crate) patch: Option<usize>,
    /// Visible area in m².
    pub(crate) area: f64,
    pub(crate) finish: Option<Finish>,
}

impl Enclosure {
    /// The walls, in their order.
    pub fn walls(&self) -> Vec<WallView> {
        let walls = self
            .solid
            .walls
            .iter()
            .zip(&self.solid.mesh.walls)
            .zip(&self.finishes)
            .enumerate();
        walls
            .map(|(index, ((wall, name), finish))| WallView {
                name: name.clone(),
                area: wall.area,
                coating: finish.and_then(Finish::coating),
                is_opening: *finish == Some(Finish::Opening),
                frame: wall.plane.as_ref().map(|plane| plane.frame),
                regions: self
                    .patches
                    .iter()
                    .filter(|patch| patch.wall == index)
                    .map(|p| p.name.clone())
                    .collect(),
            })
            .collect()
    }

    /// All pieces: the walls in their order, then the regions in theirs. The index is the row.
    pub(crate) fn pieces(&self) -> Vec<Piece<'_>> {
        let walls = self
            .solid
            .mesh
            .walls
            .iter()
            .zip(&self.finishes)
            .enumerate()
            .map(|(wall, (name, &finish))| Piece {
                name: self.openings[wall].as_ref().unwrap_or(name),
                wall,
                patch: None,
                area: self.bare_area(wall),
                finish,
            });
        let regions = self.patches.iter().enumerate().map(|(index, patch)| Piece {
            name: &patch.name,
            wall: patch.wall,
            patch: Some(index),
            area: patch.visible,
            finish: Some(patch.finish),
        });
        walls.chain(regions).collect()
    }

    /// Names of walls, regions and openings with their visible areas in m², in the order of an outcome's rows.
    pub fn rows(&self) -> Vec<(String, f64)> {
        self.pieces()
            .iter()
            .map(|piece| (piece.name.to_owned(), piece.area))
            .collect()
    }
}
