//! STL files: triangles in text or binary.
//!
//! A file is binary if its length fits the facet count at byte 80, whatever it begins with; else it is text if it
//! begins with `solid` and has no zero byte in its first half kilobyte. (A text cannot pass for binary: four printable
//! bytes are a count of facets for which it would have to be longer than any file that is read.)
//!
//! Triangles do not share vertices in the file: corners with equal coordinates (to the last bit in metres, −0 being 0)
//! become one vertex, corners that differ by any rounding do not. The normals and the two attribute bytes of a binary
//! facet are not looked at: the order of the corners tells which side is which. Each `solid` of a text is a wall, solids
//! of one name are one wall, keywords are read in any case.

use std::collections::HashMap;

use super::builder::{Builder, NAMELESS};
use super::words::Words;
use super::{ImportError, MeshFormat, Place, Unit};
use crate::geometry::Mesh;

/// Bytes before the first facet of a binary file: 80 of comment, 4 of count.
const HEADER: usize = 84;
/// Bytes of a binary facet: a normal and three corners of three `f32` each, and two bytes of attributes.
const FACET: usize = 50;

/// Reads an STL file.
pub(super) fn read(bytes: &[u8], unit: Unit) -> Result<Mesh, ImportError> {
    let welder = Welder {
        builder: Builder::new(MeshFormat::Stl, unit),
        seen: HashMap::new(),
    };
    let declared = bytes
        .first_chunk::<HEADER>()
        .and_then(|header| header.last_chunk())
        .map(|&c| u32::from_le_bytes(c));
    let wrong_length = declared.and_then(|declared| {
        let required = HEADER as u64 + FACET as u64 * u64::from(declared);
        let found = bytes.len() as u64;
        (required != found).then_some(ImportError::WrongLength {
            declared,
            required,
            found,
        })
    });
    if declared.is_some() && wrong_length.is_none() {
        return welder.read_binary(&bytes[HEADER..]);
    }
    if looks_like_text(bytes) {
        return welder.read_text(bytes);
    }
    Err(wrong_length.unwrap_or(ImportError::Truncated {
        format: MeshFormat::Stl,
        place: Place::Byte(0),
        required: HEADER as u64,
        left: bytes.len() as u64,
    }))
}

fn looks_like_text(bytes: &[u8]) -> bool {
    let first = Words::new(MeshFormat::Stl, bytes)
        .word()
        .unwrap_or_default();
    first.eq_ignore_ascii_case(b"solid") && !bytes.iter().take(512).any(|&byte| byte == 0)
}

/// A mesh in the making, and its vertices by the bits of their coordinates.
struct Welder<'a> {
    builder: Builder<'a>,
    seen: HashMap<[u64; 3], u32>,
}

impl<'a> Welder<'a> {
    fn corner(&mut self, coordinates: [f64; 3], place: Place) -> Result<(), ImportError> {
        let position = self.builder.position(coordinates, place)?;
        let key = position.to_array().map(f64::to_bits);
        let vertex = *self
            .seen
            .entry(key)
            .or_insert_with(|| self.builder.vertex(position));
        self.builder.corner(vertex, place);
        Ok(())
    }

    fn read_binary(mut self, facets: &[u8]) -> Result<Mesh, ImportError> {
        let wall = self.builder.wall(NAMELESS);
        for (facet, bytes) in facets.chunks_exact(FACET).enumerate() {
            let place = Place::Facet(facet);
            for corner in bytes[12..48].chunks_exact(12) {
                let mut coordinates = [0.0; 3];
                for (coordinate, bytes) in coordinates.iter_mut().zip(corner.as_chunks().0) {
                    *coordinate = f64::from(f32::from_le_bytes(*bytes));
                }
                self.corner(coordinates, place)?;
            }
            self.builder.facet(wall, place)?;
        }
        self.builder.finish()
    }

