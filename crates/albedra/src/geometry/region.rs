//! Regions: outlines on a wall that can be painted or opened.

use std::fmt;

use glam::DVec3;
use serde::{Deserialize, Serialize};

use super::audit::Short;
use super::outline::Bounds;
use super::outline_check::{OutlineError, check_outline};
use super::polygon::{self, Point};
use super::region_shape::RegionShape;
use super::visible_area::uncovered_area;
use super::wall_plane::PlanarWall;
use crate::math::order::larger;

/// An outline on a planar wall, in the wall's own coordinates (u, v) in metres.
///
/// The coordinates start at the wall's area centroid, or at the point chosen with [`at`](Self::at). A region is only checked
/// once it meets its wall.
///
/// # Examples
///
/// ```
/// use albedra::Region;
///
/// let port = Region::disk((0.0, 0.1), 0.05);
/// assert!(port.check().is_ok());
/// assert!(Region::disk((0.0, 0.1), -0.05).check().is_err());
/// ```
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Region {
    figure: Figure,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    at: Option<DVec3>,
}

/// The outline of a region; all lengths are in metres.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case", deny_unknown_fields)]
#[non_exhaustive]
pub enum Figure {
    /// A disk.
    Disk {
        /// Its centre (u, v).
        centre: (f64, f64),
        /// Its radius.
        radius: f64,
    },
    /// A rectangle along the wall's axes.
    Rectangle {
        /// Its centre (u, v).
        centre: (f64, f64),
        /// Its width along u and its height along v.
        size: (f64, f64),
    },
    /// A simple polygon.
    Polygon {
        /// Its corners (u, v).
        corners: Vec<(f64, f64)>,
    },
}

/// Reason why a region cannot be used. Lengths are in metres.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum RegionError {
    /// A number is infinite or not a number.
    NotFinite {
        /// What it says.
        argument: &'static str,
        /// The number.
        value: f64,
    },
    /// A length is not positive, or so small or large that the area leaves the range of `f64`.
    NotPositive {
        /// What it says.
        argument: &'static str,
        /// The number.
        value: f64,
    },
    /// The corners are not those of a simple polygon.
    Polygon(OutlineError),
    /// Part of the region is outside its wall or over a hole of it.
    OffWall {
        /// The point (u, v) of the region or of the wall's border where it is worst.
        at: (f64, f64),
        /// How far this point is on the wrong side of a border.
        by: f64,
    },
    /// The region lies across a gap of its wall.
    OverGap {
        /// The area of the region in m² that is not on the wall.
        area: f64,
    },
}

impl fmt::Display for RegionError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::NotFinite { argument, value } => {
                write!(f, "{argument} of a region must be finite, got {value:?}")
            }
            Self::NotPositive { argument, value } => {
                write!(
                    f,
                    "{argument} of a region must be positive and finite with its square, got {value:?} m"
                )
            }
            Self::Polygon(error) => error.fmt(f),
            Self::OffWall { at, by } => write!(
                f,
                "must lie on its wall, but leaves it by {} m at (u, v) = ({}, {}) m",
                Short(*by),
                Short(at.0),
                Short(at.1)
            ),
            Self::OverGap { area } => write!(
                f,
                "must lie on its wall, but crosses a gap of it: {} m² are off the wall",
                Short(*area)
            ),
        }
    }
}

impl std::error::Error for RegionError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        match self {
            Self::Polygon(error) => Some(error),
            _ => None,
        }
    }
}

impl Region {
    /// A disk of this radius around a point (u, v).
    pub fn disk(centre: (f64, f64), radius: f64) -> Self {
        Self {
            figure: Figure::Disk { centre, radius },
            at: None,
        }
    }

    /// A rectangle around a point (u, v), with its width along u and its height along v.
    pub fn rectangle(centre: (f64, f64), size: (f64, f64)) -> Self {
        Self {
            figure: Figure::Rectangle { centre, size },
            at: None,
        }
    }

    /// A simple polygon with these corners (u, v), which may run either way.
    pub fn polygon(corners: Vec<(f64, f64)>) -> Self {
        Self {
            figure: Figure::Polygon { corners },
            at: None,
        }
    }

    /// The same region with its coordinates relative to the point of its wall that is nearest to a position.
    ///
    /// The axes stay the wall's own.
    #[must_use]
    pub fn at(mut self, position: DVec3) -> Self {
        self.at = Some(position);
        self
    }

    /// The outline.
    pub fn figure(&self) -> &Figure {
        &self.figure
    }

    /// The position in metres that was chosen with [`at`](Self::at), if one was.
    pub fn position(&self) -> Option<DVec3> {
        self.at
    }

