//! Running an experiment.

use std::fmt;
use std::ops::ControlFlow;
use std::thread::available_parallelism;

use super::compile::{Compiled, compile};
use super::{Experiment, ExperimentError};
use crate::engine::{EngineError, LANES, Level, Order, Progress, run};
use crate::estimate::{MergeError, Totals};
use crate::outcome::{Outcome, Target};

/// First photon of a pilot run; photons of results have smaller indices.
///
/// A photon takes four places in the sequence of 2⁶⁴ that generators are seeded from, so that photon 2⁶² would have the
/// generator of photon 0.
const PILOT: u64 = 1 << 61;

/// Photons of a pilot run.
const PILOT_PHOTONS: u64 = 12_800;

/// A function that is told how far a run is and may stop it.
type Watch<'a> = Box<dyn FnMut(&Progress) -> ControlFlow<()> + 'a>;

/// A run that is being prepared: options, then [`Trace::run`].
#[must_use = "a trace does nothing until it is run"]
pub struct Trace<'a> {
    experiment: &'a Experiment,
    photons: u64,
    seed: u64,
    first: u64,
    threads: Option<usize>,
    lanes: usize,
    level: Level,
    before: Option<&'a Outcome>,
    target: Option<(String, f64)>,
    watched: Option<String>,
    watch: Option<Watch<'a>>,
}

impl fmt::Debug for Trace<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Trace")
            .field("photons", &self.photons)
            .field("seed", &self.seed)
            .field("first", &self.first)
            .finish_non_exhaustive()
    }
}

impl<'a> Trace<'a> {
    pub(super) fn new(experiment: &'a Experiment, photons: u64) -> Self {
        Self {
            experiment,
            photons,
            seed: 0,
            first: 0,
            threads: None,
            lanes: LANES,
            level: Level::best(),
            before: None,
            target: None,
            watched: None,
            watch: None,
        }
    }

    /// Sets the seed; 0 unless told otherwise. The same seed gives the same photons.
    pub fn seed(mut self, seed: u64) -> Self {
        self.seed = seed;
        self
    }

    /// Sets the index of the first photon; 0 unless told otherwise. A run may so be divided among machines.
    pub fn from(mut self, first: u64) -> Self {
        self.first = first;
        self
    }

    /// Sets the number of threads; all cores unless told otherwise. Results do not depend on it.
    pub fn threads(mut self, threads: usize) -> Self {
        self.threads = Some(threads);
        self
    }

    /// Sets how many photons a block holds, from 1 to 256. Results do not depend on it.
    pub fn lanes(mut self, lanes: usize) -> Self {
        self.lanes = lanes;
        self
    }

    /// Sets the instruction set. Results do not depend on it.
    pub fn level(mut self, level: Level) -> Self {
        self.level = level;
        self
    }

