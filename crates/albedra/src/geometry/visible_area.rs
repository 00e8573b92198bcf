//! How much of a region, and of its wall, is left to see once later regions cover it.

use super::curve::Curve;
use super::outline::Bounds;
use super::polygon::Point;
use super::region_shape::RegionShape;
use super::wall_plane::PlanarWall;

/// A visible share below this is rounding, and counts as none.
const LEAST_SHARE: f64 = 1e-12;

/// Visible areas in m² on one wall; they add up to the wall's area.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct VisibleAreas {
    /// The wall without its regions.
    pub(crate) wall: f64,
    /// Each region without the later ones. Exactly zero means that nothing of it can be seen.
    pub(crate) regions: Vec<f64>,
}

/// What each region of a wall and the wall itself leave to see, where later regions cover earlier ones.
///
/// The error is about 1e-15 of the whole region's (or wall's) area, so that a share above 1e-6 is right to 1e-9 of itself.
pub(crate) fn visible_areas(wall: &PlanarWall, regions: &[RegionShape]) -> VisibleAreas {
    let curves: Vec<Vec<Curve>> = regions.iter().map(RegionShape::curves).collect();
    let visible = |(i, region): (usize, &RegionShape)| {
        let later = i + 1..regions.len();
        let covered = later
            .clone()
            .any(|other| regions[other].bounds().meets(&region.bounds()));
        // The closed form is the better one where nothing lies above.
        if covered {
            uncovered_area(&curves[i], &curves[later])
        } else {
            region.area()
        }
    };
    VisibleAreas {
        wall: if regions.is_empty() {
            wall.area
        } else {
            uncovered_area(&wall.outline.curves(), &curves)
        },
        regions: regions.iter().enumerate().map(visible).collect(),
    }
}

/// Area in m² of a shape without the union of its covers, each given by its border; zero if it is below 1e-12 of the shape's.
///
/// # Method
///
/// The plane is cut at each v where a border ends, turns back or crosses another. Within such a slab borders do not cross, so that
/// their order along u tells which gaps are in the shape and in no cover; a gap's area is a trapezium plus circular segments.
pub(crate) fn uncovered_area(shape: &[Curve], covers: &[Vec<Curve>]) -> f64 {
    let bounds = bounds_of(shape);
    let mut shapes = vec![shape];
    shapes.extend(
        covers
            .iter()
            .map(Vec::as_slice)
            .filter(|cover| bounds_of(cover).meets(&bounds)),
    );
    let cuts = cuts(&shapes, bounds);

    let mut waiting: Vec<(usize, Curve, Bounds)> = Vec::new();
    for (number, curves) in shapes.iter().enumerate() {
        waiting.extend(curves.iter().map(|curve| (number, *curve, curve.bounds())));
    }
    waiting.sort_by(|a, b| b.2.low.1.total_cmp(&a.2.low.1));
    let mut active: Vec<(usize, Curve, Bounds)> = Vec::new();
    let (mut whole, mut seen) = (0.0, 0.0);
    for slab in cuts.windows(2) {
        let (v0, v1) = (slab[0], slab[1]);
        while waiting
            .last()
            .is_some_and(|(.., bounds)| bounds.low.1 <= v0)
        {
            active.extend(waiting.pop());
        }
        active.retain(|(.., bounds)| bounds.high.1 >= v1);
        let (in_shape, in_view) = slab_areas(&active, shapes.len(), v0, v1);
        whole += in_shape;
        seen += in_view;
    }
    if seen > LEAST_SHARE * whole {
        seen
    } else {
        0.0
    }
}

/// Areas between `v0` and `v1` within shape 0, and within it and in no other shape.
fn slab_areas(active: &[(usize, Curve, Bounds)], shapes: usize, v0: f64, v1: f64) -> (f64, f64) {
    let middle = v0 + (v1 - v0) * 0.5;
    let mut order: Vec<(f64, usize, Curve)> = active
        .iter()
        .map(|(n, curve, _)| (curve.at(middle), *n, *curve))
        .collect();
    order.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let mut inside = vec![false; shapes];
    let mut above = 0_usize;
    let (mut whole, mut seen) = (0.0, 0.0);
    for (i, (_, number, curve)) in order.iter().enumerate() {
        inside[*number] = !inside[*number];
        if *number > 0 {
            above = if inside[*number] {
                above + 1
            } else {
                above - 1
            };
        }
        let Some((.., next)) = order.get(i + 1) else {
            break;
        };
        if inside[0] {
            let widths = (next.at(v0) - curve.at(v0)) + (next.at(v1) - curve.at(v1));
            let area = 0.5 * widths * (v1 - v0) + (next.bulge(v0, v1) - curve.bulge(v0, v1));
            whole += area;
            if above == 0 {
                seen += area;
            }
        }
    }
    (whole, seen)
}

