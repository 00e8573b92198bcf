//! Bodies made of facets, against their own volume and area.

use albedra::{Coating, Enclosure, Experiment, Mesh, Source};
use albedra_tests::oracle::solid::Solid;
use albedra_tests::rig::lambertian;
use albedra_tests::{Budget, Checks, oracle, record, records, statistical};

const PHOTONS: u64 = 500_000;

fn enclosure(solid: &Solid, coating: Coating) -> Enclosure {
    let mesh = Mesh {
        vertices: solid.vertices.clone(),
        corners: solid.triangles.iter().flatten().copied().collect(),
        starts: (0..=solid.triangles.len())
            .map(|i| u32::try_from(3 * i).unwrap())
            .collect(),
        facet_walls: vec![0; solid.triangles.len()],
        walls: vec!["shell".to_owned()],
    };
    Enclosure::from_mesh(mesh).unwrap().coated(coating)
}

/// The four faces of a tetrahedron and the eight of an octahedron.
fn platonic_solids(budget: Budget) {
    let mut checks = Checks::new("chords of platonic solids", 0.02);
    for (prefix, solid) in [
        ("chord.regular_tetrahedron.edge1", Solid::tetrahedron(1.0)),
        ("chord.regular_octahedron.edge1", Solid::octahedron(1.0)),
    ] {
        let body = enclosure(&solid, Coating::absorber());
        let outcome = budget.run(prefix, PHOTONS, &Experiment::new(&body, Source::walls()));
        checks.against(record(&format!("{prefix}.mean")), outcome.mean_free_path());
        checks.against(record(&format!("{prefix}.l4")), outcome.flight_moment(4));
    }
    checks.assert_ran("chord", 4);
    checks.finish();
}

/// Spheres made of triangles: the mean chord is that of the polyhedron, not of the sphere.
fn spheres_of_triangles(budget: Budget) {
    let mut checks = Checks::new("spheres of triangles", 0.005);
    for entry in records("mesh.icosphere") {
        let solid = Solid::icosphere(entry.count("level"));
        for reflectance in [0.0, 0.8] {
            let body = enclosure(&solid, lambertian(reflectance));
            checks.identical(
                &format!("{} 4V/S", entry.id),
                body.mean_chord(),
                entry.value,
                1e-10,
            );
            let case = format!("{}, reflectance {reflectance}", entry.id);
            let outcome = budget.run(&case, PHOTONS / 5, &Experiment::new(&body, Source::walls()));
            checks.against(entry, outcome.mean_free_path());
            let path = entry.value / (1.0 - reflectance);
            checks.exact(&format!("I2 {case}"), outcome.mean_path(), path);
            checks.identical(
                &format!("{case}: untracked"),
                outcome.ledger().untracked.value,
                0.0,
                0.0,
            );
        }
    }
    checks.assert_ran("mesh.icosphere", 6);
    checks.finish();
}

/// Prisms inscribed in a cylinder, by the flight kernel that the enclosure chooses.
fn prisms(budget: Budget) {
    let mut checks = Checks::new("prisms", 0.005);
    for entry in records("mesh.prism") {
        let sides = entry.count("N");
        let body = Enclosure::prism(sides, 1.0, 2.0)
            .unwrap()
            .coated(Coating::absorber());
        checks.identical(
            &format!("{} 4V/S", entry.id),
            body.mean_chord(),
            entry.value,
            1e-12,
        );
        let outcome = budget.run(&entry.id, PHOTONS, &Experiment::new(&body, Source::walls()));
        checks.against(entry, outcome.mean_free_path());
        let (volume, area) = oracle::solid::prism(sides, 1.0, 2.0);
        let fourth = oracle::chord::fourth_moment(volume, area);
        checks.exact(
            &format!("{} l4", entry.id),
            outcome.flight_moment(4),
            fourth,
        );
    }
    checks.assert_ran("mesh.prism", 5);
    checks.finish();
}

statistical!(platonic_solids, spheres_of_triangles, prisms);