    /// Checks what can be checked without the wall.
    ///
    /// # Errors
    ///
    /// A number is not finite, a radius or a size is not positive, or the corners are not those of a simple polygon.
    pub fn check(&self) -> Result<(), RegionError> {
        if let Some(position) = self.at {
            finite("position", &position.to_array())?;
        }
        match &self.figure {
            Figure::Disk { centre, radius } => {
                finite("centre", &[centre.0, centre.1])?;
                positive("radius", *radius)
            }
            Figure::Rectangle { centre, size } => {
                finite("centre", &[centre.0, centre.1])?;
                positive("width", size.0)?;
                positive("height", size.1)
            }
            Figure::Polygon { corners } => check_outline(corners)
                .map(drop)
                .map_err(RegionError::Polygon),
        }
    }

    /// The region in place on its wall, ready for use.
    ///
    /// # Errors
    ///
    /// Those of [`check`](Self::check), or the region leaves its wall by more than 1e-9 of the wall's extent.
    pub(crate) fn shape(&self, wall: &PlanarWall) -> Result<RegionShape, RegionError> {
        self.check()?;
        let (u, v) = self
            .at
            .map_or((0.0, 0.0), |position| wall.nearest(position));
        let placed = |point: Point| (u + point.0, v + point.1);
        let shape = match &self.figure {
            Figure::Disk { centre, radius } => RegionShape::disk(placed(*centre), *radius),
            Figure::Rectangle { centre, size } => RegionShape::rectangle(placed(*centre), *size),
            Figure::Polygon { corners } => {
                RegionShape::polygon(corners.iter().map(|corner| placed(*corner)).collect())
                    .ok_or(RegionError::Polygon(OutlineError::NoArea))?
            }
        };
        fit(&shape, wall)?;
        Ok(shape)
    }

    /// Checks the region and that it lies on its wall; touching the border is allowed.
    ///
    /// # Errors
    ///
    /// Those of [`shape`](Self::shape).
    pub(crate) fn fits(&self, wall: &PlanarWall) -> Result<(), RegionError> {
        self.shape(wall).map(drop)
    }
}

fn finite(argument: &'static str, values: &[f64]) -> Result<(), RegionError> {
    match values.iter().find(|value| !value.is_finite()) {
        Some(&value) => Err(RegionError::NotFinite { argument, value }),
        None => Ok(()),
    }
}

fn positive(argument: &'static str, value: f64) -> Result<(), RegionError> {
    let square = value * value;
    if value > 0.0 && square.is_finite() && square > 0.0 {
        Ok(())
    } else {
        Err(RegionError::NotPositive { argument, value })
    }
}

/// How far a region may stick out, as a share of the wall's extent: well above rounding, well below any drawing.
const SLACK: f64 = 1e-9;

fn fit(shape: &RegionShape, wall: &PlanarWall) -> Result<(), RegionError> {
    let slack = SLACK * wall.extent;
    let worst = if let Some((centre, radius)) = shape.as_disk() {
        disk_outside(centre, radius, wall)
    } else {
        corners_outside(shape, wall)
    };
    // Written so that NaN fails.
    let on_wall = worst.1 <= slack;
    if !on_wall {
        return Err(RegionError::OffWall {
            at: worst.0,
            by: worst.1,
        });
    }
    // What is left are borders that cross although no corner is on the wrong side, as over a slit.
    let covers = [wall.outline.curves()];
    let off = uncovered_area(&shape.curves(), &covers);
    if off <= slack * shape.perimeter() {
        Ok(())
    } else {
        Err(RegionError::OverGap { area: off })
    }
}

/// The point of a disk that is farthest outside the wall or over a hole, and how far; zero if the disk is on the wall.
fn disk_outside(centre: Point, radius: f64, wall: &PlanarWall) -> (Point, f64) {
    let border = wall.outline.nearest_border(centre);
    let away = polygon::distance(centre, border);
    let inside = wall.outline.contains(centre);
    let by = if inside { radius - away } else { radius + away };
    let at = |du: f64, dv: f64| (centre.0 + du * radius, centre.1 + dv * radius);
    let worst = if away > 0.0 {
        let reach = if inside { away } else { -away };
        at((border.0 - centre.0) / reach, (border.1 - centre.1) / reach)
    } else {
        // A centre on the border: the worst of four points, since the border has no one direction in a corner.
        let four = [at(1.0, 0.0), at(-1.0, 0.0), at(0.0, 1.0), at(0.0, -1.0)];
        let outside = four.map(|point| (point, wall.outline.outside_by(point)));
        let farther =
            |worst: (Point, f64), next: (Point, f64)| if next.1 > worst.1 { next } else { worst };
        outside.into_iter().fold((centre, 0.0), farther).0
    };
    (worst, larger(0.0, by))
}

