//! An absorbing medium: I6 and what follows from it.

use albedra::{Coating, Experiment, Medium, Source};
use albedra_tests::rig::{
    after_paths, after_paths_in, cuboid, decay_at, lambertian, late_length, late_window, mirror,
};
use albedra_tests::{Budget, Checks, Measured, oracle, record, records, statistical};
use glam::DVec3;

const PHOTONS: u64 = 200_000;

fn medium(index: f64, absorption: f64) -> Medium {
    Medium::new(index, absorption).unwrap()
}

/// I6 against a second run without absorption, other photons: Lambertian, mixed and mirror-like walls.
fn factor_of_the_curve(budget: Budget) {
    let mut checks = Checks::new("I6, two runs", 0.05);
    let paths = [0.0, 0.3, 1.0, 3.0, 6.0, 10.0];
    let absorption = 0.35;
    for (name, share) in [("Lambertian", 0.0), ("mixed", 0.6)] {
        let empty = cuboid([1.0, 1.3, 0.9], Coating::mixed(0.8, share).unwrap());
        let filled = empty.clone().with_medium(medium(1.0, absorption));
        let run = |kind: &str, body| {
            let experiment = Experiment::new(body, Source::walls()).time(after_paths(&paths));
            budget.run(&format!("I6 {name} {kind}"), PHOTONS, &experiment)
        };
        let (without, with) = (run("empty", &empty), run("filled", &filled));
        for (edge, s) in paths.iter().enumerate().skip(1) {
            let expected = decay_at(&without, edge).scaled((-absorption * s).exp());
            checks.equal(
                &format!("{name}, path {s}"),
                decay_at(&with, edge),
                expected,
            );
        }
    }
    checks.finish();
}

/// I6 against closed forms: mirror boxes, also in a medium in which light is slower.
fn mirror_boxes(budget: Budget) {
    let mut checks = Checks::new("I6, mirror boxes", 0.02);
    for entry in records("mirror_box.fill") {
        for (index, absorption) in [(1.0, 0.2), (1.52, 0.05)] {
            let (size, s) = (entry.numbers("box"), entry.number("s"));
            let body = cuboid([size[0], size[1], size[2]], mirror(entry.number("R")));
            let filled = body.with_medium(medium(index, absorption));
            let grid = after_paths_in(index, &[0.0, s]);
            let case = format!("{} index {index}", entry.id);
            let outcome = budget.run(
                &case,
                PHOTONS,
                &Experiment::new(&filled, Source::volume()).time(grid),
            );
            checks.against(entry, decay_at(&outcome, 1).scaled((absorption * s).exp()));
        }
    }
    checks.assert_ran("mirror_box.fill", 10);
    checks.finish();
}

/// Every decay rate λ becomes λ + μ.
fn decay_rates(budget: Budget) {
    let mut checks = Checks::new("I6, decay rates", 0.01);
    for (id, absorption) in [
        ("box.decay.length.1.1.1.rho0.5", 0.4),
        ("box.decay.length.1.1.1.rho0.9", 0.1),
        ("box.decay.length.1.1.1.rho0.99", 0.05),
        ("box.decay.length.1.1.2.rho0.8", 0.2),
    ] {
        let entry = record(id);
        let size = entry.numbers("box");
        let body = cuboid([size[0], size[1], size[2]], lambertian(entry.number("rho")));
        let filled = body.with_medium(medium(1.0, absorption));
        let expected = 1.0 / (1.0 / entry.value + absorption);
        let edges = [6.0 * size[2], 6.0 * size[2] + 3.0 * expected];
        let experiment =
            Experiment::new(&filled, Source::walls()).time(late_window(edges[0], edges[1]));
        let outcome = budget.run(&format!("{id} filled"), PHOTONS / 2, &experiment);
        checks.near(
            id,
            late_length(&outcome),
            expected,
            entry.tolerance / entry.value,
        );
    }
    checks.finish();
}

