//! Whatever bytes come, the import gives a sound mesh or an error, soon and without a panic.

use std::time::{Duration, Instant};

use albedra::{Mesh, MeshFormat, Unit};

const OBJ: &str = "\
# box corner
o room
v 0 0 0
v 1.5 0 0 1
v 1.5 1 0
v 0 1e0 -0
v .5 .5 1
vn 0 0 1
g floor low
f 4//1 3//1 2//1 1//1\r
usemtl white
g side
f 1 2 \\
5
f -4/1/1 -3/2/1 -1/3/1
g
f 3 4 5
f 4 1 5
";
const SOLID: &str = "\
solid floor
facet normal 0 0 -1
outer loop
vertex 0 0 0
vertex 0 1 0
vertex 1 0 0
endloop
endfacet
endsolid floor
solid side
facet normal nan 0 0
outer loop
vertex 0 0 0
vertex 1 0 0
vertex 0 0 1e0
endloop
endfacet
endsolid
";
const PLY_ELEMENTS: &str = "\
comment c
element vertex 4
property float x
property double y
property float z
property uchar red
element face 2
property list uchar int vertex_indices
element edge 2
property list ushort char tags
end_header
";
const PLY_BODY: &str = "0 0 0 255\n1 0 0 1\n1 1 0 2\n0 1 0 3\n4 0 1 2 3\n3 2 1 0\n2 5 6\n0\n";

/// Words that mean something to one of the formats, or to number parsers.
const WORDS: &str = "\
v f g o usemtl vn # \\ solid endsolid facet normal outer loop endloop endfacet vertex
ply format ascii binary_little_endian binary_big_endian 1.0 element face property list
char uchar short ushort int uint float double x y z vertex_indices end_header comment
0 1 2 3 4 -1 -2 1/2/3 1//3 1e308 1e999 nan -inf 255 256 65536 4294967295 4294967296
9223372036854775807 -9223372036854775808 18446744073709551615 99999999999999999999
0.30000000000000004 1e-320";

/// The generator `SplitMix64` (Steele, Lea, Flood 2014).
struct Chance(u64);

impl Chance {
    fn draw(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    fn below(&mut self, limit: usize) -> usize {
        usize::try_from(self.draw() % limit.max(1) as u64).unwrap()
    }
}

fn binary_stl() -> Vec<u8> {
    let mut bytes = format!("{:80}", "solid but binary").into_bytes();
    bytes.extend(3_u32.to_le_bytes());
    for facet in 0..3_u8 {
        for number in 0..12_u8 {
            bytes.extend(f32::from((number + facet) % 5).to_le_bytes());
        }
        bytes.extend([0, 0]);
    }
    bytes
}

fn binary_ply() -> Vec<u8> {
    let mut bytes = format!("ply\nformat binary_little_endian 1.0\n{PLY_ELEMENTS}").into_bytes();
    for (x, y) in [(0.0_f32, 0.0_f64), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)] {
        bytes.extend(x.to_le_bytes());
        bytes.extend(y.to_le_bytes());
        bytes.extend([0, 0, 0, 0, 9]);
    }
    for corners in [&[0_u8, 1, 2, 3][..], &[2, 1, 0]] {
        bytes.push(u8::try_from(corners.len()).unwrap());
        bytes.extend(
            corners
                .iter()
                .flat_map(|&corner| u32::from(corner).to_le_bytes()),
        );
    }
    bytes.extend([2, 0, 5, 6, 0, 0]);
    bytes
}

fn valid_files() -> Vec<(MeshFormat, Vec<u8>)> {
    let text_ply = format!("ply\nformat ascii 1.0\n{PLY_ELEMENTS}{PLY_BODY}");
    vec![
        (MeshFormat::Obj, OBJ.into()),
        (MeshFormat::Stl, SOLID.into()),
        (MeshFormat::Stl, binary_stl()),
        (MeshFormat::Ply, text_ply.into()),
        (MeshFormat::Ply, binary_ply()),
    ]
}

/// Changes a file in one way.
fn mutate(bytes: &mut Vec<u8>, other: &[u8], words: &[&str], chance: &mut Chance) {
    let at = chance.below(bytes.len());
    let end = at + chance.below((bytes.len() - at).min(40));
    match chance.below(8) {
        0 if !bytes.is_empty() => bytes[at] ^= 1 << chance.below(8),
        1 if !bytes.is_empty() => bytes[at] = u8::try_from(chance.below(256)).unwrap(),
        2 => bytes.truncate(at),
        3 => drop(bytes.drain(at..end)),
        4 => {
            let copy = bytes[at..end].to_vec();
            bytes.splice(at..at, copy);
        }
        5 => {
            let from = chance.below(other.len());
            let to = from + chance.below((other.len() - from).min(60));
            bytes.splice(at..end, other[from..to].iter().copied());
        }
        6 => {
            // A word for a word.
            let blank = |byte: &u8| byte.is_ascii_whitespace();
            let start = bytes[..at]
                .iter()
                .rposition(blank)
                .map_or(0, |blank| blank + 1);
            let end = bytes[at..]
                .iter()
                .position(blank)
                .map_or(bytes.len(), |length| at + length);
            bytes.splice(start..end, words[chance.below(words.len())].bytes());
        }
        _ => {
            let extreme =
                [u32::MAX, 0x7f80_0000, 0x7fc0_0000, 1 << 31, 1 << 16, 0][chance.below(6)];
            for (byte, new) in bytes[at..].iter_mut().zip(extreme.to_le_bytes()) {
                *byte = new;
            }
        }
    }
}

