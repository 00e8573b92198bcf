use std::time::{Duration, Instant};

use glam::{DQuat, DVec3};
use proptest::prelude::*;

use super::*;
use crate::geometry::Audit;
use crate::geometry::audit::fixtures::{
    cuboid, extruded, icosphere, joined, l_prism, octahedron, unit_cube,
};

fn triangles(corners: impl Iterator<Item = [DVec3; 3]>) -> Mesh {
    let mut mesh = Mesh {
        walls: vec!["shell".into()],
        ..Mesh::default()
    };
    for at in corners {
        let start = u32::try_from(mesh.vertices.len()).unwrap();
        mesh.vertices.extend(at);
        mesh.push_facet(&[start, start + 1, start + 2], 0);
    }
    mesh
}

/// An L with corners in the middle of its straight edges.
fn notched() -> Mesh {
    extruded(
        &[
            (0.0, 0.0),
            (1.0, 0.0),
            (2.0, 0.0),
            (2.0, 1.0),
            (1.5, 1.0),
            (1.0, 1.0),
            (1.0, 2.0),
            (0.0, 2.0),
        ],
        0.3,
    )
}

fn crossings(audit: &Audit) -> Vec<[usize; 2]> {
    let pair = |problem: &Problem| match problem {
        Problem::Intersection { facets, .. } => Some(*facets),
        _ => None,
    };
    audit.problems.iter().filter_map(pair).collect()
}

#[test]
fn crossing_boxes_name_pairs_and_positions() {
    let mesh = joined(
        &unit_cube(),
        &cuboid(DVec3::new(0.75, 0.0, 0.0), DVec3::new(1.0, 0.25, 0.25)),
    );
    let audit = mesh.audit();
    // The thin box comes out of x+ by its four long walls, which are facets 8 to 11.
    assert_eq!(
        crossings(&audit),
        [[1, 8], [1, 9], [1, 10], [1, 11]],
        "{audit}"
    );
    assert!(
        audit
            .problems
            .iter()
            .any(|problem| bodies_from(problem, &[0, 6]))
    );
    for problem in &audit.problems {
        if let Problem::Intersection { position, .. } = problem {
            assert_eq!(position.x, 0.5);
            let (y, z) = (position.y.abs(), position.z.abs());
            assert!(
                (y == 0.125 && z <= 0.125) || (z == 0.125 && y <= 0.125),
                "{position}"
            );
        }
    }
}

#[test]
fn walls_that_lie_on_each_other_overlap() {
    let mesh = joined(
        &unit_cube(),
        &cuboid(DVec3::new(1.0, 0.25, 0.25), DVec3::ONE),
    );
    let audit = mesh.audit();
    assert!(crossings(&audit).contains(&[1, 6]), "{audit}");
    let touching =
        |problem: &&Problem| matches!(problem, Problem::Intersection { facets: [1, 6], .. });
    let Some(Problem::Intersection { position, .. }) = audit.problems.iter().find(touching) else {
        panic!()
    };
    assert!(
        position.x == 0.5
            && (-0.25..=0.5).contains(&position.y)
            && (-0.25..=0.5).contains(&position.z)
    );
}

#[test]
fn dented_corner_pierces_the_opposite_wall() {
    let mut mesh = octahedron();
    mesh.vertices[4] = DVec3::new(1.0, 0.5, -0.5); // the upper corner goes down and out through the lower half
    let audit = mesh.audit();
    assert!(!crossings(&audit).is_empty(), "{audit}");
    assert!(
        crossings(&audit)
            .iter()
            .all(|[a, b]| a % 2 != b % 2 && a < b),
        "upper against lower: {audit}"
    );
}

#[test]
fn corner_that_touches_a_wall_is_sound_and_one_that_passes_it_is_not() {
    // A pyramid-shaped dent in the top of a box, whose tip comes down to the bottom.
    let dented = |tip: f64| {
        let mut mesh = unit_cube();
        mesh.facet_walls.pop();
        mesh.starts.pop();
        mesh.corners.truncate(20);
        mesh.vertices.push(DVec3::new(0.125, 0.0, tip));
        for (a, b) in [(4, 5), (5, 7), (7, 6), (6, 4)] {
            mesh.push_facet(&[a, b, 8], 5);
        }
        mesh.audit()
    };
    assert!(dented(-0.25).is_sound());
    assert!(dented(-0.5).is_sound(), "{}", dented(-0.5));
    let below = dented(-0.500_000_000_1);
    assert_eq!(
        crossings(&below),
        [[4, 5], [4, 6], [4, 7], [4, 8]],
        "{below}"
    );
}

