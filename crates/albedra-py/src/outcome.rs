//! What a run found.

use std::path::PathBuf;
use std::sync::Arc;

use pyo3::prelude::*;
use pyo3::sync::PyOnceLock;
use pyo3::types::{PyBytes, PyDict, PyTuple};

use crate::curves::{Curve, Decay};
use crate::errors::raise;
use crate::estimate::Estimate;
use crate::experiment::Experiment;
use crate::histogram::FlightHistogram;
use crate::ledger::{Counters, Facts, Flux, Ledger, Target};
use crate::map::Map;
use crate::named::{MAPS, Named, ROWS};
use crate::outputs::{self, unit, unit_of_power, unit_of_ratio};
use crate::wall::Names;

/// What a run found: estimates, curves and maps, each with the standard uncertainty of the simulation.
///
/// Printed, it is a table of 80 columns. Names of single outputs, as for `ratio`, are listed by `outputs`.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> box = al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.lambertian(0.5)).with_opening("z+")
/// >>> result = al.Experiment(box, al.Source.wall("z-")).trace(20_000, seed=7)
/// >>> result.flux["z+"].escaped.u < 0.01
/// True
/// >>> ratio = result.ratio("z+.direct", "ledger.emitted")
/// >>> low, high = ratio.coverage_interval(0.9999)
/// >>> low < 0.1998 < high  # view factor of facing sides of a cube
/// True
#[pyclass(frozen, module = "albedra")]
pub(crate) struct Outcome {
    pub(crate) inner: Arc<albedra::Outcome>,
    decay: PyOnceLock<Py<Decay>>,
    switch_off: PyOnceLock<Py<Curve>>,
    switch_on: PyOnceLock<Py<Curve>>,
    histogram: PyOnceLock<Py<FlightHistogram>>,
    flux: PyOnceLock<Py<Named>>,
    irradiance: PyOnceLock<Py<Named>>,
    maps: PyOnceLock<Py<Named>>,
}

impl Outcome {
    pub(crate) fn of(inner: Arc<albedra::Outcome>) -> Self {
        Self {
            inner,
            decay: PyOnceLock::new(),
            switch_off: PyOnceLock::new(),
            switch_on: PyOnceLock::new(),
            histogram: PyOnceLock::new(),
            flux: PyOnceLock::new(),
            irradiance: PyOnceLock::new(),
            maps: PyOnceLock::new(),
        }
    }

    fn rows(&self) -> Vec<String> {
        self.inner
            .rows()
            .iter()
            .map(|row| row.name.clone())
            .collect()
    }
}

#[pymethods]
impl Outcome {
    /// The experiment that was traced.
    #[getter]
    fn experiment(&self) -> Experiment {
        Experiment(Arc::new(self.inner.experiment().clone()))
    }

    /// Number of photons.
    #[getter]
    fn photons(&self) -> u64 {
        self.inner.photons()
    }

    /// Seed of the run.
    #[getter]
    fn seed(&self) -> u64 {
        self.inner.seed()
    }

    /// Fingerprint of all that decides what photons do, 32 hexadecimal digits.
    #[getter]
    fn fingerprint(&self) -> String {
        self.inner.totals().history().to_string()
    }

    /// Indices of the photons, as (first, last + 1) of each unbroken range.
    #[getter]
    fn intervals<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyTuple>> {
        let ranges = self.inner.totals().photons().iter();
        PyTuple::new(py, ranges.map(|range| (range.start, range.end)))
    }

    /// Strikes, flights, and photons that were tried again or lost.
    #[getter]
    fn counters(&self) -> Counters {
        Counters::of(self.inner.counters())
    }

    /// What was known before any photon was traced.
    #[getter]
    fn facts(&self) -> Facts {
        Facts::of(self.inner.facts())
    }

    /// The target that the run had, or None, and whether it was met.
    #[getter]
    fn target(&self) -> Option<Target> {
        self.inner.target().map(Target::of)
    }

    /// Where all the emitted energy went.
    #[getter]
    fn ledger(&self) -> Ledger {
        Ledger::of(&self.inner.ledger())
    }

    /// Names of the walls, regions and openings: the disjoint pieces of the boundary.
    #[getter]
    #[pyo3(name = "rows")]
    fn row_names(&self) -> Names {
        Names(self.rows())
    }

