//! Enclosure, sources and what to observe, put together.

use std::sync::Arc;

use pyo3::exceptions::{PyTypeError, PyValueError};
use pyo3::prelude::*;
use pyo3::types::{PyDict, PyMapping, PyTuple};

use crate::arrays::count;
use crate::enclosure::{Enclosure, Reduced};
use crate::errors::raise;
use crate::grid::TimeGrid;
use crate::mesh;
use crate::outcome::Outcome;
use crate::source::Source;
use crate::text::{counted, fitting, quoted};
use crate::trace::{Order, trace};

/// An enclosure, the sources in it and what to observe: immutable, with no randomness in it.
///
/// Parameters
/// ----------
/// enclosure : Enclosure
///     The enclosure.
/// source : Source or sequence of Source
///     The sources; each photon starts from one of them, chosen in proportion to their flux.
/// time : TimeGrid, optional
///     Time grid of the curves; by default 200 bins up to ten times the expected decay time.
/// maps : dict of str to (int, int), optional
///     Walls whose irradiance is mapped, with the number of cells along their u and v.
/// path_limit : float, optional
///     Ends photons at their first strike after this path in m; what they still carry is booked as cut.
/// memory : int, optional
///     Memory in bytes that outputs may take; 1 GiB by default.
/// title : str
///     Printed with the outcome; has no influence on it.
///
/// Raises
/// ------
/// ExperimentError
///     If anything about it is wrong.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> chamber = al.Enclosure.cuboid((1.2, 0.8, 0.5), coating=al.Coating.lambertian(0.9))
/// >>> lamp = al.Source.point((0.2, 0, 0), flux=5.0)
/// >>> experiment = al.Experiment(chamber, lamp, time=al.TimeGrid(stop=1e-7, bins=50), maps={"z-": (12, 8)})
/// >>> result = experiment.trace(20_000, seed=7)
/// >>> result.ledger.closes
/// True
#[pyclass(frozen, eq, from_py_object, module = "albedra")]
#[derive(Clone, PartialEq)]
pub(crate) struct Experiment(pub(crate) Arc<albedra::Experiment>);

fn sources(source: &Bound<'_, PyAny>) -> PyResult<Vec<albedra::Source>> {
    let wrong = |what: &Bound<'_, PyAny>| {
        let name = what
            .get_type()
            .name()
            .map_or_else(|_| "?".to_owned(), |n| n.to_string());
        PyTypeError::new_err(format!(
            "source must be a Source or a sequence of them, got {name}"
        ))
    };
    if let Ok(one) = source.extract::<Source>() {
        return Ok(vec![one.0]);
    }
    let mut all = Vec::new();
    for item in source.try_iter().map_err(|_| wrong(source))? {
        let item = item?;
        all.push(item.extract::<Source>().map_err(|_| wrong(&item))?.0);
    }
    if all.is_empty() {
        return Err(PyValueError::new_err(
            "source must hold at least one Source, got none",
        ));
    }
    Ok(all)
}

