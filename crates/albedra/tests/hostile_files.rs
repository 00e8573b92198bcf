//! Mesh files of at most 1 MB, made to cost as much as they can: an answer within a second and bounded memory.
#![expect(
    unsafe_code,
    reason = "memory is counted by an allocator of its own, in this test alone"
)]
#![expect(
    clippy::disallowed_methods,
    clippy::format_collect,
    clippy::too_many_lines,
    reason = "lists of files, whose last digits are of no concern"
)]

use std::alloc::{GlobalAlloc, Layout, System};
use std::fmt::Write as _;
use std::path::PathBuf;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::time::{Duration, Instant};

use albedra::{Enclosure, Unit};

/// Counts bytes in use and the most that ever were.
struct Counting;

static NOW: AtomicUsize = AtomicUsize::new(0);
static MOST: AtomicUsize = AtomicUsize::new(0);

fn taken(bytes: usize) {
    let now = NOW.fetch_add(bytes, Ordering::Relaxed) + bytes;
    MOST.fetch_max(now, Ordering::Relaxed);
}

// SAFETY: every call is handed on to the system's allocator unchanged; counting has no influence on what it returns.
unsafe impl GlobalAlloc for Counting {
    unsafe fn alloc(&self, layout: Layout) -> *mut u8 {
        taken(layout.size());
        // SAFETY: the caller keeps the contract of `alloc`, which is the same.
        unsafe { System.alloc(layout) }
    }

    unsafe fn alloc_zeroed(&self, layout: Layout) -> *mut u8 {
        taken(layout.size());
        // SAFETY: the caller keeps the contract of `alloc_zeroed`, which is the same.
        unsafe { System.alloc_zeroed(layout) }
    }

    unsafe fn dealloc(&self, pointer: *mut u8, layout: Layout) {
        NOW.fetch_sub(layout.size(), Ordering::Relaxed);
        // SAFETY: the pointer came from `alloc` above, hence from the system's allocator, with this layout.
        unsafe { System.dealloc(pointer, layout) }
    }

    unsafe fn realloc(&self, pointer: *mut u8, layout: Layout, size: usize) -> *mut u8 {
        // Both may be in use while the contents move.
        taken(size);
        NOW.fetch_sub(layout.size(), Ordering::Relaxed);
        // SAFETY: the pointer came from `alloc` above with this layout, and the caller keeps the rest of the contract.
        unsafe { System.realloc(pointer, layout, size) }
    }
}

#[global_allocator]
static COUNTING: Counting = Counting;

const MEGABYTE: usize = 1_000_000;

/// A second in a release build; without optimisation of the standard library's generic code five times as long.
const LIMIT: Duration = Duration::from_secs(if cfg!(debug_assertions) { 5 } else { 1 });

/// What a file asks for.
struct Case {
    name: &'static str,
    extension: &'static str,
    bytes: Vec<u8>,
}

fn obj(name: &'static str, text: String) -> Case {
    Case {
        name,
        extension: "obj",
        bytes: text.into_bytes(),
    }
}

/// An OBJ file of triangles that do not share vertices, as many as fit.
fn soup(name: &'static str, mut corners: impl FnMut(u32) -> [[f64; 3]; 3]) -> Case {
    let mut text = String::new();
    for triangle in 0_u32.. {
        let before = text.len();
        for [x, y, z] in corners(triangle) {
            writeln!(text, "v {x} {y} {z}").unwrap();
        }
        text.push_str("f -3 -2 -1\n");
        if text.len() > MEGABYTE {
            text.truncate(before);
            break;
        }
    }
    obj(name, text)
}

/// An OBJ file of facets on the given vertices, as many as fit.
fn facets(name: &'static str, mut text: String, mut facet: impl FnMut(usize) -> String) -> Case {
    for number in 0_usize.. {
        let line = facet(number);
        if text.len() + line.len() > MEGABYTE {
            break;
        }
        text.push_str(&line);
    }
    obj(name, text)
}