    /// Continues an outcome: its seed is taken, the photons that follow its last one are traced, and both are merged.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::lambertian(0.8)?);
    /// let experiment = Experiment::new(&cube, Source::volume());
    /// let before = experiment.trace(600).seed(7).run()?;
    /// let all = experiment.trace(400).continuing(&before).run()?;
    /// assert_eq!(all, experiment.trace(1000).seed(7).run()?);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn continuing(mut self, outcome: &'a Outcome) -> Self {
        self.seed = outcome.totals().seed();
        self.first = outcome
            .totals()
            .photons()
            .iter()
            .next_back()
            .map_or(0, |range| range.end);
        self.before = Some(outcome);
        self
    }

    /// Wants a relative standard uncertainty of an output: a pilot run on other photons, which is thrown away, decides how
    /// many photons to trace, at most the number given. The numbers are those of tracing so many.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::lambertian(0.5)?);
    /// let experiment = Experiment::new(&cube, Source::volume());
    /// let outcome = experiment.trace(1_000_000).target("x-.incident", 0.01).run()?;
    /// assert!(outcome.target().is_some_and(|target| target.reached < 0.02));
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn target(mut self, output: impl Into<String>, relative: f64) -> Self {
        self.target = Some((output.into(), relative));
        self
    }

    /// Names the output whose relative uncertainty the watch is told; the target's, or the mean path, unless told otherwise.
    pub fn watching(mut self, output: impl Into<String>) -> Self {
        self.watched = Some(output.into());
        self
    }

    /// Has a function called about twenty times a second, on this thread, that may stop the run with `Break`.
    ///
    /// # Examples
    ///
    /// ```
    /// use std::ops::ControlFlow;
    ///
    /// # use albedra::{Coating, Enclosure, Experiment, RunError, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::lambertian(0.8)?);
    /// let experiment = Experiment::new(&cube, Source::volume());
    /// let stopped = experiment.trace(1 << 50).watch(|_| ControlFlow::Break(())).run();
    /// assert!(matches!(stopped, Err(RunError::Cancelled { .. })));
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn watch(mut self, watch: impl FnMut(&Progress) -> ControlFlow<()> + 'a) -> Self {
        self.watch = Some(Box::new(watch));
        self
    }

    /// Runs.
    ///
    /// # Errors
    ///
    /// If the experiment or an option is wrong, or if the watch stopped the run; then the error has what is done so far.
    pub fn run(mut self) -> Result<Outcome, RunError> {
        let compiled = compile(self.experiment).map_err(RunError::Experiment)?;
        if self.photons == 0 {
            return Err(RunError::Photons { value: 0 });
        }
        if self
            .first
            .checked_add(self.photons)
            .is_none_or(|end| end > PILOT)
        {
            return Err(RunError::Indices {
                first: self.first,
                photons: self.photons,
            });
        }
        if let Some(before) = self.before {
            // Before the work is done, not after.
            let (plan, theirs) = (&compiled.plan, before.totals());
            let mut empty = Totals::empty(plan.history, plan.totals, theirs.seed(), plan.outputs());
            empty.merge(theirs).map_err(RunError::Merge)?;
        }
        let threads = self
            .threads
            .unwrap_or_else(|| available_parallelism().map_or(1, usize::from));
        if !(1..=4096).contains(&threads) {
            return Err(RunError::Threads { value: threads });
        }
        if !(1..=LANES).contains(&self.lanes) {
            return Err(RunError::Lanes { value: self.lanes });
        }
        let watched = self
            .watched
            .take()
            .or_else(|| self.target.as_ref().map(|(output, _)| output.clone()))
            .unwrap_or_else(|| "mean_path".to_owned());
        compiled
            .layout
            .known(&watched)
            .map_err(RunError::Experiment)?;
        let mut watch = self.watch.take();
        let mut go =
            |first, photons| self.trace(&compiled, threads, first, photons, &watched, &mut watch);

        let mut photons = self.photons;
        let mut met = None;
        if let Some((output, relative)) = &self.target {
            if !(1e-9..1.0).contains(relative) {
                return Err(RunError::Target { value: *relative });
            }
            compiled
                .layout
                .known(output)
                .map_err(RunError::Experiment)?;
            let (pilot, flow) = go(PILOT, PILOT_PHOTONS)?;
            if flow.is_break() {
                return Err(RunError::Cancelled { partial: None });
            }
            let pilot = Outcome::new(self.experiment, &compiled.layout, pilot);
            photons = photons_for(pilot.relative_uncertainty(output), *relative, self.photons);
            met = Some((output.clone(), *relative));
        }

        let (mut totals, flow) = go(self.first, photons)?;
        if let Some(before) = self.before {
            let mut merged = before.totals().clone();
            merged.merge(&totals).map_err(RunError::Merge)?;
            totals = merged;
        }
        let mut outcome = Outcome::new(self.experiment, &compiled.layout, totals);
        if let Some((output, relative)) = met {
            let reached = outcome.relative_uncertainty(&output);
            outcome.set_target(Target {
                output,
                relative,
                reached,
            });
        }
        if flow.is_break() {
            let partial = (outcome.photons() > 0).then(|| Box::new(outcome));
            return Err(RunError::Cancelled { partial });
        }
        Ok(outcome)
    }

    fn trace(
        &self,
        compiled: &Compiled,
        threads: usize,
        first: u64,
        photons: u64,
        watched: &str,
        watch: &mut Option<Watch<'a>>,
    ) -> Result<(Totals, ControlFlow<()>), RunError> {
        let plan = &compiled.plan;
        let order = Order {
            plan,
            seed: self.seed,
            first,
            photons,
            threads,
            lanes: self.lanes,
            level: self.level,
        };
        let mut tell = |progress: &Progress, totals: &Totals| {
            let Some(watch) = watch else {
                return ControlFlow::Continue(());
            };
            let mut progress = progress.clone();
            let relative = compiled.layout.relative_uncertainty(totals, watched);
            progress.relative_uncertainty = relative.is_finite().then_some(relative);
            watch(&progress)
        };
        run(&order, &mut tell)
            .map_err(|EngineError::Threads(reason)| RunError::NoThreads { reason })
    }
}

