//! A number with its uncertainty.

use pyo3::prelude::*;
use pyo3::types::PyDict;

use crate::text::{fitting, number, quoted};

/// A value with its standard uncertainty, Type A, of the simulation alone.
///
/// Printed in the concise notation of JCGM 100:2008 (GUM), 7.2.2, with two digits in the bracket.
///
/// Parameters
/// ----------
/// value : float
///     The value, in `unit`.
/// u : float
///     Standard uncertainty, in `unit`; infinite where the photons do not suffice for one.
/// degrees_of_freedom : float
///     Degrees of freedom of `u`; infinite for a `u` that is known exactly.
/// upper : float, optional
///     Upper 95 % limit of a quantity that hardly any photon reached; printed instead of value and `u`.
/// unit : str
///     The unit, for printing.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> estimate = al.Estimate(0.274131, 0.00088, 63, unit="W")
/// >>> print(estimate)
/// 0.274 13(88) W
/// >>> interval = estimate.coverage_interval(0.95)
/// >>> round(interval.low, 4), round(interval.high, 4)
/// (0.2724, 0.2759)
/// >>> round(estimate.zeta(0.2750), 2)
/// -0.99
#[pyclass(frozen, eq, from_py_object, module = "albedra")]
#[derive(Clone, PartialEq)]
pub(crate) struct Estimate {
    pub(crate) inner: albedra::Estimate,
    unit: String,
}

impl Estimate {
    pub(crate) fn of(inner: albedra::Estimate, unit: &str) -> Self {
        let unit = unit.to_owned();
        Self { inner, unit }
    }
}

/// A representation for the fields of records.
impl crate::records::Written for Estimate {
    fn written(&self, _: Python<'_>) -> PyResult<String> {
        Ok(format!("'{}'", self.__str__()))
    }
}

#[pymethods]
impl Estimate {
    #[new]
    #[pyo3(signature = (value, u, degrees_of_freedom = f64::INFINITY, *, upper = None, unit = ""))]
    #[pyo3(text_signature = "(value, u, degrees_of_freedom=..., *, upper=None, unit='')")]
    fn new(value: f64, u: f64, degrees_of_freedom: f64, upper: Option<f64>, unit: &str) -> Self {
        let inner = albedra::Estimate::new(value, u, degrees_of_freedom).with_upper(upper);
        Self::of(inner, unit)
    }

    /// The value, in `unit`.
    #[getter]
    fn value(&self) -> f64 {
        self.inner.value
    }

    /// Standard uncertainty, in `unit`; infinite where the photons do not suffice for one.
    #[getter]
    fn u(&self) -> f64 {
        self.inner.u
    }

    /// Degrees of freedom of `u`.
    #[getter]
    fn degrees_of_freedom(&self) -> f64 {
        self.inner.degrees_of_freedom
    }

    /// Upper 95 % limit of a quantity that hardly any photon reached, else None.
    #[getter]
    fn upper(&self) -> Option<f64> {
        self.inner.upper
    }

    /// The unit, for printing.
    #[getter]
    fn unit(&self) -> &str {
        &self.unit
    }

    /// Relative standard uncertainty u / abs(value).
    #[getter]
    fn relative(&self) -> f64 {
        self.inner.relative()
    }

    /// Interval that covers the true value with a chance of `p`, by Student's t.
    ///
    /// Parameters
    /// ----------
    /// p : float
    ///     Chance, from 0 to 1.
    ///
    /// Returns
    /// -------
    /// CoverageInterval
    ///     Named tuple `(low, high)`, in `unit`.
    #[pyo3(signature = (p = 0.95))]
    fn coverage_interval<'py>(&self, py: Python<'py>, p: f64) -> PyResult<Bound<'py, PyAny>> {
        if !(0.0..=1.0).contains(&p) {
            let text = format!("p must lie in [0, 1], got {p}");
            return Err(pyo3::exceptions::PyValueError::new_err(text));
        }
        let class = py.import("albedra._records")?.getattr("CoverageInterval")?;
        class.call1(self.inner.coverage_interval(p))
    }

    /// Zeta score: deviation from a reference in units of the combined standard uncertainty.
    ///
    /// Parameters
    /// ----------
    /// reference : float
    ///     The reference, in `unit`.
    /// u : float
    ///     Its standard uncertainty, in `unit`.
    #[pyo3(signature = (reference, u = 0.0))]
    fn zeta(&self, reference: f64, u: f64) -> f64 {
        self.inner.zeta(reference, u)
    }

    /// Chance of a zeta score at least as far from 0, if the reference is right.
    ///
    /// Parameters
    /// ----------
    /// reference : float
    ///     The reference, in `unit`.
    /// u : float
    ///     Its standard uncertainty, in `unit`.
    #[pyo3(signature = (reference, u = 0.0))]
    fn p_value(&self, reference: f64, u: f64) -> f64 {
        self.inner.p_value(reference, u)
    }

    fn __float__(&self) -> f64 {
        self.inner.value
    }

    fn __str__(&self) -> String {
        self.inner.with_unit(&self.unit).to_string()
    }

    fn __format__<'py>(&self, py: Python<'py>, spec: &str) -> PyResult<Bound<'py, PyAny>> {
        let builtins = py.import("builtins")?;
        if spec.ends_with(['e', 'E', 'f', 'F', 'g', 'G', 'n', '%']) {
            builtins.call_method1("format", (self.inner.value, spec))
        } else {
            builtins.call_method1("format", (self.__str__(), spec))
        }
    }

    fn __repr__(&self, py: Python<'_>) -> PyResult<String> {
        let e = &self.inner;
        let [value, u, freedom] = [e.value, e.u, e.degrees_of_freedom].map(number);
        let mut arguments = vec![value, u, freedom];
        if let Some(upper) = e.upper {
            arguments.push(format!("upper={}", number(upper)));
        }
        if !self.unit.is_empty() {
            arguments.push(format!("unit={}", quoted(py, &self.unit)?));
        }
        let full = format!("Estimate({})", arguments.join(", "));
        Ok(fitting(full, || format!("<Estimate: {}>", self.__str__())))
    }

    fn __getnewargs_ex__<'py>(
        &self,
        py: Python<'py>,
    ) -> PyResult<((f64, f64, f64), Bound<'py, PyDict>)> {
        let keywords = PyDict::new(py);
        keywords.set_item("upper", self.inner.upper)?;
        keywords.set_item("unit", &self.unit)?;
        let e = &self.inner;
        Ok(((e.value, e.u, e.degrees_of_freedom), keywords))
    }
}