/// The corner of a polygon or of the wall that is farthest on the wrong side, and how far.
fn corners_outside(shape: &RegionShape, wall: &PlanarWall) -> (Point, f64) {
    let outer = shape.corners();
    let own = outer
        .iter()
        .map(|&corner| (corner, wall.outline.outside_by(corner)));
    let bounds = Bounds::of(outer.iter().copied());
    let inner = wall.outline.corners().filter(|&corner| {
        bounds.meets(&Bounds {
            low: corner,
            high: corner,
        })
    });
    let of_wall = inner.map(|corner| (corner, shape.depth(corner)));
    own.chain(of_wall).fold(((0.0, 0.0), 0.0), |worst, next| {
        if next.1 <= worst.1 { worst } else { next }
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::wall_plane::tests::flat_wall;

    /// A wall 4 × 2 around the origin with a hole 1 × 1 whose left edge is at u = 0.5.
    fn wall() -> PlanarWall {
        flat_wall(vec![
            vec![(-2.0, -1.0), (2.0, -1.0), (2.0, 1.0), (-2.0, 1.0)],
            vec![(0.5, -0.5), (0.5, 0.5), (1.5, 0.5), (1.5, -0.5)],
        ])
    }

    fn off(region: &Region) -> (Point, f64) {
        match region.fits(&wall()) {
            Err(RegionError::OffWall { at, by }) => (at, by),
            other => panic!("{other:?}"),
        }
    }

    fn near(a: (Point, f64), b: (Point, f64)) -> bool {
        polygon::distance(a.0, b.0) < 1e-12 && (a.1 - b.1).abs() < 1e-12
    }

    #[test]
    fn numbers_are_checked() {
        use RegionError as E;
        let radius = |r| Region::disk((0.0, 0.0), r).check();
        assert_eq!(radius(0.1), Ok(()));
        assert_eq!(
            radius(0.0),
            Err(E::NotPositive {
                argument: "radius",
                value: 0.0
            })
        );
        assert!(matches!(
            radius(f64::NAN),
            Err(E::NotPositive {
                argument: "radius",
                ..
            })
        ));
        assert!(
            radius(f64::INFINITY).is_err() && radius(1e-200).is_err() && radius(1e200).is_err()
        );
        assert!(matches!(
            Region::disk((f64::NAN, 0.0), 1.0).check(),
            Err(E::NotFinite {
                argument: "centre",
                ..
            })
        ));
        let size = Region::rectangle((0.0, 0.0), (1.0, -2.0)).check();
        assert_eq!(
            size,
            Err(E::NotPositive {
                argument: "height",
                value: -2.0
            })
        );
        let at = Region::disk((0.0, 0.0), 1.0).at(DVec3::new(0.0, f64::INFINITY, 0.0));
        assert_eq!(
            at.check(),
            Err(E::NotFinite {
                argument: "position",
                value: f64::INFINITY
            })
        );
        let bow_tie = Region::polygon(vec![(0.0, 0.0), (1.0, 1.0), (1.0, 0.0), (0.0, 1.0)]);
        assert_eq!(
            bow_tie.check(),
            Err(E::Polygon(OutlineError::SelfCrossing {
                first: 1,
                second: 3
            }))
        );
        assert_eq!(bow_tie.fits(&wall()), bow_tie.check());
    }

    #[test]
    fn disks_that_leave_the_wall_say_where_and_by_how_much() {
        assert!(
            Region::disk((-1.0, 0.0), 1.0).fits(&wall()).is_ok(),
            "touches three sides"
        );
        assert!(
            Region::disk((-1.0, 0.0), 1.0 + 1e-9).fits(&wall()).is_ok(),
            "within the slack"
        );
        assert!(near(
            off(&Region::disk((-1.0, 0.5), 0.75)),
            ((-1.0, 1.25), 0.25)
        ));
        assert!(
            near(off(&Region::disk((0.25, 0.0), 0.5)), ((0.75, 0.0), 0.25)),
            "over the hole"
        );
        assert!(
            near(off(&Region::disk((0.75, 0.0), 0.1)), ((0.85, 0.0), 0.35)),
            "in the hole"
        );
        assert!(
            near(off(&Region::disk((-3.0, 0.0), 0.5)), ((-3.5, 0.0), 1.5)),
            "beside the wall"
        );
        assert!(
            near(
                off(&Region::disk((2.0, 0.75), 0.125)),
                ((2.125, 0.75), 0.125)
            ),
            "centre on the border"
        );
    }

    #[test]
    fn polygons_that_leave_the_wall_say_where_and_by_how_much() {
        assert!(
            Region::rectangle((-1.0, 0.0), (2.0, 2.0))
                .fits(&wall())
                .is_ok()
        );
        assert!(
            Region::rectangle((0.25, 0.0), (0.5, 2.0))
                .fits(&wall())
                .is_ok(),
            "touches the hole"
        );
        assert!(
            Region::rectangle((-1.0, 0.0), (2.0 + 2e-9, 2.0))
                .fits(&wall())
                .is_ok(),
            "within the slack"
        );
        assert!(near(
            off(&Region::rectangle((-1.0, 0.5), (1.0, 1.5))),
            ((-0.5, 1.25), 0.25)
        ));
        let around_the_hole = Region::rectangle((1.0, 0.0), (1.5, 1.5));
        assert_eq!(off(&around_the_hole).1, 0.25);
        let whole = Region::rectangle((0.0, 0.0), (4.0, 2.0));
        assert!(near((off(&whole).0, 0.0), ((0.5, -0.5), 0.0)) && off(&whole).1 == 0.5);
        let c_shaped = Region::polygon(vec![
            (0.25, -0.75),
            (1.75, -0.75),
            (1.75, -0.5),
            (0.5, -0.5),
            (0.5, 0.5),
            (1.75, 0.5),
            (1.75, 0.75),
            (0.25, 0.75),
        ]);
        assert!(
            c_shaped.fits(&wall()).is_ok(),
            "around the hole, on its border"
        );
        assert!(near(
            (off(&Region::rectangle((-1.0, 5.0), (0.5, 0.5))).0, 0.0),
            ((-0.75, 5.25), 0.0)
        ));
    }

    #[test]
    fn a_region_across_a_slit_is_over_a_gap() {
        let slit = flat_wall(vec![
            vec![(-2.0, -1.0), (2.0, -1.0), (2.0, 1.0), (-2.0, 1.0)],
            vec![(-0.01, -0.9), (-0.01, 0.9), (0.01, 0.9), (0.01, -0.9)],
        ]);
        let across = Region::rectangle((0.0, 0.0), (1.0, 0.5)).fits(&slit);
        let Err(RegionError::OverGap { area }) = across else {
            panic!("{across:?}")
        };
        assert!((area - 0.01).abs() < 1e-15);
    }

    #[test]
    fn at_moves_the_origin_to_the_nearest_point_of_the_wall() {
        let moved = Region::disk((0.25, 0.0), 0.1)
            .at(DVec3::new(-1.0, 0.5, 7.0))
            .shape(&wall())
            .unwrap();
        assert_eq!(moved, RegionShape::disk((-0.75, 0.5), 0.1));
        // Above the hole the nearest point is on its left edge; beside the wall it is on the border.
        let beside = Region::rectangle((-0.25, 0.0), (0.5, 0.5));
        let shape = beside
            .clone()
            .at(DVec3::new(0.75, 0.0, 1.0))
            .shape(&wall())
            .unwrap();
        assert_eq!(shape, RegionShape::rectangle((0.25, 0.0), (0.5, 0.5)));
        let shape = beside.at(DVec3::new(9.0, 0.5, 1.0)).shape(&wall()).unwrap();
        assert_eq!(shape, RegionShape::rectangle((1.75, 0.5), (0.5, 0.5)));
    }

    #[test]
    fn regions_survive_their_text_form() {
        let polygon = Region::polygon(vec![(0.0, 0.0), (0.1, 0.0), (0.0, 1.0 / 3.0)]);
        let moved = Region::rectangle((0.5, 0.0), (1.0, 2.0)).at(DVec3::new(1.0, 2.0, 0.1));
        for region in [Region::disk((0.1, -0.2), 0.3), moved, polygon] {
            let text = toml::to_string(&region).unwrap();
            assert_eq!(toml::from_str::<Region>(&text).unwrap(), region, "{text}");
            assert!(toml::from_str::<Region>(&format!("surplus = 1\n{text}")).is_err());
        }
        let written = "[figure.disk]\ncentre = [0, 0.5]\nradius = 1\n";
        assert_eq!(
            toml::from_str::<Region>(written).unwrap(),
            Region::disk((0.0, 0.5), 1.0)
        );
    }

    #[test]
    fn messages_name_the_culprit() {
        let text = RegionError::OffWall {
            at: (0.5, -0.25),
            by: 0.125,
        }
        .to_string();
        assert_eq!(
            text,
            "must lie on its wall, but leaves it by 0.125 m at (u, v) = (0.5, -0.25) m"
        );
        let text = Region::disk((0.0, 0.0), -1.0)
            .check()
            .unwrap_err()
            .to_string();
        assert_eq!(
            text,
            "radius of a region must be positive and finite with its square, got -1.0 m"
        );
    }
}
