//! Walls, regions, coatings and medium, put together and checked.

mod error;
mod form;
mod paint;
mod rows;
mod solid;

use std::path::Path;
use std::sync::Arc;

pub use error::EnclosureError;
pub(crate) use form::EnclosureForm;
pub(crate) use paint::{Finish, Patch};
pub(crate) use rows::Piece;
pub use rows::WallView;
pub(crate) use solid::{ShapeForm, Solid};

use crate::coating::Coating;
use crate::geometry::{Audit, Mesh, Unit};
use crate::medium::Medium;
use crate::near::Near;

/// A closed body of walls with light inside: its shape, what its walls do to light, regions on them, and the medium.
///
/// Immutable: every verb returns a changed copy, which shares the shape.
///
/// # Examples
///
/// ```
/// use albedra::{Coating, Enclosure, Region};
///
/// let white = Coating::lambertian(0.97)?;
/// let chamber = Enclosure::cuboid([1.2, 0.8, 0.5])?
///     .coated(white)
///     .with_coating("z-", Coating::mixed(0.90, 0.3)?)?
///     .paint("sample", "y+", Region::rectangle((0.0, 0.0), (0.1, 0.1)), Coating::lambertian(0.6)?)?
///     .with_opening("detector", "x+", Region::disk((0.0, 0.0), 0.05))?;
/// assert_eq!(chamber.walls().len(), 6);
/// assert!((chamber.mean_chord() - 4.0 * 0.48 / 3.92).abs() < 1e-12);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct Enclosure {
    pub(crate) solid: Arc<Solid>,
    /// What each wall does, if it was said.
    pub(crate) finishes: Vec<Option<Finish>>,
    /// The name of the opening that takes a wall's place, if it has one of its own.
    pub(crate) openings: Vec<Option<String>>,
    /// Regions in the order in which they were painted; later ones cover earlier ones.
    pub(crate) patches: Vec<Patch>,
    pub(crate) medium: Medium,
}

impl Enclosure {
    /// A box of this size in m, centred on the origin, with walls `x-`, `x+`, `y-`, `y+`, `z-`, `z+`.
    ///
    /// # Examples
    ///
    /// ```
    /// let chamber = albedra::Enclosure::cuboid([1.2, 0.8, 0.5])?;
    /// assert!((chamber.volume() - 0.48).abs() < 1e-15);
    /// assert!(albedra::Enclosure::cuboid([1.2, 0.8, -0.5]).is_err());
    /// # Ok::<(), albedra::EnclosureError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If an edge is out of range.
    pub fn cuboid(size: [f64; 3]) -> Result<Self, EnclosureError> {
        Self::of(ShapeForm::Cuboid { size }, None)
    }

    /// A regular prism about the z axis, centred on the origin, with walls `side 1` …, `bottom`, `top`; `radius` is that of
    /// the circle through its vertices in m, the first of which lies on +x.
    ///
    /// # Examples
    ///
    /// ```
    /// let pipe = albedra::Enclosure::prism(6, 0.01, 0.3)?;
    /// assert_eq!(pipe.walls().len(), 8);
    /// assert_eq!(pipe.walls()[7].name, "top");
    /// # Ok::<(), albedra::EnclosureError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If a number is out of range.
    pub fn prism(sides: u32, radius: f64, height: f64) -> Result<Self, EnclosureError> {
        Self::of(
            ShapeForm::Prism {
                sides,
                radius,
                height,
            },
            None,
        )
    }

    /// A body of constant cross-section: corners (x, y) in m, from z = −height/2 to height/2, with walls `side 1` … counted
    /// counter-clockwise from the first corner, `bottom`, `top`. The outline need not be convex.
    ///
    /// # Examples
    ///
    /// ```
    /// let corners = [(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0)];
    /// let l_shaped = albedra::Enclosure::extruded(&corners, 0.5)?;
    /// assert!((l_shaped.volume() - 1.5).abs() < 1e-15);
    /// # Ok::<(), albedra::EnclosureError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If the outline crosses itself or a number is out of range.
    pub fn extruded(outline: &[(f64, f64)], height: f64) -> Result<Self, EnclosureError> {
        Self::of(
            ShapeForm::Extruded {
                outline: outline.to_vec(),
                height,
            },
            None,
        )
    }

    /// A body bounded by a mesh.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Enclosure, EnclosureError, Mesh};
    ///
    /// let mut mesh = Mesh::default();
    /// let wall = mesh.wall("all");
    /// mesh.vertices = vec![[0., 0., 0.].into(), [1., 0., 0.].into(), [0., 1., 0.].into(), [0., 0., 1.].into()];
    /// for corners in [[0, 2, 1], [0, 1, 3], [1, 2, 3]] {
    ///     mesh.push_facet(&corners, wall);
    /// }
    /// assert!(matches!(Enclosure::from_mesh(mesh.clone()), Err(EnclosureError::Unsound(_))));
    /// mesh.push_facet(&[2, 0, 3], wall);
    /// assert_eq!(Enclosure::from_mesh(mesh)?.volume(), 1.0 / 6.0);
    /// # Ok::<(), EnclosureError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If the mesh does not enclose one body; all problems are listed.
    pub fn from_mesh(mesh: Mesh) -> Result<Self, EnclosureError> {
        Self::of(ShapeForm::Mesh, Some(mesh))
    }

