//! Mirror-like ducts and boxes with a constant reflectance, by unfolding: a mirror wall continues the space behind it.

use std::f64::consts::PI;

use super::quadrature::Rule;

/// Gives the mean of Rⁿ where n is the number of walls crossed by a segment of `q` wall distances whose start is
/// uniform: n = ⌊q⌋ or one more, so R^⌊q⌋ [1 − (1−R)(q−⌊q⌋)].
pub fn kept(reflectance: f64, q: f64) -> f64 {
    let whole = q.floor();
    reflectance.powf(whole) * (1.0 - (1.0 - reflectance) * (q - whole))
}

/// Gives the transmittance of a duct of section a × b and the given length for parallel light that fills its entrance.
///
/// `theta` is the angle from the axis and `phi` that of the lateral part from the a axis, in radians.
pub fn duct_parallel([a, b]: [f64; 2], length: f64, theta: f64, phi: f64, reflectance: f64) -> f64 {
    let lateral = length * theta.tan();
    kept(reflectance, lateral * phi.cos().abs() / a)
        * kept(reflectance, lateral * phi.sin().abs() / b)
}

/// Gives the transmittance of a duct of section a × b for Lambertian light that fills its entrance.
///
/// # Method
///
/// With x = tan θ cos φ and y = tan θ sin φ the Lambertian law is dx dy / [π (1 + x² + y²)²], and the duct keeps
/// g(Lx/a) g(Ly/b). Both factors are linear between whole numbers, where Gauss quadrature is used cell by cell up to
/// a remainder of 10⁻¹².
///
/// # Panics
///
/// If the reflectance is outside [0, 0.999), where the sum would take too long.
pub fn duct_lambertian([a, b]: [f64; 2], length: f64, reflectance: f64) -> f64 {
    assert!(
        (0.0..0.999).contains(&reflectance),
        "reflectance must lie in [0, 0.999), got {reflectance}"
    );
    let rule = Rule::new(12);
    let (step_x, step_y) = (a / length, b / length);
    let mut sum = 0.0;
    let mut weight_x = 1.0;
    let mut i = 0.0;
    while weight_x > 1e-12 {
        let mut weight = weight_x;
        let mut j = 0.0;
        while weight > 1e-12 {
            sum += weight
                * step_x
                * step_y
                * rule.square(|s, t| {
                    let (x, y) = (step_x * (i + s), step_y * (j + t));
                    let density = 1.0 / (PI * (1.0 + x * x + y * y).powi(2));
                    density * (1.0 - (1.0 - reflectance) * s) * (1.0 - (1.0 - reflectance) * t)
                });
            weight *= reflectance;
            j += 1.0;
        }
        weight_x *= reflectance;
        i += 1.0;
    }
    4.0 * sum
}

/// Gives the energy left at the path `s` in a mirror box after a uniform isotropic fill of unit energy:
/// the mean of Π g(s |dᵢ| / Lᵢ) over directions, by the midpoint rule with `n`² nodes in one octant.
///
/// Nodes are even in the polar angle and in the azimuth. The error falls about as 1/n² and, for n = 1000, is below
/// 10⁻⁷ where s is at most 20 edges.
pub fn box_fill(size: [f64; 3], reflectance: f64, s: f64, n: u32) -> f64 {
    let step = 0.5 * PI / f64::from(n);
    let mut sum = 0.0;
    for i in 0..n {
        let (sine, z) = ((f64::from(i) + 0.5) * step).sin_cos();
        let along_z = sine * kept(reflectance, s * z / size[2]);
        for j in 0..n {
            let (y, x) = ((f64::from(j) + 0.5) * step).sin_cos();
            sum += along_z
                * kept(reflectance, s * sine * x / size[0])
                * kept(reflectance, s * sine * y / size[1]);
        }
    }
    sum * step * 2.0 / PI * step
}

