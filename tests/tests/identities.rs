//! Identities that hold in any body, whatever its shape.

use albedra::{Coating, Enclosure, Experiment, Medium, Region, Source};
use albedra_tests::rig::{
    SPEED_OF_LIGHT, after_paths, cuboid, curve_at, decay_at, lambertian, mirror,
};
use albedra_tests::{Budget, Checks, Measured, oracle, records, statistical};
use glam::DVec3;

const PHOTONS: u64 = 100_000;

fn mixed(reflectance: f64, share: f64) -> Coating {
    Coating::mixed(reflectance, share).unwrap()
}

/// Bodies with one reflectance everywhere: a box, a five-sided prism, an L-shaped room, a box of several laws.
fn bodies(reflectance: f64) -> Vec<(&'static str, Enclosure)> {
    let corner = [
        (0.0, 0.0),
        (2.0, 0.0),
        (2.0, 0.8),
        (0.9, 0.8),
        (0.9, 2.0),
        (0.0, 2.0),
    ];
    let several = cuboid([1.0, 1.4, 0.8], lambertian(reflectance));
    let several = several.with_coating("x+", mixed(reflectance, 0.5)).unwrap();
    let several = several.with_coating("z-", mirror(reflectance)).unwrap();
    let disk = Region::disk((0.1, 0.0), 0.3);
    let several = several
        .paint("spot", "y-", disk, mixed(reflectance, 0.9))
        .unwrap();
    vec![
        ("box", cuboid([1.0, 2.0, 3.0], lambertian(reflectance))),
        (
            "prism",
            Enclosure::prism(5, 1.0, 1.5)
                .unwrap()
                .coated(lambertian(reflectance)),
        ),
        (
            "L",
            Enclosure::extruded(&corner, 0.7)
                .unwrap()
                .coated(lambertian(reflectance)),
        ),
        ("several laws", several),
    ]
}

/// I1 and I2: mean free path 4V/S and mean path (4V/S)/(1−ρ) after uniform Lambertian launch.
///
/// Both also hold for mixed and mirror-like walls of equal reflectance: a uniform isotropic field meets every wall as
/// Lambertian light and leaves it so, in every generation.
fn mean_free_path(budget: Budget) {
    let mut checks = Checks::new("I1 and I2", 0.01);
    for reflectance in [0.0, 0.5, 0.9] {
        for (name, body) in bodies(reflectance) {
            let case = format!("I1 {name}, reflectance {reflectance}");
            let outcome = budget.run(&case, PHOTONS, &Experiment::new(&body, Source::walls()));
            let chord = oracle::chord::mean(body.volume(), body.area());
            checks.exact(&case, outcome.mean_free_path(), chord);
            checks.exact(
                &format!("I2 {name}, reflectance {reflectance}"),
                outcome.mean_path(),
                chord / (1.0 - reflectance),
            );
        }
    }
    checks.finish();
}

/// I7 and I12: mean irradiance Φ/[S(1−ρ)] and mean strikes 1/(1−ρ), for any source.
///
/// Weights make both almost certain: only roulette scatters them, so the resolution is far below a percent.
fn mean_irradiance(budget: Budget) {
    let mut checks = Checks::new("I7 and I12", 1e-3);
    for reflectance in [0.3, 0.9] {
        for (name, body) in bodies(reflectance) {
            let inside = if name == "L" {
                DVec3::new(0.45, 0.4, 0.1)
            } else {
                DVec3::new(0.2, 0.1, 0.15)
            };
            for (kind, source) in [
                ("walls", Source::walls()),
                ("volume", Source::volume()),
                ("point", Source::point(inside)),
                (
                    "beam",
                    Source::beam(inside, DVec3::new(0.3, -0.2, 0.9)).divergence(0.1),
                ),
            ] {
                let case = format!("I7 {name}, reflectance {reflectance}, {kind}");
                let outcome = budget.run(
                    &case,
                    PHOTONS / 2,
                    &Experiment::new(&body, source.flux(5.0)),
                );
                let strikes: Measured = outcome.mean_strikes().into();
                checks.exact(
                    &format!("{case}: strikes"),
                    strikes,
                    1.0 / (1.0 - reflectance),
                );
                let incident: f64 = outcome
                    .fluxes()
                    .iter()
                    .map(|flux| flux.incident.value)
                    .sum();
                checks.identical(&case, incident / (5.0 * strikes.value), 1.0, 1e-9);
            }
        }
    }
    checks.finish();
}

