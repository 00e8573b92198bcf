//! Outputs by name: their units, and functions of them.

use std::cell::RefCell;

use pyo3::exceptions::PyValueError;
use pyo3::prelude::*;
use pyo3::types::PyDict;

use crate::errors::raise;
use crate::estimate::Estimate;

/// Unit of an output, by its name.
pub(crate) fn unit(output: &str) -> &'static str {
    match output {
        "mean_free_path" | "mean_path" => "m",
        "mean_strikes" => "",
        "stored_energy" => "J",
        _ if output.ends_with(".irradiance") => "W/m²",
        _ => "W",
    }
}

/// Unit of the ratio of two outputs.
pub(crate) fn unit_of_ratio(above: &str, below: &str) -> String {
    match (unit(above), unit(below)) {
        (a, b) if a == b => String::new(),
        (a, "") => a.to_owned(),
        ("", b) => format!("1/({b})"),
        (a, b) => format!("{a}/({b})"),
    }
}

/// Unit of a power of a length, from 1 to 4.
pub(crate) fn unit_of_power(power: usize) -> PyResult<&'static str> {
    let units = ["m", "m²", "m³", "m⁴"];
    let unit = power.checked_sub(1).and_then(|at| units.get(at));
    unit.copied().ok_or_else(|| {
        let text = format!("power must lie in [1, 4], got {power}");
        PyValueError::new_err(text)
    })
}

/// Estimates a function that takes a dict of all outputs; an exception that it raises comes out unchanged.
pub(crate) fn estimate(
    py: Python<'_>,
    outcome: &albedra::Outcome,
    function: &Bound<'_, PyAny>,
) -> PyResult<Estimate> {
    let names = outcome.output_names();
    let raised = RefCell::new(None);
    let call = |get: &dyn Fn(&str) -> f64| {
        let outputs = PyDict::new(py);
        for name in &names {
            outputs.set_item(name, get(name))?;
        }
        function.call1((outputs,))?.extract::<f64>()
    };
    let estimate = outcome.estimate(|get| {
        if raised.borrow().is_some() {
            return f64::NAN;
        }
        call(get).unwrap_or_else(|error| {
            *raised.borrow_mut() = Some(error);
            f64::NAN
        })
    });
    match raised.into_inner() {
        Some(error) => Err(error),
        None => Ok(Estimate::of(estimate.map_err(raise)?, "")),
    }
}
