//! Lengths of flights, with their uncertainty.

use std::sync::Arc;

use numpy::PyArray1;
use pyo3::prelude::*;

use crate::arrays::{Shared, same, share};
use crate::curves::{extent, of_outcome};

/// Lengths of flights that start on a surface.
#[pyclass(frozen, module = "albedra")]
pub(crate) struct FlightHistogram {
    outcome: Arc<albedra::Outcome>,
    edges: Shared,
    share: Shared,
    u: Shared,
    degrees_of_freedom: f64,
}

impl FlightHistogram {
    pub(crate) fn of(py: Python<'_>, outcome: &Arc<albedra::Outcome>) -> Self {
        let histogram = outcome.flight_histogram();
        Self {
            outcome: Arc::clone(outcome),
            edges: share(py, histogram.edges),
            share: share(py, histogram.share),
            u: share(py, histogram.u),
            degrees_of_freedom: histogram.degrees_of_freedom,
        }
    }
}

#[pymethods]
impl FlightHistogram {
    /// Edges of equal bins in m, from 0 to the diagonal of the body's bounding box.
    #[getter]
    fn edges<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.edges.bind(py)
    }

    /// Share of the flights in each bin, weighted by the energy at their start.
    #[getter]
    fn share<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.share.bind(py)
    }

    /// Standard uncertainty of the share.
    #[getter]
    fn u<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.u.bind(py)
    }

    /// Degrees of freedom of the uncertainty.
    #[getter]
    fn degrees_of_freedom(&self) -> f64 {
        self.degrees_of_freedom
    }

    fn __eq__(&self, py: Python<'_>, other: &Self) -> bool {
        same(py, &self.edges, &other.edges)
            && same(py, &self.share, &other.share)
            && same(py, &self.u, &other.u)
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        of_outcome(py, &self.outcome, "flight_histogram")
    }

    fn __repr__(&self, py: Python<'_>) -> String {
        format!("<FlightHistogram: {}>", extent(py, &self.edges, "m"))
    }
}
