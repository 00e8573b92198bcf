//! OBJ files: polygons in text.
//!
//! Read: `v` (three coordinates; a fourth and colours are not looked at), `f` (corners `v`, `v/vt`, `v//vn` or
//! `v/vt/vn`, counted from 1 or backwards from −1; the vertex may follow later; polygons stay whole), and the names that
//! `g`, `o` and `usemtl` set for the facets after them. A name is all of its line, as in
//! `g side 1`; a `g` without one ends the group. A `#` begins a comment at the beginning of a line,
//! and before any word but a name; a backslash at the end of a line that is no comment joins it with the next.
//!
//! Statements that add no facets are skipped; curves, surfaces and anything unknown are errors, since a part of the shape
//! would be missing.

use super::builder::{Builder, NAMELESS};
use super::words::Words;
use super::{ImportError, MeshFormat, Unit};
use crate::geometry::Mesh;

/// Statements that add no facets.
const SKIPPED: [&[u8]; 18] = [
    b"vt",
    b"vn",
    b"vp",
    b"s",
    b"mg",
    b"p",
    b"l",
    b"mtllib",
    b"maplib",
    b"usemap",
    b"lod",
    b"bevel",
    b"c_interp",
    b"d_interp",
    b"shadow_obj",
    b"trace_obj",
    b"ctech",
    b"stech",
];

/// Reads an OBJ file.
pub(super) fn read(bytes: &[u8], unit: Unit) -> Result<Mesh, ImportError> {
    let mut words = Words::new(MeshFormat::Obj, bytes).continued();
    let mut builder = Builder::new(MeshFormat::Obj, unit);
    let nameless = builder.wall(NAMELESS);
    let (mut group, mut object, mut material) = (None, None, None);
    while let Some(keyword) = words.word() {
        match keyword {
            b"v" => read_vertex(&mut words, &mut builder)?,
            b"f" => {
                let wall = group.or(object).or(material).unwrap_or(nameless);
                read_facet(&mut words, &mut builder, wall)?;
            }
            b"g" => group = named(words.rest_of_line()).map(|name| builder.wall(name)),
            b"o" => object = named(words.rest_of_line()).map(|name| builder.wall(name)),
            b"usemtl" => material = named(words.rest_of_line()).map(|name| builder.wall(name)),
            [b'#', ..] => {
                words.rest_of_line();
            }
            _ if SKIPPED.contains(&keyword) => {}
            _ => {
                return Err(words.unexpected(
                    "a statement v, f, g, o, usemtl or one without facets",
                    Some(keyword),
                ));
            }
        }
        skip_statement(&mut words);
    }
    builder.finish()
}

/// Passes over the rest of a statement and the comment behind it.
fn skip_statement(words: &mut Words<'_>) {
    while let Some(word) = words.word_in_line() {
        if word.starts_with(b"#") {
            words.rest_of_line();
        }
    }
}

fn named(name: &[u8]) -> Option<&[u8]> {
    if name.is_empty() { None } else { Some(name) }
}

fn read_vertex(words: &mut Words<'_>, builder: &mut Builder<'_>) -> Result<(), ImportError> {
    let mut coordinates = [0.0; 3];
    for coordinate in &mut coordinates {
        let word = words.word_in_line();
        *coordinate = words.number(word)?;
    }
    let position = builder.position(coordinates, words.place())?;
    builder.vertex(position);
    Ok(())
}

fn read_facet(
    words: &mut Words<'_>,
    builder: &mut Builder<'_>,
    wall: u32,
) -> Result<(), ImportError> {
    let place = words.place();
    while let Some(word) = words.word_in_line() {
        if word.starts_with(b"#") {
            words.rest_of_line();
            break;
        }
        let vertex = read_corner(words, builder.vertices(), word)?;
        builder.corner(vertex, words.place());
    }
    builder.facet(wall, place)
}