/// An OBJ file with one facet on as many corners as fit.
fn polygon(name: &'static str, corner: impl Fn(usize, usize) -> [f64; 3], corners: usize) -> Case {
    let mut text = String::new();
    for k in 0..corners {
        let [x, y, z] = corner(k, corners);
        writeln!(text, "v {x} {y} {z}").unwrap();
    }
    text.push('f');
    for k in 1..=corners {
        write!(text, " {k}").unwrap();
    }
    text.push('\n');
    obj(name, text)
}

fn binary_stl(
    name: &'static str,
    declared: u32,
    triangles: usize,
    corner: impl Fn(usize) -> [f32; 9],
) -> Case {
    let mut bytes = vec![b' '; 80];
    bytes.extend(declared.to_le_bytes());
    for triangle in 0..triangles {
        bytes.extend([0; 12]);
        bytes.extend(corner(triangle).iter().flat_map(|x| x.to_le_bytes()));
        bytes.extend([0; 2]);
    }
    Case {
        name,
        extension: "stl",
        bytes,
    }
}

fn ply(name: &'static str, header: &str, body: &[u8]) -> Case {
    let mut bytes = format!("ply\n{header}end_header\n").into_bytes();
    bytes.extend(body);
    bytes.truncate(MEGABYTE);
    Case {
        name,
        extension: "ply",
        bytes,
    }
}

/// A binary PLY file with one facet of 99 000 corners, in whole numbers of 16 bits.
fn short_polygon(name: &'static str, corner: impl Fn(usize) -> [f64; 2]) -> Case {
    const CORNERS: usize = 99_000;
    let header = format!(
        "format binary_little_endian 1.0\nelement vertex {CORNERS}\nproperty short x\nproperty short y\nproperty short z\n\
         element face 1\nproperty list uint uint vertex_indices\n"
    );
    let mut body = Vec::new();
    for k in 0..CORNERS {
        let [x, y] = corner(k);
        body.extend(
            [x, y, 0.0]
                .iter()
                .flat_map(|&x| (x.round() as i16).to_le_bytes()),
        );
    }
    body.extend((CORNERS as u32).to_le_bytes());
    body.extend((0..CORNERS as u32).flat_map(u32::to_le_bytes));
    ply(name, &header, &body)
}

/// A number from 0 to 1 that looks random.
fn scatter(k: u32, salt: u32) -> f64 {
    let mut x = k
        .wrapping_mul(0x9e37_79b9)
        .wrapping_add(salt.wrapping_mul(0x85eb_ca6b));
    x = (x ^ (x >> 15)).wrapping_mul(0x2c1b_3c6d);
    x = (x ^ (x >> 12)).wrapping_mul(0x297a_2d39);
    f64::from(x ^ (x >> 15)) / f64::from(u32::MAX)
}

/// A closed ring of n quadrilaterals with lids of n corners: sound, and large.
fn drum(name: &'static str, corners: usize, radius: impl Fn(usize) -> f64) -> Case {
    let mut text = String::new();
    for z in ["0", "1"] {
        for k in 0..corners {
            let angle = std::f64::consts::TAU * k as f64 / corners as f64;
            let r = radius(k);
            writeln!(text, "v {:.7} {:.7} {z}", r * angle.cos(), r * angle.sin()).unwrap();
        }
    }
    for k in 0..corners {
        let next = (k + 1) % corners;
        writeln!(
            text,
            "f {} {} {} {}",
            k + 1,
            next + 1,
            corners + next + 1,
            corners + k + 1
        )
        .unwrap();
    }
    let list =
        |order: &mut dyn Iterator<Item = usize>| order.map(|k| format!(" {k}")).collect::<String>();
    writeln!(text, "f{}", list(&mut (1..=corners).rev())).unwrap();
    writeln!(text, "f{}", list(&mut (corners + 1..=2 * corners))).unwrap();
    obj(name, text)
}

fn around(k: usize, corners: usize) -> (f64, f64) {
    let angle = std::f64::consts::TAU * k as f64 / corners as f64;
    (angle.cos(), angle.sin())
}

