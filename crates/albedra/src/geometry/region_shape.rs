//! A region in place on its wall: what is inside, how large it is, points in it.

use super::outline::{Bounds, Outline};
use super::polygon::{self, Point};
use super::triangulate::triangulate;
use crate::math::angle::sin_cos_turns;

/// A region in its wall's coordinates (u, v), in metres.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct RegionShape {
    figure: Figure,
    area: f64,
    bounds: Bounds,
}

#[derive(Clone, Debug, PartialEq)]
enum Figure {
    Disk {
        centre: Point,
        radius: f64,
    },
    Rectangle,
    Polygon {
        outline: Outline,
        triangles: Vec<[Point; 3]>,
        cumulative: Vec<f64>,
    },
}

impl RegionShape {
    /// A disk; the radius must be positive.
    pub(crate) fn disk(centre: Point, radius: f64) -> Self {
        let bounds = Bounds {
            low: (centre.0 - radius, centre.1 - radius),
            high: (centre.0 + radius, centre.1 + radius),
        };
        Self {
            figure: Figure::Disk { centre, radius },
            area: std::f64::consts::PI * (radius * radius),
            bounds,
        }
    }

    /// A rectangle; width along u and height along v must be positive.
    pub(crate) fn rectangle(centre: Point, (width, height): (f64, f64)) -> Self {
        let (half_width, half_height) = (0.5 * width, 0.5 * height);
        let bounds = Bounds {
            low: (centre.0 - half_width, centre.1 - half_height),
            high: (centre.0 + half_width, centre.1 + half_height),
        };
        Self {
            figure: Figure::Rectangle,
            area: width * height,
            bounds,
        }
    }

    /// A simple polygon that runs either way; `None` if it cannot be cut into triangles.
    pub(crate) fn polygon(mut corners: Vec<Point>) -> Option<Self> {
        if polygon::signed_area(&corners, *corners.first()?) < 0.0 {
            // The first corner stays first.
            corners[1..].reverse();
        }
        let cut = triangulate(&corners)?;
        let triangles: Vec<[Point; 3]> = cut
            .iter()
            .map(|t| t.map(|corner| corners[corner as usize]))
            .collect();
        let mut area = 0.0;
        let cumulative = triangles.iter().map(|&[a, b, c]| {
            area += 0.5 * polygon::turn(a, b, c);
            area
        });
        let cumulative: Vec<f64> = cumulative.collect();
        let bounds = Bounds::of(corners.iter().copied());
        let figure = Figure::Polygon {
            outline: Outline::new(vec![corners]),
            triangles,
            cumulative,
        };
        (area > 0.0 && area.is_finite()).then_some(Self {
            figure,
            area,
            bounds,
        })
    }

    /// Centre and radius, if this is a disk.
    pub(crate) fn as_disk(&self) -> Option<(Point, f64)> {
        match self.figure {
            Figure::Disk { centre, radius } => Some((centre, radius)),
            _ => None,
        }
    }

    /// Whether a point is in the region.
    ///
    /// Disks and rectangles hold their border. Polygons follow [`polygon::ray_crosses`]: of two polygons that share an edge
    /// exactly one holds a point on it.
    pub(crate) fn contains(&self, u: f64, v: f64) -> bool {
        match &self.figure {
            Figure::Disk { centre, radius } => {
                let (du, dv) = (u - centre.0, v - centre.1);
                du * du + dv * dv <= radius * radius
            }
            Figure::Rectangle => self.in_bounds(u, v),
            Figure::Polygon { outline, .. } => self.in_bounds(u, v) && outline.contains((u, v)),
        }
    }

    fn in_bounds(&self, u: f64, v: f64) -> bool {
        let Bounds { low, high } = self.bounds;
        low.0 <= u && u <= high.0 && low.1 <= v && v <= high.1
    }

    /// Area in m², without regard to other regions.
    pub(crate) fn area(&self) -> f64 {
        self.area
    }

    /// Bounding rectangle.
    pub(crate) fn bounds(&self) -> Bounds {
        self.bounds
    }

