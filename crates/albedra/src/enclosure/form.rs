//! The text form of an enclosure; a mesh is kept beside it.

use serde::{Deserialize, Serialize};

use super::{Enclosure, EnclosureError, Finish, ShapeForm};
use crate::geometry::{Mesh, Region};
use crate::medium::Medium;

/// All of an enclosure but its mesh.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct EnclosureForm {
    shape: ShapeForm,
    medium: Medium,
    walls: Vec<WallForm>,
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    regions: Vec<RegionForm>,
}

#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct WallForm {
    name: String,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    finish: Option<Finish>,
    /// The name of the opening that takes the wall's place, if it is not the wall's.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    opening: Option<String>,
}

#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct RegionForm {
    name: String,
    wall: String,
    region: Region,
    finish: Finish,
}

impl Enclosure {
    /// The mesh, if the shape was given by one; it must be kept beside the text.
    pub fn mesh_beside(&self) -> Option<&Mesh> {
        (self.solid.form == ShapeForm::Mesh).then_some(&self.solid.mesh)
    }

    pub(crate) fn to_form(&self) -> EnclosureForm {
        let finishes = self.finishes.iter().zip(&self.openings);
        let walls = self.solid.mesh.walls.iter().zip(finishes);
        let regions = self.patches.iter().map(|patch| RegionForm {
            name: patch.name.clone(),
            wall: self.solid.mesh.walls[patch.wall].clone(),
            region: patch.region.clone(),
            finish: patch.finish,
        });
        EnclosureForm {
            shape: self.solid.form.clone(),
            medium: self.medium,
            walls: walls
                .map(|(name, (&finish, opening))| WallForm {
                    name: name.clone(),
                    finish,
                    opening: opening.clone(),
                })
                .collect(),
            regions: regions.collect(),
        }
    }

    pub(crate) fn from_form(
        form: EnclosureForm,
        mesh: Option<Mesh>,
    ) -> Result<Self, EnclosureError> {
        let mut enclosure = Self::of(form.shape, mesh)?.with_medium(form.medium);
        for wall in form.walls {
            let Some(index) = enclosure.solid.wall(&wall.name) else {
                return Err(enclosure.unknown(&wall.name));
            };
            enclosure.finishes[index] = wall.finish;
            if let Some(opening) = wall.opening {
                enclosure = enclosure.opened_as(&opening, &wall.name)?;
            }
        }
        for patch in form.regions {
            enclosure = enclosure.patched(&patch.name, &patch.wall, patch.region, patch.finish)?;
        }
        Ok(enclosure)
    }
}
