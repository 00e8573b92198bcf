//! All triangles in turn are the oracle; then edges, vertices, long walks and hostile meshes.

#![expect(
    clippy::cast_possible_truncation,
    reason = "meshes of a few thousand triangles"
)]

mod bodies;
mod speed;
mod walk;

use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::SeedableRng;

use super::build::{cross, dot};
use super::{Hierarchy, Hit, Triangles};
use bodies::{corridor, icosphere, moved, spiky, star};
use walk::{Walk, minus, on_sphere, unit};

impl Triangles {
    fn of(&self, triangle: usize) -> [[f64; 3]; 3] {
        self.corners[triangle].map(|corner| self.vertices[corner as usize])
    }

    /// A point inside a triangle.
    fn point(&self, triangle: usize, weights: [f64; 3]) -> [f64; 3] {
        let [a, b, c] = self.of(triangle);
        [0, 1, 2].map(|k| weights[0] * a[k] + weights[1] * b[k] + weights[2] * c[k])
    }
}

/// The strike found by testing all triangles in turn.
fn by_force(
    mesh: &Triangles,
    behind: f64,
    origin: [f64; 3],
    direction: [f64; 3],
    standing: u32,
) -> Option<Hit> {
    let ray = super::Ray::new(origin, direction);
    let mut best: Option<Hit> = None;
    for triangle in (0..mesh.corners.len()).filter(|k| *k != standing as usize) {
        let corners = mesh.of(triangle);
        if let Some(t) = ray.strike(corners.each_ref(), behind)
            && best.is_none_or(|hit| t < hit.t)
        {
            best = Some(Hit {
                t,
                triangle: triangle as u32,
            });
        }
    }
    best
}

/// Compares strikes from random points on all surfaces, and from one point inside, with the oracle, bit for bit.
#[track_caller]
fn agrees(mesh: &Triangles, inside: [f64; 3], rays: usize) {
    finds_the_same(&Hierarchy::new(mesh), mesh, inside, rays);
}

#[track_caller]
fn finds_the_same(hierarchy: &Hierarchy, mesh: &Triangles, inside: [f64; 3], rays: usize) {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(11);
    let mut struck = 0;
    for ray in 0..rays {
        let triangle = ray % mesh.corners.len();
        let (origin, standing) = if ray % 3 == 0 {
            (inside, Hierarchy::NOWHERE)
        } else {
            let weights = on_sphere(&mut rng).map(|x| x * x);
            (mesh.point(triangle, weights), triangle as u32)
        };
        // Some run along an axis or a plane of the axes, or nearly so.
        let mut direction = on_sphere(&mut rng);
        direction[ray / 2 % 3] *= [1.0, 1.0, 0.0, 1e-13, 1e-30][ray % 5];
        let direction = unit(direction);
        let found = hierarchy.next(origin, direction, standing);
        let wanted = by_force(mesh, hierarchy.behind, origin, direction, standing);
        let bits = |hit: Option<Hit>| hit.map(|hit| (hit.t.to_bits(), hit.triangle));
        assert_eq!(
            bits(found),
            bits(wanted),
            "ray {ray} from {origin:?} along {direction:?}, standing on {standing}"
        );
        struck += usize::from(found.is_some());
    }
    assert!(struck > rays / 2, "only {struck} strikes");
}

#[test]
fn equals_all_triangles_in_turn() {
    agrees(&icosphere(2), [0.1, 0.2, -0.1], 20_000);
    agrees(&icosphere(4), [0.1, 0.2, -0.1], 2_000);
    agrees(&corridor(1), [0.5, 0.5, 0.5], 40_000);
    agrees(&corridor(6), [0.5, 0.5, 0.5], 10_000);
    agrees(&star(3), [0.0; 3], 10_000);
    agrees(&spiky(3), [0.0; 3], 10_000);
}

#[test]
#[ignore = "long"]
fn equals_all_triangles_in_turn_at_length() {
    for level in 0..7 {
        let rays = 3_000_000_000 / (20 << (2 * level) as usize) / 40;
        agrees(&icosphere(level), [0.1, 0.2, -0.1], rays);
        agrees(&star(level), [0.0; 3], rays);
        agrees(&spiky(level), [0.0; 3], rays);
    }
    agrees(&corridor(30), [0.5, 0.5, 0.5], 20_000);
}

