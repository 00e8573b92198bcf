//! Regions on walls.

use serde::{Deserialize, Serialize};

use super::{Enclosure, EnclosureError};
use crate::coating::Coating;
use crate::geometry::{PlanarWall, Region, RegionShape, visible_areas};
use crate::near::Near;

/// What a wall or a region does to light.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub(crate) enum Finish {
    Coated(Coating),
    Opening,
}

impl Finish {
    /// The coating; nothing for an opening.
    pub(crate) fn coating(self) -> Option<Coating> {
        match self {
            Self::Coated(coating) => Some(coating),
            Self::Opening => None,
        }
    }
}

/// A region on a wall, with its own finish.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Patch {
    pub(crate) name: String,
    pub(crate) wall: usize,
    pub(crate) region: Region,
    pub(crate) finish: Finish,
    pub(crate) shape: RegionShape,
    /// What later regions leave of it, m².
    pub(crate) visible: f64,
}

impl Enclosure {
    /// Paints a region of a planar wall with another coating, under a name of its own. Later paint covers earlier.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure, Region};
    ///
    /// let chamber = Enclosure::cuboid([1.0, 1.0, 1.0])?
    ///     .coated(Coating::lambertian(0.97)?)
    ///     .paint("sample", "y+", Region::rectangle((0.0, 0.0), (0.1, 0.1)), Coating::lambertian(0.6)?)?;
    /// // Rows are disjoint.
    /// let area: f64 = chamber.rows().iter().map(|(_, area)| area).sum();
    /// assert!((area - 6.0).abs() < 1e-12);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is no such wall, it is not planar, the name is taken, the region leaves the wall, or nothing would be left to
    /// see of an earlier region or of the wall.
    pub fn paint(
        self,
        name: &str,
        wall: &str,
        region: Region,
        coating: Coating,
    ) -> Result<Self, EnclosureError> {
        self.patched(name, wall, region, Finish::Coated(coating))
    }

    /// Opens a region of a planar wall, under a name of its own: light that meets it has escaped.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Enclosure, EnclosureError, Region};
    ///
    /// let chamber = Enclosure::cuboid([1.0, 1.0, 1.0])?
    ///     .with_opening("detector", "x+", Region::disk((0.0, 0.0), 0.05))?;
    /// assert_eq!(chamber.walls()[1].regions, ["detector"]);
    /// let too_large = chamber.with_opening("port", "x-", Region::disk((0.0, 0.0), 0.6));
    /// assert!(matches!(too_large, Err(EnclosureError::Region { .. })));
    /// # Ok::<(), EnclosureError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// As [`Enclosure::paint`].
    pub fn with_opening(
        self,
        name: &str,
        wall: &str,
        region: Region,
    ) -> Result<Self, EnclosureError> {
        self.patched(name, wall, region, Finish::Opening)
    }

    pub(super) fn patched(
        mut self,
        name: &str,
        wall: &str,
        region: Region,
        finish: Finish,
    ) -> Result<Self, EnclosureError> {
        let Some(index) = self.solid.wall(wall) else {
            return Err(self.unknown_wall(wall));
        };
        self.new_name(name)?;
        let plane = self.plane(index)?;
        let shape = region
            .fits(plane)
            .and_then(|()| region.shape(plane))
            .map_err(|error| EnclosureError::Region {
                name: name.to_owned(),
                wall: wall.to_owned(),
                error,
            })?;
        let visible = shape.area();
        self.patches.push(Patch {
            name: name.to_owned(),
            wall: index,
            region,
            finish,
            shape,
            visible,
        });
        self.see(index)?;
        Ok(self)
    }

    /// Refuses a name that is empty or taken. An output `ledger.absorbed` must mean the ledger's.
    pub(super) fn new_name(&self, name: &str) -> Result<(), EnclosureError> {
        let taken = ["", "ledger"].contains(&name)
            || self.solid.wall(name).is_some()
            || self.openings.iter().any(|own| own.as_deref() == Some(name))
            || self.patches.iter().any(|patch| patch.name == name);
        if taken {
            return Err(EnclosureError::Name {
                name: name.to_owned(),
            });
        }
        Ok(())
    }

    /// The error for a wall that does not exist.
    pub(super) fn unknown_wall(&self, wall: &str) -> EnclosureError {
        let walls = self.solid.mesh.walls.iter().map(String::as_str);
        EnclosureError::UnknownWall {
            name: wall.to_owned(),
            near: Near::to(wall, walls),
        }
    }

    /// The plane of a wall that is to carry a region or a map.
    pub(crate) fn plane(&self, wall: usize) -> Result<&PlanarWall, EnclosureError> {
        let plane = self.solid.walls[wall].plane.as_ref();
        plane.ok_or_else(|| EnclosureError::NotPlanar {
            wall: self.solid.mesh.walls[wall].clone(),
        })
    }

    /// Finds what can be seen of a wall's regions.
    fn see(&mut self, wall: usize) -> Result<(), EnclosureError> {
        let areas = visible_areas(self.plane(wall)?, &self.shapes_on(wall));
        let mut patches = self.patches.iter_mut().filter(|patch| patch.wall == wall);
        for visible in areas.regions {
            let Some(patch) = patches.next() else { break };
            if visible <= 0.0 {
                return Err(EnclosureError::Hidden {
                    name: patch.name.clone(),
                });
            }
            patch.visible = visible;
        }
        if areas.wall <= 0.0 {
            return Err(EnclosureError::Hidden {
                name: self.solid.mesh.walls[wall].clone(),
            });
        }
        Ok(())
    }

    fn shapes_on(&self, wall: usize) -> Vec<RegionShape> {
        self.patches
            .iter()
            .filter(|patch| patch.wall == wall)
            .map(|patch| patch.shape.clone())
            .collect()
    }

    /// Area of a wall without its regions in m².
    pub(crate) fn bare_area(&self, wall: usize) -> f64 {
        let shapes = self.shapes_on(wall);
        match self.plane(wall) {
            Ok(plane) if !shapes.is_empty() => visible_areas(plane, &shapes).wall,
            _ => self.solid.walls[wall].area,
        }
    }
}
