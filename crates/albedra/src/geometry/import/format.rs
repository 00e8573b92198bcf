//! Which mesh file formats are read, and how a file says which one it is.

use std::fmt;
use std::path::Path;

use super::ImportError;

/// Format of a mesh file.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum MeshFormat {
    /// Polygons in text, with groups.
    Obj,
    /// Triangles without shared vertices, in text or binary.
    Stl,
    /// Polygons in text or binary, with a header that says what is in the file.
    Ply,
}

impl MeshFormat {
    /// The format that a path's extension (`obj`, `stl` or `ply`, in any case) stands for.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::MeshFormat;
    ///
    /// assert_eq!(MeshFormat::of("sphere.STL")?, MeshFormat::Stl);
    /// assert!(MeshFormat::of("sphere.txt").is_err());
    /// # Ok::<(), albedra::ImportError>(())
    /// ```
    ///
    /// # Errors
    ///
    /// [`ImportError::Extension`] for any other extension or none.
    pub fn of(path: impl AsRef<Path>) -> Result<Self, ImportError> {
        let path = path.as_ref();
        let extension = path.extension().unwrap_or_default().to_ascii_lowercase();
        match extension.to_str() {
            Some("obj") => Ok(Self::Obj),
            Some("stl") => Ok(Self::Stl),
            Some("ply") => Ok(Self::Ply),
            _ => Err(ImportError::Extension {
                path: path.to_owned(),
            }),
        }
    }
}

impl fmt::Display for MeshFormat {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(match self {
            Self::Obj => "OBJ",
            Self::Stl => "STL",
            Self::Ply => "PLY",
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn extensions_are_known_in_any_case_and_others_named() {
        assert_eq!(MeshFormat::of("a/b.obj"), Ok(MeshFormat::Obj));
        assert_eq!(MeshFormat::of("b.x.Stl"), Ok(MeshFormat::Stl));
        assert_eq!(MeshFormat::of("b.PLY"), Ok(MeshFormat::Ply));
        for path in ["b.step", "obj", ".obj", "b.", "b.obj/", ""] {
            let found = MeshFormat::of(path);
            if path == "b.obj/" {
                assert_eq!(found, Ok(MeshFormat::Obj)); // that it is a folder is found on opening
            } else {
                assert_eq!(found, Err(ImportError::Extension { path: path.into() }));
            }
        }
    }
}