#[test]
fn equals_all_triangles_in_turn_at_any_size_and_place() {
    for size in [1e-6, 1.0, 1e4] {
        for offset in [0.0, 1.0, 1e4] {
            let inside = [0.1, 0.2, -0.1].map(|x| x * size + offset * size);
            agrees(&moved(&icosphere(3), size, offset * size), inside, 2_000);
            agrees(
                &moved(&spiky(3), size, offset * size),
                [offset * size; 3],
                2_000,
            );
        }
    }
    agrees(&moved(&icosphere(3), 1e-6, 1e4), [1e4; 3], 2_000);
    agrees(&moved(&icosphere(3), 1.0, 1e4), [1e4; 3], 2_000);
}

#[test]
fn strikes_a_cube_where_it_should() {
    let mesh = corridor(0);
    let hierarchy = Hierarchy::new(&mesh);
    let hit = hierarchy
        .next([0.25, 0.5, 0.5], [1.0, 0.0, 0.0], Hierarchy::NOWHERE)
        .unwrap();
    assert_eq!(hit.t, 1.75);
    assert_eq!(mesh.of(hit.triangle as usize).map(|p| p[0]), [2.0; 3]);
    // Round the corner of the L, and into the other arm.
    assert_eq!(
        hierarchy
            .next([0.5, 1.5, 0.5], [1.0, 0.0, 0.0], Hierarchy::NOWHERE)
            .unwrap()
            .t,
        0.5
    );
    assert_eq!(
        hierarchy
            .next([0.5, 0.5, 0.5], [0.0, 1.0, 0.0], Hierarchy::NOWHERE)
            .unwrap()
            .t,
        1.5
    );
    // From outside no triangle faces the ray before the far wall.
    assert_eq!(
        hierarchy
            .next([-1.0, 0.5, 0.5], [1.0, 0.0, 0.0], Hierarchy::NOWHERE)
            .unwrap()
            .t,
        3.0
    );
    assert_eq!(
        hierarchy.next([-1.0, 0.5, 0.5], [-1.0, 0.0, 0.0], Hierarchy::NOWHERE),
        None
    );
}

#[test]
fn distance_is_that_to_the_plane() {
    let mesh = spiky(4);
    let hierarchy = Hierarchy::new(&mesh);
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(3);
    for _ in 0..10_000 {
        let direction = on_sphere(&mut rng);
        let hit = hierarchy
            .next([0.0; 3], direction, Hierarchy::NOWHERE)
            .unwrap();
        let [a, b, c] = mesh.of(hit.triangle as usize);
        let normal = cross(minus(b, a), minus(c, a));
        let cosine = dot(normal, direction);
        assert!(cosine > 0.0);
        assert!((hit.t * cosine - dot(normal, a)).abs() < 1e-14 * dot(normal, normal).sqrt());
    }
}

/// A direction multiplied by the power of two that brings its length into (0.5, 1], which rounds nothing.
fn scaled(direction: [f64; 3]) -> [f64; 3] {
    let inverse = 1.0 / dot(direction, direction).sqrt();
    direction.map(|x| x * f64::from_bits(inverse.to_bits() & (0x7ff << 52)))
}

/// Rays from inside aimed at every vertex and at points of every edge, in both roundings of "at".
#[track_caller]
fn no_gaps(mesh: &Triangles, origins: impl Iterator<Item = [f64; 3]>) -> usize {
    let hierarchy = Hierarchy::new(mesh);
    let mut rays = 0;
    let mut missed = 0;
    for origin in origins {
        for triangle in 0..mesh.corners.len() {
            for weights in [
                [1.0, 0.0, 0.0],
                [0.5, 0.5, 0.0],
                [0.3, 0.0, 0.7],
                [0.0, 1e-9, 1.0 - 1e-9],
                [0.9, 0.1, 0.0],
                [0.0, 0.123, 0.877],
            ] {
                let exact = minus(mesh.point(triangle, weights), origin);
                for direction in [scaled(exact), unit(exact)] {
                    rays += 1;
                    missed += usize::from(
                        hierarchy
                            .next(origin, direction, Hierarchy::NOWHERE)
                            .is_none(),
                    );
                }
            }
        }
    }
    assert_eq!(missed, 0, "of {rays}");
    rays
}