/// All v within the first shape's bounds at which a border ends, turns back or may cross that of another shape, in order.
fn cuts(shapes: &[&[Curve]], bounds: Bounds) -> Vec<f64> {
    let (low, high) = (bounds.low.1, bounds.high.1);
    let mut cuts = Vec::new();
    let mut cut = |v: f64| {
        if low <= v && v <= high {
            cuts.push(v);
        }
    };
    for (i, curves) in shapes.iter().enumerate() {
        for curve in *curves {
            cut(curve.bounds().low.1);
            cut(curve.bounds().high.1);
        }
        let own = bounds_of(curves);
        for others in &shapes[..i] {
            let meeting = bounds_of(others).meets(&own);
            for curve in curves.iter().filter(|_| meeting) {
                others
                    .iter()
                    .for_each(|other| curve.crossings(other, &mut cut));
            }
        }
    }
    cuts.sort_by(f64::total_cmp);
    cuts.dedup();
    cuts
}

fn bounds_of(curves: &[Curve]) -> Bounds {
    let ends = |curve: &Curve| -> [Point; 2] { [curve.bounds().low, curve.bounds().high] };
    Bounds::of(curves.iter().flat_map(ends))
}

#[cfg(test)]
mod tests {
    use std::f64::consts::PI;

    use proptest::prelude::*;
    use rand::{Rng, RngExt, SeedableRng};
    use rand_xoshiro::Xoshiro256PlusPlus;

    use super::*;
    use crate::geometry::wall_plane::tests::flat_wall;
    use crate::math::angle::{acos, sin_cos_turns};

    fn wall() -> PlanarWall {
        flat_wall(vec![vec![
            (-2.0, -1.5),
            (2.0, -1.5),
            (2.0, 1.5),
            (-2.0, 1.5),
        ]])
    }

    fn regions(shapes: &[RegionShape]) -> Vec<f64> {
        visible_areas(&wall(), shapes).regions
    }

    #[track_caller]
    fn assert_close(found: f64, expected: f64) {
        assert!(
            (found / expected - 1.0).abs() < 1e-12,
            "{found} for {expected}"
        );
    }

    /// Area common to two circles: the two sectors less the kite between centres and crossings (from memory, re-derived).
    fn lens(r: f64, s: f64, d: f64) -> f64 {
        let sector = |r: f64, s: f64| r * r * acos((d * d + r * r - s * s) / (2.0 * d * r));
        let kite = ((-d + r + s) * (d + r - s) * (d - r + s) * (d + r + s)).sqrt();
        sector(r, s) + sector(s, r) - 0.5 * kite
    }

    #[test]
    fn two_disks_share_a_lens() {
        for (r, s, d) in [
            (1.0, 1.0, 1.0),
            (1.0, 0.5, 0.75),
            (0.8, 0.3, 0.6),
            (0.5, 1.0, 0.9),
        ] {
            // Turned to several directions, so that the crossings are anywhere on the circles.
            for turn in 0..16 {
                let (sin, cos) = sin_cos_turns(f64::from(turn) / 16.0 + 0.013);
                let shapes = [
                    RegionShape::disk((0.1, 0.2), r),
                    RegionShape::disk((0.1 + d * cos, 0.2 + d * sin), s),
                ];
                let seen = regions(&shapes);
                assert_close(seen[0], PI * r * r - lens(r, s, d));
                assert_eq!(seen[1], shapes[1].area());
            }
        }
    }

