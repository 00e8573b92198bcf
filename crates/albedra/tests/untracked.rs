//! No photon is lost, in bodies of any proportions, size and place.
#![expect(
    clippy::disallowed_methods,
    reason = "the last digits of a body are of no concern"
)]

use albedra::{Coating, Enclosure, Experiment, Mesh, Outcome, Source};
use glam::DVec3;

/// Coatings from Lambertian to mirror.
fn coatings() -> [Coating; 3] {
    [0.0, 0.5, 1.0].map(|share| Coating::mixed(0.97, share).unwrap())
}

/// A mesh moved, scaled and without what tells its kernel that it is convex.
fn moved(mesh: &Mesh, scale: f64, by: f64) -> Mesh {
    let mut mesh = mesh.clone();
    for vertex in &mut mesh.vertices {
        *vertex = *vertex * scale + DVec3::new(by, -0.7 * by, 0.3 * by);
    }
    mesh
}

const L: [(f64, f64); 6] = [
    (0.0, 0.0),
    (2.0, 0.0),
    (2.0, 1.0),
    (1.0, 1.0),
    (1.0, 2.0),
    (0.0, 2.0),
];

/// A round body with a dent: triangles of all directions, not convex. Rings of `n` times `m` quadrilaterals.
fn dented_ball(n: u32, m: u32) -> Mesh {
    let mut mesh = Mesh::default();
    let wall = mesh.wall("shell");
    let tau = std::f64::consts::TAU;
    mesh.vertices.push(DVec3::new(0.0, 0.0, 0.35));
    for ring in 1..m {
        let (sine, cosine) = (0.5 * tau * f64::from(ring) / f64::from(m)).sin_cos();
        // The top is pressed in.
        let height = if cosine > 0.6 { 1.2 - cosine } else { cosine };
        for k in 0..n {
            let (y, x) = (tau * f64::from(k) / f64::from(n)).sin_cos();
            mesh.vertices.push(DVec3::new(sine * x, sine * y, height));
        }
    }
    mesh.vertices.push(DVec3::new(0.0, 0.0, -1.0));
    let at = |ring: u32, k: u32| 1 + (ring - 1) * n + k % n;
    let last = (m - 1) * n + 1;
    for k in 0..n {
        mesh.push_facet(&[0, at(1, k), at(1, k + 1)], wall);
        for ring in 1..m - 1 {
            mesh.push_facet(&[at(ring, k), at(ring + 1, k), at(ring + 1, k + 1)], wall);
            mesh.push_facet(&[at(ring, k), at(ring + 1, k + 1), at(ring, k + 1)], wall);
        }
        mesh.push_facet(&[last, at(m - 1, k + 1), at(m - 1, k)], wall);
    }
    mesh
}

/// Bodies for the planes kernel.
fn convex() -> Vec<(String, Enclosure)> {
    let mut all = Vec::new();
    for size in [
        [1.0, 1.0, 1.0],
        [1.0, 1.0, 1e-6],
        [1e-6, 1e-6, 1.0],
        [1.0, 1e-3, 1e-6],
        [1e-9, 1.0, 1.0],
    ] {
        all.push((format!("cuboid {size:?}"), Enclosure::cuboid(size).unwrap()));
    }
    for scale in [1e-6, 1e4] {
        let size = [1.2, 0.8, 0.5].map(|x| x * scale);
        all.push((
            format!("cuboid of {scale} m"),
            Enclosure::cuboid(size).unwrap(),
        ));
    }
    all.push(("prism".to_owned(), Enclosure::prism(17, 1.0, 0.4).unwrap()));
    all.push((
        "needle of 3 sides".to_owned(),
        Enclosure::prism(3, 1e-5, 3.0).unwrap(),
    ));
    let far = moved(Enclosure::cuboid([1.0, 0.6, 0.3]).unwrap().mesh(), 1.0, 1e4);
    all.push((
        "cuboid far away".to_owned(),
        Enclosure::from_mesh(far).unwrap(),
    ));
    all
}