/// Vertex of a corner, counted from 0.
fn read_corner(words: &Words<'_>, vertices: usize, word: &[u8]) -> Result<u32, ImportError> {
    const REQUIRED: &str = "a corner v, v/vt, v//vn or v/vt/vn";
    let mut parts = word.split(|&byte| byte == b'/');
    let index = words
        .integer(parts.next(), REQUIRED)
        .map_err(|_| words.unexpected(REQUIRED, Some(word)))?;
    let digits = |part: &[u8]| {
        part.iter()
            .all(|&byte| byte.is_ascii_digit() || byte == b'-')
    };
    if !(parts.clone().count() <= 2 && parts.all(digits)) {
        return Err(words.unexpected(REQUIRED, Some(word)));
    }
    let missing = || ImportError::MissingVertex {
        format: MeshFormat::Obj,
        place: words.place(),
        index,
        vertices,
    };
    // Neither sum can overflow: the signs differ.
    let counted = if index < 0 {
        i64::try_from(vertices).ok().map(|count| count + index)
    } else {
        Some(index - 1)
    };
    counted
        .and_then(|vertex| u32::try_from(vertex).ok())
        .ok_or_else(missing)
}

#[cfg(test)]
mod tests {
    use super::super::Place;
    use super::*;

    const CORNERS: &str = "v 0 0 0\nv 1 0 0\nv 1 1 0\nv 0 1 0\n";

    fn parse(text: &str) -> Result<Mesh, ImportError> {
        read(text.as_bytes(), Unit::Metre)
    }

    fn after_corners(text: &str) -> Result<Mesh, ImportError> {
        parse(&format!("{CORNERS}{text}"))
    }

    fn unexpected(line: usize, required: &'static str, found: &str) -> Result<Mesh, ImportError> {
        let (format, place) = (MeshFormat::Obj, Place::Line(line));
        Err(ImportError::Unexpected {
            format,
            place,
            required,
            found: found.to_owned(),
        })
    }

    #[test]
    fn all_forms_of_a_facet_are_read_alike() {
        let plain = after_corners("f 1 2 3 4\n").unwrap();
        assert_eq!(plain.corners, [0, 1, 2, 3]);
        assert_eq!(plain.starts, [0, 4]);
        assert_eq!(plain.walls, ["mesh"]);
        for text in [
            "f 1/1 2/2 3/3 4/4",
            "f 1//1 2//1 3//1 4//1\r\n",
            "f 1/5/1 2/6/-1 3/-7/1 4/8/1 # all corners",
            "f -4 -3 -2 -1 #",
            "f 1 2 \\\n3 \\\r\n\\\n4",
            "f 1 2\\\n3 4 \\\n",
            "# comment \\\nvn 0 0 \\\n 1\ns off\n\n  \tf 1 2 3 4",
            "usemtl \nmtllib room.mtl\no\ng\nf 1 2 3 4",
        ] {
            assert_eq!(after_corners(text), Ok(plain.clone()), "{text:?}");
        }
        let weights =
            "f 1 2 3 4 # C:\\\nv 0 0 0 2 # C:\\\nv 1 0 0 0.5 0.5 0.5\nv 1 1 0 1 # x\nv 0 1 0 nan";
        assert_eq!(
            parse(weights),
            Ok(plain),
            "vertices may follow; what comes after z is not looked at"
        );
    }

    #[test]
    fn walls_are_groups_else_objects_else_materials() {
        let facet = "f 1 2 3\n";
        let text = format!(
            "g unused\n{CORNERS}g\n{facet}usemtl white paint\n{facet}o left half \r\n{facet}usemtl black\n{facet}\
             g top upper\n{facet}o right\n{facet}g #1\n{facet}g\n{facet}o\n{facet}g top\n{facet}"
        );
        let mesh = parse(&text).unwrap();
        let walls: Vec<_> = mesh
            .facet_walls
            .iter()
            .map(|&wall| mesh.walls[wall as usize].as_str())
            .collect();
        let left = "left half";
        assert_eq!(
            walls,
            [
                "mesh",
                "white paint",
                left,
                left,
                "top upper",
                "top upper",
                "#1",
                "right",
                "black",
                "top"
            ]
        );
        assert_eq!(
            mesh.walls,
            [
                "mesh",
                "white paint",
                left,
                "black",
                "top upper",
                "right",
                "#1",
                "top"
            ]
        );
    }