    fn read_text(mut self, bytes: &'a [u8]) -> Result<Mesh, ImportError> {
        let mut words = Words::new(MeshFormat::Stl, bytes);
        while let Some(word) = words.word() {
            check(&words, "solid", Some(word))?;
            let name = words.rest_of_line();
            let wall = self
                .builder
                .wall(if name.is_empty() { NAMELESS } else { name });
            loop {
                let word = words.word();
                if word.is_some_and(|word| word.eq_ignore_ascii_case(b"endsolid")) {
                    words.rest_of_line();
                    break;
                }
                if !word.is_some_and(|word| word.eq_ignore_ascii_case(b"facet")) {
                    return Err(words.unexpected("facet or endsolid", word));
                }
                self.read_facet(&mut words, wall)?;
            }
        }
        self.builder.finish()
    }

    /// Reads a facet from after its first word to its last.
    fn read_facet(&mut self, words: &mut Words<'_>, wall: u32) -> Result<(), ImportError> {
        let place = words.place();
        expect(words, "normal")?;
        for _ in 0..3 {
            // Not looked at: for empty triangles some write "nan".
            words.word();
        }
        expect(words, "outer")?;
        expect(words, "loop")?;
        for _ in 0..3 {
            expect(words, "vertex")?;
            let mut coordinates = [0.0; 3];
            for coordinate in &mut coordinates {
                let word = words.word();
                *coordinate = words.number(word)?;
            }
            self.corner(coordinates, words.place())?;
        }
        expect(words, "endloop")?;
        expect(words, "endfacet")?;
        self.builder.facet(wall, place)
    }
}

fn expect(words: &mut Words<'_>, keyword: &'static str) -> Result<(), ImportError> {
    let word = words.word();
    check(words, keyword, word)
}

