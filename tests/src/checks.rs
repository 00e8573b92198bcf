//! Comparison of measured values with references, all of one topic in one list.

use std::collections::BTreeSet;

use crate::Record;
use crate::records::within;
use crate::special::student_two_sided;

/// Probability below which a deviation fails: |zeta| 4.9 at 63 degrees of freedom, about 140 comparisons a run.
pub const LIMIT: f64 = 7e-6;

/// A measured value, its standard uncertainty and degrees of freedom.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Measured {
    /// The value.
    pub value: f64,
    /// Its standard uncertainty, same unit.
    pub u: f64,
    /// Degrees of freedom of the uncertainty.
    pub degrees_of_freedom: f64,
}

impl Measured {
    /// Multiplies by a constant without uncertainty.
    #[must_use]
    pub fn scaled(self, factor: f64) -> Self {
        Self {
            value: self.value * factor,
            u: self.u * factor.abs(),
            ..self
        }
    }

    /// Adds an independent measurement (Welch–Satterthwaite degrees of freedom).
    #[must_use]
    pub fn plus(self, other: Self) -> Self {
        let (a, b) = (self.u * self.u, other.u * other.u);
        let degrees_of_freedom = (a + b) * (a + b)
            / (a * a / self.degrees_of_freedom + b * b / other.degrees_of_freedom);
        Self {
            value: self.value + other.value,
            u: (a + b).sqrt(),
            degrees_of_freedom,
        }
    }
}

/// The comparisons of one topic: collects, prints and fails together.
///
/// A list that is dropped without [`finish`](Self::finish) panics, so a test cannot forget to judge.
#[derive(Debug)]
#[must_use = "comparisons are judged by `finish`"]
pub struct Checks {
    topic: String,
    resolution: f64,
    compared: BTreeSet<String>,
    comparisons: usize,
    failures: Vec<String>,
    judged: bool,
}

impl Checks {
    /// Starts a list. Every standard uncertainty must be below `resolution` times the reference, or the comparison
    /// fails: an error bar that hides everything is no check.
    pub fn new(topic: &str, resolution: f64) -> Self {
        println(&format!(
            "== {topic} (fails at p < {LIMIT:.0e}, or u above {resolution} of the reference)"
        ));
        Self {
            topic: topic.to_owned(),
            resolution,
            compared: BTreeSet::new(),
            comparisons: 0,
            failures: Vec::new(),
            judged: false,
        }
    }

    /// Compares with a reference record, whose tolerance counts as its standard uncertainty.
    pub fn against(&mut self, record: &Record, measured: impl Into<Measured>) {
        self.compared.insert(record.id.clone());
        self.compare(&record.id, measured.into(), record.value, record.tolerance);
    }

    /// Compares with a reference record from which the measured quantity may differ by `relative` by its definition, as
    /// the mean over a cell does from the value at its centre. This counts as the standard uncertainty.
    pub fn near_record(&mut self, record: &Record, measured: impl Into<Measured>, relative: f64) {
        self.compared.insert(record.id.clone());
        let tolerance = record.tolerance.hypot(relative * record.value);
        self.compare(&record.id, measured.into(), record.value, tolerance);
    }

    /// Compares with a reference from a closed form, known exactly.
    pub fn exact(&mut self, id: &str, measured: impl Into<Measured>, reference: f64) {
        self.compare(id, measured.into(), reference, 0.0);
    }

    /// Compares with a reference known within `relative` of it, which counts as its standard uncertainty.
    pub fn near(&mut self, id: &str, measured: impl Into<Measured>, reference: f64, relative: f64) {
        self.compare(id, measured.into(), reference, relative * reference.abs());
    }

    /// Compares two independent measurements of one quantity (Welch–Satterthwaite degrees of freedom).
    pub fn equal(&mut self, id: &str, a: impl Into<Measured>, b: impl Into<Measured>) {
        let (a, b) = (a.into(), b.into());
        let difference = a.plus(b.scaled(-1.0));
        self.compare(
            id,
            Measured {
                value: a.value,
                ..difference
            },
            b.value,
            0.0,
        );
    }