#[test]
fn folded_neighbours_overlap() {
    // A corner of an icosphere is drawn across an opposite edge of its neighbour triangles, within the surface.
    let mut mesh = icosphere(1);
    let moved = mesh.vertices[mesh.corners_of(0)[1] as usize];
    let other = mesh.positions_of(0).next().unwrap();
    let at = mesh.corners_of(0)[1] as usize;
    mesh.vertices[at] = (other + (other - moved) * 0.7).normalize();
    let audit = mesh.audit();
    assert!(!crossings(&audit).is_empty(), "{audit}");

    // Exactly flat: both triangles on the same side of their shared edge.
    let (p, q, r, s) = (
        DVec3::ZERO,
        DVec3::X,
        DVec3::new(0.25, 1.0, 0.0),
        DVec3::new(0.75, 1.0, 0.0),
    );
    let audit = triangles([[p, q, r], [q, p, s]].into_iter()).audit();
    let Some(Problem::Intersection {
        facets: [0, 1],
        position,
    }) = audit.problems.last()
    else {
        panic!("{audit}")
    };
    assert!(position.z == 0.0 && position.y > 0.0 && position.y < 1.0);
}

#[test]
fn copies_of_a_facet_overlap() {
    let mut mesh = octahedron();
    let corners = mesh.corners_of(5).to_vec();
    mesh.push_facet(&corners, 0);
    assert_eq!(crossings(&mesh.audit()), [[5, 8]]);
}

#[test]
fn crossed_outline_is_a_twisted_facet() {
    let mut mesh = extruded(&[(0.0, 0.0), (2.0, 0.0), (1.5, 1.0), (0.0, 1.5)], 1.0);
    assert!(mesh.audit().is_sound());
    let corners = &mut mesh.corners;
    let last = corners.len() - 1;
    corners.swap(last, last - 1);
    let audit = mesh.audit();
    let twisted = |problem: &Problem| matches!(problem, Problem::TwistedFacet { facet: 5, .. });
    assert!(audit.problems.iter().any(twisted), "{audit}");
}

#[test]
fn concave_prism_is_sound_and_a_bar_through_its_notch_is_free() {
    assert!(l_prism(1.0).audit().is_sound());
    let free = joined(
        &l_prism(1.0),
        &cuboid(DVec3::new(1.5, 1.5, 0.5), DVec3::new(0.5, 0.5, 4.0)),
    );
    let problems = free.audit().problems;
    assert!(problems.len() == 1 && bodies_from(&problems[0], &[0, 8]));
    let through = joined(
        &l_prism(1.0),
        &cuboid(DVec3::new(0.5, 1.5, 0.5), DVec3::new(0.5, 0.5, 4.0)),
    );
    let found = crossings(&through.audit());
    assert_eq!(
        found.len(),
        8,
        "bottom and top against four sides: {found:?}"
    );
    assert!(
        found
            .iter()
            .all(|[a, b]| (6..8).contains(a) && (8..12).contains(b)),
        "{found:?}"
    );
}

#[test]
fn worst_cases_are_bounded() {
    let unit = [DVec3::ZERO, DVec3::X, DVec3::Y];
    let count = 30_000;
    // Measured in release builds; without a bound it would be half a minute.
    let timed = |mesh: &Mesh| {
        let start = Instant::now();
        let audit = mesh.audit();
        assert!(
            start.elapsed() < Duration::from_secs(10),
            "{:?}",
            start.elapsed()
        );
        assert!(audit.problems.len() <= 1000);
        audit
    };
    let given_up = |audit: &Audit| {
        audit
            .problems
            .iter()
            .any(|p| matches!(p, Problem::TooManyOverlaps { .. }))
    };
    let copies = timed(&triangles((0..count).map(|_| unit)));
    assert!(given_up(&copies), "{copies}");
    // Long slivers around one line, all through the origin; none shares a corner with another.
    let slivers = timed(&triangles((0..count).map(|i| {
        let t = f64::from(i) / f64::from(count);
        let far = DVec3::new(1.0 - t, t, 0.3 - t * t) * 1e3;
        [far, -far, far + DVec3::Z * 1e-3]
    })));
    assert!(!slivers.is_sound() && slivers.more > 0);
    // Slanted parallel strips in one plane: all boxes meet, no two strips do.
    timed(&triangles((0..count).map(|i| {
        let at = DVec3::new(f64::from(i), -f64::from(i), 0.0) * 1e-5;
        [
            at,
            at + DVec3::new(1.0, 1.0, 0.0),
            at + DVec3::new(1.000_001, 0.999_999, 0.0),
        ]
    })));
}

