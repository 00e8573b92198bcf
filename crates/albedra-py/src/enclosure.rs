//! Walls, regions, coatings and medium, put together.

use std::path::PathBuf;

use pyo3::exceptions::PyValueError;
use pyo3::prelude::*;
use pyo3::types::{PyBytes, PyTuple};

use crate::arrays::{count, names, points, vector};
use crate::coating::Coating;
use crate::errors::{noted, raise};
use crate::medium::Medium;
use crate::mesh;
use crate::region::Region;
use crate::text::{counted, fitting, short};
use crate::wall::{Audit, Wall};

/// A closed body of walls with light inside: its shape, what its walls do to light, regions, and the medium.
///
/// Immutable: `with_coating`, `paint`, `with_opening` and `with_medium` return changed copies.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> chamber = (al.Enclosure.cuboid((1.2, 0.8, 0.5), coating=al.Coating.lambertian(0.97))
/// ...            .with_coating("z-", al.Coating.mixed(0.90, specular_share=0.3))
/// ...            .paint("sample", wall="y+", region=al.Region.rectangle((0, 0), (0.1, 0.1)),
/// ...                   coating=al.Coating.lambertian(0.6))
/// ...            .with_opening("detector", wall="x+", region=al.Region.disk((0, 0), radius=0.05)))
/// >>> [wall.name for wall in chamber.walls]
/// ['x-', 'x+', 'y-', 'y+', 'z-', 'z+']
/// >>> round(chamber.mean_chord, 4)
/// 0.4898
#[pyclass(frozen, eq, from_py_object, module = "albedra")]
#[derive(Clone, PartialEq)]
pub(crate) struct Enclosure(pub(crate) albedra::Enclosure);

/// Coatings by name, in the order in which they were given.
type Coatings<'py> = Option<Bound<'py, pyo3::types::PyMapping>>;

impl Enclosure {
    fn finished(
        enclosure: albedra::Enclosure,
        coating: Option<&Coating>,
        coatings: &Coatings<'_>,
        medium: Option<&Medium>,
    ) -> PyResult<Self> {
        let mut enclosure = match coating {
            Some(coating) => enclosure.coated(coating.0),
            None => enclosure,
        };
        if let Some(coatings) = coatings {
            for item in coatings.items()? {
                let (name, coating): (String, Coating) = item.extract()?;
                enclosure = enclosure.with_coating(&name, coating.0).map_err(raise)?;
            }
        }
        if let Some(medium) = medium {
            enclosure = enclosure.with_medium(medium.0);
        }
        Ok(Self(enclosure))
    }
}

#[pymethods]
impl Enclosure {
    /// A box centred on the origin, with walls `x-`, `x+`, `y-`, `y+`, `z-`, `z+`.
    ///
    /// Parameters
    /// ----------
    /// size : (3,) array_like
    ///     Lengths along x, y and z in m.
    /// coating : Coating, optional
    ///     Coating of all walls.
    /// medium : Medium, optional
    ///     What fills it; vacuum by default.
    #[staticmethod]
    #[pyo3(signature = (size, *, coating = None, medium = None))]
    fn cuboid(
        size: &Bound<'_, PyAny>,
        coating: Option<Coating>,
        medium: Option<Medium>,
    ) -> PyResult<Self> {
        let enclosure = albedra::Enclosure::cuboid(vector("size", size)?).map_err(raise)?;
        Self::finished(enclosure, coating.as_ref(), &None, medium.as_ref())
    }

    /// A regular prism about the z axis, centred on the origin, with walls `side 1` …, `bottom`, `top`.
    ///
    /// Parameters
    /// ----------
    /// sides : int
    ///     Number of sides.
    /// radius : float
    ///     Radius in m of the circle through its vertices, the first of which lies on +x.
    /// height : float
    ///     Height in m.
    /// coating : Coating, optional
    ///     Coating of all walls.
    /// medium : Medium, optional
    ///     What fills it; vacuum by default.
    #[staticmethod]
    #[pyo3(signature = (sides, radius, height, *, coating = None, medium = None))]
    fn prism(
        sides: &Bound<'_, PyAny>,
        radius: f64,
        height: f64,
        coating: Option<Coating>,
        medium: Option<Medium>,
    ) -> PyResult<Self> {
        let sides = count("sides", sides)?;
        let enclosure = albedra::Enclosure::prism(sides, radius, height).map_err(raise)?;
        Self::finished(enclosure, coating.as_ref(), &None, medium.as_ref())
    }