#[test]
fn no_ray_slips_through_an_edge_or_a_vertex() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(5);
    let mut inside = |size: f64, offset: f64| on_sphere(&mut rng).map(|x| 0.4 * x * size + offset);
    let mut rays = 0;
    for _ in 0..3 {
        rays += no_gaps(&icosphere(3), [[0.0; 3], inside(1.0, 0.0)].into_iter());
        rays += no_gaps(&star(3), [[0.0; 3], inside(0.5, 0.0)].into_iter());
        rays += no_gaps(&spiky(3), [[0.0; 3], inside(0.5, 0.0)].into_iter());
        rays += no_gaps(&corridor(3), [[0.5; 3], inside(1.0, 0.5)].into_iter());
        for (size, offset) in [(1e-6, 0.0), (1e4, 0.0), (1.0, 1e4), (1e4, 1e4), (1e-6, 1.0)] {
            rays += no_gaps(
                &moved(&icosphere(2), size, offset),
                [[offset; 3], inside(size, offset)].into_iter(),
            );
            rays += no_gaps(
                &moved(&spiky(2), size, offset),
                [inside(0.5 * size, offset)].into_iter(),
            );
        }
    }
    eprintln!("{rays} rays at edges and vertices");
}

#[test]
#[ignore = "long"]
fn no_ray_slips_through_an_edge_or_a_vertex_at_length() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(6);
    let mut rays = 0;
    for level in 0..7 {
        let points = 1_000_000 / (12 * (20 << (2 * level)));
        let origins: Vec<_> = (0..points + 2)
            .map(|_| on_sphere(&mut rng).map(|x| 0.3 * x))
            .collect();
        for mesh in [icosphere(level), star(level), spiky(level)] {
            // All three are seen from the centre, and the coarsest do not reach as far as every origin.
            let hierarchy = Hierarchy::new(&mesh);
            let inside = |origin: &&[f64; 3]| {
                let surface = hierarchy.next([0.0; 3], unit(**origin), Hierarchy::NOWHERE);
                surface.unwrap().t > 0.301
            };
            rays += no_gaps(&mesh, origins.iter().filter(inside).copied());
        }
    }
    eprintln!("{rays} rays at edges and vertices");
}

/// Starts at vertices and on edges, standing on each triangle there, in diffuse directions.
#[test]
fn light_goes_on_from_edges_and_vertices() {
    for (mesh, convex) in [
        (icosphere(0), true),
        (icosphere(3), true),
        (corridor(0), false),
        (corridor(4), false),
        (star(3), false),
        (spiky(3), false),
        (moved(&icosphere(3), 1.0, 1e4), true),
        (moved(&icosphere(3), 1e-6, 0.0), true),
    ] {
        let mut walk = Walk::new(&mesh, 8);
        for round in 0..60_000 / mesh.corners.len() {
            for triangle in 0..mesh.corners.len() {
                let weights = [
                    [1.0, 0.0, 0.0],
                    [0.5, 0.5, 0.0],
                    [0.0, 0.3, 0.7],
                    [0.0, 0.0, 1.0],
                ][round % 4];
                walk.place(mesh.point(triangle, weights), triangle as u32);
                walk.step();
            }
        }
        eprintln!("{} triangles, convex: {convex}: {walk}", mesh.corners.len());
        assert_eq!(walk.lost, 0);
    }
}

/// Lets light walk about in a body and asserts that none is lost.
#[track_caller]
fn wander(name: &str, mesh: &Triangles, start: [f64; 3], strikes: usize) {
    let mut walk = Walk::new(mesh, 17);
    walk.place(start, Hierarchy::NOWHERE);
    for _ in 0..strikes {
        walk.step();
    }
    eprintln!("{name}, {} triangles: {walk}", mesh.corners.len());
    assert_eq!(walk.lost, 0);
    assert_eq!(walk.strikes, strikes);
}

fn wander_everywhere(strikes: usize) {
    wander("sphere", &icosphere(2), [0.0; 3], strikes);
    wander("sphere", &icosphere(5), [0.0; 3], strikes);
    wander("corridor", &corridor(0), [0.5; 3], strikes);
    wander("corridor", &corridor(12), [0.5; 3], strikes);
    wander("star", &star(4), [0.0; 3], strikes);
    wander("spikes", &spiky(4), [0.0; 3], strikes);
    wander(
        "micrometre",
        &moved(&spiky(3), 1e-6, 0.0),
        [0.0; 3],
        strikes,
    );
    wander(
        "ten kilometres",
        &moved(&spiky(3), 1e4, 0.0),
        [0.0; 3],
        strikes,
    );
    wander("far away", &moved(&spiky(3), 1.0, 1e4), [1e4; 3], strikes);
    wander(
        "far away",
        &moved(&icosphere(4), 1.0, 1e4),
        [1e4; 3],
        strikes,
    );
}

