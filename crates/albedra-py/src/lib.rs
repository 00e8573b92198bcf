//! The compiled half of the Python package `albedra`: it converts arguments and results, and holds no physics.

/// Where light goes in a closed cavity.
#[pyo3::pymodule]
mod _albedra {
    use pyo3::prelude::*;

    #[pymodule_init]
    fn init(module: &Bound<'_, PyModule>) -> PyResult<()> {
        module.add("__version__", env!("CARGO_PKG_VERSION"))
    }
}