/// Bodies for the facets kernel.
fn meshes() -> Vec<(String, Enclosure)> {
    let mut all = Vec::new();
    for (name, outline, height) in [
        ("L", L.to_vec(), 1.0),
        ("thin L", L.to_vec(), 1e-6),
        ("long L", L.map(|(x, y)| (1e-6 * x, 1e-6 * y)).to_vec(), 1.0),
        (
            "narrow notch",
            vec![(0.0, 0.0), (1.0, 0.0), (0.5, 1e-6), (0.5, 0.5), (0.0, 1.0)],
            0.5,
        ),
        (
            "thin wedge",
            vec![(0.0, 0.0), (1.0, 0.0), (1.0, 1e-5), (0.5, 1e-7)],
            0.1,
        ),
    ] {
        all.push((
            name.to_owned(),
            Enclosure::extruded(&outline, height).unwrap(),
        ));
    }
    let (l, ball) = (
        Enclosure::extruded(&L, 0.7).unwrap().mesh().clone(),
        dented_ball(24, 16),
    );
    for (name, mesh) in [("L", l), ("dented ball", ball)] {
        for (scale, by) in [
            (1.0, 0.0),
            (1.0, 1e4),
            (1e-6, 0.0),
            (1e4, 0.0),
            (1e-3, 10.0),
        ] {
            let body = Enclosure::from_mesh(moved(&mesh, scale, by)).unwrap();
            all.push((format!("{name} of {scale} m, {by} m away"), body));
        }
    }
    all
}

/// Traces until so many strikes are done in each body; gives all strikes.
fn strikes(bodies: &[(String, Enclosure)], wanted: u64) -> u64 {
    let mut all = 0;
    for (name, body) in bodies {
        for coating in coatings() {
            let enclosure = body.clone().coated(coating);
            let experiment = Experiment::new(&enclosure, Source::walls()).and(Source::volume());
            // Down to a weight of 2⁻¹², 0.97 takes some 270 strikes.
            let photons = wanted / 3 / 270 + 1;
            let outcome = experiment.trace(photons).seed(13).run().unwrap();
            nothing_is_lost(name, &outcome);
            all += outcome.counters().strikes;
        }
    }
    all
}

#[track_caller]
fn nothing_is_lost(name: &str, outcome: &Outcome) {
    let counters = outcome.counters();
    assert_eq!(counters.untracked, 0, "{name}: {counters:?}");
    let ledger = outcome.ledger();
    assert_eq!(ledger.untracked.value, 0.0, "{name}");
    assert!(ledger.closes(), "{name}");
    eprintln!(
        "{name}: {} strikes, {} tried again",
        counters.strikes, counters.retried
    );
}

#[test]
fn no_photon_is_lost_between_planes() {
    let bodies = convex();
    let wanted = 10_000_000;
    let all = strikes(&bodies, wanted / bodies.len() as u64);
    assert!(all > wanted / 2, "{all}");
}

#[test]
fn no_photon_is_lost_between_facets() {
    let bodies = meshes();
    let wanted = 10_000_000;
    let all = strikes(&bodies, wanted / bodies.len() as u64);
    assert!(all > wanted / 2, "{all}");
}

#[test]
#[ignore = "long: cargo xtask stats"]
fn no_photon_is_lost_in_a_hundred_million_strikes() {
    for bodies in [convex(), meshes()] {
        let all = strikes(&bodies, 100_000_000 / bodies.len() as u64);
        assert!(all > 50_000_000, "{all}");
    }
}

#[test]
fn beams_into_edges_and_corners_arrive() {
    // Exactly into an edge, into a corner, along a diagonal from corner to corner, along a wall.
    let beams = [
        ([0.0, 0.0, 0.0], [1.0, 1.0, 0.0]),
        ([0.0, 0.0, 0.0], [1.0, 1.0, 1.0]),
        ([-0.5, -0.5, -0.5], [1.0, 1.0, 1.0]),
        ([0.0, 0.0, 0.5], [1.0, 0.0, 0.0]),
        ([0.0, 0.5, 0.5], [1.0, 0.0, 0.0]),
        ([0.5, 0.5, 0.5], [1.0, 1.0, 1.0]),
        ([0.5, 0.0, 0.0], [1.0, 0.0, 0.0]),
    ];
    for coating in coatings() {
        for (position, direction) in beams {
            let cube = Enclosure::cuboid([1.0; 3]).unwrap().coated(coating);
            let outcome = Experiment::new(&cube, Source::beam(position, direction))
                .map("x+", (2, 2))
                .trace(500)
                .run()
                .unwrap();
            nothing_is_lost(&format!("{position:?} {direction:?}"), &outcome);
        }
        let l = Enclosure::extruded(&L, 1.0).unwrap().coated(coating);
        for (position, direction) in [
            ([0.5, 0.5, 0.0], [1.0, 1.0, 0.0]),
            ([0.0, 0.0, -0.5], [1.0, 1.0, 1.0]),
            ([0.5, 0.5, 0.0], [0.5, 0.5, 0.5]),
            ([2.0, 1.0, 0.0], [-1.0, 0.0, 0.0]),
            ([0.5, 1.0, 0.0], [1.0, 0.0, 0.0]),
            ([1.0, 0.0, 0.5], [0.0, 1.0, 0.0]),
            ([1.0, 1.0, 0.0], [0.0, 0.0, 1.0]),
            ([1.0, 1.0, 0.0], [1.0, 1.0, 0.0]),
        ] {
            let outcome = Experiment::new(&l, Source::beam(position, direction))
                .map("side 3", (2, 2))
                .trace(500)
                .run()
                .unwrap();
            nothing_is_lost(&format!("L: {position:?} {direction:?}"), &outcome);
        }
    }
}