#[test]
fn polygon_of_many_corners_is_bounded() {
    let circle = |count: u32| {
        let angle = |i| f64::from(i) * std::f64::consts::TAU / f64::from(count);
        #[expect(
            clippy::disallowed_methods,
            reason = "a test's outline decides nothing"
        )]
        let outline: Vec<_> = (0..count)
            .map(|i| (angle(i).cos(), angle(i).sin()))
            .collect();
        outline
    };
    let start = Instant::now();
    let round = extruded(&circle(100_000), 1.0).audit();
    assert!(round.is_sound(), "{round}");
    let star: Vec<_> = circle(100_000)
        .into_iter()
        .enumerate()
        .map(|(i, (x, y))| {
            if i % 2 == 0 {
                (x, y)
            } else {
                (x * 0.9, y * 0.9)
            }
        })
        .collect();
    let star = extruded(&star, 1.0).audit();
    assert!(
        star.problems.contains(&Problem::TooManyCorners {
            facet: 100_000,
            corners: 100_000
        }),
        "{star}"
    );
    assert!(
        start.elapsed() < Duration::from_secs(10),
        "{:?}",
        start.elapsed()
    );
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, cases: 200, ..ProptestConfig::default() })]

    /// Good bodies in any position and of any size are sound, and stay so without shared vertices.
    #[test]
    fn moved_bodies_are_sound(
        body in 0..5_usize,
        axis in prop::array::uniform3(-3.0..3.0_f64),
        scale in prop::array::uniform3(0.01..100.0_f64),
        shift in prop::array::uniform3(-1e3..1e3_f64),
        unit in -12..12_i32,
    ) {
        let mut mesh = match body {
            0 => unit_cube(),
            1 => octahedron(),
            2 => icosphere(2),
            3 => l_prism(2.0),
            _ => notched(),
        };
        let turn = DQuat::from_scaled_axis(DVec3::from_array(axis));
        let unit = format!("1e{unit}").parse::<f64>().unwrap();
        for at in &mut mesh.vertices {
            *at = (turn * (*at * DVec3::from_array(scale)) + DVec3::from_array(shift)) * unit;
        }
        let audit = mesh.audit();
        prop_assert!(audit.is_sound(), "{}", audit);
        prop_assert!(audit.volume > 0.0);
        prop_assert_eq!(crate::geometry::audit::fixtures::soup(&mesh).audit(), audit);
    }

    /// Files of seven digits leave polygons slightly bent and their straight edges slightly broken.
    #[test]
    fn turned_and_rounded_polygons_are_sound(axis in prop::array::uniform3(-3.0..3.0_f64)) {
        let turn = DQuat::from_scaled_axis(DVec3::from_array(axis));
        let mut mesh = notched();
        for at in &mut mesh.vertices {
            *at = (turn * *at * 1e7).round() / 1e7;
        }
        prop_assert!(mesh.audit().is_sound(), "{}", mesh.audit());
    }

    /// Any numbers at all: no panic, and the same answer twice.
    #[test]
    fn any_mesh_gets_an_answer(
        points in prop::collection::vec(prop::array::uniform3(prop_oneof![-2..3_i8, -2..3_i8]), 1..12),
        facets in prop::collection::vec(prop::collection::vec(0..12_u32, 0..7), 0..20),
        huge in prop_oneof![Just(1.0), Just(1e30), Just(1e-200), Just(5e-324)],
    ) {
        let vertices = points.iter().map(|p| DVec3::from_array(p.map(f64::from)) * huge).collect();
        let mut mesh = Mesh { vertices, walls: vec!["a".into()], ..Mesh::default() };
        for corners in &facets {
            mesh.push_facet(corners, 0);
        }
        let audit = mesh.audit();
        prop_assert!(!audit.to_string().is_empty());
        prop_assert_eq!(mesh.audit(), audit);
    }
}

fn bodies_from(problem: &Problem, expected: &[usize]) -> bool {
    matches!(problem, Problem::SeveralBodies { facets, .. } if facets == expected)
}
