//! How numbers and objects are written so that Python reads them back.

use glam::DVec3;
use pyo3::prelude::*;

/// A representation is no wider than this.
const WIDTH: usize = 80;

/// A number as Python writes it.
pub(crate) fn number(x: f64) -> String {
    let plain = format!("{x:?}");
    // Rust writes 1e-7 as Python does, but not exponents of one digit, infinity and NaN.
    if x.is_nan() {
        return "float('nan')".to_owned();
    }
    if x.is_infinite() {
        return format!("float('{x}')");
    }
    plain
}

/// A point or a vector as a tuple.
pub(crate) fn tuple(numbers: &[f64]) -> String {
    let numbers: Vec<String> = numbers.iter().map(|&x| number(x)).collect();
    format!("({})", numbers.join(", "))
}

/// A vector as a tuple.
pub(crate) fn vector(v: DVec3) -> String {
    tuple(&v.to_array())
}

/// A text in quotes, by Python's own rules.
pub(crate) fn quoted(py: Python<'_>, text: &str) -> PyResult<String> {
    Ok(pyo3::types::PyString::new(py, text).repr()?.to_string())
}

/// The full representation if it fits its line, or else the short one, cut if it must be.
pub(crate) fn fitting(full: String, short: impl FnOnce() -> String) -> String {
    if full.chars().count() <= WIDTH {
        return full;
    }
    let short = short();
    if short.chars().count() <= WIDTH {
        return short;
    }
    let kept: String = short.chars().take(WIDTH - 2).collect();
    format!("{kept}…>")
}

/// A number of things: "1 wall", "2 walls".
pub(crate) fn counted(number: usize, noun: &str) -> String {
    let plural = if number == 1 { "" } else { "s" };
    format!("{number} {noun}{plural}")
}

/// Names and values in two columns, one pair a line.
pub(crate) fn lines(pairs: &[(&str, String)]) -> String {
    let width = pairs.iter().map(|(name, _)| name.len()).max().unwrap_or(0);
    let lines: Vec<String> = pairs
        .iter()
        .map(|(name, value)| format!("{name:<width$}  {}", value.trim_matches('\'')))
        .collect();
    lines.join("\n")
}

/// A number in four digits, for reading only.
pub(crate) fn short(x: f64) -> String {
    let magnitude = x.abs();
    if !(1e-3..1e4).contains(&magnitude) {
        return format!("{x:.3e}");
    }
    let decimals = [1e3, 1e2, 1e1, 1.0, 1e-1, 1e-2]
        .iter()
        .take_while(|&&least| magnitude < least)
        .count();
    format!("{x:.decimals$}")
}
