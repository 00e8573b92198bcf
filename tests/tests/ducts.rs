//! Mirror-like rectangular ducts between two openings.

use albedra::{Coating, Enclosure, Experiment, Source};
use albedra_tests::rig::mirror;
use albedra_tests::{Budget, Checks, oracle, records, statistical};
use glam::DVec3;

const PHOTONS: u64 = 400_000;

/// A duct along one of the axes; `ends` are openings, or absorbers if not `open`.
fn duct(size: [f64; 3], ends: [&str; 2], reflectance: f64, open: bool) -> Enclosure {
    let mut duct = Enclosure::cuboid(size).unwrap().coated(mirror(reflectance));
    for end in ends {
        let ended = if open {
            duct.opened(end)
        } else {
            duct.with_coating(end, Coating::absorber())
        };
        duct = ended.unwrap();
    }
    duct
}

fn parallel_light(budget: Budget) {
    let mut checks = Checks::new("mirror ducts, parallel light", 0.002);
    for entry in records("mirror_duct") {
        let (a, b, length) = (entry.number("a"), entry.number("b"), entry.number("L"));
        let (theta, phi) = (
            entry.number("theta_deg").to_radians(),
            entry.number("phi_deg").to_radians(),
        );
        let (lateral, axial) = theta.sin_cos();
        let (sine, cosine) = phi.sin_cos();
        // Along z with a along x, and along x with a along y: no axis is special.
        let along_z = DVec3::new(lateral * cosine, lateral * sine, axial);
        let along_x = DVec3::new(axial, lateral * cosine, lateral * sine);
        for (size, [from, to], direction) in [
            ([a, b, length], ["z-", "z+"], along_z),
            ([length, a, b], ["x-", "x+"], along_x),
        ] {
            for open in [true, false] {
                let duct = duct(size, [from, to], entry.number("R"), open);
                let case = format!("{} {from} open {open}", entry.id);
                let source = Source::wall(from).parallel(direction);
                let outcome = budget.run(&case, PHOTONS, &Experiment::new(&duct, source));
                let (there, back) = (outcome.flux(to).unwrap(), outcome.flux(from).unwrap());
                checks.against(entry, if open { there.escaped } else { there.absorbed });
                checks.identical(
                    &format!("{case}: nothing comes back"),
                    back.incident.value,
                    0.0,
                    0.0,
                );
            }
        }
    }
    checks.assert_ran("mirror_duct", 5);
    checks.finish();
}

fn lambertian_light(budget: Budget) {
    let mut checks = Checks::new("mirror ducts, Lambertian light", 0.005);
    for (a, b, length, reflectance) in [
        (1.0, 1.0, 5.0, 0.9),
        (1.0, 1.5, 6.0, 0.92),
        (2.0, 1.0, 3.0, 0.95),
        (1.0, 1.0, 2.0, 0.3),
    ] {
        let duct = duct([a, b, length], ["z-", "z+"], reflectance, true);
        let case = format!("duct {a} x {b} x {length}, R {reflectance}");
        let outcome = budget.run(&case, PHOTONS, &Experiment::new(&duct, Source::wall("z-")));
        let passed = oracle::mirror::duct_lambertian([a, b], length, reflectance);
        checks.exact(&case, outcome.flux("z+").unwrap().escaped, passed);
        let absorbed = outcome.ledger().absorbed;
        checks.exact(&format!("{case}: absorbed"), absorbed, 1.0 - passed);
    }
    checks.finish();
}

statistical!(parallel_light, lambertian_light);
