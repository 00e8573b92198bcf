//! The compiled half of the Python package `albedra`: it converts arguments and results, and holds no physics.

use pyo3::prelude::*;

/// Where light goes in a closed cavity.
#[pymodule]
mod _albedra {
    use super::*;

    #[pymodule_init]
    fn init(module: &Bound<'_, PyModule>) -> PyResult<()> {
        module.add("__version__", env!("CARGO_PKG_VERSION"))
    }
}