    /// Radiant flux of each wall, region and opening, by name.
    #[getter]
    fn flux<'py>(&'py self, py: Python<'py>) -> PyResult<&'py Bound<'py, Named>> {
        let make = || {
            let fluxes = self.inner.fluxes();
            let items = fluxes
                .iter()
                .map(|flux| Ok(Py::new(py, Flux::of(flux))?.into_any()));
            Py::new(
                py,
                Named::of(ROWS, self.rows(), items.collect::<PyResult<_>>()?),
            )
        };
        Ok(self.flux.get_or_try_init(py, make)?.bind(py))
    }

    /// Mean irradiance in W/m² (for a pulse: radiant exposure in J/m²) of each wall, region and opening, by name.
    #[getter]
    fn irradiance<'py>(&'py self, py: Python<'py>) -> PyResult<&'py Bound<'py, Named>> {
        let make = || {
            let rows = self.rows();
            let item = |name: &String| {
                let estimate = self.inner.irradiance(name).map_err(raise)?;
                Ok(Py::new(py, Estimate::of(estimate, "W/m²"))?.into_any())
            };
            let items = rows.iter().map(item).collect::<PyResult<_>>()?;
            Py::new(py, Named::of(ROWS, rows, items))
        };
        Ok(self.irradiance.get_or_try_init(py, make)?.bind(py))
    }

    /// The maps that the experiment asked for, by wall.
    #[getter]
    fn maps<'py>(&'py self, py: Python<'py>) -> PyResult<&'py Bound<'py, Named>> {
        let make = || {
            let walls = self.inner.maps();
            let item = |wall: &String| {
                let map = self.inner.map(wall).map_err(raise)?;
                Ok(Py::new(py, Map::of(py, &self.inner, map)?)?.into_any())
            };
            let items = walls.iter().map(item).collect::<PyResult<_>>()?;
            Py::new(py, Named::of(MAPS, walls, items))
        };
        Ok(self.maps.get_or_try_init(py, make)?.bind(py))
    }

    /// Energy inside after a short pulse that carries as many joules as the sources have watts.
    #[getter]
    fn decay<'py>(&'py self, py: Python<'py>) -> PyResult<&'py Bound<'py, Decay>> {
        let make = || Py::new(py, Decay::of(py, &self.inner));
        Ok(self.decay.get_or_try_init(py, make)?.bind(py))
    }

    /// Energy inside after a steady lamp goes off.
    #[getter]
    fn switch_off<'py>(&'py self, py: Python<'py>) -> PyResult<&'py Bound<'py, Curve>> {
        let make = || Py::new(py, Curve::of(py, &self.inner, false));
        Ok(self.switch_off.get_or_try_init(py, make)?.bind(py))
    }

    /// Energy inside after a lamp comes on and stays steady.
    #[getter]
    fn switch_on<'py>(&'py self, py: Python<'py>) -> PyResult<&'py Bound<'py, Curve>> {
        let make = || Py::new(py, Curve::of(py, &self.inner, true));
        Ok(self.switch_on.get_or_try_init(py, make)?.bind(py))
    }

    /// Lengths of flights that start on a surface.
    #[getter]
    fn flight_histogram<'py>(
        &'py self,
        py: Python<'py>,
    ) -> PyResult<&'py Bound<'py, FlightHistogram>> {
        let make = || Py::new(py, FlightHistogram::of(py, &self.inner));
        Ok(self.histogram.get_or_try_init(py, make)?.bind(py))
    }

    /// Mean free path in m: flights that start on a surface, weighted by the energy at their start.
    #[getter]
    fn mean_free_path(&self) -> Estimate {
        Estimate::of(self.inner.mean_free_path(), "m")
    }

    /// Mean number of strikes, weighted by energy.
    #[getter]
    fn mean_strikes(&self) -> Estimate {
        Estimate::of(self.inner.mean_strikes(), "")
    }

    /// Mean path in m of the light from its source to its end, weighted by energy.
    #[getter]
    fn mean_path(&self) -> Estimate {
        Estimate::of(self.inner.mean_path(), "m")
    }

    /// Energy in J that a steady lamp keeps inside.
    #[getter]
    fn stored_energy(&self) -> Estimate {
        Estimate::of(self.inner.stored_energy(), "J")
    }

    /// Mean of a power of the length of flights that start on a surface.
    ///
    /// Parameters
    /// ----------
    /// power : int
    ///     The power k, from 1 to 4; the result is in mᵏ.
    fn flight_moment(&self, power: usize) -> PyResult<Estimate> {
        let unit = unit_of_power(power)?;
        Ok(Estimate::of(self.inner.flight_moment(power), unit))
    }

    /// The same of first flights that start inside, as from a point, a beam or the volume; NaN if there are none.
    ///
    /// Parameters
    /// ----------
    /// power : int
    ///     The power k, from 1 to 4; the result is in mᵏ.
    fn first_flight_moment(&self, power: usize) -> PyResult<Estimate> {
        let unit = unit_of_power(power)?;
        Ok(Estimate::of(self.inner.first_flight_moment(power), unit))
    }

    /// Names of all outputs that are single numbers.
    #[getter]
    fn outputs(&self) -> Names {
        Names(self.inner.output_names())
    }

    /// The output of this name.
    ///
    /// Parameters
    /// ----------
    /// name : str
    ///     Such as `"detector.incident"`, `"ledger.absorbed"` or `"mean_free_path"`; see `outputs`.
    fn output(&self, name: &str) -> PyResult<Estimate> {
        let estimate = self.inner.output(name).map_err(raise)?;
        Ok(Estimate::of(estimate, unit(name)))
    }

    /// Ratio of two outputs; their covariance is taken into account.
    ///
    /// Parameters
    /// ----------
    /// above, below : str
    ///     Names of the outputs; see `outputs`.
    fn ratio(&self, above: &str, below: &str) -> PyResult<Estimate> {
        let estimate = self.inner.ratio(above, below).map_err(raise)?;
        let unit = unit_of_ratio(above, below);
        Ok(Estimate::of(estimate, &unit))
    }

    /// Any function of the outputs, with its uncertainty by the jackknife.
    ///
    /// Parameters
    /// ----------
    /// function : callable
    ///     Takes a dict of all `outputs` (name to float) and returns a float; it is called once for all photons
    ///     and once for each of 64 groups left out, and must depend on its argument alone.
    ///
    /// Returns
    /// -------
    /// Estimate
    ///     Of the unit that the function gives.
    fn estimate(&self, py: Python<'_>, function: &Bound<'_, PyAny>) -> PyResult<Estimate> {
        outputs::estimate(py, &self.inner, function)
    }

    /// Puts this outcome and one of other photons of the same experiment and seed together.
    ///
    /// Parameters
    /// ----------
    /// other : Outcome
    ///     The other one.
    ///
    /// Returns
    /// -------
    /// Outcome
    ///     A new outcome; neither of the two is changed.
    ///
    /// Raises
    /// ------
    /// MergeError
    ///     If the other is of another experiment or seed, or has a photon that this one has.
    fn merge(&self, other: &Self) -> PyResult<Self> {
        let mut merged = (*self.inner).clone();
        merged.merge(&other.inner).map_err(raise)?;
        Ok(Self::of(Arc::new(merged)))
    }

    /// Saves the outcome with its experiment as a NetCDF-4 file; a crash leaves the old file or the new one.
    ///
    /// Parameters
    /// ----------
    /// path : path-like
    ///     The file.
    fn save(slf: &Bound<'_, Self>, path: PathBuf) -> PyResult<()> {
        slf.py()
            .import("albedra._store")?
            .call_method1("save", (slf, path))
            .map(drop)
    }

    /// Reads an outcome from a file that `save` wrote; equal to the saved one, bit for bit.
    ///
    /// Parameters
    /// ----------
    /// path : path-like
    ///     The file.
    #[staticmethod]
    fn load(py: Python<'_>, path: PathBuf) -> PyResult<Bound<'_, PyAny>> {
        py.import("albedra._store")?.call_method1("load", (path,))
    }

    /// All results as an xarray Dataset, with units; the variable of a standard uncertainty ends in `_u`.
    fn to_xarray<'py>(slf: &Bound<'py, Self>) -> PyResult<Bound<'py, PyAny>> {
        slf.py()
            .import("albedra._xarray")?
            .call_method1("dataset", (slf,))
    }

    /// Draws the outcome with matplotlib.
    ///
    /// Parameters
    /// ----------
    /// kind : {"decay", "flux", "map"}, optional
    ///     What to draw; by default everything, as an overview.
    /// wall : str, optional
    ///     The wall of a map; by default the first one that has one.
    /// ax : matplotlib.axes.Axes, optional
    ///     Where to draw; by default a new figure. Not for an overview.
    ///
    /// Returns
    /// -------
    /// matplotlib.axes.Axes or matplotlib.figure.Figure
    ///     The axes, or the figure of an overview. Bars and bands are 95 % coverage intervals.
    #[pyo3(signature = (kind = None, *, wall = None, ax = None))]
    fn plot<'py>(
        slf: &Bound<'py, Self>,
        kind: Option<&str>,
        wall: Option<&str>,
        ax: Option<&Bound<'py, PyAny>>,
    ) -> PyResult<Bound<'py, PyAny>> {
        slf.py()
            .import("albedra._plot")?
            .call_method1("plot", (slf, kind, wall, ax))
    }

    fn _store<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyDict>> {
        crate::store::parts(py, &self.inner)
    }

    #[staticmethod]
    fn _restore(parts: &Bound<'_, PyDict>) -> PyResult<Self> {
        crate::store::outcome(parts).map(|outcome| Self::of(Arc::new(outcome)))
    }

    #[staticmethod]
    #[pyo3(signature = (bytes, target))]
    fn _rebuild(
        py: Python<'_>,
        bytes: &[u8],
        target: Option<(String, f64, f64)>,
    ) -> PyResult<Self> {
        let outcome = py
            .detach(|| albedra::Outcome::from_bytes(bytes))
            .map_err(raise)?;
        let target = target
            .map(|(output, relative, reached)| albedra::Target::new(output, relative, reached));
        Ok(Self::of(Arc::new(outcome.with_target(target))))
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
        let target = self
            .inner
            .target()
            .map(|t| (t.output.clone(), t.relative, t.reached));
        let bytes = PyBytes::new(py, &self.inner.to_bytes());
        Ok((rebuild, (bytes, target)).into_pyobject(py)?.into_any())
    }

    fn __eq__(&self, other: &Self) -> bool {
        self.inner == other.inner
    }

    fn __str__(&self) -> String {
        self.inner.to_string()
    }

    fn __repr__(&self) -> String {
        format!(
            "<Outcome: {} photons, seed {}, fingerprint {:.8}…>",
            self.inner.photons(),
            self.inner.seed(),
            self.inner.totals().history().to_string()
        )
    }
}