    #[test]
    fn unused_vertices_go_and_repeated_corners_stay() {
        let mesh = parse("v 9 9 9\nv 0 0 0\nv 1 0 0\nv 8 8 8\nv 0 1 0\nf 2 2 3 5").unwrap();
        assert_eq!(mesh.vertices.len(), 3);
        assert_eq!(mesh.corners, [0, 0, 1, 2]);
    }

    #[test]
    fn coordinates_keep_their_bits() {
        let mesh = parse("v 0.1234567890123456789 1e-300 -0\nv 1 0 0\nv 0 1 0\nf 1 2 3").unwrap();
        assert_eq!(
            mesh.vertices[0].to_array(),
            [0.123_456_789_012_345_68, 1.0e-300, 0.0]
        );
        assert_eq!(mesh.vertices[0].z.to_bits(), 0);
    }

    #[test]
    fn bad_vertices_name_line_and_word() {
        assert_eq!(
            parse("v 0 0 0\nv 1 2\nf"),
            unexpected(2, "a number", "the end of the line")
        );
        assert_eq!(
            parse("v 0 0"),
            unexpected(1, "a number", "the end of the file")
        );
        assert_eq!(
            parse("v 0 \\\n 1,5 0"),
            unexpected(2, "a number", "\"1,5\"")
        );
        assert_eq!(parse("v 0 0 # 1"), unexpected(1, "a number", "\"#\""));
        let (format, place, found) = (MeshFormat::Obj, Place::Line(2), "\"NaN\"".to_owned());
        assert_eq!(
            parse("\nv 0 NaN 0"),
            Err(ImportError::NotFinite {
                format,
                place,
                found
            })
        );
    }

    #[test]
    fn bad_facets_name_line_and_word() {
        let corner = "a corner v, v/vt, v//vn or v/vt/vn";
        for word in [
            "1/x/2",
            "1/2/3/4",
            "/1",
            "x",
            "1.0",
            "99999999999999999999",
            "\\",
        ] {
            assert_eq!(
                after_corners(&format!("f 1 2 {word}")),
                unexpected(5, corner, &format!("{word:?}"))
            );
        }
        let (format, place) = (MeshFormat::Obj, Place::Line(5));
        for index in [0, 5, -5, 1 << 32, i64::MIN, i64::MAX] {
            let expected = ImportError::MissingVertex {
                format,
                place,
                index,
                vertices: 4,
            };
            assert_eq!(
                after_corners(&format!("f 1 2 {index}\nf 1 2 3")),
                Err(expected)
            );
        }
        for (text, corners) in [("f", 0), ("f 1 2", 2), ("f 1 2 # 3", 2), ("f 1 2\n3", 2)] {
            assert_eq!(
                after_corners(text),
                Err(ImportError::FewCorners {
                    format,
                    place,
                    corners
                }),
                "{text:?}"
            );
        }
    }

    #[test]
    fn shapes_that_are_not_polygons_and_files_without_facets_are_errors() {
        let required = "a statement v, f, g, o, usemtl or one without facets";
        assert_eq!(
            after_corners("f 1 2 3\ncurv 0 1 1 2"),
            unexpected(6, required, "\"curv\"")
        );
        assert_eq!(
            parse("\x7fELF\0"),
            unexpected(1, required, "\"\\u{7f}ELF\\0\"")
        );
        assert_eq!(
            after_corners("l 1 2"),
            Err(ImportError::Empty {
                format: MeshFormat::Obj
            })
        );
    }
}
