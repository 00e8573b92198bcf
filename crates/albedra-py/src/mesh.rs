//! Meshes from and to arrays.

use albedra::Mesh;
use glam::DVec3;
use numpy::{PyArrayMethods, PyUntypedArrayMethods};
use pyo3::exceptions::{PyTypeError, PyValueError};
use pyo3::prelude::*;
use pyo3::types::{PyBytes, PyString};

use crate::arrays::{integers, points};

/// The wall of facets that were given no name.
const UNNAMED: &str = "mesh";

/// A mesh of vertices (n, 3) in m, faces as lists of indices, and the name of each face's wall.
pub(crate) fn from_arrays(
    vertices: &Bound<'_, PyAny>,
    faces: &Bound<'_, PyAny>,
    walls: Option<&Bound<'_, PyAny>>,
) -> PyResult<Mesh> {
    let mut mesh = Mesh {
        vertices: points::<3>("vertices", vertices)?
            .into_iter()
            .map(DVec3::from_array)
            .collect(),
        ..Mesh::default()
    };
    let faces = corners(faces, mesh.vertices.len())?;
    let names = names(walls, faces.len())?;
    for (face, corners) in faces.iter().enumerate() {
        let wall = mesh.wall(names.get(face).map_or(&names[0], |name| name));
        mesh.push_facet(corners, wall);
    }
    Ok(mesh)
}

/// Faces as an array (n, k), or as a list of lists of different lengths.
fn corners(faces: &Bound<'_, PyAny>, vertices: usize) -> PyResult<Vec<Vec<u32>>> {
    let checked = |face: usize, row: &[i64]| {
        let wrong = |index| {
            let most = vertices.saturating_sub(1);
            PyValueError::new_err(format!(
                "faces[{face}] must hold indices in [0, {most}], got {index}"
            ))
        };
        let known = |&index: &i64| {
            u32::try_from(index)
                .ok()
                .filter(|&index| (index as usize) < vertices)
                .ok_or_else(|| wrong(index))
        };
        row.iter().map(known).collect::<PyResult<Vec<u32>>>()
    };
    if let Ok(array) = integers("faces", faces) {
        let &[_, columns] = array.shape() else {
            return Err(PyValueError::new_err(format!(
                "faces must have two dimensions, got {}",
                array.ndim()
            )));
        };
        if columns == 0 {
            return Err(PyValueError::new_err("faces must have corners, got none"));
        }
        let readonly = array.readonly();
        let rows = readonly.as_slice()?.chunks_exact(columns).enumerate();
        return rows.map(|(face, row)| checked(face, row)).collect();
    }
    let mut all = Vec::new();
    for (face, row) in faces.try_iter()?.enumerate() {
        let argument = format!("faces[{face}]");
        let row = integers(&argument, &row?)?;
        all.push(checked(face, row.readonly().as_slice()?)?);
    }
    Ok(all)
}

/// One name for all faces, or one for each.
fn names(walls: Option<&Bound<'_, PyAny>>, faces: usize) -> PyResult<Vec<String>> {
    let Some(walls) = walls else {
        return Ok(vec![UNNAMED.to_owned()]);
    };
    if let Ok(name) = walls.cast::<PyString>() {
        return Ok(vec![name.to_string()]);
    }
    let wrong = || {
        PyTypeError::new_err("walls must be a name, or a list with the name of each face's wall")
    };
    let names: Vec<String> = walls.extract().map_err(|_| wrong())?;
    if names.len() != faces {
        return Err(PyValueError::new_err(format!(
            "walls must hold one name for each of the {faces} faces, got {}",
            names.len()
        )));
    }
    Ok(names)
}

/// A mesh as bytes, for pickles and files; None where there is no mesh.
pub(crate) fn to_bytes<'py>(py: Python<'py>, mesh: Option<&Mesh>) -> Option<Bound<'py, PyBytes>> {
    mesh.map(|mesh| PyBytes::new(py, &mesh.to_bytes()))
}

/// A mesh from its bytes.
pub(crate) fn from_bytes(bytes: Option<&[u8]>) -> PyResult<Option<Mesh>> {
    let wrong = || PyValueError::new_err("the bytes are not those of a mesh");
    bytes
        .map(|bytes| Mesh::from_bytes(bytes).ok_or_else(wrong))
        .transpose()
}