    /// A body of constant cross-section from z = −height/2 to height/2, with walls `side 1` …, `bottom`, `top`.
    ///
    /// Parameters
    /// ----------
    /// outline : (n, 2) array_like
    ///     Corners (x, y) in m; the outline need not be convex.
    /// height : float
    ///     Height in m.
    /// coating : Coating, optional
    ///     Coating of all walls.
    /// medium : Medium, optional
    ///     What fills it; vacuum by default.
    #[staticmethod]
    #[pyo3(signature = (outline, height, *, coating = None, medium = None))]
    fn extruded(
        outline: &Bound<'_, PyAny>,
        height: f64,
        coating: Option<Coating>,
        medium: Option<Medium>,
    ) -> PyResult<Self> {
        let outline: Vec<_> = points("outline", outline)?
            .into_iter()
            .map(|[x, y]| (x, y))
            .collect();
        let enclosure = albedra::Enclosure::extruded(&outline, height).map_err(raise)?;
        Self::finished(enclosure, coating.as_ref(), &None, medium.as_ref())
    }

    /// A body bounded by polygons.
    ///
    /// Parameters
    /// ----------
    /// vertices : (n, 3) array_like
    ///     Positions in m.
    /// faces : (m, k) array_like, or list of lists
    ///     Indices of each face's corners, counter-clockwise seen from outside.
    /// walls : str or list of str, optional
    ///     Name of the wall of all faces, or of each; `"mesh"` by default.
    /// coating : Coating, optional
    ///     Coating of all walls.
    /// coatings : dict of str to Coating, optional
    ///     Coatings of single walls.
    /// medium : Medium, optional
    ///     What fills it; vacuum by default.
    ///
    /// Raises
    /// ------
    /// EnclosureError
    ///     If the faces do not enclose one body; all problems are listed.
    #[staticmethod]
    #[pyo3(signature = (vertices, faces, *, walls = None, coating = None, coatings = None, medium = None))]
    fn from_mesh(
        py: Python<'_>,
        vertices: &Bound<'_, PyAny>,
        faces: &Bound<'_, PyAny>,
        walls: Option<&Bound<'_, PyAny>>,
        coating: Option<Coating>,
        coatings: Coatings<'_>,
        medium: Option<Medium>,
    ) -> PyResult<Self> {
        let mesh = mesh::from_arrays(vertices, faces, walls)?;
        let enclosure = py
            .detach(|| albedra::Enclosure::from_mesh(mesh))
            .map_err(raise)?;
        Self::finished(enclosure, coating.as_ref(), &coatings, medium.as_ref())
    }

