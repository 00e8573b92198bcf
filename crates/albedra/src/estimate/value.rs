//! A number with its uncertainty.

use serde::{Deserialize, Serialize};

use super::student;

/// A value with its standard uncertainty, Type A, of the simulation alone.
///
/// Printed in the concise notation of JCGM 100:2008 (GUM), 7.2.2, with two digits in the bracket.
///
/// # Examples
///
/// ```
/// use albedra::Estimate;
///
/// let estimate = Estimate::new(0.274_131, 0.000_88, 63.0);
/// assert_eq!(estimate.to_string(), "0.274 13(88)");
/// assert_eq!(estimate.with_unit("W").to_string(), "0.274 13(88) W");
/// let (low, high) = estimate.coverage_interval(0.95);
/// assert!(low < 0.2724 && 0.2758 < high);
/// assert!(estimate.p_value(0.2750, 0.0) > 0.05);
/// ```
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Estimate {
    /// The value.
    pub value: f64,
    /// Standard uncertainty, in the unit of the value; infinite where the photons do not suffice for one.
    pub u: f64,
    /// Degrees of freedom of `u`: the number of groups less one; infinite for a `u` that is known exactly.
    pub degrees_of_freedom: f64,
    /// Upper 95 % limit, in the unit of the value, for a quantity that hardly any photon reached; printed instead of value
    /// and `u`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub upper: Option<f64>,
}

impl Estimate {
    /// Takes a value, its standard uncertainty (same unit) and the degrees of freedom of that.
    pub fn new(value: f64, u: f64, degrees_of_freedom: f64) -> Self {
        Self {
            value,
            u,
            degrees_of_freedom,
            upper: None,
        }
    }

    /// Takes a value that is known exactly.
    pub fn exact(value: f64) -> Self {
        Self::new(value, 0.0, f64::INFINITY)
    }

    /// Sets or removes the upper 95 % limit.
    #[must_use]
    pub fn with_upper(self, upper: Option<f64>) -> Self {
        Self { upper, ..self }
    }

    /// Multiplies by a number that is known exactly, as for another unit; a limit is kept by a factor that is not negative.
    #[must_use]
    pub fn scaled(self, factor: f64) -> Self {
        let upper = self
            .upper
            .filter(|_| factor >= 0.0)
            .map(|upper| upper * factor);
        Self {
            value: self.value * factor,
            u: self.u * factor.abs(),
            upper,
            ..self
        }
    }

    /// Interval `(low, high)` that covers the true value with a chance of `p` from 0 to 1, by Student's t.
    ///
    /// Infinite on both sides if there is no uncertainty; NaN if the value or `p` is of no use.
    pub fn coverage_interval(&self, p: f64) -> (f64, f64) {
        let factor = student::coverage_factor(p, self.degrees_of_freedom);
        let half = match (self.u, factor) {
            (0.0, factor) if !factor.is_nan() => 0.0,
            (u, 0.0) if !u.is_nan() => 0.0,
            (u, factor) => u * factor,
        };
        (self.value - half, self.value + half)
    }

    /// Zeta score: deviation from a reference in units of the combined standard uncertainty.
    ///
    /// NaN if the estimate has no uncertainty (`u` infinite), as nothing can be said then. Without any uncertainty on
    /// either side it is 0 or infinite.
    pub fn zeta(&self, reference: f64, u_reference: f64) -> f64 {
        let deviation = self.value - reference;
        let combined = root_sum_of_squares(self.u, u_reference);
        if !combined.is_finite() {
            f64::NAN
        } else if deviation == 0.0 {
            0.0
        } else {
            deviation / combined
        }
    }

    /// Chance of a zeta score at least as far from 0, if the reference is right.
    ///
    /// Student's t with the estimate's degrees of freedom. If the reference has an uncertainty, which is taken as known
    /// well, they rise by the Welch–Satterthwaite formula (JCGM 100, G.4.1). NaN where the zeta score is.
    pub fn p_value(&self, reference: f64, u_reference: f64) -> f64 {
        let ratio = if u_reference == 0.0 {
            0.0
        } else {
            u_reference / self.u
        };
        let rise = 1.0 + ratio * ratio;
        let freedom = self.degrees_of_freedom * rise * rise;
        student::two_sided_p(self.zeta(reference, u_reference), freedom)
    }

    /// Relative standard uncertainty u / |value|; infinite for a value of 0 with an uncertainty.
    pub fn relative(&self) -> f64 {
        if self.u == 0.0 {
            0.0
        } else {
            self.u / self.value.abs()
        }
    }
}

