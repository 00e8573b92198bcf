//! PLY files: polygons in text or in binary with the least significant byte first.
//!
//! Read: of the element `vertex` its properties `x`, `y` and `z` (of any number type), of the element `face` its list
//! `vertex_indices` or `vertex_index` (of any whole-number types), in either order. All else is passed over. In a text
//! every item is a line of its own and coordinates keep all bits, also where the header says `float`. What follows the
//! last item is an error, since then the counts of the header are wrong.

mod header;
mod values;

use self::header::{Content, Element, Encoding, Header, Role, Shape};
use self::values::Values;
use super::builder::{Builder, NAMELESS};
use super::words::Words;
use super::{ImportError, MeshFormat, Place, Unit};
use crate::geometry::Mesh;

/// Reads a PLY file.
pub(super) fn read(bytes: &[u8], unit: Unit) -> Result<Mesh, ImportError> {
    let mut words = Words::new(MeshFormat::Ply, bytes);
    let header = Header::read(&mut words)?;
    let mut values = match header.encoding {
        Encoding::Text => Values::text(words),
        // The header ends with the line feed.
        Encoding::Binary => Values::binary(bytes, words.at() + 1),
    };
    let mut builder = Builder::new(MeshFormat::Ply, unit);
    let wall = builder.wall(NAMELESS);
    for element in &header.elements {
        // Without properties an item takes no room: however many there are, there is nothing to read.
        let items = if element.properties.is_empty() {
            0
        } else {
            element.count
        };
        for item in 0..items {
            values.begin_item();
            match element.content {
                Content::Vertices => read_vertex(element, &mut values, &mut builder)?,
                Content::Facets => {
                    let place = values.facet_place(item);
                    read_facet(element, &mut values, &mut builder, place, header.vertices)?;
                    builder.facet(wall, place)?;
                }
                Content::Other => read_other(element, &mut values)?,
            }
            values.end_item()?;
        }
    }
    values.end()?;
    builder.finish()
}

fn read_vertex(
    element: &Element,
    values: &mut Values<'_>,
    builder: &mut Builder<'_>,
) -> Result<(), ImportError> {
    let place = values.place();
    let mut coordinates = [0.0; 3];
    for property in &element.properties {
        match (property.role, property.shape) {
            (Role::Coordinate(axis), Shape::Scalar(kind)) => {
                coordinates[axis] = values.number(kind)?;
            }
            (_, shape) => values.skip(shape)?,
        }
    }
    let position = builder.position(coordinates, place)?;
    builder.vertex(position);
    Ok(())
}

fn read_facet(
    element: &Element,
    values: &mut Values<'_>,
    builder: &mut Builder<'_>,
    place: Place,
    vertices: u64,
) -> Result<(), ImportError> {
    for property in &element.properties {
        match (property.role, property.shape) {
            (Role::Corners, Shape::List { length, item }) => {
                for _ in 0..values.length(length)? {
                    let index = values.integer(item, "a vertex index")?;
                    let vertex = u32::try_from(index).map_err(|_| {
                        let vertices = usize::try_from(vertices).unwrap_or(usize::MAX);
                        ImportError::MissingVertex {
                            format: MeshFormat::Ply,
                            place,
                            index,
                            vertices,
                        }
                    })?;
                    builder.corner(vertex, place);
                }
            }
            (_, shape) => values.skip(shape)?,
        }
    }
    Ok(())
}

fn read_other(element: &Element, values: &mut Values<'_>) -> Result<(), ImportError> {
    element
        .properties
        .iter()
        .try_for_each(|property| values.skip(property.shape))
}

#[cfg(test)]
mod tests {
    use super::*;

    const CUBE_CORNER: &str = "\
        element vertex 4\nproperty uchar red\nproperty float x\nproperty double y\nproperty list uchar int tags\n\
        property float z\nelement face 2\nproperty list uchar int vertex_indices\nproperty float quality\n\
        element edge 1\nproperty int a\nproperty list char double b\nend_header\n";
    const TEXT_BODY: &str = "255 0 0 2 7 8 0\n1 1 0 0 0\n2 1 1 0 0.1\n3 0 1 1 5 0\n3 0 1 2 0.5\n\n4 0 1 2 3 nan\n7 1 0.5\n";