    /// Compares a number that has no chance in it with its exact value, within `relative` of it (of 1 if it is 0).
    pub fn identical(&mut self, id: &str, value: f64, reference: f64, relative: f64) {
        let scale = if reference == 0.0 {
            1.0
        } else {
            reference.abs()
        };
        let deviation = (value - reference) / scale;
        let verdict = if deviation.abs() <= relative {
            None
        } else {
            Some("is not the exact value")
        };
        self.report(
            id,
            &format!("{value:.15e}  exact {reference:.15e}  relative {deviation:+.1e}"),
            verdict,
        );
    }

    /// Judges a finding that is no comparison of two numbers.
    pub fn holds(&mut self, id: &str, finding: &str, holds: bool) {
        self.report(
            id,
            finding,
            if holds { None } else { Some("does not hold") },
        );
    }

    /// Fails unless at least `at_least` different records below `prefix` were compared so far.
    pub fn assert_ran(&mut self, prefix: &str, at_least: usize) {
        let ran = self.compared.iter().filter(|id| within(id, prefix)).count();
        let verdict = if ran >= at_least {
            None
        } else {
            Some("too few records were compared")
        };
        self.report(
            prefix,
            &format!("{ran} of at least {at_least} records compared"),
            verdict,
        );
        self.comparisons -= 1; // A count is no comparison.
    }

    /// Judges the list.
    ///
    /// # Panics
    ///
    /// If a comparison failed, or none was made.
    #[track_caller]
    pub fn finish(mut self) {
        self.judged = true;
        assert!(self.comparisons > 0, "{}: nothing was compared", self.topic);
        let list = self.failures.join("\n");
        assert!(
            list.is_empty(),
            "{}: {} of {} failed:\n{list}",
            self.topic,
            self.failures.len(),
            self.comparisons
        );
    }

    fn compare(&mut self, id: &str, measured: Measured, reference: f64, tolerance: f64) {
        let Measured {
            value,
            u,
            degrees_of_freedom,
        } = measured;
        let zeta = (value - reference) / (u * u + tolerance * tolerance).sqrt();
        let p = student_two_sided(zeta, degrees_of_freedom);
        let relative = u / reference.abs();
        let verdict = if !(u > 0.0 && u.is_finite()) {
            Some("has no uncertainty to judge by")
        } else if relative.is_nan() || relative > self.resolution {
            Some("has too large an uncertainty to judge by")
        } else if p >= LIMIT {
            None
        } else {
            Some("deviates")
        };
        let shown = format!(
            "{value:.8e} ± {u:.1e}  reference {reference:.8e}  u/ref {relative:.1e}  zeta {zeta:+.2}  p {p:.2e}"
        );
        self.report(id, &shown, verdict);
    }

    fn report(&mut self, id: &str, shown: &str, verdict: Option<&str>) {
        self.comparisons += 1;
        let mark = if verdict.is_some() { "FAIL" } else { "ok  " };
        println(&format!("{mark} {id:<44} {shown}"));
        if let Some(verdict) = verdict {
            self.failures.push(format!("{id} {verdict}: {shown}"));
        }
    }
}

impl Drop for Checks {
    fn drop(&mut self) {
        assert!(
            self.judged || std::thread::panicking(),
            "{}: dropped without a verdict",
            self.topic
        );
    }
}

