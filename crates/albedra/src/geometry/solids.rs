//! Meshes of the plain solids.

use std::fmt;

use glam::DVec3;

use super::mesh::Mesh;
use super::outline_check::{OutlineError, check_outline};
use crate::math::angle::sin_cos_parts;

/// Range of lengths in metres. Areas and volumes then stay far from the limits of `f64`.
const LENGTHS: (f64, f64) = (1e-9, 1e9);

/// Range of the number of sides of a prism.
const SIDES: (u32, u32) = (3, 4096);

/// Reason why a solid cannot be built.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum SolidError {
    /// A length or a number of sides outside its range, or not a number.
    OutOfRange {
        /// Name of the argument.
        argument: &'static str,
        /// What it was.
        value: f64,
        /// Least value allowed.
        low: f64,
        /// Greatest value allowed.
        high: f64,
    },
    /// The outline is not a simple polygon.
    Outline(OutlineError),
}

impl fmt::Display for SolidError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::OutOfRange {
                argument,
                value,
                low,
                high,
            } => {
                if *argument == "sides" {
                    return write!(f, "{argument} must lie in [{low}, {high}], got {value}");
                }
                write!(
                    f,
                    "{argument} must lie in [{low:e}, {high:e}] m, got {value:?} m"
                )
            }
            Self::Outline(error) => error.fmt(f),
        }
    }
}

impl std::error::Error for SolidError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        match self {
            Self::Outline(error) => Some(error),
            Self::OutOfRange { .. } => None,
        }
    }
}

/// A box of this size in metres, centred on the origin, with the walls `x-`, `x+`, `y-`, `y+`, `z-`, `z+`.
///
/// # Errors
///
/// An edge outside 1e-9 to 1e9 m.
pub(crate) fn cuboid([x, y, z]: [f64; 3]) -> Result<Mesh, SolidError> {
    let half = [
        length("x size", x)? * 0.5,
        length("y size", y)? * 0.5,
        length("z size", z)? * 0.5,
    ];
    let mut mesh = Mesh::default();
    // Bit 0 of a vertex' number says which side in x, bit 1 in y, bit 2 in z.
    for number in 0..8 {
        let side = |bit: usize| {
            if number >> bit & 1 == 1 {
                half[bit]
            } else {
                -half[bit]
            }
        };
        mesh.vertices.push(DVec3::new(side(0), side(1), side(2)));
    }
    let walls = [
        ("x-", [0, 4, 6, 2]),
        ("x+", [1, 3, 7, 5]),
        ("y-", [0, 1, 5, 4]),
        ("y+", [2, 6, 7, 3]),
        ("z-", [0, 2, 3, 1]),
        ("z+", [4, 5, 7, 6]),
    ];
    for (name, corners) in walls {
        let wall = mesh.wall(name);
        mesh.push_facet(&corners, wall);
    }
    Ok(mesh)
}

/// A regular prism with its axis on z, centred on the origin.
///
/// `radius` is the circumradius in metres; vertex 1 is on +x and the others follow counter-clockwise seen from above. The walls are
/// `side 1` (from vertex 1 to vertex 2) and so on, `bottom`, `top`.
///
/// # Errors
///
/// Fewer than 3 or more than 4096 sides; a radius or a height outside 1e-9 to 1e9 m.
pub(crate) fn prism(sides: u32, radius: f64, height: f64) -> Result<Mesh, SolidError> {
    let (least, most) = SIDES;
    if !(least..=most).contains(&sides) {
        let value = f64::from(sides);
        return Err(SolidError::OutOfRange {
            argument: "sides",
            value,
            low: f64::from(least),
            high: f64::from(most),
        });
    }
    length("radius", radius)?;
    length("height", height)?;
    let corner = |part: u32| {
        let (sin, cos) = sin_cos_parts(part, sides);
        (radius * cos, radius * sin)
    };
    Ok(walled(&(0..sides).map(corner).collect::<Vec<_>>(), height))
}

/// A solid with this outline in x and y and this height, from `−height/2` to `height/2` in z.
///
/// The outline is kept where it is; one that runs clockwise is turned round, its first corner staying first. The walls are
/// `side 1` (from corner 1 to corner 2) and so on, `bottom`, `top`.
///
/// # Errors
///
/// The outline is not a simple polygon of at most 10 000 corners, a coordinate is beyond ±1e9 m, or the height is outside 1e-9 to 1e9 m.
pub(crate) fn extruded(outline: &[(f64, f64)], height: f64) -> Result<Mesh, SolidError> {
    let facts = check_outline(outline).map_err(SolidError::Outline)?;
    for &(x, y) in outline {
        for (argument, value) in [("outline x", x), ("outline y", y)] {
            within(argument, value, (-LENGTHS.1, LENGTHS.1))?;
        }
    }
    length("height", height)?;
    let mut corners = outline.to_vec();
    if facts.area < 0.0 {
        corners[1..].reverse();
    }
    Ok(walled(&corners, height))
}

