//! A run that is stopped keeps what is whole, and stops soon.

use std::ops::ControlFlow;
use std::time::{Duration, Instant};

use albedra::{Coating, Enclosure, Experiment, Outcome, Progress, RunError, Source};

fn cube(coating: Coating) -> Experiment {
    let enclosure = Enclosure::cuboid([1.0; 3]).unwrap().coated(coating);
    Experiment::new(&enclosure, Source::volume())
}

/// Stops a run once the watch has seen so many photons end.
fn stopped_after(
    experiment: &Experiment,
    before: Option<&Outcome>,
    threads: usize,
    photons: u64,
) -> Outcome {
    let watch = |progress: &Progress| {
        assert!(progress.done <= progress.wanted);
        if progress.done >= photons {
            ControlFlow::Break(())
        } else {
            ControlFlow::Continue(())
        }
    };
    let mut trace = experiment
        .trace(u64::MAX >> 8)
        .seed(3)
        .threads(threads)
        .watch(watch);
    if let Some(before) = before {
        trace = trace.continuing(before);
    }
    match trace.run() {
        Err(RunError::Cancelled {
            partial: Some(partial),
        }) => *partial,
        other => panic!("{other:?}"),
    }
}

#[test]
fn what_was_done_equals_a_straight_run_of_its_photons() {
    let experiment = cube(Coating::mixed(0.6, 0.3).unwrap());
    for threads in [1, 3] {
        let partial = stopped_after(&experiment, None, threads, 100_000);
        let photons = partial.photons();
        let ranges: Vec<_> = partial.totals().photons().iter().collect();
        assert!(ranges.len() == 1 && ranges[0] == (0..photons), "{ranges:?}");
        let whole = experiment.trace(photons).seed(3).run().unwrap();
        assert_eq!(partial, whole);
        assert!(partial.ledger().closes());
        // It can be taken up again, stopped again, and is still what a straight run gives.
        let more = stopped_after(&experiment, Some(&partial), threads, 80_000);
        assert!(more.photons() > photons);
        assert_eq!(
            more,
            experiment.trace(more.photons()).seed(3).run().unwrap()
        );
    }
}

#[test]
fn long_lives_do_not_delay_the_stop() {
    // Eight million strikes a photon: not one task ends within the time of this test.
    let experiment = cube(Coating::mirror(0.999_999).unwrap());
    for (threads, lanes, photons) in [(1, 256, 1000), (2, 1, 3), (7, 256, 1_000_000)] {
        let mut stopped = None;
        let run = experiment
            .trace(photons)
            .threads(threads)
            .lanes(lanes)
            .watch(|progress| {
                if progress.elapsed < Duration::from_millis(200) {
                    return ControlFlow::Continue(());
                }
                stopped.get_or_insert_with(Instant::now);
                ControlFlow::Break(())
            });
        let result = run.run();
        let late = stopped.expect("the watch was called").elapsed();
        assert_eq!(result, Err(RunError::Cancelled { partial: None }));
        assert!(late < Duration::from_secs(1), "{threads} threads: {late:?}");
    }
}

#[test]
fn pilots_can_be_stopped_too() {
    let experiment = cube(Coating::mirror(0.999_999).unwrap());
    let run = experiment
        .trace(1000)
        .target("x-.incident", 0.01)
        .watch(|_| ControlFlow::Break(()));
    let begun = Instant::now();
    let error = run.run().unwrap_err();
    assert_eq!(error, RunError::Cancelled { partial: None });
    assert_eq!(
        error.to_string(),
        "the run was stopped before any batch was done"
    );
    assert!(
        begun.elapsed() < Duration::from_secs(1),
        "{:?}",
        begun.elapsed()
    );
}

#[test]
fn stopping_while_continuing_keeps_what_was_there() {
    let experiment = cube(Coating::mirror(0.999_9).unwrap());
    let first = experiment.trace(50).run().unwrap();
    let error = experiment
        .trace(1 << 40)
        .continuing(&first)
        .watch(|_| ControlFlow::Break(()))
        .run()
        .unwrap_err();
    let RunError::Cancelled {
        partial: Some(partial),
    } = &error
    else {
        panic!("{error:?}");
    };
    assert_eq!(partial.totals(), first.totals());
    assert_eq!(
        error.to_string(),
        "the run was stopped; 50 photons are done"
    );
}

#[test]
fn watches_that_go_on_change_nothing() {
    let experiment = cube(Coating::mixed(0.99, 0.3).unwrap());
    let mut calls = 0;
    let watch = |progress: &Progress| {
        calls += 1;
        assert_eq!(progress.wanted, 20_000);
        ControlFlow::Continue(())
    };
    let watched = experiment.trace(20_000).watch(watch).run().unwrap();
    assert!(calls > 0);
    assert_eq!(watched, experiment.trace(20_000).run().unwrap());
}

#[test]
fn a_watch_that_panics_does_not_leave_the_workers_waiting() {
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::mirror(0.999_999).unwrap());
    let experiment = Experiment::new(&cube, Source::volume());
    let run = std::panic::AssertUnwindSafe(|| {
        experiment
            .trace(1 << 40)
            .watch(|_| panic!("the watch has had enough"))
            .run()
    });
    let panic = std::panic::catch_unwind(run).expect_err("the panic comes out");
    assert_eq!(
        panic.downcast_ref::<&str>(),
        Some(&"the watch has had enough")
    );
}
