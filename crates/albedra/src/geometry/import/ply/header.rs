//! The header of a PLY file: which elements follow, with which properties.

use super::super::ImportError;
use super::super::words::Words;

/// What a PLY file says about itself.
#[derive(Debug, PartialEq)]
pub(super) struct Header {
    pub(super) encoding: Encoding,
    pub(super) elements: Vec<Element>,
    /// Number of vertices declared.
    pub(super) vertices: u64,
}

/// How the values after the header are written.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Encoding {
    Text,
    /// Least significant byte first.
    Binary,
}

/// So many items with the same properties.
#[derive(Debug, PartialEq)]
pub(super) struct Element {
    pub(super) content: Content,
    pub(super) count: u64,
    pub(super) properties: Vec<Property>,
}

/// What the items of an element are.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Content {
    Vertices,
    Facets,
    Other,
}

/// One value or list of each item of an element.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Property {
    pub(super) role: Role,
    pub(super) shape: Shape,
}

/// What a property is used for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Role {
    /// A coordinate of a vertex: 0 is x, 1 is y, 2 is z.
    Coordinate(usize),
    /// The vertices of a facet.
    Corners,
    Other,
}

/// Whether a property is one value or a list.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Shape {
    Scalar(Kind),
    /// A length, and so many items.
    List {
        length: Kind,
        item: Kind,
    },
}

/// Type of a number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Kind {
    I8,
    U8,
    I16,
    U16,
    I32,
    U32,
    F32,
    F64,
}

impl Kind {
    /// Length in bytes.
    pub(super) fn size(self) -> usize {
        match self {
            Self::I8 | Self::U8 => 1,
            Self::I16 | Self::U16 => 2,
            Self::I32 | Self::U32 | Self::F32 => 4,
            Self::F64 => 8,
        }
    }

    fn of(word: &[u8]) -> Option<Self> {
        Some(match word {
            b"char" | b"int8" => Self::I8,
            b"uchar" | b"uint8" => Self::U8,
            b"short" | b"int16" => Self::I16,
            b"ushort" | b"uint16" => Self::U16,
            b"int" | b"int32" => Self::I32,
            b"uint" | b"uint32" => Self::U32,
            b"float" | b"float32" => Self::F32,
            b"double" | b"float64" => Self::F64,
            _ => return None,
        })
    }

    fn whole(self) -> bool {
        !matches!(self, Self::F32 | Self::F64)
    }
}

impl Header {
    /// Reads from the first word to the end of the line `end_header`.
    pub(super) fn read(words: &mut Words<'_>) -> Result<Self, ImportError> {
        let magic = words.word();
        if magic != Some(b"ply") {
            return Err(words.unexpected("ply", magic));
        }
        words.end_of_line()?;
        let mut encoding = None;
        let mut elements: Vec<Element> = Vec::new();
        loop {
            let keyword = words.word();
            match keyword {
                Some(b"comment" | b"obj_info") => {
                    words.rest_of_line();
                }
                Some(b"format") if encoding.is_none() => encoding = Some(read_format(words)?),
                Some(b"element") => {
                    let element = read_element(words)?;
                    let known = element.content != Content::Other;
                    if known
                        && elements
                            .iter()
                            .any(|other| other.content == element.content)
                    {
                        return Err(words.unexpected(
                            "one element vertex and one element face",
                            Some(b"another one"),
                        ));
                    }
                    elements.push(element);
                }
                Some(b"property") => match elements.last_mut() {
                    Some(element) => read_property(words, element)?,
                    None => {
                        return Err(words.unexpected("an element before its properties", keyword));
                    }
                },
                Some(b"end_header") => break,
                _ => {
                    return Err(words.unexpected(
                        "format (once), comment, element, property or end_header",
                        keyword,
                    ));
                }
            }
            words.end_of_line()?;
        }
        words.end_of_line()?;
        let missing = |required| words.unexpected(required, Some(b"end_header"));
        let encoding = encoding.ok_or_else(|| missing("a line format"))?;
        let vertices = elements
            .iter()
            .find(|element| element.content == Content::Vertices);
        let vertices =
            vertices.filter(|element| (0..3).all(|axis| element.has(Role::Coordinate(axis))));
        let vertices = vertices
            .ok_or_else(|| missing("an element vertex with properties x, y and z"))?
            .count;
        if !elements
            .iter()
            .any(|element| element.content == Content::Facets && element.has(Role::Corners))
        {
            return Err(missing("an element face with a list vertex_indices"));
        }
        Ok(Self {
            encoding,
            elements,
            vertices,
        })
    }
}