/// Photons that bring a relative uncertainty down to the target, at most `most`.
///
/// The uncertainties of the pilot and of the run are themselves known to about 9 %; with 40 % more photons than the pilot
/// asks for, about one run in a dozen misses its target.
fn photons_for(pilot: f64, target: f64, most: u64) -> u64 {
    let ratio = pilot / target;
    let wanted = PILOT_PHOTONS as f64 * ratio * ratio * 1.4;
    if wanted < most as f64 {
        let whole = wanted as u64 + 1;
        if whole > PILOT_PHOTONS {
            whole
        } else {
            PILOT_PHOTONS.min(most)
        }
    } else {
        most
    }
}

/// A run that gave no outcome.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum RunError {
    /// The experiment cannot be traced.
    Experiment(ExperimentError),
    /// No photons.
    Photons {
        /// What was given.
        value: u64,
    },
    /// Photons with indices from 2⁶¹ on, which are kept for pilot runs.
    Indices {
        /// Index of the first photon.
        first: u64,
        /// Number of photons.
        photons: u64,
    },
    /// Threads outside 1 to 4096.
    Threads {
        /// What was given.
        value: usize,
    },
    /// The operating system gave no threads.
    NoThreads {
        /// Its reason.
        reason: String,
    },
    /// Lanes outside 1 to 256.
    Lanes {
        /// What was given.
        value: usize,
    },
    /// The relative uncertainty wanted is out of range.
    Target {
        /// What was given.
        value: f64,
    },
    /// The outcome to be continued does not fit.
    Merge(MergeError),
    /// The watch stopped the run.
    Cancelled {
        /// What was done in full before, if anything was.
        partial: Option<Box<Outcome>>,
    },
}

impl fmt::Display for RunError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Experiment(error) => error.fmt(f),
            Self::Photons { value } => write!(f, "photons must number at least 1, got {value}"),
            Self::Indices { first, photons } => write!(
                f,
                "indices of photons must stay below 2^61, got {photons} photons from index {first} on"
            ),
            Self::Threads { value } => write!(f, "threads must number from 1 to 4096, got {value}"),
            Self::NoThreads { reason } => write!(f, "the system gave no threads: {reason}"),
            Self::Lanes { value } => write!(f, "lanes must number from 1 to {LANES}, got {value}"),
            Self::Target { value } => {
                write!(
                    f,
                    "target must be a relative uncertainty from 1e-9 to 1, got {value}"
                )
            }
            Self::Merge(error) => error.fmt(f),
            Self::Cancelled {
                partial: Some(outcome),
            } => {
                write!(
                    f,
                    "the run was stopped; {} photons are done",
                    outcome.photons()
                )
            }
            Self::Cancelled { partial: None } => {
                write!(f, "the run was stopped before any batch was done")
            }
        }
    }
}

impl std::error::Error for RunError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        match self {
            Self::Experiment(error) => Some(error),
            Self::Merge(error) => Some(error),
            _ => None,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::engine::Streams;

    #[test]
    fn pilot_photons_have_generators_of_their_own() {
        let mut streams = Streams::new();
        let mut first = |photon: u64| {
            streams.seed(0, 7, photon);
            streams.lane(0).unit()
        };
        for photon in [0, 1, PILOT_PHOTONS - 1] {
            assert_ne!(first(photon), first(PILOT + photon));
        }
        // From here on they would repeat, so that no pilot may reach it.
        assert_eq!(first(0), first(1 << 62));
        const { assert!(PILOT + PILOT_PHOTONS <= 1 << 62) };
    }
}