/// Gives the same as [`box_fill`] exactly where `s` is at most the shortest edge.
///
/// There every factor is 1 − (1−R) s |dᵢ| / Lᵢ, and over the sphere ⟨|dᵢ|⟩ = 1/2, ⟨|dᵢ dⱼ|⟩ = 2/(3π),
/// ⟨|d₁ d₂ d₃|⟩ = 1/(4π).
pub fn box_fill_early([a, b, c]: [f64; 3], reflectance: f64, s: f64) -> f64 {
    let q = (1.0 - reflectance) * s;
    let singles = 1.0 / a + 1.0 / b + 1.0 / c;
    let pairs = 1.0 / (a * b) + 1.0 / (b * c) + 1.0 / (c * a);
    1.0 - 0.5 * q * singles + 2.0 / (3.0 * PI) * q * q * pairs - q * q * q / (4.0 * PI * a * b * c)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::oracle::view::facing_rectangles;
    use crate::records;

    #[test]
    fn whole_numbers_of_walls_join_without_a_step() {
        for n in 1..6 {
            let n = f64::from(n);
            assert!((kept(0.8, n - 1e-12) - kept(0.8, n)).abs() < 1e-11);
            assert!((kept(0.8, n) - 0.8_f64.powf(n)).abs() < 1e-15);
        }
        assert_eq!((kept(0.8, 0.0), kept(1.0, 3.7)), (1.0, 1.0));
        assert!((kept(0.0, 0.3) - 0.7).abs() < 1e-15 && kept(0.0, 1.3) == 0.0);
    }

    #[test]
    fn parallel_light_in_ducts_matches_the_records() {
        for entry in records("mirror_duct") {
            let section = [entry.number("a"), entry.number("b")];
            let (theta, phi) = (
                entry.number("theta_deg").to_radians(),
                entry.number("phi_deg").to_radians(),
            );
            let value = duct_parallel(section, entry.number("L"), theta, phi, entry.number("R"));
            assert!(
                (value - entry.value).abs() <= 1e-10,
                "{}: {value}",
                entry.id
            );
        }
    }

    #[test]
    fn a_black_duct_passes_the_view_factor_of_its_ends() {
        for (section, length) in [([1.0, 1.0], 1.0), ([2.0, 1.0], 3.0)] {
            let value = duct_lambertian(section, length, 0.0);
            let factor = facing_rectangles(section[0], section[1], length);
            assert!((value - factor).abs() < 1e-12, "{value} {factor}");
        }
    }

    #[test]
    fn lambertian_light_is_the_mean_of_parallel_light() {
        // Midpoint rule in sin² θ and φ; parallel light averaged over the cosine law.
        let (section, length, reflectance, n) = ([1.0, 1.5], 3.0, 0.9, 1200);
        let mut sum = 0.0;
        for i in 0..n {
            let theta = ((f64::from(i) + 0.5) / f64::from(n)).sqrt().asin();
            for j in 0..n {
                let phi = 0.5 * PI * (f64::from(j) + 0.5) / f64::from(n);
                sum += duct_parallel(section, length, theta, phi, reflectance);
            }
        }
        let mean = sum / f64::from(n * n);
        assert!(
            (duct_lambertian(section, length, reflectance) - mean).abs() < 1e-5,
            "{mean}"
        );
    }

    #[test]
    fn boxes_match_the_records() {
        for entry in records("mirror_box.fill") {
            let size = entry.numbers("box");
            let value = box_fill(
                [size[0], size[1], size[2]],
                entry.number("R"),
                entry.number("s"),
                1000,
            );
            // The records at the path 1 are off by up to 4·10⁻⁷ (see the polynomial below), within their tolerance.
            let deviation = (value - entry.value).abs();
            assert!(deviation <= entry.tolerance, "{}: {value}", entry.id);
        }
    }

    #[test]
    fn early_boxes_are_polynomials() {
        for s in [0.1, 0.5, 1.0] {
            let (exact, value) = (
                box_fill_early([1.0, 1.2, 2.0], 0.7, s),
                box_fill([1.0, 1.2, 2.0], 0.7, s, 1000),
            );
            assert!((exact - value).abs() < 3e-7, "{s}: {exact} {value}");
        }
        let slope = (1.0 - box_fill_early([1.0, 1.2, 2.0], 0.7, 1e-6)) / 1e-6;
        let (volume, area) = crate::oracle::chord::volume_and_area([1.0, 1.2, 2.0]);
        assert!((slope - 0.3 * area / (4.0 * volume)).abs() < 1e-6);
    }
}