impl Element {
    fn has(&self, role: Role) -> bool {
        self.properties.iter().any(|property| property.role == role)
    }
}

fn read_format(words: &mut Words<'_>) -> Result<Encoding, ImportError> {
    let encoding = match words.word_in_line() {
        Some(b"ascii") => Encoding::Text,
        Some(b"binary_little_endian") => Encoding::Binary,
        Some(b"binary_big_endian") => {
            return Err(ImportError::BigEndian {
                place: words.place(),
            });
        }
        word => return Err(words.unexpected("ascii or binary_little_endian", word)),
    };
    match words.word_in_line() {
        Some(b"1.0") => Ok(encoding),
        version => Err(words.unexpected("version 1.0", version)),
    }
}

fn read_element(words: &mut Words<'_>) -> Result<Element, ImportError> {
    let content = match words.word_in_line() {
        Some(b"vertex") => Content::Vertices,
        Some(b"face") => Content::Facets,
        Some(_) => Content::Other,
        None => return Err(words.unexpected("the name of an element", None)),
    };
    let word = words.word_in_line();
    let count = word.and_then(|word| std::str::from_utf8(word).ok()?.parse().ok());
    let count = count.ok_or_else(|| words.unexpected("a number of items", word))?;
    Ok(Element {
        content,
        count,
        properties: Vec::new(),
    })
}

fn read_property(words: &mut Words<'_>, element: &mut Element) -> Result<(), ImportError> {
    let word = words.word_in_line();
    let shape = if word == Some(b"list") {
        let word = words.word_in_line();
        let length = word.and_then(Kind::of).filter(|kind| kind.whole());
        let length = length.ok_or_else(|| {
            words.unexpected("a whole-number type for the length of a list", word)
        })?;
        Shape::List {
            length,
            item: read_kind(words)?,
        }
    } else {
        Shape::Scalar(
            word.and_then(Kind::of)
                .ok_or_else(|| words.unexpected("list or a number type", word))?,
        )
    };
    let name = words.word_in_line();
    let role = match (element.content, name) {
        (_, None) => return Err(words.unexpected("the name of a property", None)),
        (Content::Vertices, Some(b"x")) => Role::Coordinate(0),
        (Content::Vertices, Some(b"y")) => Role::Coordinate(1),
        (Content::Vertices, Some(b"z")) => Role::Coordinate(2),
        (Content::Facets, Some(b"vertex_indices" | b"vertex_index")) => Role::Corners,
        _ => Role::Other,
    };
    let required = match (role, shape) {
        (Role::Coordinate(_), Shape::List { .. }) => Some("a number type for a coordinate"),
        (Role::Corners, Shape::List { item, .. }) if item.whole() => None,
        (Role::Corners, _) => Some("a list of whole numbers for the corners of a face"),
        _ => None,
    };
    if let Some(required) = required {
        return Err(words.unexpected(required, word));
    }
    if role != Role::Other && element.has(role) {
        return Err(words.unexpected("a property only once", name));
    }
    element.properties.push(Property { role, shape });
    Ok(())
}

fn read_kind(words: &mut Words<'_>) -> Result<Kind, ImportError> {
    let word = words.word_in_line();
    word.and_then(Kind::of)
        .ok_or_else(|| words.unexpected("a number type", word))
}

#[cfg(test)]
mod tests {
    use super::super::super::{MeshFormat, Place};
    use super::*;

    const WHOLE: &str = "ply\nformat ascii 1.0\ncomment element x\nobj_info\nelement vertex 3\nproperty float x\n\
                         property double y\nproperty int8 z\nproperty list uint int32 x2\nelement face 1\n\
                         property list uchar ushort vertex_index\nelement x 0\nend_header\n";

    fn header(text: &str) -> Result<Header, ImportError> {
        Header::read(&mut Words::new(MeshFormat::Ply, text.as_bytes()))
    }

