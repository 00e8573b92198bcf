//! Chord lengths of convex bodies under uniform isotropic lines (Lambertian light from a uniformly lit wall).

use std::f64::consts::PI;

use super::quadrature::Rule;

/// Gives the mean chord 4V/S of any closed body (Cauchy; C. W. Kosten, Acustica 10 (1960) 245, from memory).
pub fn mean(volume: f64, area: f64) -> f64 {
    4.0 * volume / area
}

/// Gives ⟨l⁴⟩ = 12 V²/(π S) of a convex body (L. A. Santaló 1976, from memory).
pub fn fourth_moment(volume: f64, area: f64) -> f64 {
    12.0 * volume * volume / (PI * area)
}

/// Gives the volume and wall area of a box.
pub fn volume_and_area([a, b, c]: [f64; 3]) -> (f64, f64) {
    (a * b * c, 2.0 * (a * b + b * c + c * a))
}

/// Gives ⟨lⁿ⟩ of a box for n = 2, 3 or 4.
///
/// # Method
///
/// ⟨lⁿ⟩ = n(n−1)/(πS) ∬ r^(n−4) dV dV′, which for a box is 8n(n−1)/(πS) ∫∫∫ (a−x)(b−y)(c−z) r^(n−4). The singularity
/// at r = 0 goes away in three pyramids with the tip there: (x, y, z) = (t, t p, t q) and so on.
///
/// # Panics
///
/// If `n` is none of these.
pub fn box_moment(size: [f64; 3], n: i32) -> f64 {
    assert!(
        (2..=4).contains(&n),
        "the moment must be 2, 3 or 4, got {n}"
    );
    let (_, area) = volume_and_area(size);
    let rule = Rule::new(24);
    let mut sum = 0.0;
    for axis in 0..3 {
        let [a, b, c] = [size[axis], size[(axis + 1) % 3], size[(axis + 2) % 3]];
        // Flat boxes peak near the tip of the base: p = b·s^3 and q likewise put nodes there.
        sum += rule.square(|s, t| {
            let (u, v) = (s * s * s, t * t * t);
            let jacobian = 9.0 * s * s * t * t;
            let (p, q) = (b * u / a, c * v / a);
            let r = (1.0 + p * p + q * q).sqrt();
            // x from 0 to a: dx dy dz = x² (b/a)(c/a) du dv dx, and r^(n−4) x^(n−4).
            let along = rule.integrate(0.0, a, |x| {
                (a - x) * (b - x * p) * (c - x * q) * x.powi(n - 2)
            });
            jacobian * (b / a) * (c / a) * r.powi(n - 4) * along
        });
    }
    8.0 * f64::from(n * (n - 1)) / (PI * area) * sum
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::records;

    #[test]
    fn boxes_match_the_records() {
        for entry in records("chord.box") {
            let size = [entry.number("a"), entry.number("b"), entry.number("c")];
            let (volume, area) = volume_and_area(size);
            let (first, second) = (mean(volume, area), box_moment(size, 2));
            let value = match entry.id.rsplit('.').next() {
                Some("mean") => first,
                Some("l2") => second,
                Some("l4") => fourth_moment(volume, area),
                Some("gamma2") => second / (first * first) - 1.0,
                Some("fill_first_flight") => second / (2.0 * first),
                other => panic!("{other:?}"),
            };
            assert!(
                (value - entry.value).abs() <= 1e-9 * value + entry.tolerance,
                "{}: {value}",
                entry.id
            );
        }
    }

    #[test]
    fn the_pyramids_give_the_fourth_moment_too() {
        for size in [[1.0, 1.0, 1.0], [1.0, 2.0, 5.0], [1.0, 10.0, 10.0]] {
            let (volume, area) = volume_and_area(size);
            assert!(
                (box_moment(size, 4) / fourth_moment(volume, area) - 1.0).abs() < 1e-10,
                "{size:?}"
            );
        }
    }

    #[test]
    fn the_third_moment_matches_the_mean_inverse_distance_in_a_cube() {
        // ∬ 1/r over the unit cube twice = 1.8823126443896602 (from memory: the mean inverse distance, or twice the
        // self-energy of a uniformly charged cube).
        assert!((box_moment([1.0; 3], 3) - 6.0 / (PI * 6.0) * 1.882_312_644_389_66).abs() < 1e-9);
    }

    #[test]
    fn moments_are_ordered_as_moments_must_be() {
        for size in [[1.0, 1.0, 1.0], [0.2, 1.0, 3.0]] {
            let (volume, area) = volume_and_area(size);
            let m = [
                mean(volume, area),
                box_moment(size, 2),
                box_moment(size, 3),
                fourth_moment(volume, area),
            ];
            assert!(
                m[1] > m[0] * m[0] && m[2] * m[0] > m[1] * m[1] && m[3] * m[1] > m[2] * m[2],
                "{m:?}"
            );
        }
    }

    #[test]
    fn platonic_solids_match_the_records() {
        for (prefix, volume, area) in [
            (
                "chord.regular_tetrahedron",
                1.0 / (6.0 * 2_f64.sqrt()),
                3_f64.sqrt(),
            ),
            (
                "chord.regular_octahedron",
                2_f64.sqrt() / 3.0,
                2.0 * 3_f64.sqrt(),
            ),
        ] {
            for entry in records(prefix) {
                let first = entry.id.ends_with("mean");
                let value = if first {
                    mean(volume, area)
                } else {
                    fourth_moment(volume, area)
                };
                assert!(
                    (value - entry.value).abs() <= 1e-12,
                    "{}: {value}",
                    entry.id
                );
            }
        }
    }
}
