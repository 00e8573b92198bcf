//! Results by name.

use pyo3::exceptions::PyKeyError;
use pyo3::prelude::*;
use pyo3::types::{PyList, PyTuple};

/// Results by the name of their wall, region or opening, in the order of an outcome's rows.
#[pyclass(frozen, mapping, name = "_Named", module = "albedra._albedra")]
pub(crate) struct Named {
    /// What the names are of.
    what: &'static str,
    names: Vec<String>,
    items: Vec<Py<PyAny>>,
}

impl Named {
    /// Puts names and items of equal number together.
    pub(crate) fn of(what: &'static str, names: Vec<String>, items: Vec<Py<PyAny>>) -> Self {
        Self { what, names, items }
    }

    fn find(&self, name: &str) -> Option<&Py<PyAny>> {
        let at = self.names.iter().position(|known| known == name)?;
        self.items.get(at)
    }
}

#[pymethods]
impl Named {
    fn __len__(&self) -> usize {
        self.names.len()
    }

    fn __contains__(&self, name: &Bound<'_, PyAny>) -> bool {
        name.extract::<String>()
            .is_ok_and(|name| self.find(&name).is_some())
    }

    fn __getitem__(&self, py: Python<'_>, name: &Bound<'_, PyAny>) -> PyResult<Py<PyAny>> {
        let text: String = name
            .extract()
            .map_err(|_| PyKeyError::new_err(name.clone().unbind()))?;
        self.find(&text)
            .map(|item| item.clone_ref(py))
            .ok_or_else(|| {
                let near = albedra::Near::to(&text, self.names.iter().map(String::as_str));
                PyKeyError::new_err(format!("no {} is named {text:?}{near}", self.what))
            })
    }

    #[pyo3(signature = (name, default = None))]
    fn get(&self, py: Python<'_>, name: &str, default: Option<Py<PyAny>>) -> Option<Py<PyAny>> {
        self.find(name).map(|item| item.clone_ref(py)).or(default)
    }

    fn keys<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyTuple>> {
        PyTuple::new(py, &self.names)
    }

    fn values<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyTuple>> {
        PyTuple::new(py, &self.items)
    }

    fn items<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyTuple>> {
        PyTuple::new(py, self.names.iter().zip(&self.items))
    }

    fn __iter__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        Ok(PyList::new(py, &self.names)?.try_iter()?.into_any())
    }

    fn __eq__(&self, py: Python<'_>, other: &Self) -> PyResult<bool> {
        if self.names != other.names {
            return Ok(false);
        }
        for (ours, theirs) in self.items.iter().zip(&other.items) {
            if !ours.bind(py).eq(theirs)? {
                return Ok(false);
            }
        }
        Ok(true)
    }

    #[staticmethod]
    fn _rebuild(what: &str, names: Vec<String>, items: Vec<Py<PyAny>>) -> Self {
        let known = [ROWS, MAPS].into_iter().find(|&known| known == what);
        Self::of(known.unwrap_or(ROWS), names, items)
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
        let names = PyList::new(py, &self.names)?;
        let arguments = (self.what, names, PyList::new(py, &self.items)?);
        Ok((rebuild, arguments).into_pyobject(py)?.into_any())
    }

    fn __repr__(&self) -> String {
        let names = if self.names.is_empty() {
            "none".to_owned()
        } else {
            self.names.join(", ")
        };
        let full = format!("<by {}: {names}>", self.what);
        crate::text::fitting(full.clone(), || full)
    }
}

/// What the names of fluxes and irradiances are of.
pub(crate) const ROWS: &str = "wall, region or opening";

/// What the names of maps are of.
pub(crate) const MAPS: &str = "map";