/// The walls over a counter-clockwise outline.
fn walled(corners: &[(f64, f64)], height: f64) -> Mesh {
    let mut mesh = Mesh::default();
    for z in [-0.5 * height, 0.5 * height] {
        mesh.vertices
            .extend(corners.iter().map(|&(x, y)| DVec3::new(x, y, z)));
    }
    // Outlines have at most 10 000 corners.
    let count = u32::try_from(corners.len()).unwrap_or(u32::MAX);
    for i in 0..count {
        let next = (i + 1) % count;
        // Not by `Mesh::wall`, which looks through all names.
        mesh.walls.push(format!("side {}", i + 1));
        mesh.push_facet(&[i, next, count + next, count + i], i);
    }
    let bottom: Vec<u32> = (0..count).rev().collect();
    let top: Vec<u32> = (count..2 * count).collect();
    for (name, facet, wall) in [("bottom", bottom, count), ("top", top, count + 1)] {
        mesh.walls.push(name.to_owned());
        mesh.push_facet(&facet, wall);
    }
    mesh
}

fn length(argument: &'static str, value: f64) -> Result<f64, SolidError> {
    within(argument, value, LENGTHS)
}

fn within(argument: &'static str, value: f64, (low, high): (f64, f64)) -> Result<f64, SolidError> {
    if (low..=high).contains(&value) {
        Ok(value)
    } else {
        Err(SolidError::OutOfRange {
            argument,
            value,
            low,
            high,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::wall_plane::{PlanarWall, planar_walls};

    /// Volume by the divergence theorem, over fans of the facets.
    fn volume(mesh: &Mesh) -> f64 {
        let of_facet = |facet: usize| {
            let p: Vec<DVec3> = mesh.positions_of(facet).collect();
            (1..p.len() - 1)
                .map(|i| p[0].dot(p[i].cross(p[i + 1])) / 6.0)
                .sum::<f64>()
        };
        (0..mesh.facets()).map(of_facet).sum()
    }

    /// Each edge must be there once in each direction.
    fn is_closed(mesh: &Mesh) -> bool {
        let mut edges = Vec::new();
        for facet in 0..mesh.facets() {
            let corners = mesh.corners_of(facet);
            edges
                .extend((0..corners.len()).map(|i| (corners[i], corners[(i + 1) % corners.len()])));
        }
        edges.sort_unstable();
        edges.windows(2).all(|pair| pair[0] != pair[1])
            && edges
                .iter()
                .all(|&(a, b)| edges.binary_search(&(b, a)).is_ok())
    }

    fn walls(mesh: &Mesh) -> Vec<PlanarWall> {
        planar_walls(mesh)
            .into_iter()
            .map(|wall| wall.expect("a planar wall"))
            .collect()
    }

    #[test]
    fn cuboid_has_exact_frames() {
        let mesh = cuboid([1.2, 0.8, 0.5]).unwrap();
        assert_eq!(mesh.walls, ["x-", "x+", "y-", "y+", "z-", "z+"]);
        assert!(is_closed(&mesh) && (volume(&mesh) - 0.48).abs() < 1e-15);
        let (x, y, z) = (DVec3::X, DVec3::Y, DVec3::Z);
        let expected = [
            (x * -0.6, x, y, 0.4),
            (x * 0.6, -x, -y, 0.4),
            (y * -0.4, y, -x, 0.6),
            (y * 0.4, -y, x, 0.6),
            (z * -0.25, z, x, 0.96),
            (z * 0.25, -z, x, 0.96),
        ];
        for (wall, (origin, normal, u, area)) in walls(&mesh).iter().zip(expected) {
            let v = normal.cross(u);
            assert_eq!(
                wall.frame,
                crate::Frame {
                    origin,
                    u,
                    v,
                    normal
                }
            );
            assert!((wall.area - area).abs() < 1e-15);
        }
    }

    #[test]
    fn prism_has_its_textbook_area_and_volume() {
        let mesh = prism(6, 1.0, 2.0).unwrap();
        assert!(is_closed(&mesh));
        // A regular hexagon of circumradius 1 has the area 3√3/2 and sides of length 1.
        let floor = 1.5 * 3.0_f64.sqrt();
        assert!((volume(&mesh) - 2.0 * floor).abs() < 1e-14);
        let walls = walls(&mesh);
        assert_eq!(mesh.walls[0], "side 1");
        assert_eq!(mesh.walls[5..], ["side 6", "bottom", "top"]);
        assert!(
            walls[..6]
                .iter()
                .all(|wall| (wall.area - 2.0).abs() < 1e-14)
        );
        assert!(
            walls[6..]
                .iter()
                .all(|wall| (wall.area - floor).abs() < 1e-14)
        );
        assert_eq!(
            (walls[6].frame.normal, walls[7].frame.normal),
            (DVec3::Z, -DVec3::Z)
        );
        assert!(
            walls[6..]
                .iter()
                .all(|wall| wall.frame.origin.truncate().length() < 1e-16)
        );
        assert_eq!(mesh.vertices[0], DVec3::new(1.0, 0.0, -1.0));
        assert_eq!(mesh.vertices[1].y, -mesh.vertices[5].y);
        // Side 1 runs from vertex 1 to vertex 2; inward is against their middle.
        assert!(
            walls[0]
                .frame
                .normal
                .dot(mesh.vertices[0] + mesh.vertices[1])
                < 0.0
        );
        let square = prism(4, 1.0, 1.0).unwrap();
        assert_eq!(
            square.vertices[1..3],
            [DVec3::new(0.0, 1.0, -0.5), DVec3::new(-1.0, 0.0, -0.5)]
        );
        assert!(is_closed(&prism(4096, 1.0, 1.0).unwrap()));
    }

    #[test]
    fn extruded_keeps_place_and_first_corner() {
        let l = [
            (1.0, 1.0),
            (3.0, 1.0),
            (3.0, 2.0),
            (2.0, 2.0),
            (2.0, 3.0),
            (1.0, 3.0),
        ];
        let mesh = extruded(&l, 0.5).unwrap();
        let mut clockwise = l;
        clockwise[1..].reverse();
        assert_eq!(extruded(&clockwise, 0.5).unwrap(), mesh);
        assert!(is_closed(&mesh) && (volume(&mesh) - 1.5).abs() < 1e-14);
        assert_eq!(
            (mesh.vertices[0], mesh.vertices[11]),
            (DVec3::new(1.0, 1.0, -0.25), DVec3::new(1.0, 3.0, 0.25))
        );
        let areas: Vec<f64> = walls(&mesh).iter().map(|wall| wall.area).collect();
        for (area, expected) in areas.iter().zip([1.0, 0.5, 0.5, 0.5, 0.5, 1.0, 3.0, 3.0]) {
            assert!((area - expected).abs() < 1e-14);
        }
    }

    #[test]
    fn bad_arguments_are_named() {
        let culprit = |result: Result<Mesh, SolidError>| match result {
            Err(SolidError::OutOfRange {
                argument, value, ..
            }) => (argument, value.to_bits()),
            other => panic!("{other:?}"),
        };
        assert_eq!(
            culprit(cuboid([1.0, 0.0, 1.0])),
            ("y size", 0.0_f64.to_bits())
        );
        assert_eq!(
            culprit(cuboid([1.0, 1.0, f64::NAN])),
            ("z size", f64::NAN.to_bits())
        );
        assert_eq!(culprit(prism(2, 1.0, 1.0)), ("sides", 2.0_f64.to_bits()));
        assert_eq!(
            culprit(prism(4097, 1.0, 1.0)),
            ("sides", 4097.0_f64.to_bits())
        );
        assert_eq!(
            culprit(prism(3, -1.0, 1.0)),
            ("radius", (-1.0_f64).to_bits())
        );
        assert_eq!(
            culprit(prism(3, 1.0, f64::INFINITY)),
            ("height", f64::INFINITY.to_bits())
        );
        let far = [(0.0, 0.0), (1.0, 0.0), (0.0, 2e9)];
        assert_eq!(
            culprit(extruded(&far, 1.0)),
            ("outline y", 2e9_f64.to_bits())
        );
        let line = extruded(&[(0.0, 0.0), (1.0, 0.0)], 1.0);
        assert_eq!(
            line,
            Err(SolidError::Outline(OutlineError::TooFewCorners {
                corners: 2
            }))
        );
        let text = prism(2, 1.0, 1.0).unwrap_err().to_string();
        assert_eq!(text, "sides must lie in [3, 4096], got 2");
        let text = cuboid([1.0, -2.0, 1.0]).unwrap_err().to_string();
        assert_eq!(text, "y size must lie in [1e-9, 1e9] m, got -2.0 m");
    }
}
