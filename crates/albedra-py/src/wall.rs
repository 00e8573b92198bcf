//! What is known of walls and meshes.

use glam::DVec3;
use pyo3::prelude::*;

use crate::arrays::vector;
use crate::coating::Coating;
use crate::records::{Columns, Written, record};

type Triple = (f64, f64, f64);

fn triple(v: DVec3) -> Triple {
    (v.x, v.y, v.z)
}

impl Written for Triple {
    fn written(&self, _: Python<'_>) -> PyResult<String> {
        Ok(crate::text::tuple(&[self.0, self.1, self.2]))
    }
}

impl Written for Coating {
    fn written(&self, _: Python<'_>) -> PyResult<String> {
        Ok(self.0.to_string())
    }
}

impl Written for Frame {
    fn written(&self, py: Python<'_>) -> PyResult<String> {
        self.__repr__(py)
    }
}

impl Written for Names {
    fn written(&self, py: Python<'_>) -> PyResult<String> {
        Ok(pyo3::types::PyTuple::new(py, &self.0)?.repr()?.to_string())
    }
}

/// Names that become a tuple.
#[derive(Clone, PartialEq)]
pub(crate) struct Names(pub(crate) Vec<String>);

impl<'py> IntoPyObject<'py> for Names {
    type Target = pyo3::types::PyTuple;
    type Output = Bound<'py, pyo3::types::PyTuple>;
    type Error = PyErr;

    fn into_pyobject(self, py: Python<'py>) -> PyResult<Self::Output> {
        pyo3::types::PyTuple::new(py, self.0)
    }
}

impl<'a, 'py> FromPyObject<'a, 'py> for Names {
    type Error = PyErr;

    fn extract(value: Borrowed<'a, 'py, PyAny>) -> PyResult<Self> {
        value.extract().map(Self)
    }
}

record! {
    /// A planar wall's own coordinates (u, v) in m: where they start and which way they run.
    Frame {
        /// Area centroid of the wall (x, y, z), in m.
        origin: Triple,
        /// Direction of growing u, a unit vector.
        u: Triple,
        /// Direction of growing v, a unit vector.
        v: Triple,
        /// Inward unit normal u × v.
        normal: Triple,
    }

    /// Position (x, y, z) in m of a point (u, v) in m of the wall's plane.
    ///
    /// Parameters
    /// ----------
    /// point : (2,) array_like
    ///     The point (u, v) in m.
    fn to_space(&self, point: &Bound<'_, PyAny>) -> PyResult<Triple> {
        let [u, v] = vector("point", point)?;
        Ok(triple(self.core().to_space((u, v))))
    }

    /// Point (u, v) in m of the wall's plane beneath a position in m.
    ///
    /// Parameters
    /// ----------
    /// position : (3,) array_like
    ///     The position (x, y, z) in m.
    fn to_plane(&self, position: &Bound<'_, PyAny>) -> PyResult<(f64, f64)> {
        Ok(self.core().to_plane(DVec3::from_array(vector("position", position)?)))
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Frame {
    fn of(frame: &albedra::Frame) -> Self {
        Self {
            origin: triple(frame.origin),
            u: triple(frame.u),
            v: triple(frame.v),
            normal: triple(frame.normal),
        }
    }

    fn core(&self) -> albedra::Frame {
        albedra::Frame {
            origin: self.origin.into(),
            u: self.u.into(),
            v: self.v.into(),
            normal: self.normal.into(),
        }
    }
}

record! {
    /// What is known of a wall.
    Wall {
        /// Its name.
        name: String,
        /// Area in m², with the regions on it.
        area: f64,
        /// Its coating; None if it has none yet or is an opening.
        coating: Option<Coating>,
        /// Whether the whole wall is an opening.
        is_opening: bool,
        /// Where its (u, v) start and run; None if it is not planar.
        frame: Option<Frame>,
        /// Names of the regions and openings on it, in the order in which they were painted.
        regions: Names,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl Wall {
    pub(crate) fn of(wall: &albedra::WallView) -> Self {
        Self {
            name: wall.name.clone(),
            area: wall.area,
            coating: wall.coating.map(Coating),
            is_opening: wall.is_opening,
            frame: wall.frame.as_ref().map(Frame::of),
            regions: Names(wall.regions.clone()),
        }
    }
}

record! {
    /// Size of a mesh and everything that keeps it from being one closed body.
    Audit {
        /// Volume in m³.
        volume: f64,
        /// Area of all facets in m².
        area: f64,
        /// Mean chord 4V/S in m.
        mean_chord: f64,
        /// Number of facets.
        facets: usize,
        /// The first 1000 problems.
        problems: Names,
        /// Number of problems beyond those.
        more: usize,
        /// The same as a table.
        table: String,
    }

    /// Whether the mesh is one closed body without any problem.
    #[getter]
    fn is_sound(&self) -> bool {
        self.problems.0.is_empty() && self.more == 0
    }

    fn __str__(&self) -> &str {
        &self.table
    }
}

impl Audit {
    pub(crate) fn of(audit: &albedra::Audit) -> Self {
        Self {
            volume: audit.volume,
            area: audit.area,
            mean_chord: audit.mean_chord,
            facets: audit.facets,
            problems: Names(audit.problems.iter().map(ToString::to_string).collect()),
            more: audit.more,
            table: audit.to_string(),
        }
    }
}
