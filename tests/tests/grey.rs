//! Boxes with grey walls, each with its own reflectance, against converged radiosity.

use albedra::{Coating, Enclosure, Experiment, Source};
use albedra_tests::rig::{FACES, lambertian};
use albedra_tests::{Budget, Checks, Record, records, statistical};
use glam::DVec3;

/// Runs the box of the records below `prefix`; walls without reflectance are openings if `open`, else absorbers.
fn case(budget: Budget, checks: &mut Checks, prefix: &str, photons: u64, open: bool) {
    let entries: Vec<_> = records(prefix)
        .into_iter()
        .filter(|entry| !entry.id.contains("centre"))
        .collect();
    let size = entries[0].numbers("box");
    let reflectances = entries[0].numbers("rho_faces");
    let mut chamber = Enclosure::cuboid([size[0], size[1], size[2]]).unwrap();
    for (face, &reflectance) in FACES.iter().zip(&reflectances) {
        chamber = match (reflectance == 0.0, open) {
            (true, true) => chamber.opened(face),
            (true, false) => chamber.with_coating(face, Coating::absorber()),
            _ => chamber.with_coating(face, lambertian(reflectance)),
        }
        .unwrap();
    }
    let experiment = Experiment::new(&chamber, source(entries[0], &size));
    let outcome = budget.run(&format!("{prefix} open {open}"), photons, &experiment);
    for entry in entries {
        let face = entry.text("face");
        let index = FACES.iter().position(|name| *name == face).unwrap();
        let flux = outcome.flux(face).unwrap();
        let opening = open && reflectances[index] == 0.0;
        if entry.value == 0.0 {
            checks.identical(&entry.id, flux.absorbed.value, 0.0, 0.0);
        } else {
            checks.against(entry, if opening { flux.escaped } else { flux.absorbed });
        }
    }
}

fn source(entry: &Record, size: &[f64]) -> Source {
    let source = entry.inputs["source"].as_array().unwrap();
    match source[0].as_str().unwrap() {
        "face" => Source::wall(FACES[usize::try_from(source[1].as_u64().unwrap()).unwrap()]),
        "point" => {
            let place: Vec<f64> = source[1]
                .as_array()
                .unwrap()
                .iter()
                .map(|x| x.as_f64().unwrap())
                .collect();
            let centred = |i: usize| place[i] - 0.5 * size[i]; // The records have a corner at the origin.
            Source::point(DVec3::new(centred(0), centred(1), centred(2)))
        }
        other => panic!("{other}"),
    }
}

fn closed_boxes(budget: Budget) {
    let mut checks = Checks::new("closed grey boxes", 0.01);
    for name in [
        "cube_mixed_face",
        "cube_mixed_point",
        "cube_uniform_face",
        "room_point",
        "room_ceiling",
    ] {
        case(budget, &mut checks, &format!("box.{name}"), 400_000, false);
    }
    case(
        budget,
        &mut checks,
        "box.cube_uniform_offpoint",
        400_000,
        false,
    );
    checks.assert_ran("box", 36);
    checks.finish();
}

fn boxes_with_openings(budget: Budget) {
    let mut checks = Checks::new("grey boxes with open or black ends", 0.01);
    for name in [
        "mixbox_open_ends",
        "duct_white_L1",
        "duct_white_L2",
        "duct_white_L5",
        "open_box_lambert_in",
    ] {
        for open in [true, false] {
            case(budget, &mut checks, &format!("box.{name}"), 400_000, open);
        }
    }
    // The sides of the white ducts absorb exactly nothing and are compared apart: 6 + 3 · 2 + 6 are left.
    checks.assert_ran("box", 18);
    checks.finish();
}

statistical!(closed_boxes, boxes_with_openings);
