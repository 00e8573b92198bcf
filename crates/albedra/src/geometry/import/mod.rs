//! Reads meshes from OBJ, STL and PLY files: their shape and the names of their groups, nothing else.
//!
//! What all formats have in common:
//!
//! - Coordinates keep all 53 bits and are put into metres with one division (two roundings for inches and feet); numbers
//!   that are not finite are refused.
//! - A facet with fewer than three corners is an error. Repeated corners, empty facets, open edges and the like are left
//!   to the audit, which lists them all at once.
//! - Vertices and walls that no facet uses are dropped; the rest keeps the order of the file.
//! - Nothing is reserved from a count that a file declares, and every turn of a loop takes at least a byte of it, so a
//!   file cannot ask for more time or memory than its length allows.
//!
//! The formats are described in the modules from memory; they have no standards body.

mod builder;
mod error;
mod format;
mod obj;
mod ply;
mod stl;
mod unit;
mod words;

use std::fs::File;
use std::io::{self, Read};
use std::path::Path;

pub use error::{ImportError, Place};
pub use format::MeshFormat;
pub use unit::{Unit, UnitError};

use super::Mesh;

impl Mesh {
    /// Reads a mesh from the bytes of a file whose lengths are in `unit`.
    ///
    /// The walls are, of an OBJ file, the group (`g`, the first name where there are several), else the object (`o`), else
    /// the material (`usemtl`) of each facet; of an STL text, its solids. Facets without any of these, binary STL files
    /// and PLY files belong to the wall `mesh`. The triangles of an STL file are joined where corners are equal to the
    /// last bit. Normals, colours and coefficients of materials are not read.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Mesh, MeshFormat, Unit};
    ///
    /// let text = "v 0 0 0\nv 250 0 0\nv 0 250 0\ng floor\nf 1 3 2\n";
    /// let mesh = Mesh::read(text.as_bytes(), MeshFormat::Obj, Unit::Millimetre)?;
    /// assert_eq!(mesh.facets(), 1);
    /// assert_eq!(mesh.walls, ["floor"]);
    /// assert_eq!(mesh.vertices[1].x, 0.25); // metres
    /// # Ok::<(), albedra::ImportError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// An [`ImportError`] that names the format, the place, what was required and what came.
    pub fn read(bytes: &[u8], format: MeshFormat, unit: Unit) -> Result<Self, ImportError> {
        check_length(bytes.len() as u64, format)?;
        match format {
            MeshFormat::Obj => obj::read(bytes, unit),
            MeshFormat::Stl => stl::read(bytes, unit),
            MeshFormat::Ply => ply::read(bytes, unit),
        }
    }

    /// Reads a mesh from a file whose lengths are in `unit`; its extension tells the format.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{ImportError, Mesh, Unit};
    ///
    /// let error = Mesh::load("no such chamber.stl", Unit::Millimetre).unwrap_err();
    /// assert!(matches!(error, ImportError::File { kind: std::io::ErrorKind::NotFound, .. }));
    /// ```
    ///
    /// # Errors
    ///
    /// As [`Mesh::read`], and if the extension is not known or the file cannot be read.
    pub fn load(path: impl AsRef<Path>, unit: Unit) -> Result<Self, ImportError> {
        let path = path.as_ref();
        let format = MeshFormat::of(path)?;
        let failed = |error: &io::Error| ImportError::File {
            path: path.to_owned(),
            kind: error.kind(),
            message: error.to_string(),
        };
        let file = File::open(path).map_err(|error| failed(&error))?;
        let metadata = file.metadata().map_err(|error| failed(&error))?;
        if !metadata.is_file() {
            return Err(failed(&io::Error::new(
                io::ErrorKind::InvalidInput,
                "not a regular file",
            )));
        }
        check_length(metadata.len(), format)?;
        // A file that grows while it is read ends where it did when it was opened.
        let mut bytes = Vec::new();
        file.take(metadata.len())
            .read_to_end(&mut bytes)
            .map_err(|error| failed(&error))?;
        Self::read(&bytes, format, unit)
    }
}

/// Refuses files in which an index could outgrow a `u32`.
fn check_length(bytes: u64, format: MeshFormat) -> Result<(), ImportError> {
    if bytes > u64::from(u32::MAX) {
        Err(ImportError::TooLong { format, bytes })
    } else {
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lengths_are_checked_before_anything_is_read() {
        let format = MeshFormat::Stl;
        assert_eq!(check_length(u64::from(u32::MAX), format), Ok(()));
        let bytes = 1 << 32;
        assert_eq!(
            check_length(bytes, format),
            Err(ImportError::TooLong { format, bytes })
        );
    }

    #[test]
    fn files_are_loaded_and_folders_refused() {
        let folder = std::env::temp_dir().join(format!("albedra import {}", std::process::id()));
        let inner = folder.join("folder.ply");
        std::fs::create_dir_all(&inner).unwrap();
        let path = folder.join("one facet.OBJ");
        std::fs::write(&path, "v 0 0 0\nv 1 0 0\nv 0 1 0\nf 1 2 3").unwrap();
        let mesh = Mesh::load(&path, Unit::Centimetre);
        let refused = Mesh::load(&inner, Unit::Metre);
        std::fs::remove_dir_all(&folder).unwrap();
        assert_eq!(mesh.unwrap().vertices[1].x, 0.01);
        assert!(matches!(refused, Err(ImportError::File { path, .. }) if path == inner));
    }

    #[test]
    fn empty_and_blank_files_are_errors() {
        for format in [MeshFormat::Obj, MeshFormat::Stl, MeshFormat::Ply] {
            for bytes in [&b""[..], b"\n", b"\0", b"\xef\xbb\xbf"] {
                assert!(
                    Mesh::read(bytes, format, Unit::Metre).is_err(),
                    "{format} {bytes:?}"
                );
            }
        }
    }
}