#[pymethods]
impl Experiment {
    #[new]
    #[pyo3(signature = (
        enclosure, source, *, time = None, maps = None, path_limit = None, memory = None, title = ""
    ))]
    #[expect(clippy::too_many_arguments, reason = "all but two are options by name")]
    fn new(
        py: Python<'_>,
        enclosure: &Enclosure,
        source: &Bound<'_, PyAny>,
        time: Option<&TimeGrid>,
        maps: Option<Bound<'_, PyMapping>>,
        path_limit: Option<f64>,
        memory: Option<&Bound<'_, PyAny>>,
        title: &str,
    ) -> PyResult<Self> {
        let mut sources = sources(source)?.into_iter();
        let first = sources.next().unwrap_or_else(albedra::Source::volume);
        let mut experiment = albedra::Experiment::new(&enclosure.0, first).title(title);
        for source in sources {
            experiment = experiment.and(source);
        }
        if let Some(time) = time {
            experiment = experiment.time(time.grid.clone());
        }
        if let Some(maps) = maps {
            for item in maps.items()? {
                let (wall, cells): (String, Bound<'_, PyAny>) = item.extract()?;
                let pair: (Bound<'_, PyAny>, Bound<'_, PyAny>) = cells.extract().map_err(|_| {
                    PyTypeError::new_err(format!(
                        "maps[{wall:?}] must be (cells along u, cells along v)"
                    ))
                })?;
                let argument = format!("maps[{wall:?}]");
                let (nu, nv) = (count(&argument, &pair.0)?, count(&argument, &pair.1)?);
                experiment = experiment.map(wall, (nu, nv));
            }
        }
        if let Some(metres) = path_limit {
            experiment = experiment.path_limit(metres);
        }
        if let Some(bytes) = memory {
            experiment = experiment.memory(count("memory", bytes)?);
        }
        py.detach(|| experiment.check()).map_err(raise)?;
        Ok(Self(Arc::new(experiment)))
    }

    /// Traces photons.
    ///
    /// Ctrl-C stops it within a fraction of a second and raises Interrupted, whose `result` is the outcome of
    /// what was done in full before.
    ///
    /// Parameters
    /// ----------
    /// photons : int
    ///     How many; with a target, at most so many; with `resume`, how many more.
    /// seed : int
    ///     The same seed gives the same photons. With `resume`, its seed is taken.
    /// threads : int, optional
    ///     Number of threads; by default all cores. Results do not depend on it.
    /// first : int
    ///     Index of the first photon. A run may so be divided among machines, and merged.
    /// target : (str, float), optional
    ///     An output (see `Outcome.outputs`) and the relative standard uncertainty wanted of it: a pilot run on
    ///     other photons, which is thrown away, decides how many photons to trace. The numbers are those of
    ///     tracing so many without a target; the outcome's `target` says whether it was met.
    /// resume : Outcome, optional
    ///     An outcome to continue, with the photons that follow its last one.
    /// progress : bool or callable, optional
    ///     True shows a bar, or lines where there is no terminal; False shows nothing; a callable is called with
    ///     a Progress about 20 times a second and at the end, and may raise an exception, which stops the run.
    ///     By default a bar is shown on a terminal, and in a notebook if tqdm is installed.
    ///
    /// Returns
    /// -------
    /// Outcome
    ///     What was found.
    ///
    /// Raises
    /// ------
    /// Interrupted
    ///     If Ctrl-C stopped the run.
    /// MergeError
    ///     If the outcome to continue is of another experiment.
    #[pyo3(signature = (
        photons, *, seed = None, threads = None, first = None, target = None, resume = None, progress = None
    ))]
    #[pyo3(
        text_signature = "($self, photons, *, seed=0, threads=None, first=0, target=None, resume=None, progress=None)"
    )]
    #[expect(clippy::too_many_arguments, reason = "all but one are options by name")]
    fn trace(
        &self,
        py: Python<'_>,
        photons: &Bound<'_, PyAny>,
        seed: Option<&Bound<'_, PyAny>>,
        threads: Option<&Bound<'_, PyAny>>,
        first: Option<&Bound<'_, PyAny>>,
        target: Option<(String, f64)>,
        resume: Option<&Bound<'_, Outcome>>,
        progress: Option<&Bound<'_, PyAny>>,
    ) -> PyResult<Outcome> {
        let number = |argument, value: Option<&Bound<'_, PyAny>>| {
            value.map(|value| count::<u64>(argument, value)).transpose()
        };
        let order = Order {
            photons: count("photons", photons)?,
            seed: number("seed", seed)?,
            threads: threads
                .map(|threads| count("threads", threads))
                .transpose()?,
            first: number("first", first)?,
            target,
            resume: resume.map(|outcome| Arc::clone(&outcome.get().inner)),
        };
        trace(py, &self.0, order, progress)
    }

    /// The enclosure.
    #[getter]
    fn enclosure(&self) -> Enclosure {
        Enclosure(self.0.enclosure().clone())
    }

    /// The sources.
    #[getter]
    fn sources<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyTuple>> {
        PyTuple::new(
            py,
            self.0.sources().iter().map(|source| Source(source.clone())),
        )
    }

    /// The time grid that was given, or None.
    #[getter]
    fn time(&self) -> Option<TimeGrid> {
        self.0.settings().time.clone().map(TimeGrid::of)
    }

    /// Numbers of cells along u and v of each map, by wall.
    #[getter]
    fn maps<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyDict>> {
        let maps = PyDict::new(py);
        for map in &self.0.settings().maps {
            maps.set_item(&map.wall, (map.cells[0], map.cells[1]))?;
        }
        Ok(maps)
    }

    /// Path in m after which photons end, or None.
    #[getter]
    fn path_limit(&self) -> Option<f64> {
        self.0.settings().path_limit
    }

    /// Memory in bytes that outputs may take.
    #[getter]
    fn memory(&self) -> u64 {
        self.0.settings().memory
    }

    /// The title.
    #[getter]
    fn title(&self) -> &str {
        &self.0.settings().title
    }

    /// The experiment as TOML text; a mesh is not in it.
    fn to_text(&self) -> String {
        self.0.to_text()
    }

    #[staticmethod]
    #[pyo3(signature = (text, mesh))]
    fn _rebuild(py: Python<'_>, text: &str, mesh: Option<&[u8]>) -> PyResult<Self> {
        let mesh = mesh::from_bytes(mesh)?;
        let experiment = py
            .detach(|| albedra::Experiment::from_text(text, mesh))
            .map_err(raise)?;
        Ok(Self(Arc::new(experiment)))
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Reduced<'py>> {
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
        Ok((
            rebuild,
            (self.0.to_text(), mesh::to_bytes(py, self.0.mesh_beside())),
        ))
    }

    fn __repr__(&self, py: Python<'_>) -> PyResult<String> {
        let settings = self.0.settings();
        let tail = format!(
            "{}, {}, {}>",
            counted(self.0.enclosure().rows().len(), "row"),
            counted(settings.sources.len(), "source"),
            counted(settings.maps.len(), "map")
        );
        if settings.title.is_empty() {
            return Ok(format!("<Experiment: {tail}"));
        }
        let full = format!("<Experiment {}: {tail}", quoted(py, &settings.title)?);
        Ok(fitting(full, || format!("<Experiment: {tail}")))
    }
}