    #[test]
    fn everything_declared_is_known() {
        let header = header(WHOLE).unwrap();
        assert_eq!((header.encoding, header.vertices), (Encoding::Text, 3));
        let shape = |shape, role| Property { role, shape };
        let expected = [
            shape(Shape::Scalar(Kind::F32), Role::Coordinate(0)),
            shape(Shape::Scalar(Kind::F64), Role::Coordinate(1)),
            shape(Shape::Scalar(Kind::I8), Role::Coordinate(2)),
            shape(
                Shape::List {
                    length: Kind::U32,
                    item: Kind::I32,
                },
                Role::Other,
            ),
        ];
        assert_eq!(header.elements[0].properties, expected);
        let corners = shape(
            Shape::List {
                length: Kind::U8,
                item: Kind::U16,
            },
            Role::Corners,
        );
        assert_eq!(header.elements[1].properties, [corners]);
        assert_eq!(
            header.elements[2],
            Element {
                content: Content::Other,
                count: 0,
                properties: Vec::new()
            }
        );
        let kinds = [
            "int8", "uint8", "int16", "uint16", "int32", "uint32", "float32", "float64",
        ];
        assert_eq!(
            kinds.map(|kind| Kind::of(kind.as_bytes()).unwrap().size()),
            [1, 1, 2, 2, 4, 4, 4, 8]
        );
    }

    #[test]
    fn most_significant_byte_first_is_refused_by_name() {
        let error = header(&WHOLE.replace("ascii", "binary_big_endian")).unwrap_err();
        assert_eq!(
            error,
            ImportError::BigEndian {
                place: Place::Line(2)
            }
        );
        let text = "PLY file, line 2: format ascii or binary_little_endian required, got binary_big_endian";
        assert_eq!(error.to_string(), text);
    }

    /// What is replaced | by what | line of the error | what was required | what came.
    const FAULTS: &str = r#"
ply | pl | 1 | ply | "pl"
ply | ply 2 | 1 | the end of the line | "2"
ascii | text | 2 | ascii or binary_little_endian | "text"
1.0 | 1.1 | 2 | version 1.0 | "1.1"
format ascii 1.0 | | 13 | a line format | "end_header"
obj_info | format ascii 1.0 | 4 | format (once), comment, element, property or end_header | "format"
obj_info | info | 4 | format (once), comment, element, property or end_header | "info"
obj_info | property int x | 4 | an element before its properties | "property"
obj_info | element | 4 | the name of an element | the end of the line
vertex 3 | vertex -3 | 5 | a number of items | "-3"
vertex 3 | vertex | 5 | a number of items | the end of the line
vertex 3 | vertex 18446744073709551616 | 5 | a number of items | "18446744073709551616"
vertex 3 | vertices 3 | 13 | an element vertex with properties x, y and z | "end_header"
int8 z | int8 w | 13 | an element vertex with properties x, y and z | "end_header"
int8 z | int8 y | 8 | a property only once | "y"
int8 z | int64 z | 8 | list or a number type | "int64"
int8 z | int8 | 8 | the name of a property | the end of the line
int8 z | list char char z | 8 | a number type for a coordinate | "list"
uint int32 | float int32 | 9 | a whole-number type for the length of a list | "float"
uint int32 | uint bool | 9 | a number type | "bool"
face 1 | vertex 1 | 10 | one element vertex and one element face | "another one"
face 1 | facet 1 | 13 | an element face with a list vertex_indices | "end_header"
list uchar ushort | int | 11 | a list of whole numbers for the corners of a face | "int"
uchar ushort | uchar float | 11 | a list of whole numbers for the corners of a face | "list"
end_header | end_header 1 | 13 | the end of the line | "1"
end_header | | 14 | format (once), comment, element, property or end_header | the end of the file"#;

    #[test]
    fn every_fault_is_named_with_its_line() {
        for fault in FAULTS.trim().lines() {
            let parts: Vec<_> = fault.split('|').map(str::trim).collect();
            let &[from, to, line, required, found] = &parts[..] else {
                panic!("{fault}");
            };
            let error = ImportError::Unexpected {
                format: MeshFormat::Ply,
                place: Place::Line(line.parse().unwrap()),
                required,
                found: found.to_owned(),
            };
            assert_eq!(header(&WHOLE.replacen(from, to, 1)), Err(error), "{fault}");
        }
    }
}
