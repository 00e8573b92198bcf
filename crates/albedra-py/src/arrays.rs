//! Arguments that are arrays or counts, and results that are arrays.

use numpy::ndarray::Array2;
use numpy::{IntoPyArray, PyArray1, PyArray2, PyArrayDyn, PyArrayMethods, PyUntypedArrayMethods};
use pyo3::exceptions::{PyTypeError, PyValueError};
use pyo3::prelude::*;
use pyo3::types::PyDict;

/// A result that Python shares: read-only, and owned by Rust for ever after.
pub(crate) type Shared = Py<PyArray1<f64>>;

/// The same with rows and columns.
pub(crate) type Shared2 = Py<PyArray2<f64>>;

/// Hands a list over to NumPy without copying it.
pub(crate) fn share(py: Python<'_>, values: Vec<f64>) -> Shared {
    let array = values.into_pyarray(py);
    array.readwrite().make_nonwriteable();
    array.unbind()
}

/// Hands a table over to NumPy without copying it, given row by row.
pub(crate) fn share2(py: Python<'_>, values: Vec<f64>, shape: (usize, usize)) -> PyResult<Shared2> {
    let table = Array2::from_shape_vec(shape, values)
        .map_err(|error| PyValueError::new_err(error.to_string()))?;
    let array = table.into_pyarray(py);
    array.readwrite().make_nonwriteable();
    Ok(array.unbind())
}

/// Whether two results have equal bits, so that NaN equals itself.
pub(crate) fn same(py: Python<'_>, a: &Shared, b: &Shared) -> bool {
    equal(
        a.bind(py).readonly().as_slice(),
        b.bind(py).readonly().as_slice(),
    )
}

/// The same for tables.
pub(crate) fn same2(py: Python<'_>, a: &Shared2, b: &Shared2) -> bool {
    let (a, b) = (a.bind(py), b.bind(py));
    a.shape() == b.shape() && equal(a.readonly().as_slice(), b.readonly().as_slice())
}

fn equal<E>(a: Result<&[f64], E>, b: Result<&[f64], E>) -> bool {
    match (a, b) {
        (Ok(a), Ok(b)) => {
            a.len() == b.len() && a.iter().zip(b).all(|(a, b)| a.to_bits() == b.to_bits())
        }
        _ => false,
    }
}

/// Makes a C-contiguous array of finite `f64` of anything like an array; errors name the argument.
pub(crate) fn numbers<'py>(
    argument: &str,
    value: &Bound<'py, PyAny>,
) -> PyResult<Bound<'py, PyArrayDyn<f64>>> {
    let array = converted(argument, value, "fiu", "float64")?.cast_into::<PyArrayDyn<f64>>()?;
    let readonly = array.readonly();
    let bad = readonly.as_slice()?.iter().position(|x| !x.is_finite());
    if let Some(at) = bad {
        let found = readonly.as_slice()?[at];
        let at = place(at, array.shape());
        return Err(PyValueError::new_err(format!(
            "{argument} must be finite, got {found} at [{at}]"
        )));
    }
    drop(readonly);
    Ok(array)
}

/// The same for whole numbers.
pub(crate) fn integers<'py>(
    argument: &str,
    value: &Bound<'py, PyAny>,
) -> PyResult<Bound<'py, PyArrayDyn<i64>>> {
    Ok(converted(argument, value, "iu", "int64")?.cast_into()?)
}

fn converted<'py>(
    argument: &str,
    value: &Bound<'py, PyAny>,
    kinds: &str,
    dtype: &str,
) -> PyResult<Bound<'py, PyAny>> {
    let py = value.py();
    let numpy = py.import("numpy")?;
    let wrong = |cause: Option<PyErr>| {
        let what = value
            .get_type()
            .name()
            .map_or_else(|_| "?".to_owned(), |n| n.to_string());
        let of = if kinds.contains('f') {
            "numbers"
        } else {
            "whole numbers"
        };
        let error =
            PyTypeError::new_err(format!("{argument} must be an array of {of}, got {what}"));
        error.set_cause(py, cause);
        error
    };
    let array = numpy
        .call_method1("asarray", (value,))
        .map_err(|error| wrong(Some(error)))?;
    let kind: String = array.getattr("dtype")?.getattr("kind")?.extract()?;
    let empty = array.getattr("size")?.extract::<usize>()? == 0;
    if !(empty || kinds.contains(&kind)) {
        return Err(wrong(None));
    }
    let keywords = PyDict::new(py);
    keywords.set_item("dtype", dtype)?;
    keywords.set_item("order", "C")?;
    numpy.call_method("asarray", (array,), Some(&keywords))
}

