//! An outcome in the parts that a file holds.

use albedra::{Counters, Fingerprint, GROUPS, Intervals, Totals};
use numpy::ndarray::Array2;
use numpy::{IntoPyArray, PyArray2, PyArrayMethods, PyUntypedArrayMethods};
use pyo3::exceptions::{PyKeyError, PyValueError};
use pyo3::prelude::*;
use pyo3::types::PyDict;

use crate::errors::raise;
use crate::mesh;

/// All parts of an outcome; sums are split into their high and low 64 bits, (output, group).
pub(crate) fn parts<'py>(
    py: Python<'py>,
    outcome: &albedra::Outcome,
) -> PyResult<Bound<'py, PyDict>> {
    let parts = PyDict::new(py);
    let (experiment, totals) = (outcome.experiment(), outcome.totals());
    parts.set_item("experiment", experiment.to_text())?;
    parts.set_item("mesh", mesh::to_bytes(py, experiment.mesh_beside()))?;
    parts.set_item("history", totals.history().to_string())?;
    parts.set_item("outputs", totals.outputs().to_string())?;
    parts.set_item("checksum", totals.checksum().to_string())?;
    parts.set_item("seed", totals.seed())?;
    let ranges: Vec<(u64, u64)> = totals.photons().iter().map(|r| (r.start, r.end)).collect();
    parts.set_item("photons", ranges)?;
    let c = totals.counters();
    parts.set_item("counters", (c.strikes, c.flights, c.retried, c.untracked))?;
    let target = outcome
        .target()
        .map(|t| (t.output.clone(), t.relative, t.reached));
    parts.set_item("target", target)?;
    let shape = (totals.groups().len(), GROUPS);
    let sums = || totals.groups().iter().flatten();
    let high = Array2::from_shape_vec(shape, sums().map(|&sum| (sum >> 64) as i64).collect());
    let low = Array2::from_shape_vec(shape, sums().map(|&sum| sum as u64).collect());
    let wrong = |error: numpy::ndarray::ShapeError| PyValueError::new_err(error.to_string());
    parts.set_item("high", high.map_err(wrong)?.into_pyarray(py))?;
    parts.set_item("low", low.map_err(wrong)?.into_pyarray(py))?;
    Ok(parts)
}

/// The outcome of which these are the parts.
pub(crate) fn outcome(parts: &Bound<'_, PyDict>) -> PyResult<albedra::Outcome> {
    let part = |name: &str| {
        parts
            .get_item(name)?
            .ok_or_else(|| PyKeyError::new_err(format!("{name} is missing")))
    };
    let fingerprint = |name: &str| -> PyResult<Fingerprint> {
        let text: String = part(name)?.extract()?;
        text.parse()
            .map_err(|error| PyValueError::new_err(format!("{name}: {error}")))
    };
    let ranges: Vec<(u64, u64)> = part("photons")?.extract()?;
    let photons =
        Intervals::try_from(ranges).map_err(|error| PyValueError::new_err(error.to_string()))?;
    let (strikes, flights, retried, untracked) = part("counters")?.extract()?;
    let counters = Counters {
        strikes,
        flights,
        retried,
        untracked,
    };
    let totals = Totals::from_parts(
        fingerprint("history")?,
        fingerprint("outputs")?,
        part("seed")?.extract()?,
        photons,
        sums(&part("high")?, &part("low")?)?,
        counters,
    );
    let (stored, computed) = (fingerprint("checksum")?, totals.checksum());
    if stored != computed {
        return Err(PyValueError::new_err(format!(
            "totals are damaged: checksum must be {stored}, got {computed}"
        )));
    }
    let mesh: Option<Vec<u8>> = part("mesh")?.extract()?;
    let text: String = part("experiment")?.extract()?;
    let experiment =
        albedra::Experiment::from_text(&text, mesh::from_bytes(mesh.as_deref())?).map_err(raise)?;
    let target: Option<(String, f64, f64)> = part("target")?.extract()?;
    let target =
        target.map(|(output, relative, reached)| albedra::Target::new(output, relative, reached));
    let outcome = albedra::Outcome::from_parts(&experiment, totals).map_err(raise)?;
    Ok(outcome.with_target(target))
}

fn sums(high: &Bound<'_, PyAny>, low: &Bound<'_, PyAny>) -> PyResult<Vec<[i128; GROUPS]>> {
    let high = high.cast::<PyArray2<i64>>()?.readonly();
    let low = low.cast::<PyArray2<u64>>()?.readonly();
    if high.shape() != low.shape() || high.shape()[1] != GROUPS {
        let (high, low) = (high.shape(), low.shape());
        return Err(PyValueError::new_err(format!(
            "sums must have the shape (outputs, {GROUPS}) in both halves, got {high:?} and {low:?}"
        )));
    }
    let whole = |(&high, &low): (&i64, &u64)| (i128::from(high) << 64) | i128::from(low);
    let all: Vec<i128> = high
        .as_slice()?
        .iter()
        .zip(low.as_slice()?)
        .map(whole)
        .collect();
    let (rows, _) = all.as_chunks::<GROUPS>();
    Ok(rows.to_vec())
}
