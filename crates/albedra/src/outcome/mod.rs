//! What the user gets.

mod curves;
mod decay_time;
mod flights;
mod flux;
mod ledger;
mod maps;
mod named;
mod store;
mod table;

use std::sync::Arc;

pub use curves::{Curve, Decay};
pub use decay_time::DecayTime;
pub use flights::FlightHistogram;
pub use flux::Flux;
pub use ledger::Ledger;
pub use maps::Map;
pub use store::LoadError;

use crate::estimate::{Counters, Estimate, Jackknife, MergeError, Totals};
use crate::experiment::{Experiment, ExperimentError, Facts, Layout, Row};

/// What a run found: estimates, curves and maps, each with the standard uncertainty of the simulation.
///
/// An outcome holds the exact integer totals; everything else is computed from them on demand, and any function of the
/// outputs by [`Outcome::estimate`]. Outcomes of other photons of the same experiment can be merged.
#[derive(Clone, Debug, PartialEq)]
pub struct Outcome {
    experiment: Experiment,
    layout: Arc<Layout>,
    totals: Totals,
    target: Option<Target>,
}

/// The relative uncertainty that was wanted, and what came of it.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Target {
    /// The output.
    pub output: String,
    /// Relative standard uncertainty wanted.
    pub relative: f64,
    /// Relative standard uncertainty reached.
    pub reached: f64,
}

impl Target {
    /// A target for an output: relative standard uncertainty wanted and reached.
    pub fn new(output: impl Into<String>, relative: f64, reached: f64) -> Self {
        let output = output.into();
        Self {
            output,
            relative,
            reached,
        }
    }

    /// Whether the target was met.
    pub fn met(&self) -> bool {
        self.reached <= self.relative
    }
}

impl Outcome {
    pub(crate) fn new(experiment: &Experiment, layout: &Arc<Layout>, totals: Totals) -> Self {
        Self {
            experiment: experiment.clone(),
            layout: Arc::clone(layout),
            totals,
            target: None,
        }
    }

    /// The same outcome with the target that its run had, as when it is read from a file.
    #[must_use]
    pub fn with_target(mut self, target: Option<Target>) -> Self {
        self.target = target;
        self
    }

    pub(crate) fn set_target(&mut self, target: Target) {
        self.target = Some(target);
    }

    /// The experiment that was traced.
    pub fn experiment(&self) -> &Experiment {
        &self.experiment
    }

    /// The exact totals.
    pub fn totals(&self) -> &Totals {
        &self.totals
    }

    /// Number of photons.
    pub fn photons(&self) -> u64 {
        self.totals.photons().len()
    }

    /// Seed of the run.
    pub fn seed(&self) -> u64 {
        self.totals.seed()
    }

    /// Strikes, flights, and photons that were tried again or lost.
    pub fn counters(&self) -> Counters {
        self.totals.counters()
    }

    /// The target that the run had, if it had one, and whether it was met.
    pub fn target(&self) -> Option<&Target> {
        self.target.as_ref()
    }

    /// What was known before any photon was traced.
    pub fn facts(&self) -> &Facts {
        &self.layout.facts
    }

    /// Walls, regions and openings: the disjoint pieces of the boundary, in the order of all arrays.
    pub fn rows(&self) -> &[Row] {
        &self.layout.rows
    }

    /// Radiant flux of all sources in W.
    pub fn watts(&self) -> f64 {
        self.layout.watts
    }

    /// Adds an outcome of other photons of the same experiment and seed.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::lambertian(0.8)?);
    /// let experiment = Experiment::new(&cube, Source::volume());
    /// let mut first = experiment.trace(600).run()?;
    /// let second = experiment.trace(400).from(600).run()?;
    /// first.merge(&second)?;
    /// assert_eq!(first, experiment.trace(1000).run()?);
    /// assert!(first.merge(&second).is_err());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If the other is of another experiment or seed, or has a photon that this one has. Then nothing is changed.
    pub fn merge(&mut self, other: &Self) -> Result<(), MergeError> {
        self.totals.merge(&other.totals)?;
        self.target = None;
        Ok(())
    }

    /// Any function of the outputs, with its uncertainty by the delete-one-group jackknife.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// let box_ = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::lambertian(0.5)?);
    /// let outcome = Experiment::new(&box_, Source::wall("z-")).trace(12_800).run()?;
    /// let floor_over_lid = outcome.estimate(|get| get("z-.incident") / get("z+.incident"))?;
    /// assert!(floor_over_lid.u > 0.0 && floor_over_lid.degrees_of_freedom == 63.0);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If the function asks for an output that does not exist.
    pub fn estimate(
        &self,
        f: impl Fn(&dyn Fn(&str) -> f64) -> f64,
    ) -> Result<Estimate, ExperimentError> {
        let wrong = std::cell::RefCell::new(None);
        let estimate = self.jackknife().estimate(|sums| {
            f(&|name: &str| match self.layout.named(name) {
                Ok(named) => named.value(sums),
                Err(error) => {
                    wrong.borrow_mut().get_or_insert(error);
                    f64::NAN
                }
            })
        });
        wrong.into_inner().map_or(Ok(estimate), Err)
    }

    /// The output of this name, such as `"detector.incident"`, `"ledger.absorbed"` or `"mean_free_path"`.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// assert_eq!(outcome.output("z-.incident")?, outcome.flux("z-")?.incident);
    /// assert!(outcome.output("z-.incidence").is_err());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is no such output.
    pub fn output(&self, name: &str) -> Result<Estimate, ExperimentError> {
        let named = self.layout.named(name)?;
        Ok(self.named_estimate(&named))
    }

    /// Ratio of two outputs; their covariance is taken into account.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let share = outcome.ratio("z-.absorbed", "z-.incident")?;
    /// // Both come from the same photons, so that their quotient is certain.
    /// assert!((share.value - 0.2).abs() < 1e-12 && share.u < 1e-12);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    ///
    /// If there is no such output.
    pub fn ratio(&self, above: &str, below: &str) -> Result<Estimate, ExperimentError> {
        self.layout.named(above)?;
        self.layout.named(below)?;
        self.estimate(|get| get(above) / get(below))
    }

    /// Names of all outputs that are single numbers.
    pub fn output_names(&self) -> Vec<String> {
        self.layout.output_names()
    }

    /// Relative standard uncertainty of an output; infinite if it does not exist or has none.
    pub(crate) fn relative_uncertainty(&self, output: &str) -> f64 {
        self.layout.relative_uncertainty(&self.totals, output)
    }

    fn named_estimate(&self, named: &named::Named<'_>) -> Estimate {
        named.estimate(&self.jackknife())
    }

    fn jackknife(&self) -> Jackknife<'_> {
        self.totals.jackknife(&self.layout.exponents)
    }
}
