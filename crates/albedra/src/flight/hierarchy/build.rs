//! Builds the tree from the top, with a bound on its depth.

use super::node::{CONE_MARGIN, Child, MARGIN, Node};
use super::split::{Bounds, Item, parts};
use super::{Facet, Frame, Hierarchy, Triangles};

/// Nodes on any path from the root, at most.
pub(super) const DEPTH: usize = FREE_DEPTH + BALANCED_DEPTH;

/// Levels that are split by cost, which may be as uneven as it likes. Spheres and spiky bodies of 10⁶ triangles have
/// seven or eight.
pub(super) const FREE_DEPTH: usize = 14;

/// Levels below, which are halved thrice each: 2²⁸ triangles fall to one in ten.
const BALANCED_DEPTH: usize = 10;
const _: () = assert!(LEAF << (3 * BALANCED_DEPTH) >= Triangles::AT_MOST);

/// Triangles of a leaf, at most (eight can be written down).
///
/// With four, spheres take half as much memory again and no less time; with eight, small meshes take longer.
const LEAF: usize = 6;

/// Height of a triangle, as a part of the frame's unit, below which its normal is not relied on.
///
/// The sign of the area seen along a ray can be wrong for a height across the ray of a few 2⁻⁵². Where the cones'
/// margin of 2⁻¹⁹ says that a triangle faces away, 2⁻²⁸ still leaves a height of 2⁻⁴⁷.
const SLIVER: f64 = 1.0 / (1 << 28) as f64;

/// Builds the hierarchy; `free_depth` levels are split by cost.
#[expect(
    clippy::cast_possible_truncation,
    reason = "there are at most 2³² vertices, since corners are u32"
)]
pub(super) fn hierarchy(triangles: &Triangles, free_depth: usize) -> Hierarchy {
    debug_assert!(triangles.corners.len() <= Triangles::AT_MOST);
    let (frame, reach) = frame(triangles);
    let mut items: Vec<Item> = (0..)
        .zip(&triangles.corners)
        .map(|(id, c)| item(triangles, &frame, id, *c))
        .collect();
    let nodes = nodes(&mut items, free_depth);
    let mut places = vec![u32::MAX; triangles.vertices.len()];
    let mut vertices = Vec::new();
    let facets = items.iter().map(|item| Facet {
        corners: triangles.corners[item.triangle as usize].map(|corner| {
            let place = &mut places[corner as usize];
            if *place == u32::MAX {
                *place = vertices.len() as u32;
                vertices.push(triangles.vertices[corner as usize]);
            }
            *place
        }),
        triangle: item.triangle,
    });
    let facets = facets.collect();
    vertices.shrink_to_fit();
    Hierarchy {
        nodes,
        facets,
        vertices,
        frame,
        behind: Hierarchy::BEHIND * reach,
    }
}

/// The frame of a mesh and its largest coordinate (no less than its extent) in metres.
fn frame(triangles: &Triangles) -> (Frame, f64) {
    let mut low = [f64::INFINITY; 3];
    let mut high = [f64::NEG_INFINITY; 3];
    for vertex in triangles
        .corners
        .iter()
        .flatten()
        .map(|corner| triangles.vertices[*corner as usize])
    {
        for axis in 0..3 {
            low[axis] = if vertex[axis] < low[axis] {
                vertex[axis]
            } else {
                low[axis]
            };
            high[axis] = if vertex[axis] > high[axis] {
                vertex[axis]
            } else {
                high[axis]
            };
        }
    }
    let mut half = 0.0;
    let mut reach = 0.0;
    let mut centre = [0.0; 3];
    for axis in 0..3 {
        centre[axis] = low[axis] * 0.5 + high[axis] * 0.5;
        for (size, largest) in [
            (high[axis] - centre[axis], &mut half),
            (high[axis] - low[axis], &mut reach),
        ] {
            *largest = if size > *largest { size } else { *largest };
        }
        for size in [low[axis].abs(), high[axis].abs()] {
            reach = if size > reach { size } else { reach };
        }
    }
    // No vertex, or one position only, or no numbers: any frame will do.
    let sound = half > f64::MIN_POSITIVE && reach < f64::INFINITY;
    // The exponent of the result is one below that of 1 / half: a power of two that is at most 1 / half.
    let scale = if sound {
        f64::from_bits((1.0 / half).to_bits() & (0x7ff << 52))
    } else {
        1.0
    };
    (
        Frame {
            centre: if sound { centre } else { [0.0; 3] },
            scale,
        },
        if reach < f64::INFINITY { reach } else { 0.0 },
    )
}

