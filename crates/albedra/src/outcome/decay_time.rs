//! Decay time from a window of the curve.

use super::Outcome;
use crate::estimate::{Estimate, Sums};
use crate::math::ln;

/// Time in which the energy falls to 1/e, fitted to a window of the decay curve.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct DecayTime {
    /// Decay time in s.
    pub estimate: Estimate,
    /// First and last edge of the window in s.
    pub window: (f64, f64),
    /// Decay time in s from the window's first half.
    pub first_half: Estimate,
    /// Decay time in s from the window's second half.
    pub second_half: Estimate,
    /// Whether the halves differ by more than three standard uncertainties and 1 %, or cannot be compared: then one decay
    /// time does not describe the curve in this window.
    pub not_one_exponential: bool,
}

/// A window that was chosen: its edges' indices, and weights from the full totals.
struct Window {
    first: usize,
    weights: Vec<f64>,
}

impl Outcome {
    /// Decay time from the edges within a window in s, by weighted least squares of ln E.
    ///
    /// Without a window: from where the energy has fallen to a tenth (if the grid goes on long enough after that) to where
    /// its relative uncertainty passes 5 %. The uncertainty is the simulation's, by the jackknife; points along one curve are
    /// correlated, and this takes account of it.
    ///
    /// Nothing, if there are fewer than five edges with energy in the window, or if the energy does not fall in it.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(20_000).seed(7).run()?;
    /// if let Some(time) = outcome.decay_time(None) {
    ///     let expected = outcome.facts().expected_decay_time;
    ///     assert!((time.estimate.value / expected - 1.0).abs() < 0.5);
    /// }
    /// assert!(outcome.decay_time(Some((1.0, 2.0))).is_none());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn decay_time(&self, window: Option<(f64, f64)>) -> Option<DecayTime> {
        let decay = self.decay();
        let good = |k: usize| decay.energy[k] > 0.0 && decay.u[k] < 0.05 * decay.energy[k];
        let last_good = (0..decay.edges.len())
            .take_while(|&k| good(k) || k == 0)
            .last()?;
        let (from, to) = window.unwrap_or_else(|| {
            let tenth = (0..=last_good)
                .find(|&k| decay.energy[k] <= 0.1 * decay.energy[0])
                .unwrap_or(0);
            let from = if last_good - tenth >= 8 { tenth } else { 0 };
            (decay.edges[from], decay.edges[last_good])
        });
        let inside =
            |k: &usize| decay.edges[*k] >= from && decay.edges[*k] <= to && decay.energy[*k] > 0.0;
        let chosen: Vec<usize> = (0..decay.edges.len()).filter(inside).collect();
        let (&first, &last) = (chosen.first()?, chosen.last()?);
        if chosen.len() < 5 || last - first + 1 != chosen.len() {
            return None;
        }
        // Relative uncertainties make the weights; the pulse itself, known exactly, weighs like its neighbour.
        let relative = |k: usize| decay.u[k] / decay.energy[k];
        let weight = |k: usize| {
            let near = if relative(k) > 0.0 { k } else { k + 1 };
            let relative = decay.energy.get(near).map_or(0.0, |_| relative(near));
            if relative > 0.0 && relative.is_finite() {
                1.0 / (relative * relative)
            } else {
                1.0
            }
        };
        let window = |first: usize, last: usize| Window {
            first,
            weights: (first..=last).map(weight).collect(),
        };
        let middle = first.midpoint(last);
        let (whole, early, late) = (
            window(first, last),
            window(first, middle),
            window(middle, last),
        );

        let jackknife = self.jackknife();
        let estimate = jackknife.estimate(|sums| self.fit(sums, &whole));
        if !estimate.value.is_finite() {
            return None;
        }
        let first_half = jackknife.estimate(|sums| self.fit(sums, &early));
        let second_half = jackknife.estimate(|sums| self.fit(sums, &late));
        let difference = jackknife.estimate(|sums| self.fit(sums, &late) - self.fit(sums, &early));
        let apart = difference.value.abs();
        // Halves that cannot be compared raise the flag too.
        let alike = apart <= 3.0 * difference.u || apart <= 0.01 * estimate.value.abs();
        let not_one_exponential = !alike;
        let window = (decay.edges[first], decay.edges[last]);
        Some(DecayTime {
            estimate,
            window,
            first_half,
            second_half,
            not_one_exponential,
        })
    }

    /// −1 / slope of ln E over a window, in s.
    fn fit(&self, sums: &Sums<'_>, window: &Window) -> f64 {
        let energy = self.energy(sums);
        let edges = &self.layout.edges;
        let points = || {
            window
                .weights
                .iter()
                .enumerate()
                .map(|(k, &weight)| (weight, window.first + k))
        };
        let (mut total, mut time, mut log) = (0.0, 0.0, 0.0);
        for (weight, k) in points() {
            if !(energy[k] > 0.0) {
                return f64::NAN;
            }
            total += weight;
            time += weight * edges[k];
            log += weight * ln(energy[k]);
        }
        let (time, log) = (time / total, log / total);
        let (mut square, mut product) = (0.0, 0.0);
        for (weight, k) in points() {
            let t = edges[k] - time;
            square += weight * t * t;
            product += weight * t * (ln(energy[k]) - log);
        }
        -square / product
    }
}