/// Roulette takes as much as it gives: a gain wrong by a hundredth shifts the mean strikes by 3·10⁻⁶ only.
fn roulette_balances(budget: Budget) {
    let mut checks = Checks::new("I12, fine", 1e-6);
    let body = cuboid([1.0; 3], lambertian(0.3));
    let outcome = budget.run(
        "roulette",
        20 * PHOTONS,
        &Experiment::new(&body, Source::walls()),
    );
    checks.exact("strikes", outcome.mean_strikes(), 1.0 / 0.7);
    checks.finish();
}

/// I7 as lighting practice has it: indirect illuminance in a closed room (CIE 171:2006 style, from memory).
fn closed_room(budget: Budget) {
    let mut checks = Checks::new("closed room", 0.002);
    for entry in records("lighting.closed_room") {
        let edge = (entry.number("S_m2") / 6.0).sqrt();
        let room = cuboid([edge; 3], lambertian(entry.number("rho")));
        let lamp = Source::point(DVec3::new(0.5, -0.3, 1.2)).flux(entry.number("phi_lm"));
        let outcome = budget.run(&entry.id, PHOTONS / 2, &Experiment::new(&room, lamp));
        let fluxes = outcome.fluxes();
        let indirect: f64 = fluxes
            .iter()
            .map(|flux| flux.incident.value - flux.direct.value)
            .sum();
        // All that is direct is certain, so the scatter is that of the strikes.
        let scatter = Measured::from(outcome.mean_strikes()).scaled(entry.number("phi_lm"));
        let indirect = Measured {
            value: indirect,
            ..scatter
        };
        checks.against(entry, indirect.scaled(1.0 / entry.number("S_m2")));
    }
    checks.assert_ran("lighting.closed_room", 6);
    checks.finish();
}

/// I15: a box whose sides are perfect mirrors acts as two infinite plates.
fn infinite_plates(budget: Budget) {
    let mut checks = Checks::new("I15", 0.01);
    for entry in records("plates") {
        for size in [[1.0, 1.0, 1.0], [0.5, 2.0, 3.0]] {
            let plates = cuboid(size, mirror(1.0));
            let plates = plates
                .with_coating("z-", lambertian(entry.number("rho1")))
                .unwrap();
            let plates = plates
                .with_coating("z+", lambertian(entry.number("rho2")))
                .unwrap();
            let case = format!("{} {size:?}", entry.id);
            let outcome = budget.run(
                &case,
                PHOTONS / 2,
                &Experiment::new(&plates, Source::wall("z-")),
            );
            let plate = if entry.id.ends_with("absorbed2") {
                "z+"
            } else {
                "z-"
            };
            checks.against(entry, outcome.flux(plate).unwrap().absorbed);
        }
    }
    checks.assert_ran("plates", 4);
    checks.finish();
}

/// I4: `E_fill(s) = (1−ρ)/⟨l⟩ ∫ₛ^∞ E_wall ds`, where the integral is what a switched-off lamp leaves behind.
///
/// It follows from time reversal, so also for mirror-like and mixed walls, whose laws are reciprocal.
fn fill_and_wall(budget: Budget) {
    let mut checks = Checks::new("I4", 0.02);
    for (name, body, reflectance) in [
        ("cube", cuboid([1.0; 3], lambertian(0.8)), 0.8),
        ("mixed box", cuboid([1.0, 1.5, 0.7], mixed(0.7, 0.6)), 0.7),
        (
            "prism",
            Enclosure::prism(5, 1.0, 1.5)
                .unwrap()
                .coated(lambertian(0.5)),
            0.5,
        ),
    ] {
        let paths = [0.0, 0.5, 1.0, 2.0, 4.0];
        let run = |kind: &str, source: Source| {
            let experiment = Experiment::new(&body, source).time(after_paths(&paths));
            budget.run(&format!("I4 {name} {kind}"), 2 * PHOTONS, &experiment)
        };
        let (fill, wall) = (run("fill", Source::volume()), run("wall", Source::walls()));
        let chord = oracle::chord::mean(body.volume(), body.area());
        for (edge, s) in paths.iter().enumerate().skip(1) {
            let left = curve_at(&wall.switch_off(), edge)
                .scaled(SPEED_OF_LIGHT * (1.0 - reflectance) / chord);
            checks.equal(&format!("I4 {name}, path {s}"), decay_at(&fill, edge), left);
        }
    }
    checks.finish();
}