    /// A body bounded by the mesh in an OBJ, STL or PLY file, of which shape and group names are read.
    ///
    /// Parameters
    /// ----------
    /// path : path-like
    ///     The file; its extension tells the format.
    /// unit : {"m", "cm", "mm", "um", "in", "ft"}
    ///     Unit of the numbers in the file, which it does not say itself.
    /// coating : Coating, optional
    ///     Coating of all walls.
    /// coatings : dict of str to Coating, optional
    ///     Coatings of single walls.
    /// openings : sequence of str
    ///     Walls that are openings.
    /// medium : Medium, optional
    ///     What fills it; vacuum by default.
    ///
    /// Raises
    /// ------
    /// OSError
    ///     If the file cannot be read.
    /// EnclosureError
    ///     If the file is damaged or its mesh does not enclose one body.
    #[staticmethod]
    #[pyo3(signature = (path, *, unit, coating = None, coatings = None, openings = None, medium = None))]
    #[pyo3(
        text_signature = "(path, *, unit, coating=None, coatings=None, openings=(), medium=None)"
    )]
    fn load(
        py: Python<'_>,
        path: PathBuf,
        unit: &str,
        coating: Option<Coating>,
        coatings: Coatings<'_>,
        openings: Option<Bound<'_, PyAny>>,
        medium: Option<Medium>,
    ) -> PyResult<Self> {
        let unit: albedra::Unit = unit
            .parse()
            .map_err(|error: albedra::UnitError| raise(error))?;
        let openings = names("openings", openings.as_ref())?;
        let enclosure = py
            .detach(|| albedra::Enclosure::load(&path, unit))
            .map_err(|error| noted(py, raise(error), &path))?;
        let mut enclosure =
            Self::finished(enclosure, coating.as_ref(), &coatings, medium.as_ref())?;
        for name in openings {
            enclosure = Self(enclosure.0.opened(&name).map_err(raise)?);
        }
        Ok(enclosure)
    }

    /// Gives a wall or a region another coating.
    ///
    /// Parameters
    /// ----------
    /// name : str
    ///     The wall or region.
    /// coating : Coating
    ///     Its new coating.
    fn with_coating(&self, name: &str, coating: Coating) -> PyResult<Self> {
        self.0
            .clone()
            .with_coating(name, coating.0)
            .map(Self)
            .map_err(raise)
    }

    /// Paints a region of a planar wall with another coating; later paint covers earlier.
    ///
    /// Parameters
    /// ----------
    /// name : str
    ///     Name of the region, by which it is reported.
    /// wall : str
    ///     The wall.
    /// region : Region
    ///     The outline, in the wall's own coordinates.
    /// coating : Coating
    ///     What it does to light.
    #[pyo3(signature = (name, *, wall, region, coating))]
    fn paint(&self, name: &str, wall: &str, region: Region, coating: Coating) -> PyResult<Self> {
        self.0
            .clone()
            .paint(name, wall, region.0, coating.0)
            .map(Self)
            .map_err(raise)
    }

    /// Opens a region of a planar wall, or a whole wall: light that meets it has escaped.
    ///
    /// Parameters
    /// ----------
    /// name : str
    ///     Name of the opening, by which it is reported.
    /// wall : str, optional
    ///     The wall; by default, and without a region, the wall of the opening's name.
    /// region : Region, optional
    ///     The outline, in the wall's own coordinates; by default the whole wall.
    #[pyo3(signature = (name, *, wall = None, region = None))]
    fn with_opening(
        &self,
        name: &str,
        wall: Option<&str>,
        region: Option<Region>,
    ) -> PyResult<Self> {
        let enclosure = self.0.clone();
        let opened = match (wall, region) {
            (Some(wall), Some(region)) => enclosure.with_opening(name, wall, region.0),
            (None, Some(_)) => {
                let text = format!("wall must be given with the region of opening {name:?}");
                return Err(PyValueError::new_err(text));
            }
            (Some(wall), None) => enclosure.opened_as(name, wall),
            (None, None) => enclosure.opened(name),
        };
        opened.map(Self).map_err(raise)
    }

    /// Fills the enclosure with a medium.
    ///
    /// Parameters
    /// ----------
    /// medium : Medium
    ///     What fills it.
    fn with_medium(&self, medium: Medium) -> Self {
        Self(self.0.clone().with_medium(medium.0))
    }

    /// The walls, in their order.
    #[getter]
    fn walls<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyTuple>> {
        PyTuple::new(py, self.0.walls().iter().map(Wall::of))
    }

    /// What fills the enclosure.
    #[getter]
    fn medium(&self) -> Medium {
        Medium(self.0.medium())
    }

    /// Volume in m³.
    #[getter]
    fn volume(&self) -> f64 {
        self.0.volume()
    }

    /// Area of all walls in m², regions and openings included.
    #[getter]
    fn area(&self) -> f64 {
        self.0.area()
    }

    /// Mean chord 4V/S in m.
    #[getter]
    fn mean_chord(&self) -> f64 {
        self.0.mean_chord()
    }

    /// Size of the mesh and its problems, of which an enclosure has none.
    fn audit(&self, py: Python<'_>) -> Audit {
        Audit::of(&py.detach(|| self.0.audit()))
    }

    #[staticmethod]
    #[pyo3(signature = (text, mesh))]
    fn _rebuild(py: Python<'_>, text: &str, mesh: Option<&[u8]>) -> PyResult<Self> {
        let mesh = mesh::from_bytes(mesh)?;
        py.detach(|| albedra::Enclosure::from_text(text, mesh))
            .map(Self)
            .map_err(raise)
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Reduced<'py>> {
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
        Ok((
            rebuild,
            (self.0.to_text(), mesh::to_bytes(py, self.0.mesh_beside())),
        ))
    }

    fn __repr__(&self) -> String {
        let walls = self.0.walls();
        let regions: usize = walls.iter().map(|wall| wall.regions.len()).sum();
        let size = format!(
            "{}, {}",
            counted(walls.len(), "wall"),
            counted(regions, "region")
        );
        let full = format!(
            "<Enclosure: {size}, {} m³, {} m², 4V/S {} m>",
            short(self.0.volume()),
            short(self.0.area()),
            short(self.0.mean_chord())
        );
        fitting(full, || format!("<Enclosure: {size}>"))
    }
}

/// Text and mesh, with the function that puts them together again.
pub(crate) type Reduced<'py> = (Bound<'py, PyAny>, (String, Option<Bound<'py, PyBytes>>));
