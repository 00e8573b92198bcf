//! Stated uncertainties: deviations of many small runs from exact values follow Student's t with 63 degrees of freedom.

use albedra::{Experiment, Region, Source};
use albedra_tests::rig::{
    after_paths, cuboid, decay_at, lambertian, late_length, late_window, mirror,
};
use albedra_tests::{Budget, Checks, Measured, calibrate, oracle, record, statistical};

/// Photons of one run: 100 a group, so that every group has hits of every output.
const PHOTONS: u64 = 6400;

/// Zeta scores of one output over the seeds 1, 2, 3 …, all of them.
#[derive(Debug)]
struct Scores {
    name: &'static str,
    reference: f64,
    zeta: Vec<f64>,
}

impl Scores {
    fn new(name: &'static str, reference: f64) -> Self {
        Self {
            name,
            reference,
            zeta: Vec::new(),
        }
    }

    fn book(&mut self, measured: impl Into<Measured>) {
        let measured = measured.into();
        assert_eq!(measured.degrees_of_freedom, 63.0, "{}", self.name);
        self.zeta
            .push((measured.value - self.reference) / measured.u);
    }
}

fn judge(title: &str, scores: &[Scores]) {
    let mut checks = Checks::new(title, 1.0);
    for score in scores {
        let verdict = calibrate(&score.zeta, 63.0);
        checks.holds(score.name, &format!("{verdict:?}"), verdict.passes());
    }
    checks.finish();
}

fn seeds(budget: Budget) -> std::ops::RangeInclusive<u64> {
    // The long run has seeds of its own.
    if budget == Budget::Fast {
        1..=400
    } else {
        1001..=5000
    }
}

/// A cube of Lambertian walls lit evenly: five outputs with exact values, linear ones and ratios.
fn diffuse_cube(budget: Budget) {
    let mut scores = [
        Scores::new("x-.absorbed", 1.0 / 6.0),
        Scores::new("z+.direct", 1.0 / 6.0),
        Scores::new("mean_free_path", 2.0 / 3.0),
        Scores::new("second flight moment", record("chord.box.1.1.1.l2").value),
        Scores::new("mean_path", 2.0 / 3.0 / 0.2),
    ];
    let body = cuboid([1.0; 3], lambertian(0.8));
    let experiment = Experiment::new(&body, Source::walls());
    for seed in seeds(budget) {
        let outcome = experiment.trace(PHOTONS).seed(seed).run().unwrap();
        scores[0].book(outcome.flux("x-").unwrap().absorbed);
        scores[1].book(outcome.flux("z+").unwrap().direct);
        scores[2].book(outcome.mean_free_path());
        scores[3].book(outcome.flight_moment(2));
        scores[4].book(outcome.mean_path());
    }
    judge("error bars of a diffuse cube", &scores);
}

/// Curves: energy left in a mirror box, and the late slope of a diffuse one (a logarithm of a ratio).
fn curves(budget: Budget) {
    let decay = record("box.decay.length.1.1.1.rho0.8");
    let mut scores = [
        Scores::new(
            "mirror box, path 1",
            oracle::mirror::box_fill_early([1.0; 3], 0.9, 1.0),
        ),
        Scores::new(
            "mirror box, path 5",
            record("mirror_box.fill.1x1x1.R0.9.s5").value,
        ),
        Scores::new("late decay length", decay.value),
    ];
    let mirrors = Experiment::new(&cuboid([1.0; 3], mirror(0.9)), Source::volume())
        .time(after_paths(&[0.0, 1.0, 5.0]));
    let diffuse = Experiment::new(&cuboid([1.0; 3], lambertian(0.8)), Source::walls());
    let diffuse = diffuse.time(late_window(6.0, 12.0));
    for seed in seeds(budget) {
        let outcome = mirrors.trace(PHOTONS).seed(seed).run().unwrap();
        scores[0].book(decay_at(&outcome, 1));
        scores[1].book(decay_at(&outcome, 2));
        let outcome = diffuse.trace(PHOTONS).seed(seed).run().unwrap();
        scores[2].book(late_length(&outcome));
    }
    judge("error bars of curves", &scores);
}

/// A small port: one hundredth of the wall, hit about five times a group with all orders of strikes.
fn small_port(budget: Budget) {
    let mut scores = [
        Scores::new("port.incident", 0.01 / 0.1),
        Scores::new("port share of z+", 0.06),
    ];
    let port = Region::rectangle((0.1, 0.05), (0.3, 0.2));
    let body = cuboid([1.0; 3], lambertian(0.9))
        .paint("port", "z+", port, lambertian(0.9))
        .unwrap();
    let experiment = Experiment::new(&body, Source::walls());
    for seed in seeds(budget) {
        let outcome = experiment.trace(PHOTONS).seed(seed).run().unwrap();
        scores[0].book(outcome.flux("port").unwrap().incident);
        let share = outcome
            .estimate(|get| get("port.incident") / (get("port.incident") + get("z+.incident")));

        scores[1].book(share.unwrap());
    }
    judge("error bars of a small port", &scores);
}

statistical!(diffuse_cube, curves, small_port);