fn geometry() -> Vec<Case> {
    let three = "v 0 0 0\nv 1 0 0\nv 0 1 0\n".to_owned();
    vec![
        facets("coincident triangles", three.clone(), |_| {
            "f 1 2 3\n".to_owned()
        }),
        facets("pairs back to back", three.clone(), |k| {
            if k % 2 == 0 { "f 1 2 3\n" } else { "f 3 2 1\n" }.to_owned()
        }),
        facets("all on one vertex", "v 1 2 3\n".to_owned(), |_| {
            "f 1 1 1\n".to_owned()
        }),
        facets("all on one edge", three, |_| "f 1 2 1 2\n".to_owned()),
        soup("all at one point", |_| [[0.5; 3]; 3]),
        soup("slivers through one point", |k| {
            let (x, y) = (scatter(k, 1) - 0.5, scatter(k, 2) - 0.5);
            [[x, y, 1.0], [-x, -y, -1.0], [-x + 1e-9, -y, -1.0]]
        }),
        soup("slivers across each other", |k| {
            let (x, y) = (scatter(k, 1), scatter(k, 2));
            if k % 2 == 0 {
                [[x, 0.0, y], [x, 1.0, y], [x + 1e-3, 1.0, y]]
            } else {
                [[0.0, x, y], [1.0, x, y], [1.0, x + 1e-3, y]]
            }
        }),
        soup("large triangles everywhere", |k| {
            [1, 4, 7].map(|s| [0, 1, 2].map(|i| scatter(k, s + i)))
        }),
        soup("small triangles everywhere", |k| {
            let at = [11, 12, 13].map(|s| scatter(k, s));
            [1, 4, 7].map(|s| [0, 1, 2].map(|i| at[i as usize] + 1e-2 * scatter(k, s + i)))
        }),
        soup("concentric triangles in one plane", |k| {
            let r = 1.0 + scatter(k, 3);
            [[r, 0.0, 0.0], [-r, r, 0.0], [-r, -r, 0.0]]
        }),
        soup("parallel planes a hair apart", |k| {
            let z = 1e-12 * f64::from(k);
            [[0.0, 0.0, z], [1.0, 0.0, z], [0.0, 1.0, z]]
        }),
        soup("lengths from 1e-300 to 1e300", |k| {
            let r = 10_f64.powi(i32::try_from(k % 600).unwrap() - 300);
            [[r, 0.0, 0.0], [0.0, r, 0.0], [0.0, 0.0, r]]
        }),
        facets("a fan about one edge", fan_vertices(), |k| {
            format!("f 1 2 {}\n", 3 + k % 20_000)
        }),
        polygon(
            "a comb of 54 000 corners",
            |k, _| [(k / 2) as f64, if k % 4 < 2 { 0.0 } else { 9.0 }, 0.0],
            54_000,
        ),
        short_polygon("a comb of 99 000 corners", |k| {
            [(k / 2) as f64 - 25_000.0, if k % 4 < 2 { 0.0 } else { 9.0 }]
        }),
        short_polygon("a comb of 99 000 corners, closed below", |k| {
            let high = if k % 4 < 2 { 1.0 } else { 30_000.0 };
            [
                (k / 2) as f64 - 25_000.0,
                if k == 0 || k == 98_999 {
                    -30_000.0
                } else {
                    high
                },
            ]
        }),
        short_polygon("a spiral of 99 000 corners", |k| {
            let (x, y) = around(k * 101, 99_000);
            let r = 30_000.0 * k as f64 / 99_000.0;
            [r * x, r * y]
        }),
        polygon(
            "a round polygon",
            |k, n| {
                [
                    (1e5 * around(k, n).0).round(),
                    (1e5 * around(k, n).1).round(),
                    0.0,
                ]
            },
            42_000,
        ),
        polygon(
            "a star of 42 000 corners",
            |k, n| {
                let (x, y) = around(k, n);
                let r = if k % 2 == 0 { 1e5 } else { 5e4 };
                [(r * x).round(), (r * y).round(), 0.0]
            },
            42_000,
        ),
        polygon(
            "a spiral",
            |k, n| {
                let (x, y) = around(k * 301, n);
                let r = 100.0 + k as f64;
                [(r * x).round(), (r * y).round(), 0.0]
            },
            42_000,
        ),
        polygon(
            "a polygon that crosses itself everywhere",
            |k, _| {
                let at = |s| (1e4 * scatter(u32::try_from(k).unwrap(), s)).round();
                [at(1), at(2), 0.0]
            },
            42_000,
        ),
        polygon("a polygon on a line", |k, _| [k as f64, 0.0, 0.0], 50_000),
        polygon(
            "70 000 times the same corner",
            |_, _| [1.0, 2.0, 3.0],
            70_000,
        ),
        facets(
            "one facet of 100 000 repeated corners",
            "v 0 0 0\nv 1 0 0\nv 0 1 0\n".to_owned(),
            |_| format!("f{}\n", " 1 2 3".repeat(33_000)),
        ),
        drum("a drum", 9_000, |_| 1.0),
        drum("a gear", 9_000, |k| if k % 2 == 0 { 1.0 } else { 0.7 }),
        drum("a spiky gear", 9_000, |k| {
            if k % 2 == 0 {
                1.0
            } else {
                0.01 + 0.5 * scatter(u32::try_from(k).unwrap(), 1)
            }
        }),
    ]
}