    fn text(body: &str) -> Vec<u8> {
        format!("ply\nformat ascii 1.0\ncomment by hand\n{CUBE_CORNER}{body}").into_bytes()
    }

    fn binary() -> Vec<u8> {
        let mut bytes = format!("ply\nformat binary_little_endian 1.0\n{CUBE_CORNER}").into_bytes();
        let vertices: [(u8, f32, f64, &[i32], f32); 4] = [
            (255, 0.0, 0.0, &[7, 8], 0.0),
            (1, 1.0, 0.0, &[], 0.0),
            (2, 1.0, 1.0, &[], 0.1),
            (3, 0.0, 1.0, &[5], 0.0),
        ];
        for (red, x, y, tags, z) in vertices {
            bytes.push(red);
            bytes.extend(x.to_le_bytes());
            bytes.extend(y.to_le_bytes());
            bytes.push(u8::try_from(tags.len()).unwrap());
            bytes.extend(tags.iter().flat_map(|tag| tag.to_le_bytes()));
            bytes.extend(z.to_le_bytes());
        }
        for corners in [&[0_i32, 1, 2][..], &[0, 1, 2, 3]] {
            bytes.push(u8::try_from(corners.len()).unwrap());
            bytes.extend(corners.iter().flat_map(|corner| corner.to_le_bytes()));
            bytes.extend(f32::NAN.to_le_bytes());
        }
        bytes.extend(7_i32.to_le_bytes());
        bytes.push(1);
        bytes.extend(0.5_f64.to_le_bytes());
        bytes
    }

    fn parse(bytes: impl AsRef<[u8]>) -> Result<Mesh, ImportError> {
        read(bytes.as_ref(), Unit::Metre)
    }

    fn ascii(elements: &str, body: &str) -> Result<Mesh, ImportError> {
        parse(format!(
            "ply\nformat ascii 1.0\n{elements}\nend_header\n{body}"
        ))
    }

    #[test]
    fn text_and_binary_are_read_alike() {
        let mesh = parse(text(TEXT_BODY)).unwrap();
        assert_eq!(mesh.corners, [0, 1, 2, 0, 1, 2, 3]);
        assert_eq!(mesh.starts, [0, 3, 7]);
        assert_eq!(
            (&mesh.walls, &mesh.facet_walls),
            (&vec!["mesh".to_owned()], &vec![0, 0])
        );
        assert_eq!(
            mesh.vertices[2].to_array(),
            [1.0, 1.0, 0.1],
            "all bits, though the header says float"
        );
        let mut rounded = mesh.clone();
        rounded.vertices[2].z = f64::from(0.1_f32);
        assert_eq!(parse(binary()), Ok(rounded));
        let carriage_returns = String::from_utf8(text(TEXT_BODY))
            .unwrap()
            .replace('\n', "\r\n");
        assert_eq!(parse(carriage_returns), Ok(mesh));
    }

    #[test]
    fn every_shortening_is_an_error() {
        let whole = binary();
        for end in 0..whole.len() {
            assert!(parse(&whole[..end]).is_err(), "{end}");
        }
        let error = parse(&whole[..whole.len() - 3]).unwrap_err();
        let (format, place) = (MeshFormat::Ply, Place::Byte(whole.len() - 8));
        assert_eq!(
            error,
            ImportError::Truncated {
                format,
                place,
                required: 8,
                left: 5
            }
        );
        let whole = text(TEXT_BODY);
        for end in 0..whole.len() - 4 {
            assert!(parse(&whole[..end]).is_err(), "{end}");
        }
    }

    #[test]
    fn what_follows_the_last_item_is_an_error() {
        let mut longer = binary();
        let end = longer.len();
        longer.push(b'\n');
        let error = parse(longer).unwrap_err();
        assert!(
            matches!(error, ImportError::Unexpected { place: Place::Byte(byte), .. } if byte == end),
            "{error}"
        );
        let error = parse(text(&format!("{TEXT_BODY}\n 1"))).unwrap_err();
        assert_eq!(
            error.to_string(),
            "PLY file, line 26: the end of the file required, got \"1\""
        );
    }