#[expect(
    clippy::print_stdout,
    reason = "the scores are the product of a statistical run"
)]
fn println(line: &str) {
    println!("{line}");
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::record;

    fn measured(value: f64, u: f64) -> Measured {
        Measured {
            value,
            u,
            degrees_of_freedom: 63.0,
        }
    }

    fn fails(check: impl FnOnce(&mut Checks)) -> bool {
        let mut checks = Checks::new("trial", 0.1);
        check(&mut checks);
        checks.judged = true;
        !checks.failures.is_empty()
    }

    #[test]
    fn the_limit_lies_at_zeta_4_9() {
        assert!(!fails(|checks| checks.exact(
            "inside",
            measured(1.048, 0.01),
            1.0
        )));
        assert!(fails(|checks| checks.exact(
            "above",
            measured(1.0495, 0.01),
            1.0
        )));
        assert!(fails(|checks| checks.exact(
            "below",
            measured(0.9505, 0.01),
            1.0
        )));
    }

    #[test]
    fn few_degrees_of_freedom_widen_the_limit() {
        let four = Measured {
            value: 1.1,
            u: 0.01,
            degrees_of_freedom: 4.0,
        };
        assert!(!fails(|checks| checks.exact("4", four, 1.0)));
        assert!(fails(|checks| checks.exact("63", measured(1.1, 0.01), 1.0)));
    }

    #[test]
    fn nothing_that_cannot_be_judged_passes() {
        assert!(fails(|checks| checks.exact(
            "u = 0",
            measured(1.0, 0.0),
            1.0
        )));
        assert!(fails(|checks| checks.exact(
            "u = inf",
            measured(1.0, f64::INFINITY),
            1.0
        )));
        assert!(fails(|checks| checks.exact(
            "u = NaN",
            measured(1.0, f64::NAN),
            1.0
        )));
        assert!(fails(|checks| checks.exact(
            "value = NaN",
            measured(f64::NAN, 0.01),
            1.0
        )));
        assert!(fails(|checks| checks.exact(
            "coarse",
            measured(1.0, 0.11),
            1.0
        )));
        assert!(fails(|checks| checks.identical("NaN", f64::NAN, 1.0, 1e-9)));
        let none = Measured {
            value: 1.0,
            u: 0.01,
            degrees_of_freedom: f64::NAN,
        };
        assert!(fails(|checks| checks.exact("no degrees", none, 1.0)));
    }

    #[test]
    fn the_tolerance_of_a_record_counts() {
        let entry = record("published.vf.parallel.10.10.1"); // 0.827 ± 0.0005
        assert!(!fails(
            |checks| checks.against(entry, measured(0.8285, 1e-4))
        ));
        assert!(fails(|checks| checks.against(entry, measured(0.8300, 1e-4))));
    }

    #[test]
    fn two_measurements_add_their_variances() {
        assert!(!fails(|checks| checks.equal(
            "a = b",
            measured(1.06, 0.01),
            measured(1.0, 0.01)
        )));
        assert!(fails(|checks| checks.equal(
            "a = b",
            measured(1.08, 0.01),
            measured(1.0, 0.01)
        )));
    }

    #[test]
    fn a_sum_has_between_the_fewest_and_all_degrees_of_freedom() {
        let sum = measured(1.0, 0.3).plus(measured(2.0, 0.4));
        assert_eq!((sum.value, sum.u), (3.0, 0.5));
        assert!((63.0..126.0).contains(&sum.degrees_of_freedom));
        let exact = measured(1.0, 0.3).plus(measured(2.0, 0.0));
        assert_eq!((exact.value, exact.u), (3.0, 0.3));
        assert!((exact.degrees_of_freedom - 63.0).abs() < 1e-9);
    }

    #[test]
    fn exact_numbers_are_held_to_their_rounding() {
        assert!(!fails(|checks| checks.identical("zero", 0.0, 0.0, 0.0)));
        assert!(fails(|checks| checks.identical("tiny", 1e-9, 0.0, 1e-12)));
        assert!(fails(|checks| checks.identical(
            "rounding",
            2.0 + 1e-9,
            2.0,
            1e-12
        )));
        assert!(fails(|checks| checks.holds("claim", "false", false)));
        assert!(!fails(|checks| checks.holds("claim", "true", true)));
    }

    #[test]
    fn records_are_counted_once_each() {
        let entry = record("vf.perp_rect.w1.h1.l1");
        let run = |checks: &mut Checks, at_least| {
            checks.against(entry, measured(entry.value, 1e-3));
            checks.against(entry, measured(entry.value, 1e-3));
            checks.assert_ran("vf.perp_rect", at_least);
        };
        assert!(!fails(|checks| run(checks, 1)));
        assert!(fails(|checks| run(checks, 2)));
    }

    #[test]
    #[should_panic(expected = "nothing was compared")]
    fn an_empty_list_fails() {
        Checks::new("empty", 0.1).finish();
    }

    #[test]
    #[should_panic(expected = "dropped without a verdict")]
    fn a_list_that_nobody_judges_fails() {
        let _forgotten = Checks::new("forgotten", 0.1);
    }

    #[test]
    #[should_panic(expected = "1 of 2 failed")]
    fn a_failure_is_told_at_the_end() {
        let mut checks = Checks::new("two", 0.1);
        checks.exact("good", measured(1.0, 0.01), 1.0);
        checks.exact("bad", measured(2.0, 0.01), 1.0);
        checks.finish();
    }

    #[test]
    fn scaling_keeps_the_relative_uncertainty() {
        let scaled = measured(2.0, 0.1).scaled(-3.0);
        assert_eq!((scaled.value, scaled.u), (-6.0, 0.3 * (0.1 * 3.0 / 0.3)));
    }
}