/// Indices of the element at a place in row-major order.
fn place(mut at: usize, shape: &[usize]) -> String {
    let mut indices = Vec::new();
    for &length in shape.iter().rev() {
        indices.push((at % length).to_string());
        at /= length;
    }
    indices.reverse();
    indices.join(", ")
}

/// So many numbers, as a position or a size.
pub(crate) fn vector<const N: usize>(
    argument: &str,
    value: &Bound<'_, PyAny>,
) -> PyResult<[f64; N]> {
    let array = numbers(argument, value)?;
    let readonly = array.readonly();
    <[f64; N]>::try_from(readonly.as_slice()?)
        .ok()
        .filter(|_| array.shape() == [N])
        .ok_or_else(|| shape_error(argument, &format!("({N},)"), array.shape()))
}

/// A list of points with so many coordinates.
pub(crate) fn points<const N: usize>(
    argument: &str,
    value: &Bound<'_, PyAny>,
) -> PyResult<Vec<[f64; N]>> {
    let array = numbers(argument, value)?;
    if !matches!(array.shape(), [_, columns] if *columns == N) {
        return Err(shape_error(argument, &format!("(any, {N})"), array.shape()));
    }
    let readonly = array.readonly();
    let rows = readonly.as_slice()?.chunks_exact(N);
    Ok(rows
        .map(|row| std::array::from_fn(|column| row[column]))
        .collect())
}

/// A list of numbers.
pub(crate) fn list(argument: &str, value: &Bound<'_, PyAny>) -> PyResult<Vec<f64>> {
    let array = numbers(argument, value)?;
    if array.shape().len() != 1 {
        return Err(shape_error(argument, "(any,)", array.shape()));
    }
    Ok(array.readonly().as_slice()?.to_vec())
}

fn shape_error(argument: &str, wanted: &str, shape: &[usize]) -> PyErr {
    let found: Vec<String> = shape.iter().map(ToString::to_string).collect();
    let comma = if found.len() == 1 { "," } else { "" };
    PyValueError::new_err(format!(
        "{argument} must have the shape {wanted}, got ({}{comma})",
        found.join(", ")
    ))
}

/// A list of names; a single text is none, though Python would take it for a list of letters.
pub(crate) fn names(argument: &str, value: Option<&Bound<'_, PyAny>>) -> PyResult<Vec<String>> {
    let Some(value) = value else {
        return Ok(Vec::new());
    };
    value.extract().map_err(|_| {
        let text = value
            .repr()
            .map_or_else(|_| "?".to_owned(), |text| text.to_string());
        PyTypeError::new_err(format!("{argument} must be a list of names, got {text}"))
    })
}

/// A whole number from 0 to 2⁶⁴ − 1 or a smaller limit of its type.
pub(crate) fn count<T: TryFrom<u64>>(argument: &str, value: &Bound<'_, PyAny>) -> PyResult<T> {
    let py = value.py();
    let whole = py
        .import("operator")?
        .call_method1("index", (value,))
        .map_err(|_| {
            let text = value
                .repr()
                .map_or_else(|_| "?".to_owned(), |text| text.to_string());
            PyTypeError::new_err(format!("{argument} must be a whole number, got {text}"))
        })?;
    let number: Option<T> = whole
        .extract::<u64>()
        .ok()
        .and_then(|n| T::try_from(n).ok());
    number.ok_or_else(|| {
        let most = 8 * size_of::<T>();
        PyValueError::new_err(format!(
            "{argument} must lie in [0, 2^{most} - 1], got {whole}"
        ))
    })
}
