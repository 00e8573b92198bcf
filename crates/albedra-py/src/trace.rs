//! Running an experiment: progress, Ctrl-C, and what becomes of a run that was stopped.

use std::ops::ControlFlow;
use std::sync::Arc;

use albedra::RunError;
use pyo3::exceptions::{PyKeyboardInterrupt, PyValueError};
use pyo3::prelude::*;

use crate::errors::{Interrupted, raise};
use crate::ledger::Progress;
use crate::outcome::Outcome;

/// What to trace.
pub(crate) struct Order {
    pub(crate) photons: u64,
    pub(crate) seed: Option<u64>,
    pub(crate) threads: Option<usize>,
    pub(crate) first: Option<u64>,
    pub(crate) target: Option<(String, f64)>,
    pub(crate) resume: Option<Arc<albedra::Outcome>>,
}

impl Order {
    /// Refuses what the outcome to continue decides.
    fn check(&self) -> PyResult<()> {
        let Some(before) = &self.resume else {
            return Ok(());
        };
        if let Some(seed) = self.seed
            && seed != before.seed()
        {
            let text = format!(
                "seed must be that of the outcome to continue, {}, got {seed}",
                before.seed()
            );
            return Err(PyValueError::new_err(text));
        }
        match self.first {
            Some(first) => {
                let text = format!(
                    "first follows from the outcome to continue and must be left out, got {first}"
                );
                Err(PyValueError::new_err(text))
            }
            None => Ok(()),
        }
    }

    fn prepared<'a>(&'a self, experiment: &'a albedra::Experiment) -> albedra::Trace<'a> {
        let mut trace = experiment
            .trace(self.photons)
            .seed(self.seed.unwrap_or_default())
            .from(self.first.unwrap_or_default());
        if let Some(threads) = self.threads {
            trace = trace.threads(threads);
        }
        if let Some((output, relative)) = &self.target {
            trace = trace.target(output, *relative);
        }
        if let Some(before) = &self.resume {
            trace = trace.continuing(before);
        }
        trace
    }
}

/// Runs without holding the interpreter; signals and progress are seen to on this thread about 20 times a second.
pub(crate) fn trace(
    py: Python<'_>,
    experiment: &albedra::Experiment,
    order: Order,
    progress: Option<&Bound<'_, PyAny>>,
) -> PyResult<Outcome> {
    order.check()?;
    let module = py.import("albedra._progress")?;
    let teller = module.call_method1("teller", (progress,))?.unbind();
    let silent = teller.is_none(py);
    let mut raised: Option<PyErr> = None;
    let mut last: Option<albedra::Progress> = None;
    let result = py.detach(|| {
        let watch = |progress: &albedra::Progress| {
            last = Some(progress.clone());
            let told = Python::attach(|py| {
                py.check_signals()?;
                if silent {
                    return Ok(());
                }
                teller.call1(py, (Progress::of(progress),)).map(drop)
            });
            match told {
                Ok(()) => ControlFlow::Continue(()),
                Err(error) => {
                    raised = Some(error);
                    ControlFlow::Break(())
                }
            }
        };
        order.prepared(experiment).watch(watch).run()
    });
    let finished = |done: Option<&albedra::Outcome>| -> PyResult<()> {
        if let (Some(outcome), false) = (done, silent) {
            let before = order.resume.as_ref().map_or(0, |before| before.photons());
            let end = Progress::ended(outcome.photons() - before, last.as_ref());
            teller.call1(py, (end,))?;
        }
        module
            .call_method1("close", (&teller, done.is_some()))
            .map(drop)
    };
    match result {
        Ok(outcome) => {
            finished(Some(&outcome))?;
            Ok(Outcome::of(Arc::new(outcome)))
        }
        Err(RunError::Cancelled { partial }) => {
            finished(None)?;
            Err(stopped(py, raised, partial))
        }
        Err(error) => {
            finished(None)?;
            Err(raise(error))
        }
    }
}

/// Ctrl-C becomes `Interrupted` with what there is; any other exception comes out unchanged.
fn stopped(py: Python<'_>, raised: Option<PyErr>, partial: Option<Box<albedra::Outcome>>) -> PyErr {
    let cause = match raised {
        Some(error) if !error.get_type(py).is(py.get_type::<PyKeyboardInterrupt>()) => {
            return error;
        }
        cause => cause,
    };
    let text = match &partial {
        Some(outcome) => format!(
            "stopped after {} photons, which are in result",
            outcome.photons()
        ),
        None => "stopped before any photons were finished; result is None".to_owned(),
    };
    let error = Interrupted::new_err(text);
    let result = partial.map(|outcome| Outcome::of(Arc::new(*outcome)));
    if let Err(other) = error.value(py).setattr("result", result) {
        return other;
    }
    error.set_cause(py, cause);
    error
}
