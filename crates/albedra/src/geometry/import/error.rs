//! Why a mesh file could not be read.

use std::fmt;
use std::io;
use std::path::PathBuf;

use super::MeshFormat;

/// Where in a mesh file something is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum Place {
    /// A line of a text file, counted from 1.
    Line(usize),
    /// A facet of a binary file, counted from 0 as in [`Mesh`](crate::Mesh).
    Facet(usize),
    /// A byte of a binary file, counted from 0.
    Byte(usize),
}

/// Why a mesh file could not be read.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum ImportError {
    /// The extension of the path belongs to no format that is read.
    Extension {
        /// The path that was given.
        path: PathBuf,
    },
    /// The file could not be opened or read.
    File {
        /// The path that was given.
        path: PathBuf,
        /// Kind of the failure.
        kind: io::ErrorKind,
        /// What the operating system says.
        message: String,
    },
    /// The file has 2³² bytes or more.
    TooLong {
        /// Format of the file.
        format: MeshFormat,
        /// Its length in bytes.
        bytes: u64,
    },
    /// Something else was required at this place.
    Unexpected {
        /// Format of the file.
        format: MeshFormat,
        /// Where it is.
        place: Place,
        /// What the format requires there.
        required: &'static str,
        /// What came, abridged and in quotes, or in words if nothing came.
        found: String,
    },
    /// A coordinate is infinite or not a number, or becomes so in metres.
    NotFinite {
        /// Format of the file.
        format: MeshFormat,
        /// Where it is.
        place: Place,
        /// What came.
        found: String,
    },
    /// A facet has fewer than three corners.
    FewCorners {
        /// Format of the file.
        format: MeshFormat,
        /// Where the facet is.
        place: Place,
        /// Number of its corners.
        corners: usize,
    },
    /// A facet refers to a vertex that the file does not have.
    MissingVertex {
        /// Format of the file.
        format: MeshFormat,
        /// Where the reference is.
        place: Place,
        /// Index as the file has it (OBJ counts from 1, or backwards from −1; PLY from 0).
        index: i64,
        /// Number of vertices that it can refer to.
        vertices: usize,
    },
    /// A binary file is shorter than its counts say.
    Truncated {
        /// Format of the file.
        format: MeshFormat,
        /// Where the bytes are missing.
        place: Place,
        /// Number of bytes required there.
        required: u64,
        /// Number of bytes left there.
        left: u64,
    },
    /// The length of a binary STL file does not agree with the number of facets that it declares.
    WrongLength {
        /// Number of facets declared.
        declared: u32,
        /// Length in bytes that this number requires.
        required: u64,
        /// Length of the file in bytes.
        found: u64,
    },
    /// A binary PLY file has its most significant byte first, which is not read.
    BigEndian {
        /// The line of the header that says so.
        place: Place,
    },
    /// The file has no facets.
    Empty {
        /// Format of the file.
        format: MeshFormat,
    },
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Line(line) => write!(f, "line {line}"),
            Self::Facet(facet) => write!(f, "facet {facet}"),
            Self::Byte(byte) => write!(f, "byte {byte}"),
        }
    }
}

impl fmt::Display for ImportError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Extension { path } => {
                let path = path.display();
                write!(
                    f,
                    "extension of a mesh file must be obj, stl or ply, got \"{path}\""
                )
            }
            Self::File { path, message, .. } => {
                write!(
                    f,
                    "mesh file \"{}\" cannot be read: {message}",
                    path.display()
                )
            }
            Self::TooLong { format, bytes } => {
                write!(
                    f,
                    "{format} file must be shorter than 4294967296 bytes, got {bytes}"
                )
            }
            Self::Unexpected {
                format,
                place,
                required,
                found,
            } => {
                write!(
                    f,
                    "{format} file, {place}: {required} required, got {found}"
                )
            }
            Self::NotFinite {
                format,
                place,
                found,
            } => {
                write!(
                    f,
                    "{format} file, {place}: coordinates must be finite, got {found}"
                )
            }
            Self::FewCorners {
                format,
                place,
                corners,
            } => {
                write!(
                    f,
                    "{format} file, {place}: a facet must have at least 3 corners, got {corners}"
                )
            }
            Self::MissingVertex {
                format,
                place,
                index,
                vertices,
            } => {
                write!(
                    f,
                    "{format} file, {place}: {}",
                    missing(*format, *index, *vertices)
                )
            }
            Self::Truncated {
                format,
                place,
                required,
                left,
            } => {
                write!(
                    f,
                    "{format} file, {place}: {required} bytes required, got {left}"
                )
            }
            Self::WrongLength {
                declared,
                required,
                found,
            } => {
                write!(
                    f,
                    "STL file that declares {declared} facets must have {required} bytes, got {found}"
                )
            }
            Self::BigEndian { place } => {
                write!(
                    f,
                    "PLY file, {place}: format ascii or binary_little_endian required, got binary_big_endian"
                )
            }
            Self::Empty { format } => {
                write!(f, "{format} file must have at least one facet, got none")
            }
        }
    }
}

impl std::error::Error for ImportError {}

fn missing(format: MeshFormat, index: i64, vertices: usize) -> String {
    let first = usize::from(format == MeshFormat::Obj);
    if vertices == 0 {
        format!("vertex {index} required, but there are no vertices")
    } else if format == MeshFormat::Obj && index < 0 {
        format!("relative vertex index must be in -{vertices} to -1, got {index}")
    } else {
        format!(
            "vertex index must be in {first} to {}, got {index}",
            vertices - 1 + first
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn messages_name_format_place_requirement_and_culprit() {
        let (format, place) = (MeshFormat::Obj, Place::Line(7));
        let found = "\"x\"".to_owned();
        let unexpected = ImportError::Unexpected {
            format,
            place,
            required: "a number",
            found,
        };
        assert_eq!(
            unexpected.to_string(),
            "OBJ file, line 7: a number required, got \"x\""
        );
        let missing = |index, vertices| {
            ImportError::MissingVertex {
                format,
                place,
                index,
                vertices,
            }
            .to_string()
        };
        assert_eq!(
            missing(9, 8),
            "OBJ file, line 7: vertex index must be in 1 to 8, got 9"
        );
        assert_eq!(
            missing(-9, 8),
            "OBJ file, line 7: relative vertex index must be in -8 to -1, got -9"
        );
        assert_eq!(
            missing(1, 0),
            "OBJ file, line 7: vertex 1 required, but there are no vertices"
        );
        let length = ImportError::WrongLength {
            declared: 2,
            required: 184,
            found: 134,
        };
        assert_eq!(
            length.to_string(),
            "STL file that declares 2 facets must have 184 bytes, got 134"
        );
        let (format, place) = (MeshFormat::Ply, Place::Byte(90));
        let truncated = ImportError::Truncated {
            format,
            place,
            required: 8,
            left: 3,
        };
        assert_eq!(
            truncated.to_string(),
            "PLY file, byte 90: 8 bytes required, got 3"
        );
        let missing = ImportError::MissingVertex {
            format,
            place: Place::Facet(2),
            index: 8,
            vertices: 8,
        };
        assert_eq!(
            missing.to_string(),
            "PLY file, facet 2: vertex index must be in 0 to 7, got 8"
        );
    }
}
