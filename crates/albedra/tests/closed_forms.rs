//! A first alarm: a few numbers that are known exactly. The full set is a package of its own.
#![expect(
    clippy::disallowed_methods,
    reason = "what is expected need not have the same bits everywhere"
)]

use albedra::{Coating, Enclosure, Estimate, Experiment, Medium, Outcome, Source, TimeGrid};

/// Fails below a chance of 7e-6 by Student's t; prints the zeta score.
#[track_caller]
fn agrees(what: &str, estimate: Estimate, expected: f64) {
    let zeta = estimate.zeta(expected, 0.0);
    eprintln!("{what}: {estimate}, expected {expected}, zeta {zeta:+.2}");
    assert!(
        estimate.u > 0.0 && estimate.u < 0.05 * expected.abs(),
        "{what}: {estimate}"
    );
    assert!(
        estimate.p_value(expected, 0.0) > 7e-6,
        "{what}: {estimate}, expected {expected}, zeta {zeta:+.2}"
    );
}

fn run(enclosure: &Enclosure, source: Source, photons: u64) -> Outcome {
    Experiment::new(enclosure, source)
        .trace(photons)
        .seed(1)
        .run()
        .unwrap()
}

/// Light that starts on Lambertian walls by area stays uniform over them in any closed body of one coating: the mean
/// free path is 4V/S (Czuber 1884), strikes follow a geometric series, and the irradiance is Φ/(S(1 − ρ)).
#[track_caller]
fn is_uniform(name: &str, body: Enclosure, rho: f64, photons: u64) {
    let body = body.coated(Coating::lambertian(rho).unwrap());
    let outcome = run(&body, Source::walls().flux(3.0), photons);
    agrees(
        &format!("{name}, mean free path"),
        outcome.mean_free_path(),
        body.mean_chord(),
    );
    agrees(
        &format!("{name}, mean path"),
        outcome.mean_path(),
        body.mean_chord() / (1.0 - rho),
    );
    let strikes = outcome.mean_strikes();
    // Without roulette's noise it would be exact; the deviation is what roulette took or gave.
    assert!(
        (strikes.value - 1.0 / (1.0 - rho)).abs() < 5.0 * strikes.u + 1e-9,
        "{name}: {strikes}"
    );
    for row in outcome.rows() {
        let irradiance = outcome.irradiance(&row.name).unwrap();
        agrees(
            &format!("{name}, {}", row.name),
            irradiance,
            3.0 / (body.area() * (1.0 - rho)),
        );
    }
}

#[test]
fn uniform_bodies() {
    let cube = Enclosure::cuboid([1.0; 3]).unwrap();
    assert_eq!(cube.mean_chord(), 4.0 / 6.0);
    is_uniform("cube", cube, 0.9, 300_000);
    is_uniform(
        "box",
        Enclosure::cuboid([1.2, 0.8, 0.5]).unwrap(),
        0.5,
        300_000,
    );
    is_uniform(
        "prism",
        Enclosure::prism(5, 0.7, 1.1).unwrap(),
        0.8,
        200_000,
    );
    let l = [
        (0.0, 0.0),
        (2.0, 0.0),
        (2.0, 1.0),
        (1.0, 1.0),
        (1.0, 2.0),
        (0.0, 2.0),
    ];
    is_uniform("L", Enclosure::extruded(&l, 1.0).unwrap(), 0.7, 100_000);
}

#[test]
fn opposite_squares_exchange_a_fifth() {
    // View factor of opposite faces of a cube, 0.199 824 895 698 (Hottel 1931, evaluated with the closed form).
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::absorber());
    let outcome = run(&cube, Source::wall("z-"), 500_000);
    agrees(
        "opposite",
        outcome.flux("z+").unwrap().incident,
        0.199_824_895_698_387,
    );
    agrees(
        "adjacent",
        outcome.flux("x+").unwrap().incident,
        (1.0 - 0.199_824_895_698_387) / 4.0,
    );
    assert_eq!(outcome.flux("z-").unwrap().incident.value, 0.0);
}

#[test]
fn absorption_multiplies_the_decay() {
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::lambertian(0.9).unwrap());
    let (mu, index) = (0.3, 1.5);
    let grid = || TimeGrid::new(60e-9, 12).unwrap();
    let energy = |medium: Medium| {
        let enclosure = cube.clone().with_medium(medium);
        Experiment::new(&enclosure, Source::walls())
            .time(grid())
            .trace(200_000)
            .seed(2)
            .run()
            .unwrap()
            .decay()
    };
    let clear = energy(Medium::new(index, 0.0).unwrap());
    let gas = energy(Medium::new(index, mu).unwrap());
    for k in 1..=12 {
        let path = clear.edges[k] * albedra::SPEED_OF_LIGHT / index;
        let factor = (-mu * path).exp();
        let expected = factor * clear.energy[k];
        // Both runs draw on photons of the same numbers, which share their first draws alone; taken as independent.
        let u = (gas.u[k].powi(2) + (factor * clear.u[k]).powi(2)).sqrt();
        let zeta = (gas.energy[k] - expected) / u;
        eprintln!(
            "{path:.2} m: {:.3e}, expected {expected:.3e}, zeta {zeta:+.2}",
            gas.energy[k]
        );
        assert!(zeta.abs() < 5.0, "{path} m: zeta {zeta:+.2}");
    }
}

#[test]
fn what_walls_leave_the_medium_takes() {
    // Mirrors of reflectance 1: all is taken by the medium, after a mean path of 1/α.
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::mirror(1.0).unwrap());
    let enclosure = cube.with_medium(Medium::new(1.0, 0.5).unwrap());
    let outcome = run(&enclosure, Source::volume(), 20_000);
    let medium = outcome.ledger().medium;
    assert!((medium.value + outcome.ledger().roulette.value - 1.0).abs() < 1e-12);
    assert!((outcome.mean_path().value - 2.0 * medium.value).abs() < 1e-9);
}

#[test]
fn a_beam_between_mirrors_keeps_its_times() {
    // A ray along the axis strikes at 0.5 m, 1.5 m, 2.5 m …, losing a tenth each time.
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::mirror(0.9).unwrap());
    let metre = 1.0 / albedra::SPEED_OF_LIGHT;
    let experiment = Experiment::new(&cube, Source::beam([0.0; 3], [0.0, 0.0, 1.0]));
    let grid = TimeGrid::new(20.0 * metre, 20).unwrap();
    let outcome = experiment.time(grid).trace(64).run().unwrap();
    for (k, energy) in outcome.decay().energy.into_iter().enumerate() {
        let expected = 0.9_f64.powi(i32::try_from(k).unwrap());
        assert!(
            (energy - expected).abs() < 1e-12,
            "{k}: {energy} {expected}"
        );
    }
    // Upper wall first: 1 + 0.81 + …, lower wall 0.9 + 0.729 + …
    for (wall, expected) in [("z+", 1.0 / 0.19), ("z-", 0.9 / 0.19)] {
        let incident = outcome.flux(wall).unwrap().incident.value;
        assert!(
            (incident - expected).abs() < 1e-2,
            "{wall}: {incident} {expected}"
        );
    }
}
