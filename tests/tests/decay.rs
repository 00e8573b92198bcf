//! Energy left in closed boxes after a pulse.

use albedra::{Experiment, Source};
use albedra_tests::rig::{
    after_paths, cuboid, decay_at, lambertian, late_length, late_window, mirror,
};
use albedra_tests::{Budget, Checks, oracle, records, statistical};

/// Late decay of equal Lambertian walls: 1/λ between two late edges, against the spectral solution.
///
/// From the uniform launch only even patterns start; along the longest edge L they fade at a rate near (2π/L)²⟨l⟩/3
/// beside λ, faster in a cube. The first edge is at 6 L, where they are far below the uncertainty.
fn diffuse_boxes(budget: Budget) {
    let mut checks = Checks::new("late decay of diffuse boxes", 0.01);
    for entry in records("box.decay.length") {
        let size = entry.numbers("box");
        let longest = size.iter().fold(0.0, |a: f64, &b| a.max(b));
        let first = 6.0 * longest;
        let last = first
            + if entry.value > 3.0 * longest {
                3.0 * entry.value
            } else {
                6.0 * longest
            };
        let body = cuboid([size[0], size[1], size[2]], lambertian(entry.number("rho")));
        let experiment = Experiment::new(&body, Source::walls()).time(late_window(first, last));
        // Bright walls keep photons for thousands of strikes and need few of them.
        let photons = if entry.number("rho") > 0.9 {
            40_000
        } else {
            100_000
        };
        let outcome = budget.run(&entry.id, photons, &experiment);
        checks.against(entry, late_length(&outcome));
    }
    checks.assert_ran("box.decay.length", 11);
    checks.finish();
}

/// Mirror boxes after a uniform isotropic fill: not exponential.
fn mirror_boxes(budget: Budget) {
    let mut checks = Checks::new("mirror boxes after a fill", 0.02);
    for entry in records("mirror_box.fill") {
        let size = entry.numbers("box");
        let body = cuboid([size[0], size[1], size[2]], mirror(entry.number("R")));
        let paths = [
            0.0,
            0.5 * entry.number("s"),
            entry.number("s"),
            1.5 * entry.number("s"),
        ];
        let experiment = Experiment::new(&body, Source::volume()).time(after_paths(&paths));
        let outcome = budget.run(&entry.id, 200_000, &experiment);
        checks.identical(
            &format!("{} starts", entry.id),
            decay_at(&outcome, 0).value,
            1.0,
            1e-12,
        );
        checks.against(entry, decay_at(&outcome, 2));
    }
    checks.assert_ran("mirror_box.fill", 10);
    checks.finish();
}

/// A box with three different edges, whole curve from one run.
fn mirror_box_curve(budget: Budget) {
    let mut checks = Checks::new("mirror box 1 x 1.2 x 2", 0.02);
    let size = [1.0, 1.2, 2.0];
    let paths = [0.0, 0.25, 0.5, 1.0, 2.0, 4.0, 8.0, 12.0];
    let experiment =
        Experiment::new(&cuboid(size, mirror(0.7)), Source::volume()).time(after_paths(&paths));
    let outcome = budget.run("mirror box curve", 400_000, &experiment);
    for (edge, &s) in paths.iter().enumerate().skip(1) {
        let id = format!("path {s}");
        if s <= 1.0 {
            checks.exact(
                &id,
                decay_at(&outcome, edge),
                oracle::mirror::box_fill_early(size, 0.7, s),
            );
        } else {
            checks.near(
                &id,
                decay_at(&outcome, edge),
                oracle::mirror::box_fill(size, 0.7, s, 1000),
                1e-6,
            );
        }
    }
    checks.finish();
}

statistical!(diffuse_boxes, mirror_boxes, mirror_box_curve);