    #[test]
    fn a_disk_cut_by_a_rectangle_loses_a_segment() {
        // The circle's part beyond a chord at distance h: r² acos(h/r) − h √(r² − h²) (sector less triangle).
        let (r, h) = (0.7_f64, 0.2_f64);
        let segment = r * r * acos(h / r) - h * (r * r - h * h).sqrt();
        let disk = RegionShape::disk((0.0, 0.0), r);
        for centre in [
            (h + 0.5, 0.0),
            (-h - 0.5, 0.0),
            (0.0, h + 0.5),
            (0.0, -h - 0.5),
        ] {
            let cover = RegionShape::rectangle(
                centre,
                if centre.0 == 0.0 {
                    (2.0, 1.0)
                } else {
                    (1.0, 2.0)
                },
            );
            assert_close(
                regions(&[disk.clone(), cover.clone()])[0],
                PI * r * r - segment,
            );
            assert_close(regions(&[cover, disk.clone()])[0], 2.0 - segment);
        }
    }

    #[test]
    fn covers_within_a_region_are_taken_off_once() {
        let base = RegionShape::rectangle((0.0, 0.0), (2.0, 1.0));
        let hole = RegionShape::disk((0.3, 0.1), 0.2);
        let same_hole_again = hole.clone();
        let seen = visible_areas(&wall(), &[base, hole, same_hole_again]);
        assert_close(seen.regions[0], 2.0 - PI * 0.04);
        assert_eq!(seen.regions[1], 0.0, "hidden");
        assert_close(seen.regions[2], PI * 0.04);
        assert_close(seen.wall, 12.0 - 2.0);
    }

    #[test]
    fn hidden_regions_are_exactly_zero() {
        let turned = |angle: f64, size: f64| {
            let (sin, cos) = sin_cos_turns(angle);
            let corner =
                |(u, v): Point| (0.1 + size * (u * cos - v * sin), size * (u * sin + v * cos));
            RegionShape::polygon(
                [(-1.0, -1.0), (1.0, -1.0), (1.0, 1.0), (-1.0, 1.0)]
                    .map(corner)
                    .to_vec(),
            )
            .unwrap()
        };
        assert_eq!(regions(&[turned(0.03, 0.5), turned(0.03, 0.5)])[0], 0.0);
        // A quarter turn gives the same square up to rounding.
        assert_eq!(regions(&[turned(0.03, 0.5), turned(0.28, 0.5)])[0], 0.0);
        assert_eq!(
            regions(&[
                RegionShape::disk((0.0, 0.0), 0.3),
                RegionShape::disk((0.1, 0.0), 0.4)
            ])[0],
            0.0
        );
        // Two halves hide a disk, two halves with a slit do not.
        let half = |u: f64| RegionShape::rectangle((u, 0.0), (1.0, 2.0));
        assert_eq!(
            regions(&[RegionShape::disk((0.0, 0.0), 0.5), half(-0.5), half(0.5)])[0],
            0.0
        );
        let slit = regions(&[
            RegionShape::disk((0.0, 0.0), 0.5),
            half(-0.5),
            half(0.5 + 1e-4),
        ])[0];
        assert!((slit / 1e-4 - 1.0).abs() < 1e-7, "{slit}");
        // A wall that is all covered.
        assert_eq!(
            visible_areas(&wall(), &[RegionShape::rectangle((0.0, 0.0), (4.0, 3.0))]).wall,
            0.0
        );
    }

    #[test]
    fn thin_remains_keep_their_precision() {
        // A ring that is 1e-5 of the radius wide, against its closed form.
        let (r, s) = (0.5, 0.5 - 5e-6);
        let ring = regions(&[
            RegionShape::disk((0.3, 0.2), r),
            RegionShape::disk((0.3, 0.2), s),
        ])[0];
        assert!(
            (ring / (PI * (r - s) * (r + s)) - 1.0).abs() < 1e-9,
            "{ring}"
        );
        let sliver = regions(&[
            RegionShape::rectangle((0.0, 0.0), (1.0, 1.0)),
            RegionShape::rectangle((1.0 / 1_048_576.0, 0.0), (1.0, 1.0)),
        ])[0];
        assert_eq!(sliver, 1.0 / 1_048_576.0);
    }