/// Words in any order, on lines of any length.
fn babble(words: &[&str], chance: &mut Chance) -> Vec<u8> {
    const HEADS: [&str; 5] = [
        "",
        "ply\nformat ascii 1.0\n",
        "solid\n",
        "v 0 0 0\n",
        "ply\nformat binary_little_endian 1.0\n",
    ];
    let mut text = HEADS[chance.below(HEADS.len())].to_owned();
    for _ in 0..chance.below(60) {
        text += words[chance.below(words.len())];
        text += [" ", " ", " ", "\n", "\r\n", "\\\n", "\t", ""][chance.below(8)];
    }
    text.into_bytes()
}

/// Reads a file and checks the mesh or the error; tells whether it was a mesh.
#[track_caller]
fn check(bytes: &[u8], format: MeshFormat) -> bool {
    let mesh = match Mesh::read(bytes, format, Unit::Millimetre) {
        Ok(mesh) => mesh,
        Err(error) => {
            assert!((10..400).contains(&error.to_string().len()), "{error}");
            return false;
        }
    };
    let (facets, limit) = (mesh.facets(), bytes.len());
    assert!(0 < facets && facets < limit);
    assert!(mesh.corners.len() < limit && mesh.vertices.len() < limit);
    assert_eq!((mesh.starts.len(), mesh.starts[0]), (facets + 1, 0));
    assert_eq!(mesh.starts[facets] as usize, mesh.corners.len());
    assert!(mesh.starts.windows(2).all(|pair| pair[0] + 3 <= pair[1]));
    assert!(mesh.vertices.iter().all(|vertex| vertex.is_finite()));
    assert_all_used(&mesh.corners, mesh.vertices.len());
    assert_all_used(&mesh.facet_walls, mesh.walls.len());
    let mut names: Vec<_> = mesh.walls.iter().collect();
    names.sort_unstable();
    names.dedup();
    assert!(names.len() == mesh.walls.len() && !names[0].is_empty());
    true
}

#[track_caller]
fn assert_all_used(indices: &[u32], count: usize) {
    let mut used = vec![false; count];
    for &index in indices {
        used[index as usize] = true;
    }
    assert!(used.iter().all(|&used| used));
}

#[test]
fn valid_files_are_read() {
    let facets_and_walls = [(5, 3), (2, 2), (3, 1), (2, 1), (2, 1)];
    for ((format, bytes), expected) in valid_files().into_iter().zip(facets_and_walls) {
        assert!(check(&bytes, format));
        let mesh = Mesh::read(&bytes, format, Unit::Metre).unwrap();
        assert_eq!((mesh.facets(), mesh.walls.len()), expected, "{format}");
    }
}

#[test]
fn mutated_files_give_a_sound_mesh_or_an_error() {
    let (files, words) = (valid_files(), WORDS.split_whitespace().collect::<Vec<_>>());
    let mut chance = Chance(20);
    for (format, bytes) in &files {
        let mut meshes = 0;
        for _ in 0..30_000 {
            let mut mutated = bytes.clone();
            let most = chance.below(4);
            for _ in 0..=chance.below(most + 1) {
                let other = &files[chance.below(files.len())].1;
                mutate(&mut mutated, other, &words, &mut chance);
            }
            meshes += u32::from(check(&mutated, *format));
        }
        // Both ways must have been tried often.
        let message = format!("{meshes} of 30 000 mutated {format} files were meshes");
        assert!((600..29_000).contains(&meshes), "{message}");
    }
}

#[test]
fn words_in_any_order_give_a_sound_mesh_or_an_error() {
    let words: Vec<_> = WORDS.split_whitespace().collect();
    let mut chance = Chance(21);
    for _ in 0..20_000 {
        let bytes = babble(&words, &mut chance);
        for format in [MeshFormat::Obj, MeshFormat::Stl, MeshFormat::Ply] {
            check(&bytes, format);
        }
    }
}

const MEGABYTE: usize = 1_000_000;

