//! The compiled half of the Python package `albedra`: it converts arguments and results, and holds no physics.
#![allow(
    clippy::doc_markdown,
    clippy::doc_link_with_quotes,
    reason = "these are Python's docstrings, in the form of numpydoc"
)]
#![allow(
    clippy::needless_pass_by_value,
    clippy::unused_self,
    reason = "arguments are handed over by Python, and methods must be methods there"
)]

mod arrays;
mod coating;
mod curves;
mod enclosure;
mod errors;
mod estimate;
mod experiment;
mod grid;
mod histogram;
mod ledger;
mod map;
mod medium;
mod mesh;
mod named;
mod outcome;
mod outputs;
mod records;
mod region;
mod source;
mod store;
mod text;
mod trace;
mod wall;

/// Where light goes in a closed cavity.
#[pyo3::pymodule]
mod _albedra {
    use pyo3::prelude::*;

    #[pymodule_export]
    use crate::coating::Coating;
    #[pymodule_export]
    use crate::curves::{Curve, Decay, DecayTime};
    #[pymodule_export]
    use crate::enclosure::Enclosure;
    #[pymodule_export]
    use crate::errors::{EnclosureError, ExperimentError, Interrupted, MergeError};
    #[pymodule_export]
    use crate::estimate::Estimate;
    #[pymodule_export]
    use crate::experiment::Experiment;
    #[pymodule_export]
    use crate::grid::TimeGrid;
    #[pymodule_export]
    use crate::histogram::FlightHistogram;
    #[pymodule_export]
    use crate::ledger::{Counters, Facts, Flux, Ledger, Progress, Target};
    #[pymodule_export]
    use crate::map::Map;
    #[pymodule_export]
    use crate::medium::Medium;
    #[pymodule_export]
    use crate::named::Named;
    #[pymodule_export]
    use crate::outcome::Outcome;
    #[pymodule_export]
    use crate::region::Region;
    #[pymodule_export]
    use crate::source::Source;
    #[pymodule_export]
    use crate::wall::{Audit, Frame, Wall};

    #[pymodule_init]
    fn init(module: &Bound<'_, PyModule>) -> PyResult<()> {
        // What an exception says that was not raised by a run, or not for a mesh.
        let py = module.py();
        py.get_type::<Interrupted>().setattr("result", py.None())?;
        py.get_type::<EnclosureError>()
            .setattr("audit", py.None())?;
        module.add("__version__", env!("CARGO_PKG_VERSION"))
    }
}
