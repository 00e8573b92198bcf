//! The edges of time bins.

use std::sync::OnceLock;

use pyo3::prelude::*;

use crate::arrays::{Shared, count, list, share};
use crate::errors::raise;
use crate::text::{fitting, number};

/// The edges of time bins in s, from 0 on.
///
/// Parameters
/// ----------
/// stop : float
///     Last edge in s.
/// bins : int
///     Number of equal bins.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> al.TimeGrid(stop=4e-7, bins=4).edges
/// array([0.e+00, 1.e-07, 2.e-07, 3.e-07, 4.e-07])
/// >>> al.TimeGrid.from_edges([0, 1e-9, 1e-8, 1e-7]).bins
/// 3
#[pyclass(frozen, module = "albedra")]
pub(crate) struct TimeGrid {
    pub(crate) grid: albedra::TimeGrid,
    equal: bool,
    edges: OnceLock<Shared>,
}

impl TimeGrid {
    pub(crate) fn of(grid: albedra::TimeGrid) -> Self {
        let equal = albedra::TimeGrid::new(grid.stop(), grid.bins()).is_ok_and(|same| same == grid);
        let edges = OnceLock::new();
        Self { grid, equal, edges }
    }
}

#[pymethods]
impl TimeGrid {
    #[new]
    #[pyo3(signature = (*, stop, bins))]
    fn new(stop: f64, bins: &Bound<'_, PyAny>) -> PyResult<Self> {
        albedra::TimeGrid::new(stop, count("bins", bins)?)
            .map(Self::of)
            .map_err(raise)
    }

    /// Bins between given edges.
    ///
    /// Parameters
    /// ----------
    /// edges : (n,) array_like
    ///     Rising edges in s, the first of which is 0.
    #[staticmethod]
    fn from_edges(edges: &Bound<'_, PyAny>) -> PyResult<Self> {
        albedra::TimeGrid::from_edges(list("edges", edges)?)
            .map(Self::of)
            .map_err(raise)
    }

    /// Edges in s.
    #[getter]
    fn edges<'py>(&self, py: Python<'py>) -> &Bound<'py, numpy::PyArray1<f64>> {
        self.edges
            .get_or_init(|| share(py, self.grid.edges().to_vec()))
            .bind(py)
    }

    /// Number of bins.
    #[getter]
    fn bins(&self) -> usize {
        self.grid.bins()
    }

    /// Last edge in s.
    #[getter]
    fn stop(&self) -> f64 {
        self.grid.stop()
    }

    #[staticmethod]
    fn _rebuild(stop: f64, bins: usize) -> PyResult<Self> {
        albedra::TimeGrid::new(stop, bins)
            .map(Self::of)
            .map_err(raise)
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        let class = py.get_type::<Self>();
        let reduced = if self.equal {
            let arguments = (self.grid.stop(), self.grid.bins());
            (class.getattr("_rebuild")?, arguments).into_pyobject(py)?
        } else {
            let arguments = (self.edges(py).clone(),);
            (class.getattr("from_edges")?, arguments).into_pyobject(py)?
        };
        Ok(reduced.into_any())
    }

    fn __eq__(&self, other: &Self) -> bool {
        self.grid == other.grid
    }

    fn __repr__(&self) -> String {
        let (stop, bins) = (number(self.grid.stop()), self.grid.bins());
        if self.equal {
            return format!("TimeGrid(stop={stop}, bins={bins})");
        }
        let edges: Vec<String> = self.grid.edges().iter().map(|&edge| number(edge)).collect();
        fitting(
            format!("TimeGrid.from_edges([{}])", edges.join(", ")),
            || format!("<TimeGrid: {bins} bins up to {stop} s>"),
        )
    }
}