#[test]
fn flights_as_long_as_the_body_stay_in_the_histogram() {
    // The flight from end to end is as long as the diagonal to the last bit.
    let needle = Enclosure::cuboid([1e-9, 1e-9, 1.0])
        .unwrap()
        .coated(Coating::mirror(0.9).unwrap());
    let outcome = Experiment::new(&needle, Source::beam([0.0, 0.0, -0.5], [0.0, 0.0, 1.0]))
        .trace(500)
        .run()
        .unwrap();
    let histogram = outcome.flight_histogram();
    assert_eq!(histogram.share.last(), Some(&1.0));
    assert_eq!(outcome.mean_free_path().value, 1.0);
}

#[test]
fn time_grids_with_an_odd_number_of_bins_hold_what_is_late() {
    let cube = Enclosure::cuboid([1.0; 3])
        .unwrap()
        .coated(Coating::lambertian(0.9).unwrap());
    for bins in 1..9 {
        let grid = albedra::TimeGrid::new(1e-9, bins).unwrap();
        let outcome = Experiment::new(&cube, Source::volume())
            .time(grid)
            .trace(1000)
            .run()
            .unwrap();
        assert!(outcome.decay().energy[bins] > 0.5);
    }
}

#[test]
fn walls_just_ahead_on_needles_are_met() {
    // This photon starts 6e-12 m before a wall of 1e-6 m by 1 m, whose distance comes out 1e-11 m too small.
    let outline = L.map(|(x, y)| (1e-6 * x, 1e-6 * y));
    let needle = Enclosure::extruded(&outline, 1.0)
        .unwrap()
        .coated(Coating::absorber());
    let position = [0.0, 1.999_994_359_445_574e-6, -0.023_825_519_329_432_013];
    let direction = [
        0.572_611_413_264_314_3,
        0.507_169_740_451_002_9,
        0.644_123_453_827_219_9,
    ];
    let outcome = Experiment::new(&needle, Source::beam(position, direction))
        .trace(64)
        .run()
        .unwrap();
    nothing_is_lost("needle", &outcome);
    assert_eq!(outcome.flux("side 5").unwrap().absorbed.value, 1.0);
}

#[test]
fn lamps_on_walls_edges_and_a_little_outside_lose_nothing() {
    // Points within 1e-9 of the diagonal count as inside; half of their light leads outward at once.
    let bodies = [
        (
            "cube",
            Enclosure::cuboid([1.0; 3]).unwrap(),
            [0.5, 0.5, 0.5],
        ),
        ("L", Enclosure::extruded(&L, 1.0).unwrap(), [2.0, 1.0, 0.5]),
        (
            "L's notch",
            Enclosure::extruded(&L, 1.0).unwrap(),
            [1.0, 1.0, 0.5],
        ),
    ];
    for (name, body, [x, y, z]) in bodies {
        let enclosure = body.coated(Coating::mixed(0.5, 0.5).unwrap());
        for off in [0.0, 5e-10, -5e-10] {
            for position in [
                [x + off, 0.3, 0.1],
                [x + off, y + off, 0.1],
                [x + off, y + off, z + off],
                [0.3, 0.1, z + off],
            ] {
                let experiment = Experiment::new(&enclosure, Source::point(position));
                let outcome = experiment.trace(2000).run().unwrap();
                nothing_is_lost(&format!("{name}: {position:?}"), &outcome);
            }
        }
    }
}
