//! How long a ray takes: `cargo test --release -p albedra hierarchy::tests::speed -- --ignored --nocapture`.

use std::hint::black_box;
use std::time::Instant;

use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::SeedableRng;

use super::super::{Hierarchy, Stack, Triangles};
use super::bodies::{corridor, icosphere, spiky, star};
use super::walk::{minus, on_sphere, unit};
use super::{cross, dot};

fn time(name: &str, mesh: &Triangles) {
    let clock = Instant::now();
    let hierarchy = Hierarchy::new(mesh);
    let build = clock.elapsed();
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(2);
    let normals: Vec<_> = (0..mesh.corners.len())
        .map(|k| {
            let [a, b, c] = mesh.of(k);
            unit(cross(minus(b, a), minus(c, a)))
        })
        .collect();
    // Starts as diffuse light has them: those of a walk.
    let (mut position, mut standing) = ([0.1, 0.2, 0.1], Hierarchy::NOWHERE);
    let rays: Vec<_> = (0..200_000)
        .map(|_| {
            let normal = normals.get(standing as usize).copied().unwrap_or_default();
            let ray = (position, unit(minus(on_sphere(&mut rng), normal)), standing);
            let hit = hierarchy.next(ray.0, ray.1, ray.2).unwrap();
            let normal = normals[hit.triangle as usize];
            let there = [0, 1, 2].map(|k| position[k] + hit.t * ray.1[k]);
            let height = dot(normal, minus(there, mesh.of(hit.triangle as usize)[0]));
            (position, standing) = (
                [0, 1, 2].map(|k| there[k] - height * normal[k]),
                hit.triangle,
            );
            ray
        })
        .collect();
    let mut stack = Stack::new();
    // Of each ten thousand rays the least of many times, so that other work on the machine does not count.
    let mut least = vec![f64::INFINITY; rays.len() / 10_000];
    for _ in 0..15 {
        for (rays, least) in rays.chunks(10_000).zip(&mut least) {
            let clock = Instant::now();
            for (origin, direction, standing) in black_box(rays) {
                black_box(hierarchy.next_with(&mut stack, *origin, *direction, *standing));
            }
            let time = clock.elapsed().as_secs_f64();
            *least = if time < *least { time } else { *least };
        }
    }
    let time = least.iter().sum::<f64>() / rays.len() as f64 * 1e9;
    eprintln!(
        "{name:10} {:8} triangles: {:4.0} ns a ray, built in {:.3} s, {:.1} bytes a triangle",
        mesh.corners.len(),
        time,
        build.as_secs_f64(),
        hierarchy.bytes() as f64 / mesh.corners.len() as f64
    );
    assert!(time > 0.0);
}

#[test]
#[ignore = "long"]
fn speed() {
    for level in [2, 3, 5, 7, 8] {
        time("sphere", &icosphere(level));
    }
    time("corridor", &corridor(0));
    time("corridor", &corridor(30));
    time("star", &star(5));
    time("spikes", &spiky(5));
}