    /// A uniformly distributed point from two independent numbers that are uniform in `[0, 1)`.
    ///
    /// By rounding it may lie outside by about 1e-16 of the region's coordinates.
    ///
    /// # Method
    ///
    /// Disks by radius `r√u₁` and angle `2πu₂`. Polygons by a triangle chosen in proportion to its area with `u₁`, whose
    /// remainder is used again, and the square-root map within it (Osada et al. 2002, <https://doi.org/10.1145/571647.571648>,
    /// from memory).
    pub(crate) fn point(&self, u1: f64, u2: f64) -> Point {
        let Bounds { low, high } = self.bounds;
        match &self.figure {
            Figure::Disk { centre, radius } => {
                let (sin, cos) = sin_cos_turns(u2);
                let distance = radius * u1.sqrt();
                (centre.0 + distance * cos, centre.1 + distance * sin)
            }
            Figure::Rectangle => (low.0 + (high.0 - low.0) * u1, low.1 + (high.1 - low.1) * u2),
            Figure::Polygon {
                triangles,
                cumulative,
                ..
            } => {
                let wanted = u1 * self.area;
                let index = cumulative.partition_point(|&sum| sum <= wanted);
                // Rounding may carry `wanted` to the end of the last triangle.
                let index = if index < triangles.len() {
                    index
                } else {
                    triangles.len() - 1
                };
                let before = if index > 0 {
                    cumulative[index - 1]
                } else {
                    0.0
                };
                let [a, b, c] = triangles[index];
                let root = ((wanted - before) / (cumulative[index] - before)).sqrt();
                let (to_b, to_c) = (root * (1.0 - u2), root * u2);
                let at = |a: f64, b: f64, c: f64| a + (b - a) * to_b + (c - a) * to_c;
                (at(a.0, b.0, c.0), at(a.1, b.1, c.1))
            }
        }
    }

    /// Corners counter-clockwise; none for a disk.
    pub(crate) fn corners(&self) -> Vec<Point> {
        let Bounds { low, high } = self.bounds;
        match &self.figure {
            Figure::Disk { .. } => Vec::new(),
            Figure::Rectangle => vec![low, (high.0, low.1), high, (low.0, high.1)],
            Figure::Polygon { outline, .. } => outline.corners().collect(),
        }
    }

    /// Length of the border in metres.
    pub(crate) fn perimeter(&self) -> f64 {
        match self.figure {
            Figure::Disk { radius, .. } => 2.0 * std::f64::consts::PI * radius,
            _ => polygon::edges(&self.corners())
                .map(|(a, b)| polygon::distance(a, b))
                .sum(),
        }
    }

    /// How deep within the region a point lies, in metres; zero outside and on the border.
    pub(crate) fn depth(&self, point: Point) -> f64 {
        if !self.contains(point.0, point.1) {
            return 0.0;
        }
        match self.figure {
            Figure::Disk { centre, radius } => radius - polygon::distance(centre, point),
            _ => polygon::distance(
                Outline::new(vec![self.corners()]).nearest_border(point),
                point,
            ),
        }
    }
}

#[cfg(test)]
mod tests {
    use rand::{RngExt, SeedableRng};
    use rand_xoshiro::Xoshiro256PlusPlus;

    use super::*;

    fn arrow() -> RegionShape {
        RegionShape::polygon(vec![(0.0, 0.0), (2.0, 0.0), (1.0, 0.5), (0.0, 2.0)]).unwrap()
    }

    #[test]
    fn areas_bounds_and_borders() {
        let disk = RegionShape::disk((1.0, 2.0), 0.5);
        assert_eq!(disk.area(), std::f64::consts::PI * 0.25);
        assert!(disk.contains(1.5, 2.0) && !disk.contains(1.5 + 1e-9, 2.0));
        assert_eq!(
            disk.bounds(),
            Bounds {
                low: (0.5, 1.5),
                high: (1.5, 2.5)
            }
        );
        let rectangle = RegionShape::rectangle((1.0, 2.0), (1.0, 0.5));
        assert_eq!((rectangle.area(), rectangle.perimeter()), (0.5, 3.0));
        assert!(
            rectangle.contains(0.5, 1.75)
                && rectangle.contains(1.5, 2.25)
                && !rectangle.contains(1.0, 2.3)
        );
        assert!((rectangle.depth((1.0, 2.1)) - 0.15).abs() < 1e-15);
        // Triangles (0,0) (2,0) (1,½) and (0,0) (1,½) (0,2): ½ + 1.
        assert!((arrow().area() - 1.5).abs() < 1e-15);
        assert!(
            arrow().contains(1.0, 0.4) && !arrow().contains(1.0, 0.6) && arrow().contains(0.3, 1.2)
        );
        let clockwise =
            RegionShape::polygon(vec![(0.0, 0.0), (0.0, 2.0), (1.0, 0.5), (2.0, 0.0)]).unwrap();
        assert_eq!(clockwise, arrow());
    }

