//! Irradiance cell by cell.

use std::f64::consts::PI;

use albedra::{Coating, Experiment, Map, Source};
use albedra_tests::oracle::quadrature::Rule;
use albedra_tests::rig::{FACES, cuboid, lambertian};
use albedra_tests::{Budget, Checks, Measured, records, statistical};
use glam::DVec3;

fn cell(map: &Map, index: usize) -> Measured {
    let (value, u) = (map.irradiance[index], map.u[index]);
    Measured {
        value,
        u,
        degrees_of_freedom: map.degrees_of_freedom,
    }
}

/// A lamp off the centre of a black box: E = Φ cos θ/(4π r²), averaged over each cell by quadrature.
fn point_in_a_black_box(budget: Budget) {
    let mut checks = Checks::new("maps of direct light", 0.05);
    let lamp = DVec3::new(0.21, -0.34, 0.12);
    let body = cuboid([1.2, 1.5, 0.9], Coating::absorber());
    let cells = (4, 3);
    let mut experiment = Experiment::new(&body, Source::point(lamp).flux(5.0));
    for face in FACES {
        experiment = experiment.map(face, cells);
    }
    let outcome = budget.run("point in a black box", 1_000_000, &experiment);
    let rule = Rule::new(12);
    for wall in body.walls() {
        let (map, frame) = (outcome.map(&wall.name).unwrap(), wall.frame.unwrap());
        let irradiance = |u: f64, v: f64| {
            let way = frame.origin + u * frame.u + v * frame.v - lamp;
            -5.0 / (4.0 * PI) * way.dot(frame.normal) / way.length().powi(3)
        };
        let mut sum = 0.0;
        for j in 0..cells.1 {
            for i in 0..cells.0 {
                let (u, v) = (&map.u_edges[i..=i + 1], &map.v_edges[j..=j + 1]);
                let flux = rule.integrate(v[0], v[1], |v| {
                    rule.integrate(u[0], u[1], |u| irradiance(u, v))
                });
                let (area, index) = ((u[1] - u[0]) * (v[1] - v[0]), j * cells.0 + i);
                let id = format!("{} cell ({i}, {j})", wall.name);
                checks.identical(&format!("{id} area"), map.area[index], area, 1e-12);
                checks.exact(&id, cell(&map, index), flux / area);
                sum += map.irradiance[index] * area;
            }
        }
        let incident = outcome.flux(&wall.name).unwrap().incident.value;
        checks.identical(&format!("{} cells add up", wall.name), sum, incident, 1e-12);
    }
    checks.finish();
}

/// Irradiance at the centres of faces of grey cubes, from the centre cell of 9 × 9.
///
/// The cell's mean differs from the value at its centre by h²/24 of the Laplacian; with h = 1/9 and a Laplacian of at
/// most 8 times the irradiance (it varies by less than its double over half an edge) by 0.4 %, counted as tolerance.
fn centres_of_faces(budget: Budget) {
    let mut checks = Checks::new("irradiance at the centres of faces", 0.03);
    for name in ["cube_mixed_face", "cube_uniform_face"] {
        let entries = records(&format!("box.{name}.centre_irradiance"));
        let mut body = cuboid([1.0; 3], Coating::absorber());
        for (face, reflectance) in FACES.iter().zip(entries[0].numbers("rho_faces")) {
            body = body.with_coating(face, lambertian(reflectance)).unwrap();
        }
        let mut experiment = Experiment::new(&body, Source::wall("z-"));
        for face in FACES {
            experiment = experiment.map(face, (9, 9));
        }
        let outcome = budget.run(&format!("maps of {name}"), 1_000_000, &experiment);
        for entry in entries {
            let centre = cell(&outcome.map(entry.text("face")).unwrap(), 40);
            checks.near_record(entry, centre, 4e-3);
        }
    }
    checks.assert_ran("box.cube_mixed_face.centre_irradiance", 6);
    checks.assert_ran("box.cube_uniform_face.centre_irradiance", 6);
    checks.finish();
}

statistical!(point_in_a_black_box, centres_of_faces);
