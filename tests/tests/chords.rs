//! Free paths in convex bodies: uniform Lambertian light from black walls gives each chord once.

use albedra::{Coating, Experiment, Source};
use albedra_tests::rig::cuboid;
use albedra_tests::{Budget, Checks, oracle, record, records, statistical};

const PHOTONS: u64 = 1_000_000;
const BOXES: [[f64; 3]; 10] = [
    [1.0, 1.0, 1.0],
    [1.0, 1.0, 2.0],
    [1.0, 1.0, 5.0],
    [1.0, 1.0, 10.0],
    [1.0, 2.0, 2.0],
    [1.0, 2.0, 5.0],
    [1.0, 2.0, 10.0],
    [1.0, 5.0, 5.0],
    [1.0, 5.0, 10.0],
    [1.0, 10.0, 10.0],
];

/// The first four moments; a body with few long chords needs many photons for the high ones.
fn moments(budget: Budget) {
    let mut checks = Checks::new("chords of boxes", 0.05);
    for size in BOXES {
        let prefix = format!("chord.box.{}.{}.{}", size[0], size[1], size[2]);
        let black = cuboid(size, Coating::absorber());
        let outcome = budget.run(&prefix, PHOTONS, &Experiment::new(&black, Source::walls()));
        checks.against(record(&format!("{prefix}.mean")), outcome.mean_free_path());
        checks.against(record(&format!("{prefix}.l2")), outcome.flight_moment(2));
        checks.exact(
            &format!("{prefix}.l3"),
            outcome.flight_moment(3),
            oracle::chord::box_moment(size, 3),
        );
        checks.against(record(&format!("{prefix}.l4")), outcome.flight_moment(4));

        checks.identical(
            &format!("{prefix}.strikes"),
            outcome.mean_strikes().value,
            1.0,
            1e-15,
        );
    }
    checks.assert_ran("chord.box", 30);
    checks.finish();
}

/// I14 without scattering, and the mean first flight of a uniform isotropic fill, ⟨l²⟩/(2⟨l⟩).
fn first_flight_of_a_fill(budget: Budget) {
    let mut checks = Checks::new("first flight after a uniform fill", 0.005);
    for size in BOXES {
        let entry = record(&format!(
            "chord.box.{}.{}.{}.fill_first_flight",
            size[0], size[1], size[2]
        ));
        let black = cuboid(size, Coating::absorber());
        let outcome = budget.run(
            &entry.id,
            PHOTONS,
            &Experiment::new(&black, Source::volume()),
        );
        checks.against(entry, outcome.mean_path());
    }
    checks.assert_ran("chord.box", 10);
    checks.finish();
}

/// The moments hold in equilibrium, so also for reflected flights of any mixture of equal reflectance.
fn moments_with_reflection(budget: Budget) {
    let mut checks = Checks::new("chords of boxes, all generations", 0.02);
    for (size, share) in [([1.0, 1.0, 1.0], 0.0), ([1.0, 2.0, 5.0], 0.5)] {
        let coating = Coating::mixed(0.8, share).unwrap();
        let case = format!("reflecting {}.{}.{}", size[0], size[1], size[2]);
        let outcome = budget.run(
            &case,
            PHOTONS / 4,
            &Experiment::new(&cuboid(size, coating), Source::walls()),
        );
        let prefix = format!("chord.box.{}.{}.{}", size[0], size[1], size[2]);
        checks.against(record(&format!("{prefix}.mean")), outcome.mean_free_path());
        checks.against(record(&format!("{prefix}.l2")), outcome.flight_moment(2));
        checks.exact(
            &format!("{case}.l3"),
            outcome.flight_moment(3),
            oracle::chord::box_moment(size, 3),
        );
        checks.against(record(&format!("{prefix}.l4")), outcome.flight_moment(4));
    }
    checks.finish();
}

/// Blanco & Fournier 2003 (abstract seen): the printed mean chord of the cube.
fn printed_cube(budget: Budget) {
    let mut checks = Checks::new("printed mean chord of the cube", 0.002);
    let black = cuboid([1.0; 3], Coating::absorber());
    for entry in records("published.blanco_fournier.cube") {
        let outcome = budget.run(
            &entry.id,
            PHOTONS,
            &Experiment::new(&black, Source::walls()),
        );
        checks.against(entry, outcome.mean_free_path());
    }
    checks.finish();
}

statistical!(
    moments,
    first_flight_of_a_fill,
    moments_with_reflection,
    printed_cube
);