    #[test]
    fn a_shape_holds_nothing_that_is_not_a_number() {
        for shape in [
            RegionShape::disk((0.0, 0.0), 1.0),
            RegionShape::rectangle((0.0, 0.0), (1.0, 1.0)),
            arrow(),
        ] {
            assert!(!shape.contains(f64::NAN, 0.0) && !shape.contains(0.1, f64::NAN));
        }
        assert_eq!(RegionShape::polygon(Vec::new()), None);
        assert_eq!(
            RegionShape::polygon(vec![(0.0, 0.0), (1.0, 1.0), (2.0, 2.0)]),
            None
        );
    }

    #[test]
    fn points_are_uniform() {
        // Counts in the cells of a grid against the exact shares of the cells, by χ² with a limit at p = 7e-6.
        for (shape, seed) in [
            (RegionShape::disk((0.5, -1.0), 1.0), 1),
            (RegionShape::rectangle((0.5, -1.0), (1.0, 3.0)), 2),
            (arrow(), 3),
        ] {
            let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
            let loops = vec![match shape.as_disk() {
                // A polygon so fine that its area is low by 2e-7 of the disk's.
                Some((centre, radius)) => (0..4096)
                    .map(|i| crate::math::angle::sin_cos_parts(i, 4096))
                    .map(|(sin, cos)| (centre.0 + radius * cos, centre.1 + radius * sin))
                    .collect(),
                None => shape.corners(),
            }];
            let cells = super::super::wall_plane::tests::flat_wall(loops).cells(8, 8);
            let mut counts = [0_u32; 64];
            let draws = 200_000;
            for _ in 0..draws {
                let (u, v) = shape.point(rng.random(), rng.random());
                let slack = 1e-12;
                assert!(
                    shape.contains(u + slack, v + slack)
                        || shape.contains(u - slack, v + slack)
                        || shape.contains(u, v - slack)
                );
                let cell = |edges: &[f64], x: f64| edges[1..8].partition_point(|edge| *edge <= x);
                counts[cell(&cells.v_edges, v) * 8 + cell(&cells.u_edges, u)] += 1;
            }
            let (mut chi_square, mut kinds) = (0.0, 0.0);
            for (area, count) in cells.areas.iter().zip(counts) {
                let expected = area / shape.area() * f64::from(draws);
                if expected < 5.0 {
                    assert!(f64::from(count) <= 25.0);
                    continue;
                }
                chi_square +=
                    (f64::from(count) - expected) * (f64::from(count) - expected) / expected;
                kinds += 1.0;
            }
            // Wilson and Hilferty's cube root, from memory: nearly normal with these mean and variance; 4.3 is p = 7e-6, one-sided.
            let degrees: f64 = kinds - 1.0;
            let spread = 2.0 / (9.0 * degrees);
            let limit = 1.0 - spread + 4.3 * spread.sqrt();
            assert!(
                chi_square < degrees * limit * limit * limit,
                "χ² = {chi_square} for {degrees}"
            );
        }
    }

    #[test]
    fn the_ends_of_the_uniforms_stay_inside() {
        let last = 1.0 - f64::EPSILON / 2.0;
        for shape in [
            RegionShape::disk((0.0, 0.0), 1.0),
            RegionShape::rectangle((0.0, 0.0), (1.0, 1.0)),
            arrow(),
        ] {
            for (u1, u2) in [(0.0, 0.0), (last, 0.0), (0.0, last), (last, last)] {
                let (u, v) = shape.point(u1, u2);
                let Bounds { low, high } = shape.bounds();
                assert!(
                    low.0 - 1e-15 <= u
                        && u <= high.0 + 1e-15
                        && low.1 - 1e-15 <= v
                        && v <= high.1 + 1e-15
                );
            }
        }
    }
}
