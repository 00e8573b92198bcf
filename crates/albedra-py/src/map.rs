//! Irradiance cell by cell, with its uncertainty.

use std::sync::Arc;

use numpy::{PyArray1, PyArray2, PyUntypedArrayMethods};
use pyo3::prelude::*;

use crate::arrays::{Shared, Shared2, same, same2, share, share2};
use crate::errors::raise;
use crate::outcome::Outcome;

/// Irradiance of a planar wall, cell by cell, regions included.
///
/// Arrays have the shape (cells along v, cells along u).
#[pyclass(frozen, module = "albedra")]
pub(crate) struct Map {
    outcome: Arc<albedra::Outcome>,
    wall: String,
    u_edges: Shared,
    v_edges: Shared,
    area: Shared2,
    irradiance: Shared2,
    u: Shared2,
    degrees_of_freedom: f64,
}

impl Map {
    pub(crate) fn of(
        py: Python<'_>,
        outcome: &Arc<albedra::Outcome>,
        map: albedra::Map,
    ) -> PyResult<Self> {
        let shape = (map.v_edges.len() - 1, map.u_edges.len() - 1);
        Ok(Self {
            outcome: Arc::clone(outcome),
            wall: map.wall,
            u_edges: share(py, map.u_edges),
            v_edges: share(py, map.v_edges),
            area: share2(py, map.area, shape)?,
            irradiance: share2(py, map.irradiance, shape)?,
            u: share2(py, map.u, shape)?,
            degrees_of_freedom: map.degrees_of_freedom,
        })
    }
}

#[pymethods]
impl Map {
    /// The wall.
    #[getter]
    fn wall(&self) -> &str {
        &self.wall
    }

    /// Edges of the cells along the wall's u, in m.
    #[getter]
    fn u_edges<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.u_edges.bind(py)
    }

    /// Edges of the cells along the wall's v, in m.
    #[getter]
    fn v_edges<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.v_edges.bind(py)
    }

    /// Area of each cell that lies on the wall, in m².
    #[getter]
    fn area<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray2<f64>> {
        self.area.bind(py)
    }

    /// Irradiance in W/m²; NaN where a cell lies off the wall.
    #[getter]
    fn irradiance<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray2<f64>> {
        self.irradiance.bind(py)
    }

    /// Standard uncertainty in W/m².
    #[getter]
    fn u<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray2<f64>> {
        self.u.bind(py)
    }

    /// Degrees of freedom of the uncertainty.
    #[getter]
    fn degrees_of_freedom(&self) -> f64 {
        self.degrees_of_freedom
    }

    fn __eq__(&self, py: Python<'_>, other: &Self) -> bool {
        self.wall == other.wall
            && same(py, &self.u_edges, &other.u_edges)
            && same(py, &self.v_edges, &other.v_edges)
            && same2(py, &self.area, &other.area)
            && same2(py, &self.irradiance, &other.irradiance)
            && same2(py, &self.u, &other.u)
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
        let outcome = Outcome::of(Arc::clone(&self.outcome));
        Ok((rebuild, (outcome, &self.wall))
            .into_pyobject(py)?
            .into_any())
    }

    #[staticmethod]
    fn _rebuild(py: Python<'_>, outcome: &Outcome, wall: &str) -> PyResult<Self> {
        Self::of(py, &outcome.inner, outcome.inner.map(wall).map_err(raise)?)
    }

    fn __repr__(&self, py: Python<'_>) -> PyResult<String> {
        let shape = self.irradiance.bind(py).shape();
        let full = format!(
            "<Map of {}: {} × {} cells along u, v>",
            crate::text::quoted(py, &self.wall)?,
            shape[1],
            shape[0]
        );
        Ok(crate::text::fitting(full, || "<Map>".to_owned()))
    }
}
