//! Outlines on walls.

use albedra::Figure;
use glam::DVec3;
use pyo3::prelude::*;
use pyo3::types::{PyDict, PyString, PyTuple};

use crate::arrays::{points, vector};
use crate::errors::raise;
use crate::text::{self, fitting, number, tuple};

/// An outline on a planar wall, in the wall's own coordinates (u, v) in metres.
///
/// The coordinates start at the wall's area centroid, or at the point of the wall that is nearest to `at`; a
/// wall's `frame` shows its axes.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> al.Region.disk((0, 0.1), radius=0.05)
/// Region.disk((0.0, 0.1), 0.05)
/// >>> al.Region.rectangle((0, 0), (0.1, 0.2), at=(0.5, 0, 0))
/// Region.rectangle((0.0, 0.0), (0.1, 0.2), at=(0.5, 0.0, 0.0))
#[pyclass(frozen, eq, from_py_object, module = "albedra")]
#[derive(Clone, PartialEq)]
pub(crate) struct Region(pub(crate) albedra::Region);

impl Region {
    fn checked(region: albedra::Region, at: Option<&Bound<'_, PyAny>>) -> PyResult<Self> {
        let region = match at {
            Some(at) => region.at(DVec3::from_array(vector("at", at)?)),
            None => region,
        };
        region.check().map_err(raise)?;
        Ok(Self(region))
    }
}

#[pymethods]
impl Region {
    /// A disk.
    ///
    /// Parameters
    /// ----------
    /// centre : (2,) array_like
    ///     Centre (u, v) in m.
    /// radius : float
    ///     Radius in m.
    /// at : (3,) array_like, optional
    ///     Position in m; (u, v) then start at the point of the wall that is nearest to it.
    #[staticmethod]
    #[pyo3(signature = (centre, radius, *, at = None))]
    fn disk(
        centre: &Bound<'_, PyAny>,
        radius: f64,
        at: Option<&Bound<'_, PyAny>>,
    ) -> PyResult<Self> {
        let [u, v] = vector("centre", centre)?;
        Self::checked(albedra::Region::disk((u, v), radius), at)
    }

    /// A rectangle along the wall's axes.
    ///
    /// Parameters
    /// ----------
    /// centre : (2,) array_like
    ///     Centre (u, v) in m.
    /// size : (2,) array_like
    ///     Width along u and height along v in m.
    /// at : (3,) array_like, optional
    ///     Position in m; (u, v) then start at the point of the wall that is nearest to it.
    #[staticmethod]
    #[pyo3(signature = (centre, size, *, at = None))]
    fn rectangle(
        centre: &Bound<'_, PyAny>,
        size: &Bound<'_, PyAny>,
        at: Option<&Bound<'_, PyAny>>,
    ) -> PyResult<Self> {
        let ([u, v], [width, height]) = (vector("centre", centre)?, vector("size", size)?);
        Self::checked(albedra::Region::rectangle((u, v), (width, height)), at)
    }

    /// A simple polygon.
    ///
    /// Parameters
    /// ----------
    /// corners : (n, 2) array_like
    ///     Corners (u, v) in m, in order, either way round.
    /// at : (3,) array_like, optional
    ///     Position in m; (u, v) then start at the point of the wall that is nearest to it.
    #[staticmethod]
    #[pyo3(signature = (corners, *, at = None))]
    fn polygon(corners: &Bound<'_, PyAny>, at: Option<&Bound<'_, PyAny>>) -> PyResult<Self> {
        let corners = points("corners", corners)?
            .into_iter()
            .map(|[u, v]| (u, v))
            .collect();
        Self::checked(albedra::Region::polygon(corners), at)
    }

    #[staticmethod]
    #[pyo3(signature = (name, arguments, at))]
    fn _rebuild<'py>(
        name: &Bound<'py, PyString>,
        arguments: &Bound<'py, PyTuple>,
        at: Option<(f64, f64, f64)>,
    ) -> PyResult<Bound<'py, PyAny>> {
        let py = name.py();
        let keywords = PyDict::new(py);
        keywords.set_item("at", at)?;
        py.get_type::<Self>()
            .call_method(name, arguments, Some(&keywords))
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
        let at = self.0.position().map(|at| (at.x, at.y, at.z));
        let (name, arguments) = match self.0.figure() {
            Figure::Disk { centre, radius } => ("disk", (*centre, *radius).into_pyobject(py)?),
            Figure::Rectangle { centre, size } => {
                ("rectangle", (*centre, *size).into_pyobject(py)?)
            }
            Figure::Polygon { corners } => ("polygon", (corners.clone(),).into_pyobject(py)?),
            _ => {
                return Err(pyo3::exceptions::PyNotImplementedError::new_err(
                    "an unknown region",
                ));
            }
        };
        Ok((rebuild, (name, arguments, at))
            .into_pyobject(py)?
            .into_any())
    }

    fn __repr__(&self) -> String {
        let at = self
            .0
            .position()
            .map_or_else(String::new, |at| format!(", at={}", text::vector(at)));
        let pair = |(u, v): (f64, f64)| tuple(&[u, v]);
        match self.0.figure() {
            Figure::Disk { centre, radius } => fitting(
                format!("Region.disk({}, {}{at})", pair(*centre), number(*radius)),
                || format!("<Region: disk of radius {radius} m>"),
            ),
            Figure::Rectangle { centre, size } => fitting(
                format!("Region.rectangle({}, {}{at})", pair(*centre), pair(*size)),
                || format!("<Region: rectangle of {} m × {} m>", size.0, size.1),
            ),
            Figure::Polygon { corners } => {
                let all: Vec<String> = corners.iter().map(|&corner| pair(corner)).collect();
                fitting(format!("Region.polygon([{}]{at})", all.join(", ")), || {
                    format!("<Region: polygon of {} corners>", corners.len())
                })
            }
            _ => "<Region>".to_owned(),
        }
    }
}
