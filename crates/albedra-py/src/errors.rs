//! From the core's errors to Python's exceptions.

use albedra::{
    CoatingError, ExperimentError as CoreExperimentError, ImportError, LoadError, MediumError,
    MergeError as CoreMergeError, RegionError, RunError, TextError, TimeGridError, UnitError,
};
use pyo3::create_exception;
use pyo3::exceptions::{PyKeyboardInterrupt, PyRuntimeError, PyValueError};
use pyo3::prelude::*;

use crate::wall::Audit;

create_exception!(
    albedra,
    EnclosureError,
    PyValueError,
    "An enclosure that cannot be: its shape, a name or a region is wrong.\n\n`audit` is the Audit of a mesh that encloses no body, with all its problems; None otherwise."
);
create_exception!(
    albedra,
    ExperimentError,
    PyValueError,
    "An experiment that cannot be traced, or an output that it does not have."
);
create_exception!(
    albedra,
    MergeError,
    PyValueError,
    "Outcomes that cannot be put together: other experiments, other seeds, or the same photons twice."
);
create_exception!(
    albedra,
    Interrupted,
    PyKeyboardInterrupt,
    "A run that Ctrl-C stopped.

`result` is the Outcome of what was done in full before, or None.

Examples
--------
>>> import albedra as al
>>> box = al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.lambertian(0.5))
>>> try:
...     result = al.Experiment(box, al.Source.volume()).trace(1000)
... except al.Interrupted as stopped:
...     result = stopped.result
>>> result.photons
1000
"
);

/// Any error of the core.
pub(crate) enum Fault {
    /// An argument has a wrong value.
    Value(String),
    /// An enclosure cannot be.
    Enclosure(albedra::EnclosureError),
    /// An experiment cannot be.
    Experiment(CoreExperimentError),
    /// Outcomes cannot be put together.
    Merge(CoreMergeError),
    /// A run has no result; one that was stopped is seen to by its caller.
    Run(Box<RunError>),
}

/// The exception for an error of the core: the only place where this is decided.
pub(crate) fn raise(fault: impl Into<Fault>) -> PyErr {
    match fault.into() {
        Fault::Value(text) => PyValueError::new_err(text),
        Fault::Enclosure(albedra::EnclosureError::Import(error @ ImportError::File { .. })) => {
            let ImportError::File { kind, .. } = &error else {
                return PyValueError::new_err(error.to_string());
            };
            std::io::Error::new(*kind, error.to_string()).into()
        }
        Fault::Enclosure(error) => enclosure_error(&error),
        Fault::Experiment(error) => ExperimentError::new_err(error.to_string()),
        Fault::Merge(error) => MergeError::new_err(error.to_string()),
        Fault::Run(error) => match *error {
            RunError::Experiment(error) => raise(error),
            RunError::Merge(error) => raise(error),
            RunError::Cancelled { .. } => Interrupted::new_err("the run was stopped"),
            error @ RunError::NoThreads { .. } => PyRuntimeError::new_err(error.to_string()),
            error => PyValueError::new_err(error.to_string()),
        },
    }
}

/// The exception for an enclosure, with the audit of a mesh that is unsound.
fn enclosure_error(error: &albedra::EnclosureError) -> PyErr {
    let raised = EnclosureError::new_err(error.to_string());
    let albedra::EnclosureError::Unsound(audit) = error else {
        return raised;
    };
    let attached = Python::attach(|py| raised.value(py).setattr("audit", Audit::of(audit)));
    attached.err().unwrap_or(raised)
}

/// The same exception with a note on the file that it is about.
pub(crate) fn noted(py: Python<'_>, error: PyErr, file: &std::path::Path) -> PyErr {
    let note = format!("while loading {}", file.display());
    match error.value(py).call_method1("add_note", (note,)) {
        Ok(_) => error,
        Err(other) => other,
    }
}

macro_rules! value_faults {
    ($($error:ty),+) => {
        $(impl From<$error> for Fault {
            fn from(error: $error) -> Self {
                Self::Value(error.to_string())
            }
        })+
    };
}

value_faults!(
    CoatingError,
    MediumError,
    RegionError,
    TimeGridError,
    UnitError,
    LoadError
);

impl From<albedra::EnclosureError> for Fault {
    fn from(error: albedra::EnclosureError) -> Self {
        Self::Enclosure(error)
    }
}

impl From<CoreExperimentError> for Fault {
    fn from(error: CoreExperimentError) -> Self {
        Self::Experiment(error)
    }
}

impl From<CoreMergeError> for Fault {
    fn from(error: CoreMergeError) -> Self {
        Self::Merge(error)
    }
}

impl From<RunError> for Fault {
    fn from(error: RunError) -> Self {
        Self::Run(Box::new(error))
    }
}

impl From<TextError> for Fault {
    fn from(error: TextError) -> Self {
        match error {
            TextError::Enclosure(error) => Self::Enclosure(error),
            error => Self::Value(error.to_string()),
        }
    }
}