#[test]
fn no_light_is_lost_on_a_walk() {
    wander_everywhere(30_000);
}

#[test]
#[ignore = "long"]
fn no_light_is_lost_on_a_long_walk() {
    wander_everywhere(10_000_000);
}

#[test]
fn bits_of_a_walk_stay() {
    let mesh = spiky(3);
    let mut walk = Walk::new(&mesh, 1);
    walk.place([0.0; 3], Hierarchy::NOWHERE);
    (0..20_000).for_each(|_| walk.step());
    // Whatever the instruction set and the shape of the tree; a change changes every user's numbers.
    assert_eq!(walk.fingerprint, 10_880_167_939_672_789_381);
}

#[test]
fn many_equal_triangles_are_told_apart_by_index() {
    let mut mesh = icosphere(0);
    let one = mesh.corners[7];
    mesh.corners.extend(std::iter::repeat_n(one, 100_000));
    let hierarchy = Hierarchy::new(&mesh);
    let middle = mesh.point(7, [1.0 / 3.0; 3]);
    let outward = unit(middle);
    assert_eq!(
        hierarchy
            .next([0.0; 3], outward, Hierarchy::NOWHERE)
            .unwrap()
            .triangle,
        7
    );
    assert_eq!(hierarchy.next([0.0; 3], outward, 7).unwrap().triangle, 20);
    assert_eq!(hierarchy.nearest_triangle(middle).1, 7);
}

/// A start within rounding outside a wall strikes it at zero; one that is clearly outside does not.
#[test]
fn a_wall_just_behind_is_struck_at_zero() {
    let mesh = corridor(0);
    let hierarchy = Hierarchy::new(&mesh);
    let slanting = unit([1.0, 0.7, 0.1]);
    for (beyond, direction) in [
        (0.0, [1.0, 0.0, 0.0]),
        (1e-15, [1.0, 0.0, 0.0]),
        (1e-14, slanting),
    ] {
        let hit = hierarchy
            .next([2.0 + beyond, 0.5, 0.5], direction, Hierarchy::NOWHERE)
            .unwrap();
        assert_eq!(
            (hit.t, mesh.of(hit.triangle as usize).map(|p| p[0])),
            (0.0, [2.0; 3])
        );
    }
    assert_eq!(
        hierarchy.next([2.0 + 1e-11, 0.5, 0.5], slanting, Hierarchy::NOWHERE),
        None
    );
    // Coordinates of another size move the threshold with them.
    let far = Hierarchy::new(&moved(&mesh, 1.0, 1e4));
    let found = far.next(
        [1e4 + 2.0 + 1e-11, 1e4 + 0.5, 1e4 + 0.5],
        slanting,
        Hierarchy::NOWHERE,
    );
    assert_eq!(found.map(|hit| hit.t), Some(0.0));
    // Round the concave edge x = y = 1 the wall x = 1 lies behind a ray that leaves the wall y = 1 next to it.
    let wall = by_force(
        &mesh,
        hierarchy.behind,
        [1.5, 0.5, 0.5],
        [0.0, 1.0, 0.0],
        Hierarchy::NOWHERE,
    )
    .unwrap();
    let away = unit([-1.0, -0.5, 0.0]);
    assert!(
        hierarchy
            .next([1.0 + 1e-12, 1.0, 0.5], away, wall.triangle)
            .unwrap()
            .t
            > 0.5
    );
}

/// Levels of the tree.
fn depth(hierarchy: &Hierarchy) -> usize {
    let mut deepest = 0;
    let mut open = vec![(0, 1)];
    while let Some((node, level)) = open.pop() {
        let node = &hierarchy.nodes[node];
        deepest = deepest.max(level);
        for k in (0..8).filter(|k| node.sides[0][*k] <= node.sides[1][*k]) {
            if let Err(inner) = node.child[k].facets() {
                open.push((inner, level + 1));
            }
        }
    }
    deepest
}