fn fan_vertices() -> String {
    let mut text = "v 0 0 -1\nv 0 0 1\n".to_owned();
    for k in 0..20_000 {
        let (x, y) = around(k, 20_000);
        writeln!(text, "v {x:.6} {y:.6} 0").unwrap();
    }
    text
}

fn counts() -> Vec<Case> {
    let ascii = "format ascii 1.0\n";
    let binary = "format binary_little_endian 1.0\n";
    let xyz = "property float x\nproperty float y\nproperty float z\n";
    let list = "property list uint int vertex_indices\n";
    vec![
        binary_stl("STL that declares 2^32 - 1 facets", u32::MAX, 19_000, |k| {
            [k as f32; 9]
        }),
        binary_stl("STL that declares none", 0, 19_000, |k| [k as f32; 9]),
        binary_stl("STL of coincident facets", 19_998, 19_998, |_| {
            [0., 0., 0., 1., 0., 0., 0., 1., 0.]
        }),
        binary_stl("STL of slivers", 19_998, 19_998, |k| {
            let x = scatter(u32::try_from(k).unwrap(), 1) as f32;
            [x, 1., 1., -x, -1., -1., -x, -1., -0.9]
        }),
        binary_stl("STL of numbers that are none", 19_998, 19_998, |_| {
            [f32::NAN; 9]
        }),
        ply(
            "PLY that declares 2^63 vertices",
            &format!(
                "{ascii}element vertex 9223372036854775807\n{xyz}element face 9223372036854775807\n{list}"
            ),
            &b"0 0 0\n".repeat(150_000),
        ),
        ply(
            "binary PLY that declares 2^40 vertices",
            &format!("{binary}element vertex 1099511627776\n{xyz}element face 1\n{list}"),
            &[0; MEGABYTE],
        ),
        ply(
            "PLY of elements of no size",
            &format!(
                "{binary}element nothing 9223372036854775807\nelement vertex 3\n{xyz}element face 1\n{list}"
            ),
            &[0; 100],
        ),
        ply(
            "PLY of empty lists",
            &format!(
                "{binary}element vertex 1\n{xyz}element face 4000000000\nproperty list uchar int vertex_indices\n"
            ),
            &[0; MEGABYTE],
        ),
        ply(
            "PLY with a list of 2^32 - 1 corners",
            &format!("{binary}element vertex 1\n{xyz}element face 1\n{list}"),
            &[255; MEGABYTE],
        ),
        ply(
            "PLY of coincident facets",
            &format!("{ascii}element vertex 3\n{xyz}element face 120000\n{list}"),
            &[
                b"0 0 0\n1 0 0\n0 1 0\n".to_vec(),
                b"3 0 1 2\n".repeat(120_000),
            ]
            .concat(),
        ),
        ply(
            "PLY header of elements only",
            &format!("{ascii}{}", "element a 1\n".repeat(80_000)),
            &[],
        ),
        ply(
            "PLY header of properties only",
            &format!(
                "{ascii}element vertex 1\n{}",
                "property float x\n".repeat(58_000)
            ),
            &[],
        ),
        obj("OBJ of vertices only", "v 0 0 0\n".repeat(125_000)),
        obj(
            "OBJ of groups only",
            (0..110_000).map(|k| format!("g {k}\n")).collect(),
        ),
        facets(
            "OBJ with a wall for every facet",
            "v 0 0 0\nv 1 0 0\nv 0 1 0\n".to_owned(),
            |k| format!("g {k}\nf 1 2 3\n"),
        ),
        facets(
            "OBJ that goes back and forth between walls",
            "v 0 0 0\nv 1 0 0\nv 0 1 0\n".to_owned(),
            |k| format!("g {}\nf 1 2 3\n", k % 7919),
        ),
        obj(
            "OBJ of one endless line",
            format!("g {}", "x".repeat(MEGABYTE - 2)),
        ),
        obj("OBJ of endless continuations", "\\\n".repeat(MEGABYTE / 2)),
        obj(
            "OBJ of long numbers",
            format!("v {} 0 0\n", "9".repeat(MEGABYTE - 10)),
        ),
        obj("OBJ of zero bytes", "\0".repeat(MEGABYTE)),
        Case {
            name: "STL of solids only",
            extension: "stl",
            bytes: "solid a\nendsolid\n".repeat(58_000).into_bytes(),
        },
        Case {
            name: "STL that opens loops only",
            extension: "stl",
            bytes: b"solid\nfacet normal 0 0 0\nouter loop\n"
                .iter()
                .chain(b"vertex 0 0 0\n".repeat(76_000).iter())
                .copied()
                .collect(),
        },
    ]
}