/// Parallel light through a mirror duct goes L / cos θ in the medium.
fn duct(budget: Budget) {
    let mut checks = Checks::new("medium in a mirror duct", 0.002);
    for entry in records("mirror_duct") {
        let (a, b, length) = (entry.number("a"), entry.number("b"), entry.number("L"));
        let (theta, phi) = (
            entry.number("theta_deg").to_radians(),
            entry.number("phi_deg").to_radians(),
        );
        let absorption = 0.07;
        let body =
            cuboid([a, b, length], mirror(entry.number("R"))).with_medium(medium(1.3, absorption));
        let body = body.opened("z-").unwrap().opened("z+").unwrap();
        let direction = DVec3::new(
            theta.sin() * phi.cos(),
            theta.sin() * phi.sin(),
            theta.cos(),
        );
        let source = Source::wall("z-").parallel(direction);
        let outcome = budget.run(
            &format!("{} filled", entry.id),
            PHOTONS,
            &Experiment::new(&body, source),
        );
        let left = Measured::from(outcome.flux("z+").unwrap().escaped);
        checks.against(
            entry,
            left.scaled((absorption * length / theta.cos()).exp()),
        );
        let ledger = outcome.ledger();
        let sum = ledger.absorbed.value
            + ledger.escaped.value
            + ledger.medium.value
            + ledger.roulette.value;
        checks.identical(&format!("{} adds up", entry.id), sum, 1.0, 1e-12);
    }
    checks.assert_ran("mirror_duct", 5);
    checks.finish();
}

/// One crossing of a black box by a beam, and a mean path shortened by absorption: ⟨(1 − e^(−μl))/μ⟩.
fn beam(budget: Budget) {
    let mut checks = Checks::new("beam in a black box", 0.001);
    let (absorption, length, flux) = (0.8_f64, 2.0, 4.0);
    let body = cuboid([1.0, 1.0, length], Coating::absorber()).with_medium(medium(1.0, absorption));
    let source = Source::beam(DVec3::new(0.1, -0.2, -0.5 * length), DVec3::Z).flux(flux);
    let source = source.radius(0.05);
    let paths = [0.0, 0.5, 1.5, 2.5];
    let outcome = budget.run(
        "beam",
        10 * PHOTONS,
        &Experiment::new(&body, source).time(after_paths(&paths)),
    );
    let kept = (-absorption * length).exp();
    checks.identical(
        "wall",
        outcome.flux("z+").unwrap().absorbed.value,
        flux * kept,
        1e-9,
    );
    checks.identical(
        "medium",
        outcome.ledger().medium.value,
        flux * (1.0 - kept),
        1e-9,
    );
    checks.identical(
        "path",
        outcome.mean_path().value,
        (1.0 - kept) / absorption,
        1e-9,
    );
    // The time of a flight's loss is one draw along it.
    checks.exact(
        "left at 0.5",
        decay_at(&outcome, 1),
        flux * (-absorption * 0.5).exp(),
    );
    checks.exact(
        "left at 1.5",
        decay_at(&outcome, 2),
        flux * (-absorption * 1.5).exp(),
    );
    checks.identical("left at 2.5", decay_at(&outcome, 3).value, 0.0, 1e-12);
    checks.finish();
}

/// A uniform fill of a black box: that of a mirror box with R = 0, times exp(−μs).
fn black_box_curve(budget: Budget) {
    let mut checks = Checks::new("fill of a black box", 0.02);
    let (size, absorption) = ([1.0, 1.2, 2.0], 0.5);
    let body = cuboid(size, Coating::absorber()).with_medium(medium(1.0, absorption));
    let paths = [0.0, 0.2, 0.5, 0.8, 1.0];
    let experiment = Experiment::new(&body, Source::volume()).time(after_paths(&paths));
    let outcome = budget.run("black box curve", 2 * PHOTONS, &experiment);
    for (edge, &s) in paths.iter().enumerate().skip(1) {
        let expected = oracle::mirror::box_fill_early(size, 0.0, s) * (-absorption * s).exp();
        checks.exact(&format!("path {s}"), decay_at(&outcome, edge), expected);
    }
    checks.finish();
}

statistical!(
    factor_of_the_curve,
    mirror_boxes,
    decay_rates,
    duct,
    beam,
    black_box_curve
);