    #[test]
    fn holes_of_the_wall_are_not_part_of_it() {
        let ring = flat_wall(vec![
            vec![(-2.0, -1.0), (2.0, -1.0), (2.0, 1.0), (-2.0, 1.0)],
            vec![(0.5, -0.5), (0.5, 0.5), (1.5, 0.5), (1.5, -0.5)],
        ]);
        let seen = visible_areas(
            &ring,
            &[
                RegionShape::disk((-1.0, 0.0), 1.0),
                RegionShape::rectangle((0.25, 0.0), (0.5, 2.0)),
            ],
        );
        assert_close(seen.wall, 7.0 - PI - 1.0);
        assert_eq!(
            visible_areas(&ring, &[]),
            VisibleAreas {
                wall: 7.0,
                regions: Vec::new()
            }
        );
    }

    fn random_shape(rng: &mut impl Rng) -> RegionShape {
        let mut draw = |low: f64, high: f64| low + (high - low) * rng.random::<f64>();
        let centre = (draw(-1.2, 1.2), draw(-0.7, 0.7));
        let radius = draw(0.1, 0.7);
        match draw(0.0, 3.0) {
            kind if kind < 1.0 => RegionShape::disk(centre, radius),
            kind if kind < 2.0 => RegionShape::rectangle(centre, (radius, draw(0.1, 1.4))),
            _ => {
                let at = |i: i32| {
                    let (sin, cos) = sin_cos_turns(f64::from(i) / 9.0 + radius);
                    let reach = if i % 2 == 0 { radius } else { 0.4 * radius };
                    (centre.0 + reach * cos, centre.1 + reach * sin)
                };
                RegionShape::polygon((0..9).map(at).collect()).unwrap()
            }
        }
    }

    #[test]
    fn random_layouts_agree_with_random_points() {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(20_260_101);
        for _ in 0..30 {
            let shapes: Vec<RegionShape> = (0..8).map(|_| random_shape(&mut rng)).collect();
            let seen = visible_areas(&wall(), &shapes);
            let mut counts = [0_u32; 9];
            let draws = 100_000;
            for _ in 0..draws {
                let (u, v) = (
                    4.0 * rng.random::<f64>() - 2.0,
                    3.0 * rng.random::<f64>() - 1.5,
                );
                counts[shapes
                    .iter()
                    .rposition(|shape| shape.contains(u, v))
                    .unwrap_or(8)] += 1;
            }
            for (area, count) in seen.regions.iter().chain([&seen.wall]).zip(counts) {
                let share = area / 12.0;
                let spread = (share * (1.0 - share) / f64::from(draws)).sqrt();
                // Binomial, so nearly normal; 270 comparisons at 4.9 standard deviations.
                let away = f64::from(count) / f64::from(draws) - share;
                assert!(
                    away.abs() <= 4.9 * spread + 5.0 / f64::from(draws),
                    "{count} for {share}"
                );
            }
        }
    }

    proptest! {
        #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]

        #[test]
        fn rows_add_up_to_the_wall(seed: u64, count in 1_usize..12) {
            let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
            let shapes: Vec<RegionShape> = (0..count).map(|_| random_shape(&mut rng)).collect();
            let seen = visible_areas(&wall(), &shapes);
            let sum: f64 = seen.regions.iter().sum::<f64>() + seen.wall;
            prop_assert!((sum / 12.0 - 1.0).abs() < 1e-13, "{sum}");
            for (area, shape) in seen.regions.iter().zip(&shapes) {
                prop_assert!(*area >= 0.0 && *area <= shape.area() * (1.0 + 1e-14));
            }
        }

        /// Corners on a coarse grid, so that borders often coincide, touch and cross in corners.
        #[test]
        fn coinciding_borders_do_no_harm(
            boxes in prop::collection::vec((-4_i32..4, -3_i32..3, 1_i32..4, 1_i32..4, any::<bool>()), 1..10),
        ) {
            let shape = |&(u, v, width, height, round): &(i32, i32, i32, i32, bool)| {
                let [u, v, width, height] = [u, v, width, height].map(|i| f64::from(i) * 0.25);
                if round {
                    RegionShape::disk((u, v), width * 0.5)
                } else {
                    RegionShape::rectangle((u, v), (width, height))
                }
            };
            let shapes: Vec<RegionShape> = boxes.iter().map(shape).collect();
            let seen = visible_areas(&wall(), &shapes);
            let sum: f64 = seen.regions.iter().sum::<f64>() + seen.wall;
            prop_assert!((sum / 12.0 - 1.0).abs() < 1e-13, "{sum}");
        }
    }
}