/// √(a² + b²), also where a square would leave the range.
fn root_sum_of_squares(a: f64, b: f64) -> f64 {
    let (a, b) = (a.abs(), b.abs());
    let (large, small) = if a < b { (b, a) } else { (a, b) };
    let ratio = small / large;
    if large == 0.0 || large.is_infinite() {
        large + small
    } else {
        large * (1.0 + ratio * ratio).sqrt()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn intervals_follow_student() {
        let estimate = Estimate::new(10.0, 2.0, 9.0);
        let (low, high) = estimate.coverage_interval(0.99);
        // The factor is a published check, "stats.t_batch.b10", computed with scipy; see `student`.
        approx::assert_relative_eq!(
            low,
            10.0 - 2.0 * 3.249_835_541_592_126,
            max_relative = 1e-12
        );
        approx::assert_relative_eq!(
            high,
            10.0 + 2.0 * 3.249_835_541_592_126,
            max_relative = 1e-12
        );
        approx::assert_relative_eq!(estimate.p_value(low, 0.0), 0.01, max_relative = 1e-11);
        assert_eq!(estimate.coverage_interval(0.0), (10.0, 10.0));
        assert_eq!(
            estimate.coverage_interval(1.0),
            (f64::NEG_INFINITY, f64::INFINITY)
        );
        for p in [-0.1, 1.1, f64::NAN] {
            assert!(
                estimate.coverage_interval(p).0.is_nan()
                    && estimate.coverage_interval(p).1.is_nan()
            );
        }
    }

    #[test]
    fn unknown_uncertainty_decides_nothing() {
        let estimate = Estimate::new(10.0, f64::INFINITY, 63.0);
        assert_eq!(
            estimate.coverage_interval(0.95),
            (f64::NEG_INFINITY, f64::INFINITY)
        );
        assert!(estimate.zeta(10.0, 0.0).is_nan() && estimate.p_value(10.0, 0.0).is_nan());
        assert!(
            Estimate::new(10.0, f64::NAN, 63.0)
                .p_value(10.0, 0.0)
                .is_nan()
        );
        assert!(
            Estimate::new(f64::NAN, 1.0, 63.0)
                .p_value(10.0, 0.0)
                .is_nan()
        );
        assert!(Estimate::new(10.0, 1.0, 0.0).p_value(10.0, 0.0).is_nan());
    }

    #[test]
    fn exact_values() {
        let estimate = Estimate::exact(10.0);
        assert_eq!(estimate.coverage_interval(0.95), (10.0, 10.0));
        assert_eq!(
            (estimate.zeta(10.0, 0.0), estimate.p_value(10.0, 0.0)),
            (0.0, 1.0)
        );
        assert_eq!(
            (estimate.zeta(9.0, 0.0), estimate.p_value(9.0, 0.0)),
            (f64::INFINITY, 0.0)
        );
        assert_eq!((estimate.zeta(12.0, 1.0), estimate.relative()), (-2.0, 0.0));
    }

    #[test]
    fn a_known_reference_adds_its_uncertainty_and_freedom() {
        let estimate = Estimate::new(10.0, 3.0, 5.0);
        assert_eq!(estimate.zeta(5.0, 4.0), 1.0);
        // 5 (25/9)^2 = 38.58 degrees of freedom, against 5 without the reference's own u.
        let p = estimate.p_value(5.0, 4.0);
        approx::assert_relative_eq!(
            p,
            Estimate::new(10.0, 5.0, 3125.0 / 81.0).p_value(5.0, 0.0),
            max_relative = 1e-13
        );
        assert_eq!(estimate.p_value(5.0, 1e300), 1.0);
        approx::assert_relative_eq!(Estimate::new(2e-200, 1e-200, 63.0).zeta(0.0, 0.0), 2.0);
        approx::assert_relative_eq!(
            Estimate::new(2e200, 1e200, 63.0).zeta(0.0, 1e200),
            2.0_f64.sqrt()
        );
    }

    #[test]
    fn scaling_keeps_the_relative_uncertainty() {
        let estimate = Estimate::new(2.0, 0.5, 63.0).with_upper(Some(3.0));
        assert_eq!(
            estimate.scaled(2.0),
            Estimate::new(4.0, 1.0, 63.0).with_upper(Some(6.0))
        );
        assert_eq!(estimate.scaled(-2.0), Estimate::new(-4.0, 1.0, 63.0));
        assert_eq!(
            (estimate.relative(), estimate.scaled(-8.0).relative()),
            (0.25, 0.25)
        );
        assert_eq!(Estimate::new(0.0, 1.0, 63.0).relative(), f64::INFINITY);
    }

    #[test]
    fn text_form_keeps_every_bit() {
        for estimate in [
            Estimate::new(0.1, f64::INFINITY, 63.0),
            Estimate::new(0.1 + 0.2, 1e-17, 62.5).with_upper(Some(0.3)),
        ] {
            assert_eq!(
                toml::from_str::<Estimate>(&toml::to_string(&estimate).unwrap()),
                Ok(estimate)
            );
        }
    }
}