/// Box and normal of a triangle.
#[expect(
    clippy::cast_possible_truncation,
    reason = "boxes are rounded outward after; normals have a margin"
)]
fn item(triangles: &Triangles, frame: &Frame, triangle: u32, corners: [u32; 3]) -> Item {
    let positions = corners.map(|corner| triangles.vertices[corner as usize]);
    let [a, b, c] = positions.map(|position| [0, 1, 2].map(|axis| frame.inside(position, axis)));
    let mut bounds = Bounds::EMPTY;
    for corner in [a, b, c] {
        let low = corner.map(|x| ((x - MARGIN) as f32).next_down());
        let high = corner.map(|x| ((x + MARGIN) as f32).next_up());
        bounds.join(&Bounds { low, high });
    }
    let [ab, bc, ca] =
        [(a, b), (b, c), (c, a)].map(|(p, q)| [0, 1, 2].map(|axis| q[axis] - p[axis]));
    let across = cross(ab, bc);
    let length = dot(across, across).sqrt();
    let longest = [ab, bc, ca]
        .iter()
        .map(|edge| dot(*edge, *edge))
        .fold(0.0, |l, e| if e > l { e } else { l })
        .sqrt();
    let sound = length > SLIVER * longest && length > 0.0;
    Item {
        bounds,
        normal: across.map(|x| if sound { (x / length) as f32 } else { 0.0 }),
        triangle,
    }
}

/// Builds the nodes and brings the items into the order of the leaves.
fn nodes(items: &mut [Item], free_depth: usize) -> Vec<Node> {
    let mut nodes = vec![Node::EMPTY];
    let mut tasks = vec![(0, 0..items.len(), 0)];
    while let Some((node, range, depth)) = tasks.pop() {
        let parts = parts(items, range, depth >= free_depth);
        for (k, part) in parts.into_iter().enumerate() {
            let (axis, sine) = cone(&items[part.items.clone()]);
            let child = if part.items.len() <= LEAF {
                Child::leaf(part.items.start, part.items.len())
            } else {
                nodes.push(Node::EMPTY);
                tasks.push((nodes.len() - 1, part.items, depth + 1));
                Child::node(nodes.len() - 1)
            };
            let node = &mut nodes[node];
            for (a, component) in axis.into_iter().enumerate() {
                node.sides[2 * a][k] = part.bounds.low[a];
                node.sides[2 * a + 1][k] = part.bounds.high[a];
                node.axis[a][k] = component;
            }
            node.sine[k] = sine;
            node.child[k] = child;
        }
    }
    nodes
}

/// Axis and sine of the half-angle, margin included, of a cone around all normals; sine 2 if there is none.
#[expect(clippy::cast_possible_truncation, reason = "covered by the margin")]
fn cone(items: &[Item]) -> ([f32; 3], f32) {
    const NONE: ([f32; 3], f32) = ([0.0; 3], 2.0);
    let mut sum = [0.0; 3];
    for item in items {
        sum = [0, 1, 2].map(|axis| sum[axis] + f64::from(item.normal[axis]));
    }
    let length = dot(sum, sum).sqrt();
    if length.is_nan() || length <= 0.0 {
        return NONE;
    }
    let axis = sum.map(|x| x / length);
    let mut widest = 0.0;
    for item in items {
        let normal = item.normal.map(f64::from);
        let across = cross(axis, normal);
        let sine = dot(across, across);
        widest = if sine > widest { sine } else { widest };
        // Also where a normal is zero.
        let cosine = dot(axis, normal);
        if cosine.is_nan() || cosine <= 0.0 {
            return NONE;
        }
    }
    (axis.map(|x| x as f32), widest.sqrt() as f32 + CONE_MARGIN)
}

/// Scalar product.
pub(super) fn dot(a: [f64; 3], b: [f64; 3]) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

/// Vector product.
pub(super) fn cross(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [
        a[1] * b[2] - a[2] * b[1],
        a[2] * b[0] - a[0] * b[2],
        a[0] * b[1] - a[1] * b[0],
    ]
}