#[test]
fn depth_is_bounded() {
    // Halved thrice a level once the levels that are split by cost are used up.
    let mesh = spiky(3);
    for (free, levels) in [(0, 3), (1, 4), (2, 5)] {
        let hierarchy = super::build::hierarchy(&mesh, free);
        assert!(
            depth(&hierarchy) <= levels,
            "{free} free levels: {}",
            depth(&hierarchy)
        );
        finds_the_same(&hierarchy, &mesh, [0.0; 3], 1_000);
    }
    let mut equal = icosphere(0);
    equal.corners = vec![equal.corners[0]; 6 * 8 * 8 * 8 * 8];
    assert_eq!(depth(&Hierarchy::new(&equal)), 4);
}

/// Triangles of ever smaller scale, no triangles, and coordinates that no audit lets through.
#[test]
fn hostile_meshes_build() {
    let mut mesh = Triangles::default();
    let mut size = 1.0;
    for k in 0..3000_u32 {
        mesh.vertices
            .extend([[size, 0.0, 0.0], [size, size, 0.0], [size, 0.0, size]]);
        mesh.corners.push([3 * k, 3 * k + 1, 3 * k + 2]);
        size *= 0.98;
    }
    let hierarchy = Hierarchy::new(&mesh);
    let ray = ([-1.0, 1e-9, 1e-9], [1.0, 0.0, 0.0]);
    let found = hierarchy.next(ray.0, ray.1, Hierarchy::NOWHERE);
    assert_eq!(
        found,
        by_force(&mesh, hierarchy.behind, ray.0, ray.1, Hierarchy::NOWHERE)
    );

    let empty = Hierarchy::new(&Triangles::default());
    assert_eq!(
        empty.next([0.0; 3], [1.0, 0.0, 0.0], Hierarchy::NOWHERE),
        None
    );
    assert_eq!(empty.nearest_triangle([0.0; 3]), (f64::INFINITY, u32::MAX));
    assert_eq!(
        empty.overtaken([0.0; 3], [1.0, 0.0, 0.0], Hierarchy::NOWHERE),
        None
    );

    for wrong in [f64::NAN, f64::INFINITY, 1e308, 1e-320, 0.0] {
        let mut mesh = icosphere(3);
        mesh.vertices
            .iter_mut()
            .for_each(|vertex| vertex[1] *= wrong);
        let hierarchy = Hierarchy::new(&mesh);
        for origin in [[0.0; 3], [wrong; 3]] {
            for direction in [[0.0; 3], [wrong; 3], [1.0, 0.0, 0.0]] {
                hierarchy.next(origin, direction, Hierarchy::NOWHERE);
                hierarchy.nearest_triangle(origin);
                hierarchy.overtaken(origin, direction, 3);
            }
        }
    }
}

#[test]
fn nearest_triangle_equals_all_in_turn() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(23);
    for mesh in [spiky(2), corridor(3), moved(&star(2), 1e-6, 1e-6)] {
        let hierarchy = Hierarchy::new(&mesh);
        let size = mesh.vertices[0][0].abs();
        for k in 0..500 {
            let triangle = k % mesh.corners.len();
            let around = mesh.point(triangle, [0.5, 0.5, 0.0]);
            let far = on_sphere(&mut rng).map(|x| x * size * [0.0, 1e-12, 1e-3, 1.0, 10.0][k % 5]);
            let point = [0, 1, 2].map(|axis| around[axis] + far[axis]);
            let found = hierarchy.nearest_triangle(point);
            let wanted = (0..mesh.corners.len() as u32)
                .map(|k| (super::nearest::distance_to(point, &mesh.of(k as usize)), k))
                .min_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
            assert_eq!(Some(found), wanted);
        }
    }
    // Distances by hand, to the inside, an edge and a vertex of a triangle, and to one without area.
    let triangle = [[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [0.0, 1.0, 0.0]];
    assert_eq!(
        super::nearest::distance_to([0.25, 0.25, -2.0], &triangle),
        2.0
    );
    assert_eq!(
        super::nearest::distance_to([0.5, -3.0, 4.0], &triangle),
        5.0
    );
    assert_eq!(super::nearest::distance_to([4.0, 0.0, 4.0], &triangle), 5.0);
    assert_eq!(
        super::nearest::distance_to([0.5, 1.0, 0.0], &[[0.0; 3], [1.0, 0.0, 0.0], [0.0; 3]]),
        1.0
    );
}

#[test]
fn memory_stays_small() {
    let mesh = icosphere(6);
    let bytes = Hierarchy::new(&mesh).bytes() as f64 / mesh.corners.len() as f64;
    assert!(bytes < 80.0, "{bytes} bytes a triangle");
}
