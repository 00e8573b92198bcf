//! Energy inside against time.

use super::Outcome;
use super::named::per_photon;
use crate::estimate::Sums;

/// Energy inside after a short pulse, at the edges of the time grid.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Decay {
    /// Times in s; the pulse is at 0.
    pub edges: Vec<f64>,
    /// Energy inside in J, for a pulse of as many joules as the sources have watts.
    pub energy: Vec<f64>,
    /// Standard uncertainty in J.
    pub u: Vec<f64>,
    /// Degrees of freedom of the uncertainty.
    pub degrees_of_freedom: f64,
}

/// Energy inside against the time since a steady lamp was switched.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Curve {
    /// Times in s since the lamp was switched.
    pub edges: Vec<f64>,
    /// Energy inside in J.
    pub energy: Vec<f64>,
    /// Standard uncertainty in J.
    pub u: Vec<f64>,
    /// Degrees of freedom of the uncertainty.
    pub degrees_of_freedom: f64,
}

impl Outcome {
    /// Energy inside after a short pulse that carries as many joules as the sources have watts.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let decay = outcome.decay();
    /// assert_eq!(decay.edges.len(), 201);
    /// assert_eq!((decay.energy[0], decay.u[0]), (1.0, 0.0));
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn decay(&self) -> Decay {
        let all = self
            .jackknife()
            .estimate_many_linear(|sums| self.energy(sums));
        let edges = self.layout.edges.clone();
        Decay {
            edges,
            energy: all.values,
            u: all.u,
            degrees_of_freedom: all.degrees_of_freedom,
        }
    }

    /// Energy inside after a steady lamp goes off.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let curve = outcome.switch_off();
    /// let stored = outcome.stored_energy().value;
    /// assert!((curve.energy[0] / stored - 1.0).abs() < 1e-9);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn switch_off(&self) -> Curve {
        self.curve(|sums| self.integral_from_edges(sums))
    }

    /// Energy inside after a lamp comes on and stays steady.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let (on, off) = (outcome.switch_on(), outcome.switch_off());
    /// assert_eq!(on.energy[0], 0.0);
    /// // What the one has gained the other has lost.
    /// assert!(((on.energy[50] + off.energy[50]) / off.energy[0] - 1.0).abs() < 1e-9);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn switch_on(&self) -> Curve {
        self.curve(|sums| {
            let mut inside = 0.0;
            let mut curve = vec![0.0];
            curve.extend(self.integral_of_bins(sums).into_iter().map(|bin| {
                inside += bin;
                inside
            }));
            curve
        })
    }

    fn curve(&self, f: impl Fn(&Sums<'_>) -> Vec<f64>) -> Curve {
        let all = self.jackknife().estimate_many_linear(f);
        let edges = self.layout.edges.clone();
        Curve {
            edges,
            energy: all.values,
            u: all.u,
            degrees_of_freedom: all.degrees_of_freedom,
        }
    }

    /// Energy after a pulse at each edge: all that is lost later, summed as integers.
    pub(super) fn energy(&self, sums: &Sums<'_>) -> Vec<f64> {
        let (layout, bins) = (&self.layout, self.layout.time.bins());
        let mut later = 0_i128;
        let mut energy = vec![f64::NAN; bins + 1];
        for bin in (0..=bins).rev() {
            let lost = sums.quanta(layout.decay_at + 2 * bin);
            let Some(sum) = lost.and_then(|lost| later.checked_add(lost)) else {
                return energy;
            };
            later = sum;
            energy[bin] = layout.watts * per_photon(sums, later);
        }
        energy
    }

    /// ∫ E dt over each bin, in J for a lamp of the sources' watts. With the first moments it is exact: light that is lost
    /// within a bin counts up to its own moment.
    fn integral_of_bins(&self, sums: &Sums<'_>) -> Vec<f64> {
        let energy = self.energy(sums);
        (0..self.layout.time.bins())
            .map(|bin| self.integral_of_bin(sums, bin, energy[bin + 1]))
            .collect()
    }

    fn integral_of_bin(&self, sums: &Sums<'_>, bin: usize, later: f64) -> f64 {
        let layout = &self.layout;
        let moment = layout.watts * sums.mean(layout.decay_at + 2 * bin + 1);
        layout.time.width(bin) / layout.speed * (moment + later)
    }

    /// ∫ E dt from each edge on.
    fn integral_from_edges(&self, sums: &Sums<'_>) -> Vec<f64> {
        let bins = self.layout.time.bins();
        let mut sum = self.integral_of_bin(sums, bins, 0.0);
        let mut integral = vec![sum];
        for bin in self.integral_of_bins(sums).into_iter().rev() {
            sum += bin;
            integral.push(sum);
        }
        integral.reverse();
        integral
    }
}