    #[test]
    fn indices_may_have_any_whole_type_and_come_first() {
        for (length, item) in [
            ("uint8", "uint32"),
            ("int", "short"),
            ("ushort", "char"),
            ("uint", "uint16"),
        ] {
            let faces = format!("element face 1\nproperty list {length} {item} vertex_index");
            let vertices =
                "element vertex 3\nproperty int x\nproperty float32 y\nproperty float64 z";
            let mesh = ascii(
                &format!("{faces}\n{vertices}"),
                "3 2 1 0\n0 0 0\n1 0 0\n0 1 0",
            )
            .unwrap();
            assert_eq!(mesh.corners, [2, 1, 0]);
        }
    }

    #[test]
    fn bad_facets_are_named() {
        let header = "element vertex 3\nproperty float x\nproperty float y\nproperty float z\nelement face 1\n\
                      property list char int vertex_indices";
        let body = "0 0 0\n1 0 0\n0 1 0\n";
        let (format, place, vertices) = (MeshFormat::Ply, Place::Line(13), 3);
        for index in [3, -1, 1 << 40] {
            let expected = ImportError::MissingVertex {
                format,
                place,
                index,
                vertices,
            };
            assert_eq!(
                ascii(header, &format!("{body}3 0 1 {index}")),
                Err(expected)
            );
        }
        let expected = ImportError::FewCorners {
            format,
            place,
            corners: 2,
        };
        assert_eq!(ascii(header, &format!("{body}2 0 1")), Err(expected));
        for (line, message) in [
            ("3 0 1", "a vertex index required, got the end of the file"),
            (
                "3 0 1\n2",
                "a vertex index required, got the end of the line",
            ),
            ("3 0 1 2 0", "the end of the line required, got \"0\""),
            ("3 0 1 2.0", "a vertex index required, got \"2.0\""),
            (
                "-1 0 1 2",
                "a list length of at least 0 required, got \"-1\"",
            ),
        ] {
            let error = ascii(header, &format!("{body}{line}"))
                .unwrap_err()
                .to_string();
            assert_eq!(error, format!("PLY file, line 13: {message}"));
        }
        assert!(
            ascii(header, &format!("{body}3 0 1 1")).is_ok(),
            "left to the audit"
        );
    }

    #[test]
    fn bad_numbers_are_named() {
        let error = parse(text(&TEXT_BODY.replacen("1 0 0 0", "-inf 0 0 0", 1))).unwrap_err();
        assert_eq!(
            error.to_string(),
            "PLY file, line 18: coordinates must be finite, got \"-inf\""
        );
        let mut bytes = binary();
        let at = bytes
            .windows(8)
            .position(|window| window == 1.0_f64.to_le_bytes())
            .unwrap();
        bytes[at..at + 8].copy_from_slice(&f64::NAN.to_le_bytes());
        let error = parse(bytes).unwrap_err();
        assert!(
            matches!(error, ImportError::NotFinite { place: Place::Byte(byte), .. } if byte == at - 5),
            "{error}"
        );
    }

    #[test]
    fn items_without_room_take_no_time() {
        let header = format!(
            "element nothing {max}\nelement vertex 3\nproperty float x\nproperty float y\nproperty float z\n\
             element face 1\nproperty list uchar uchar vertex_indices\nelement void {max}",
            max = u64::MAX
        );
        assert_eq!(
            ascii(&header, "0 0 0\n1 0 0\n0 1 0\n3 0 1 2")
                .unwrap()
                .facets(),
            1
        );
    }

    #[test]
    fn counts_beyond_the_file_are_errors() {
        for (name, count) in [
            ("vertex 4", "vertex 18446744073709551615"),
            ("face 2", "face 4294967295"),
        ] {
            let whole = binary();
            let at = whole
                .windows(name.len())
                .position(|window| window == name.as_bytes())
                .unwrap();
            let lying = [&whole[..at], count.as_bytes(), &whole[at + name.len()..]].concat();
            assert!(matches!(parse(lying), Err(ImportError::Truncated { .. })));
        }
    }
}