    /// A body bounded by the mesh in an OBJ, STL or PLY file, whose numbers are in this unit. Only shape and group names
    /// are read.
    ///
    /// # Errors
    ///
    /// If the file cannot be read or its mesh does not enclose one body.
    pub fn load(path: impl AsRef<Path>, unit: Unit) -> Result<Self, EnclosureError> {
        Self::from_mesh(Mesh::load(path, unit)?)
    }

    fn of(form: ShapeForm, mesh: Option<Mesh>) -> Result<Self, EnclosureError> {
        let solid = Arc::new(Solid::new(form, mesh)?);
        let finishes = vec![None; solid.walls.len()];
        Ok(Self {
            solid,
            openings: vec![None; finishes.len()],
            finishes,
            patches: Vec::new(),
            medium: Medium::default(),
        })
    }

    /// Gives all walls a coating; regions and openings stay as they are.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure};
    ///
    /// let white = Coating::lambertian(0.97)?;
    /// let chamber = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(white);
    /// assert_eq!(chamber.walls()[0].coating, Some(white));
    /// assert!(chamber.walls()[5].is_opening);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    #[must_use]
    pub fn coated(mut self, coating: Coating) -> Self {
        for finish in &mut self.finishes {
            if *finish != Some(Finish::Opening) {
                *finish = Some(Finish::Coated(coating));
            }
        }
        self
    }

    /// Gives a wall or a region a coating.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure};
    ///
    /// let chamber = Enclosure::cuboid([1.0, 1.0, 1.0])?.with_coating("z-", Coating::absorber())?;
    /// assert_eq!(chamber.walls()[4].coating, Some(Coating::absorber()));
    /// assert!(chamber.with_coating("z", Coating::absorber()).is_err());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is none of this name.
    pub fn with_coating(self, name: &str, coating: Coating) -> Result<Self, EnclosureError> {
        self.finished(name, Finish::Coated(coating))
    }

    /// Makes a whole wall an opening under its own name.
    ///
    /// # Examples
    ///
    /// ```
    /// let box_ = albedra::Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?;
    /// assert!(box_.walls()[5].is_opening);
    /// # Ok::<(), albedra::EnclosureError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is no such wall.
    pub fn opened(self, wall: &str) -> Result<Self, EnclosureError> {
        self.finished(wall, Finish::Opening)
    }

    /// Makes a whole wall an opening that takes its place under a name of its own.
    ///
    /// # Examples
    ///
    /// ```
    /// let box_ = albedra::Enclosure::cuboid([1.0, 1.0, 1.0])?.opened_as("exit", "z+")?;
    /// assert_eq!(box_.rows()[5].0, "exit");
    /// # Ok::<(), albedra::EnclosureError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is no such wall or the name is taken.
    pub fn opened_as(self, name: &str, wall: &str) -> Result<Self, EnclosureError> {
        let Some(index) = self.solid.wall(wall) else {
            return Err(self.unknown_wall(wall));
        };
        if name == wall {
            return self.opened(wall);
        }
        self.new_name(name)?;
        let mut opened = self.opened(wall)?;
        opened.openings[index] = Some(name.to_owned());
        Ok(opened)
    }

    /// Fills the enclosure with a medium.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Enclosure, Medium};
    ///
    /// let cell = Enclosure::cuboid([0.1, 0.1, 1.0])?.with_medium(Medium::new(1.000_3, 0.02)?);
    /// assert_eq!(cell.medium().absorption(), 0.02);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    #[must_use]
    pub fn with_medium(mut self, medium: Medium) -> Self {
        self.medium = medium;
        self
    }

    fn finished(mut self, name: &str, finish: Finish) -> Result<Self, EnclosureError> {
        let opening = |own: &Option<String>| own.as_deref() == Some(name);
        let wall = self
            .solid
            .wall(name)
            .or_else(|| self.openings.iter().position(opening));
        if let Some(wall) = wall {
            self.finishes[wall] = Some(finish);
            self.openings[wall] = None;
        } else if let Some(patch) = self.patches.iter_mut().find(|patch| patch.name == name) {
            patch.finish = finish;
        } else {
            return Err(self.unknown(name));
        }
        Ok(self)
    }

    fn unknown(&self, name: &str) -> EnclosureError {
        let names = self
            .solid
            .mesh
            .walls
            .iter()
            .chain(self.patches.iter().map(|patch| &patch.name));
        EnclosureError::UnknownName {
            name: name.to_owned(),
            near: Near::to(name, names.map(String::as_str)),
        }
    }

    /// Volume in m³.
    pub fn volume(&self) -> f64 {
        self.solid.volume
    }

    /// Area of all walls in m², regions and openings included.
    pub fn area(&self) -> f64 {
        self.solid.area
    }

    /// Mean chord 4V/S in m.
    pub fn mean_chord(&self) -> f64 {
        self.solid.mean_chord
    }

    /// What fills the enclosure.
    pub fn medium(&self) -> Medium {
        self.medium
    }

    /// The mesh of the walls.
    pub fn mesh(&self) -> &Mesh {
        &self.solid.mesh
    }

    /// Volume, area, mean chord and problems of the mesh; an enclosure has none.
    pub fn audit(&self) -> Audit {
        self.solid.mesh.audit()
    }
}