/// A head, as many parts as fit a megabyte, and a tail.
fn filled(head: &str, part: impl Fn(usize) -> String, tail: &str) -> Vec<u8> {
    let mut text = head.to_owned();
    for part in (0..MEGABYTE).map(part) {
        if text.len() + part.len() + tail.len() > MEGABYTE {
            break;
        }
        text += &part;
    }
    (text + tail).into_bytes()
}

/// Reads a megabyte that asks for as much work as it can.
#[track_caller]
fn assert_soon(bytes: &[u8], format: MeshFormat, is_mesh: bool) {
    assert!(
        (900_000..=MEGABYTE).contains(&bytes.len()),
        "{} bytes",
        bytes.len()
    );
    let start = Instant::now();
    let read = Mesh::read(bytes, format, Unit::Millimetre);
    let taken = start.elapsed();
    assert!(taken < Duration::from_secs(1), "{taken:?}");
    assert_eq!(read.is_ok(), is_mesh, "{:?}", read.err());
}

#[test]
fn a_heavy_obj_megabyte_is_answered_within_a_second() {
    let corners = "v 0 0 0\nv 1 0 0\nv 0 1 0\n";
    let facet = "f 1 2 3\n";
    let long_name = format!("{corners}g {}\n", "n".repeat(MEGABYTE / 2));
    let digits = |i| format!("v 1.{i}{} 0 0\n", "7".repeat(760));
    let same = |part: &'static str| move |_| part.to_owned();
    for (bytes, is_mesh) in [
        (filled(corners, same("f 1 2 3\n"), ""), true),
        (filled(&format!("{corners}f"), same(" 1"), ""), true),
        (filled("", same("v 0 0 0\n"), facet), true),
        (filled(corners, |i| format!("g {i:x}\n{facet}"), ""), true),
        (filled(corners, |i| format!("g {i:x}\n"), facet), true),
        (filled(&long_name, same("usemtl a\nf 1 2 3\n"), ""), true),
        (filled("v 0", same("\\\n"), ""), false),
        (filled(corners, digits, facet), true),
        (filled("v 0.", same("1"), ""), false),
        (vec![0; MEGABYTE], false),
    ] {
        assert_soon(&bytes, MeshFormat::Obj, is_mesh);
    }
}

#[test]
fn a_heavy_stl_megabyte_is_answered_within_a_second() {
    let mut binary = vec![b' '; 80];
    binary.extend(19_998_u32.to_le_bytes());
    let numbers = (0..19_998_u32 * 25).map(|i| u16::try_from(i % 0x7f00).unwrap());
    binary.extend(numbers.flat_map(|number| number.to_le_bytes()));
    let facet = |i| {
        let vertices = format!("vertex {i} 0 1 vertex 0 {i} 0 vertex {i} {i} 0");
        format!("facet normal 0 0 0 outer loop {vertices} endloop endfacet\n")
    };
    for (bytes, is_mesh) in [
        (binary, true),
        (filled("solid\n", facet, "endsolid"), true),
        (
            filled("", |i| format!("solid {i:x}\nendsolid\n"), ""),
            false,
        ),
        (vec![0; MEGABYTE], false),
    ] {
        assert_soon(&bytes, MeshFormat::Stl, is_mesh);
    }
}

#[test]
fn a_heavy_ply_megabyte_is_answered_within_a_second() {
    let all = u64::MAX.to_string();
    let header = |vertices: &str, faces: &str, length: &str, other: &str| {
        format!(
            "ply\nformat binary_little_endian 1.0\nelement vertex {vertices}\nproperty char x\n\
             property char y\nproperty char z\nelement face {faces}\n\
             property list {length} uchar vertex_index\n{other}end_header\n"
        )
    };
    let body = |mut head: String, repeated: char| {
        head.extend(std::iter::repeat_n(repeated, MEGABYTE - head.len()));
        head.into_bytes()
    };
    // The length of the only polygon is all of the rest.
    let mut polygon = body(header("1", "1", "uint", ""), '\0');
    let at = header("1", "1", "uint", "").len() + 3;
    let corners = u32::try_from(MEGABYTE - at - 4).unwrap();
    polygon[at..at + 4].copy_from_slice(&corners.to_le_bytes());
    assert_soon(&polygon, MeshFormat::Ply, true);
    let element = format!("element e {all}\n");
    let lists = format!("{element}property list char double a\n");
    let long_header = header("0", "0", "char", &element.repeat(30_000));
    let head = header("0", "0", "char", &element);
    let head = head.trim_end_matches("end_header\n");
    for bytes in [
        body(header("0", &all, "uchar", ""), '\x03'),
        body(header(&all, "1", "uchar", ""), '\0'),
        body(header("0", "0", "uchar", &lists), '\0'),
        long_header.into_bytes(),
        filled(head, |_| "property char a\n".to_owned(), "end_header\n"),
        filled(head, |_| "comment\n".to_owned(), "end_header\n"),
        vec![0; MEGABYTE],
    ] {
        assert_soon(&bytes, MeshFormat::Ply, false);
    }
}