/// I5: the initial slope of `E_fill` is −(1−ρ)S/(4V) for any mixture of laws.
///
/// Two loss rates over h and 2h, D(h) = [1 − E(h)]/h, extrapolated as 2 D(h) − D(2h), lose the term in h. What is left
/// is of the order of (1−ρ)(h/⟨l⟩)², at most 10⁻³, which counts as the tolerance.
fn initial_slope(budget: Budget) {
    let mut checks = Checks::new("I5", 0.02);
    for reflectance in [0.5, 0.9] {
        for (name, body) in bodies(reflectance) {
            let h = 0.04 * body.mean_chord();
            let case = format!("I5 {name}, reflectance {reflectance}");
            // Two runs, so that their uncertainties are independent; what happens after the edge is of no interest.
            let loss_rate = |path: f64| {
                let experiment = Experiment::new(&body, Source::volume());
                let experiment = experiment.time(after_paths(&[0.0, path])).path_limit(path);
                let outcome =
                    budget.run(&format!("{case}, path {path}"), 10 * PHOTONS, &experiment);
                let left = decay_at(&outcome, 1);
                Measured {
                    value: (1.0 - left.value) / path,
                    u: left.u / path,
                    ..left
                }
            };
            let slope = loss_rate(h)
                .scaled(2.0)
                .plus(loss_rate(2.0 * h).scaled(-1.0));
            checks.near(&case, slope, (1.0 - reflectance) / body.mean_chord(), 1e-3);
        }
    }
    checks.finish();
}

/// I8: between perfect walls isotropic uniform light stays so: an area A gets s A/(4V) in strikes over the path s.
///
/// Photons end at their first strike after the limit. In a steady field this one is distributed like the first strike
/// after the start, so without the direct strikes the count is that of the path itself.
fn perfect_walls(budget: Budget) {
    let mut checks = Checks::new("I8", 0.01);
    let path = 30.0;
    for (name, body) in bodies(1.0) {
        let case = format!("I8 {name}");
        let experiment = Experiment::new(&body, Source::volume()).path_limit(path);
        let outcome = budget.run(&case, PHOTONS, &experiment);
        for row in outcome.rows() {
            let share = path * row.area / (4.0 * body.volume());
            let incident = format!("{}.incident", row.name);
            let direct = format!("{}.direct", row.name);
            let later = outcome
                .estimate(|get| get(&incident) - get(&direct))
                .unwrap();
            checks.exact(&format!("{case} {}", row.name), later, share);
        }
        checks.identical(
            &format!("{case} cut"),
            outcome.ledger().cut.value,
            1.0,
            1e-12,
        );
    }
    checks.finish();
}

/// The definition of the stored energy: Φ · mean path · n/c, exact within one run.
fn stored_energy(budget: Budget) {
    let mut checks = Checks::new("stored energy", 0.01);
    for (name, body) in bodies(0.7) {
        for (index, absorption) in [(1.0, 0.0), (1.5, 0.3)] {
            let filled = body
                .clone()
                .with_medium(Medium::new(index, absorption).unwrap());
            let case = format!("stored energy {name}, index {index}");
            let experiment = Experiment::new(&filled, Source::walls().flux(3.0));
            let outcome = budget.run(&case, PHOTONS / 4, &experiment);
            let path = outcome.mean_path().value;
            checks.identical(
                &case,
                outcome.stored_energy().value,
                3.0 * path * index / SPEED_OF_LIGHT,
                1e-12,
            );
        }
    }
    checks.finish();
}

statistical!(
    mean_free_path,
    mean_irradiance,
    roulette_balances,
    closed_room,
    infinite_plates,
    fill_and_wall,
    initial_slope,
    perfect_walls,
    stored_energy,
);