/// Loads a file and measures time and memory.
fn load(case: &Case) -> (Result<Enclosure, String>, Duration, usize) {
    let path: PathBuf = std::env::temp_dir().join(format!(
        "albedra hostile {}.{}",
        std::process::id(),
        case.extension
    ));
    std::fs::write(&path, &case.bytes).unwrap();
    let before = NOW.load(Ordering::Relaxed);
    MOST.store(before, Ordering::Relaxed);
    let begun = Instant::now();
    let loaded = Enclosure::load(&path, Unit::Millimetre);
    let elapsed = begun.elapsed();
    let most = MOST.load(Ordering::Relaxed) - before;
    std::fs::remove_file(&path).unwrap();
    (loaded.map_err(|error| error.to_string()), elapsed, most)
}

/// All in one test, since memory is counted for the whole process.
#[test]
fn hostile_files_cost_little_time_and_memory() {
    let mut worst = Vec::new();
    for case in geometry().iter().chain(&counts()) {
        assert!(
            case.bytes.len() <= MEGABYTE,
            "{}: {} bytes",
            case.name,
            case.bytes.len()
        );
        let (loaded, elapsed, most) = load(case);
        let allowed = (64 << 20) + 20 * case.bytes.len();
        let answer = match &loaded {
            Ok(enclosure) => format!("an enclosure of {} facets", enclosure.mesh().facets()),
            Err(message) => message.lines().take(2).collect::<Vec<_>>().join(" / "),
        };
        let answer: String = answer.chars().take(150).collect();
        eprintln!(
            "{:>7.1} ms {:>6.1} MiB of {:>5.1}  {}: {answer}",
            1e3 * elapsed.as_secs_f64(),
            most as f64 / 1_048_576.0,
            allowed as f64 / 1_048_576.0,
            case.name
        );
        // A message is for reading.
        if let Err(message) = &loaded {
            assert!(
                message.len() < 200_000,
                "{}: a message of {} bytes",
                case.name,
                message.len()
            );
        }
        if elapsed > LIMIT || most > allowed {
            worst.push(format!(
                "{}: {elapsed:?}, {most} bytes of {allowed}",
                case.name
            ));
        }
    }
    assert!(
        worst.is_empty(),
        "too much time or memory:\n{}",
        worst.join("\n")
    );
}