fn check(words: &Words<'_>, keyword: &'static str, word: Option<&[u8]>) -> Result<(), ImportError> {
    match word {
        Some(found) if found.eq_ignore_ascii_case(keyword.as_bytes()) => Ok(()),
        _ => Err(words.unexpected(keyword, word)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    type Triangle = [[f32; 3]; 3];

    const LOWER: Triangle = [[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [1.0, 1.0, 0.1]];
    const UPPER: Triangle = [[-0.0, 0.0, -0.0], [1.0, 1.0, 0.1], [0.0, 1.0, 0.0]];

    fn binary(title: &str, triangles: &[Triangle]) -> Vec<u8> {
        let mut bytes = format!("{title:80}").into_bytes();
        bytes.extend(u32::try_from(triangles.len()).unwrap().to_le_bytes());
        for triangle in triangles {
            bytes.extend([f32::NAN; 3].iter().flat_map(|x| x.to_le_bytes()));
            bytes.extend(triangle.as_flattened().iter().flat_map(|x| x.to_le_bytes()));
            bytes.extend([0xab, 0xcd]);
        }
        bytes
    }

    fn text(triangle: Triangle) -> String {
        let vertices = triangle
            .map(|[x, y, z]| format!("  vertex {x:?} {y:e} {z}\n"))
            .concat();
        format!("facet normal nan 0 1\n outer loop\n{vertices} endloop\nendfacet\n")
    }

    fn parse(bytes: impl AsRef<[u8]>) -> Result<Mesh, ImportError> {
        read(bytes.as_ref(), Unit::Metre)
    }

    fn unexpected(line: usize, required: &'static str, found: &str) -> Result<Mesh, ImportError> {
        let (format, place) = (MeshFormat::Stl, Place::Line(line));
        Err(ImportError::Unexpected {
            format,
            place,
            required,
            found: found.to_owned(),
        })
    }

    #[test]
    fn binary_files_are_welded_whatever_they_begin_with() {
        for title in ["", "solid chamber"] {
            let mesh = parse(binary(title, &[LOWER, UPPER])).unwrap();
            assert_eq!(mesh.corners, [0, 1, 2, 0, 2, 3]);
            assert_eq!(mesh.starts, [0, 3, 6]);
            assert_eq!(
                (mesh.vertices.len(), mesh.walls, mesh.facet_walls),
                (4, vec!["mesh".to_owned()], vec![0, 0])
            );
            assert_eq!(mesh.vertices[2].z, f64::from(0.1_f32));
        }
        let inches = read(&binary("", &[LOWER]), Unit::Inch).unwrap();
        assert_eq!(inches.vertices[1].x, 0.0254);
    }

    #[test]
    fn corners_that_differ_in_the_last_bit_stay_apart() {
        let mut moved = UPPER;
        moved[1][2] = moved[1][2].next_up();
        assert_eq!(
            parse(binary("", &[LOWER, moved])).unwrap().vertices.len(),
            5
        );
    }

    #[test]
    fn solids_are_walls_by_name() {
        let (lower, upper) = (text(LOWER), text(UPPER).to_uppercase());
        let file = format!(
            "solid side wall \r\n{lower}endsolid other\n\nSOLID\n{upper}ENDSOLID\nsolid none\nendsolid none\n\
             solid side wall\n{upper}{lower}endsolid"
        );
        let mesh = parse(&file).unwrap();
        assert_eq!(mesh.walls, ["side wall", "mesh"]);
        assert_eq!(mesh.facet_walls, [0, 1, 0, 0]);
        assert_eq!(mesh.corners[..6], [0, 1, 2, 0, 2, 3]);
        assert_eq!(mesh.vertices[2].z, 0.1, "a text keeps all bits");
        let one_line = format!("solid\n{}endsolid", lower.replace('\n', " "));
        assert_eq!(parse(one_line).unwrap().facets(), 1);
    }

    #[test]
    fn counts_that_lie_are_errors() {
        for title in ["", "solid chamber"] {
            for (declared, keep) in [
                (1, 184),
                (3, 184),
                (u32::MAX, 184),
                (2, 183),
                (2, 134),
                (0, 185),
                (2, 84),
            ] {
                let mut bytes = binary(title, &[LOWER, UPPER, LOWER]);
                bytes[80..84].copy_from_slice(&declared.to_le_bytes());
                bytes.truncate(keep);
                let (required, found) = (84 + 50 * u64::from(declared), keep as u64);
                assert_eq!(
                    parse(bytes),
                    Err(ImportError::WrongLength {
                        declared,
                        required,
                        found
                    })
                );
            }
        }
        let format = MeshFormat::Stl;
        let truncated = ImportError::Truncated {
            format,
            place: Place::Byte(0),
            required: 84,
            left: 83,
        };
        assert_eq!(parse(&binary("", &[LOWER])[..83]), Err(truncated));
        assert_eq!(parse(binary("", &[])), Err(ImportError::Empty { format }));
        assert_eq!(parse("solid\nendsolid"), Err(ImportError::Empty { format }));
    }

    #[test]
    fn numbers_that_are_not_finite_name_their_facet_or_line() {
        let mut bad = UPPER;
        bad[2][1] = f32::INFINITY;
        let error = parse(binary("", &[LOWER, bad])).unwrap_err();
        assert!(
            matches!(
                error,
                ImportError::NotFinite {
                    place: Place::Facet(1),
                    ..
                }
            ),
            "{error}"
        );
        let error = parse(format!("solid\n{}{}endsolid", text(LOWER), text(bad))).unwrap_err();
        assert!(
            matches!(
                error,
                ImportError::NotFinite {
                    place: Place::Line(13),
                    ..
                }
            ),
            "{error}"
        );
    }

    #[test]
    fn every_keyword_is_required() {
        let file = format!("solid a\n{}endsolid a\n", text(LOWER));
        for (word, required, line) in [
            ("facet", "facet or endsolid", 2),
            ("normal", "normal", 2),
            ("outer", "outer", 3),
            ("loop", "loop", 3),
            ("vertex", "vertex", 4),
            ("endloop", "endloop", 7),
            ("endfacet", "endfacet", 8),
            ("endsolid", "facet or endsolid", 9),
        ] {
            let spoilt = file.replacen(word, "xyz", 1);
            assert_eq!(parse(spoilt), unexpected(line, required, "\"xyz\""));
            let end = file.find(word).unwrap();
            let error = parse(&file[..end]).unwrap_err();
            assert!(
                error
                    .to_string()
                    .ends_with(&format!("{required} required, got the end of the file")),
                "{error}"
            );
        }
        assert_eq!(
            parse(format!("{file}xyz")),
            unexpected(10, "solid", "\"xyz\"")
        );
        assert_eq!(
            parse(file.replacen("1.0", "1.0.0", 1)),
            unexpected(5, "a number", "\"1.0.0\"")
        );
        let four = file.replacen(" endloop", "vertex 1 2 3 endloop", 1);
        assert_eq!(parse(four), unexpected(7, "endloop", "\"vertex\""));
    }
}
