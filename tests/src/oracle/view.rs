//! View factors between Lambertian surfaces (J. R. Howell, *A Catalog of Radiation Heat Transfer Configuration
//! Factors*, from memory; compared with direct integration of cos θ₁ cos θ₂ / (π r²) below).

use std::f64::consts::PI;

/// Gives the factor between two equal rectangles a × b that face each other at the distance `gap`.
pub fn facing_rectangles(a: f64, b: f64, gap: f64) -> f64 {
    let (x, y) = (a / gap, b / gap);
    let (p, q) = ((1.0 + x * x).sqrt(), (1.0 + y * y).sqrt());
    let log = (p * p * q * q / (1.0 + x * x + y * y)).ln();
    let sides = x * q * (x / q).atan() + y * p * (y / p).atan();
    2.0 / (PI * x * y) * (0.5 * log + sides - x * x.atan() - y * y.atan())
}

/// Gives the factor from a rectangle `width` × `common` to one of `height` × `common` that stands on its edge `common`.
pub fn standing_rectangle(width: f64, height: f64, common: f64) -> f64 {
    let (w, h) = ((width / common).powi(2), (height / common).powi(2));
    let root = (w + h).sqrt();
    let arcs = w.sqrt() * (1.0 / w.sqrt()).atan() + h.sqrt() * (1.0 / h.sqrt()).atan()
        - root * (1.0 / root).atan();
    let all = 1.0 + w + h;
    let logs = ((1.0 + w) * (1.0 + h) / all).ln()
        + w * (w * all / ((1.0 + w) * (w + h))).ln()
        + h * (h * all / ((1.0 + h) * (h + w))).ln();
    (arcs + 0.25 * logs) / (PI * w.sqrt())
}

/// Gives the factor from a disk of radius `r1` to a coaxial one of radius `r2` at the distance `gap`.
pub fn coaxial_disks(r1: f64, r2: f64, gap: f64) -> f64 {
    let (a, b) = (r1 / gap, r2 / gap);
    let s = 1.0 + (1.0 + b * b) / (a * a);
    0.5 * (s - (s * s - 4.0 * (r2 / r1).powi(2)).sqrt())
}

/// Gives the factor from the rectangle `from` to the rectangle `to` in parallel planes at the distance `gap`, by
/// quadrature; each is (centre x, centre y, width, height), in one frame for both planes.
pub fn offset_rectangles(from: [f64; 4], to: [f64; 4], gap: f64) -> f64 {
    // The kernel depends on differences only; the distribution of a difference of two uniform numbers is a trapezium,
    // integrated piece by piece between its corners.
    let rule = super::quadrature::Rule::new(40);
    let pieces = |i: usize| {
        let shift = to[i] - from[i];
        let (a, b) = (0.5 * from[i + 2], 0.5 * to[i + 2]);
        let corners = [
            shift - a - b,
            shift - (a - b).abs(),
            shift + (a - b).abs(),
            shift + a + b,
        ];
        let overlap = move |d: f64| (a + b - (d - shift).abs()).min(2.0 * a.min(b)).max(0.0);
        (corners, overlap)
    };
    let ((xs, overlap_x), (ys, overlap_y)) = (pieces(0), pieces(1));
    let kernel = |x: f64, y: f64| gap * gap / (PI * (x * x + y * y + gap * gap).powi(2));
    let mut sum = 0.0;
    for x in xs.windows(2) {
        for y in ys.windows(2) {
            sum += rule.integrate(x[0], x[1], |dx| {
                overlap_x(dx) * rule.integrate(y[0], y[1], |dy| overlap_y(dy) * kernel(dx, dy))
            });
        }
    }
    sum / (from[2] * from[3])
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::oracle::quadrature::Rule;
    use crate::{record, records};

    #[test]
    fn closed_forms_match_the_records() {
        for entry in records("vf.parallel_rect")
            .into_iter()
            .chain(records("published.vf.parallel"))
        {
            let factor = facing_rectangles(entry.number("a"), entry.number("b"), entry.number("c"));
            assert!(
                (factor - entry.value).abs() <= entry.tolerance,
                "{}: {factor}",
                entry.id
            );
        }
        for entry in records("vf.perp_rect") {
            let factor =
                standing_rectangle(entry.number("w"), entry.number("h"), entry.number("l"));
            assert!(
                (factor - entry.value).abs() <= entry.tolerance,
                "{}: {factor}",
                entry.id
            );
        }
        for entry in records("vf.coaxial_disks") {
            let factor = coaxial_disks(entry.number("r1"), entry.number("r2"), entry.number("h"));
            assert!(
                (factor - entry.value).abs() <= entry.tolerance,
                "{}: {factor}",
                entry.id
            );
        }
    }

    #[test]
    fn the_cube_closes_and_matches_what_was_printed() {
        let (opposite, adjacent) = (
            facing_rectangles(1.0, 1.0, 1.0),
            standing_rectangle(1.0, 1.0, 1.0),
        );
        assert!((opposite + 4.0 * adjacent - 1.0).abs() < 1e-14);
        for (id, factor) in [
            ("published.cube.opposite", opposite),
            ("published.cube.adjacent", adjacent),
        ] {
            assert!((factor - record(id).value).abs() <= record(id).tolerance);
        }
    }

    #[test]
    fn boxes_close_and_factors_are_reciprocal() {
        let (a, b, c) = (1.3, 0.7, 2.1);
        let sum = facing_rectangles(a, b, c)
            + 2.0 * standing_rectangle(a, c, b)
            + 2.0 * standing_rectangle(b, c, a);
        assert!((sum - 1.0).abs() < 1e-13, "{sum}");
        assert!((a * standing_rectangle(a, c, b) - c * standing_rectangle(c, a, b)).abs() < 1e-14);
        assert!(
            (coaxial_disks(0.3, 0.8, 1.1) * 0.09 - coaxial_disks(0.8, 0.3, 1.1) * 0.64).abs()
                < 1e-14
        );
    }

    #[test]
    fn offset_rectangles_reduce_to_facing_ones() {
        let factor = offset_rectangles([0.0, 0.0, 1.0, 2.0], [0.0, 0.0, 1.0, 2.0], 1.0);
        assert!(
            (factor - facing_rectangles(1.0, 2.0, 1.0)).abs() < 1e-12,
            "{factor}"
        );
        let there = offset_rectangles([0.1, 0.2, 0.5, 0.3], [-0.4, 0.6, 0.2, 0.9], 0.7);
        let back = offset_rectangles([-0.4, 0.6, 0.2, 0.9], [0.1, 0.2, 0.5, 0.3], 0.7);
        assert!((there * 0.15 - back * 0.18).abs() < 1e-12);
    }

    #[test]
    fn offset_rectangles_match_the_fourfold_integral() {
        let (from, to, gap) = ([0.1, 0.2, 0.5, 0.3], [-0.4, 0.6, 0.2, 0.9], 0.7);
        let rule = Rule::new(16);
        let kernel = |x: f64, y: f64| gap * gap / (PI * (x * x + y * y + gap * gap).powi(2));
        let seen = |x: f64, y: f64| {
            rule.square(|s, t| kernel(to[0] + (s - 0.5) * to[2] - x, to[1] + (t - 0.5) * to[3] - y))
        };
        let mean =
            rule.square(|s, t| seen(from[0] + (s - 0.5) * from[2], from[1] + (t - 0.5) * from[3]));
        assert!((mean * to[2] * to[3] - offset_rectangles(from, to, gap)).abs() < 1e-10);
    }
}
