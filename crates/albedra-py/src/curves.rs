//! Energy against time, with its uncertainty.

use std::sync::Arc;

use numpy::{PyArray1, PyArrayMethods};
use pyo3::exceptions::PyValueError;
use pyo3::prelude::*;

use crate::arrays::{Shared, same, share};
use crate::estimate::Estimate;
use crate::outcome::Outcome;
use crate::records::{Columns, record};
use crate::text::short;

/// How a view pickles: as its outcome and the attribute that gives it.
pub(crate) fn of_outcome<'py>(
    py: Python<'py>,
    outcome: &Arc<albedra::Outcome>,
    attribute: &str,
) -> PyResult<Bound<'py, PyAny>> {
    let outcome = Outcome::of(Arc::clone(outcome));
    let getattr = py.import("builtins")?.getattr("getattr")?;
    Ok((getattr, (outcome, attribute))
        .into_pyobject(py)?
        .into_any())
}

/// Energy inside after a short pulse, at the edges of the time grid.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> box = al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.lambertian(0.9))
/// >>> decay = al.Experiment(box, al.Source.volume()).trace(10_000).decay
/// >>> decay.energy[0], len(decay.edges)
/// (np.float64(1.0), 201)
/// >>> time = decay.decay_time()
/// >>> bool(abs(time.estimate.value - 2.2e-8) < 0.2e-8)
/// True
#[pyclass(frozen, module = "albedra")]
pub(crate) struct Decay {
    outcome: Arc<albedra::Outcome>,
    edges: Shared,
    energy: Shared,
    u: Shared,
    degrees_of_freedom: f64,
}

impl Decay {
    pub(crate) fn of(py: Python<'_>, outcome: &Arc<albedra::Outcome>) -> Self {
        let decay = outcome.decay();
        Self {
            outcome: Arc::clone(outcome),
            edges: share(py, decay.edges),
            energy: share(py, decay.energy),
            u: share(py, decay.u),
            degrees_of_freedom: decay.degrees_of_freedom,
        }
    }
}

/// How many edges there are, and how far they go.
pub(crate) fn extent(py: Python<'_>, edges: &Shared, unit: &str) -> String {
    let edges = edges.bind(py).readonly();
    let edges = edges.as_slice().unwrap_or_default();
    let stop = edges.last().copied().unwrap_or_default();
    format!("{} edges up to {} {unit}", edges.len(), short(stop))
}

#[pymethods]
impl Decay {
    /// Times in s; the pulse is at 0.
    #[getter]
    fn edges<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.edges.bind(py)
    }

    /// Energy inside in J, for a pulse of as many joules as the sources have watts.
    #[getter]
    fn energy<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.energy.bind(py)
    }

    /// Standard uncertainty in J.
    #[getter]
    fn u<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.u.bind(py)
    }

    /// Degrees of freedom of the uncertainty.
    #[getter]
    fn degrees_of_freedom(&self) -> f64 {
        self.degrees_of_freedom
    }

    /// Time in which the energy falls to 1/e, by weighted least squares of its logarithm over a window.
    ///
    /// Parameters
    /// ----------
    /// start, stop : float, optional
    ///     The window in s; give both or neither. By default it goes from where the energy has fallen to a
    ///     tenth to where its relative uncertainty passes 5 %.
    ///
    /// Returns
    /// -------
    /// DecayTime
    ///     With a flag that tells where the curve is not one exponential.
    ///
    /// Raises
    /// ------
    /// ValueError
    ///     If the window holds fewer than five edges with energy left, or if the energy does not fall in it.
    #[pyo3(signature = (start = None, stop = None))]
    fn decay_time(&self, start: Option<f64>, stop: Option<f64>) -> PyResult<DecayTime> {
        let window = match (start, stop) {
            (None, None) => None,
            (Some(start), Some(stop)) if start < stop => Some((start, stop)),
            (Some(start), Some(stop)) => {
                let text = format!("stop must be above start {start:?} s, got {stop:?} s");
                return Err(PyValueError::new_err(text));
            }
            _ => {
                return Err(PyValueError::new_err(
                    "start and stop must be given together",
                ));
            }
        };
        let time = self.outcome.decay_time(window).ok_or_else(|| {
            PyValueError::new_err(
                "the window must hold at least five edges with energy left, and the energy must fall in it",
            )
        })?;
        Ok(DecayTime::of(&time))
    }

    fn __eq__(&self, py: Python<'_>, other: &Self) -> bool {
        same(py, &self.edges, &other.edges)
            && same(py, &self.energy, &other.energy)
            && same(py, &self.u, &other.u)
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        of_outcome(py, &self.outcome, "decay")
    }

    fn __repr__(&self, py: Python<'_>) -> String {
        format!("<Decay: {}>", extent(py, &self.edges, "s"))
    }
}

record! {
    /// Time in which the energy falls to 1/e, fitted to a window of the decay curve.
    DecayTime {
        /// Decay time in s.
        estimate: Estimate,
        /// First and last edge of the window in s.
        window: (f64, f64),
        /// Decay time in s from the window's first half.
        first_half: Estimate,
        /// Decay time in s from the window's second half.
        second_half: Estimate,
        /// Whether the halves differ by more than three standard uncertainties and 1 %.
        not_one_exponential: bool,
    }

    fn __str__(&self, py: Python<'_>) -> PyResult<String> {
        self.columns(py)
    }
}

impl DecayTime {
    fn of(time: &albedra::DecayTime) -> Self {
        let seconds = |estimate| Estimate::of(estimate, "s");
        Self {
            estimate: seconds(time.estimate),
            window: time.window,
            first_half: seconds(time.first_half),
            second_half: seconds(time.second_half),
            not_one_exponential: time.not_one_exponential,
        }
    }
}

/// Energy inside against the time since a steady lamp was switched.
#[pyclass(frozen, module = "albedra")]
pub(crate) struct Curve {
    outcome: Arc<albedra::Outcome>,
    on: bool,
    edges: Shared,
    energy: Shared,
    u: Shared,
    degrees_of_freedom: f64,
}

impl Curve {
    pub(crate) fn of(py: Python<'_>, outcome: &Arc<albedra::Outcome>, on: bool) -> Self {
        let curve = if on {
            outcome.switch_on()
        } else {
            outcome.switch_off()
        };
        Self {
            outcome: Arc::clone(outcome),
            on,
            edges: share(py, curve.edges),
            energy: share(py, curve.energy),
            u: share(py, curve.u),
            degrees_of_freedom: curve.degrees_of_freedom,
        }
    }
}

#[pymethods]
impl Curve {
    /// Times in s since the lamp was switched.
    #[getter]
    fn edges<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.edges.bind(py)
    }

    /// Energy inside in J.
    #[getter]
    fn energy<'py>(&self, py: Python<'py>) -> &Bound<'py, PyArray1<f64>> {
        self.energy.bind(py)
    }

    /// Standard uncertainty in J.
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
            && same(py, &self.energy, &other.energy)
            && same(py, &self.u, &other.u)
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        of_outcome(
            py,
            &self.outcome,
            if self.on { "switch_on" } else { "switch_off" },
        )
    }

    fn __repr__(&self, py: Python<'_>) -> String {
        let lamp = if self.on { "on" } else { "off" };
        format!("<Curve: lamp {lamp}, {}>", extent(py, &self.edges, "s"))
    }
}
