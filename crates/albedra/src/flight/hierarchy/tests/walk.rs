//! Diffuse light that wanders from strike to strike.

use std::fmt;

use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::{Rng, SeedableRng};

use super::super::{Hierarchy, Triangles};
use super::{cross, dot};

pub(super) fn minus(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}

pub(super) fn unit(a: [f64; 3]) -> [f64; 3] {
    let length = dot(a, a).sqrt();
    a.map(|x| x / length)
}

/// A random point of the unit sphere: Marsaglia, "Choosing a point from the surface of a sphere", 1972.
pub(super) fn on_sphere(rng: &mut Xoshiro256PlusPlus) -> [f64; 3] {
    loop {
        let [x, y] = [0, 1].map(|_| (rng.next_u64() >> 11) as f64 / (1_u64 << 52) as f64 - 1.0);
        let square = x * x + y * y;
        if square < 1.0 && square > 0.0 {
            let root = 2.0 * (1.0 - square).sqrt();
            return [x * root, y * root, 1.0 - 2.0 * square];
        }
    }
}

/// One photon's walk, with counts.
pub(super) struct Walk<'a> {
    mesh: &'a Triangles,
    /// A corner and the unit outward normal of each triangle.
    planes: Vec<([f64; 3], [f64; 3])>,
    pub(super) hierarchy: Hierarchy,
    rng: Xoshiro256PlusPlus,
    position: [f64; 3],
    standing: u32,
    pub(super) strikes: usize,
    /// Strikes that were found by standing on the nearest triangle.
    pub(super) nearest: usize,
    /// Strikes that were found on the triangle just slipped through.
    pub(super) overtaken: usize,
    /// Photons that struck nothing whatever was tried.
    pub(super) lost: usize,
    pub(super) fingerprint: u64,
}

impl fmt::Display for Walk<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self {
            strikes,
            nearest,
            overtaken,
            lost,
            ..
        } = self;
        write!(
            f,
            "{strikes} strikes, {nearest} retried on the nearest, {overtaken} overtaken, {lost} lost"
        )
    }
}

impl<'a> Walk<'a> {
    pub(super) fn new(mesh: &'a Triangles, seed: u64) -> Self {
        let planes = (0..mesh.corners.len()).map(|k| {
            let [a, b, c] = mesh.of(k);
            (a, unit(cross(minus(b, a), minus(c, a))))
        });
        Self {
            planes: planes.collect(),
            hierarchy: Hierarchy::new(mesh),
            mesh,
            rng: Xoshiro256PlusPlus::seed_from_u64(seed),
            position: [0.0; 3],
            standing: Hierarchy::NOWHERE,
            strikes: 0,
            nearest: 0,
            overtaken: 0,
            lost: 0,
            fingerprint: 0,
        }
    }

    pub(super) fn place(&mut self, position: [f64; 3], standing: u32) {
        self.position = position;
        self.standing = standing;
    }

    /// The foot of the perpendicular on a triangle's plane.
    fn on_plane(&self, position: [f64; 3], triangle: u32) -> [f64; 3] {
        let (corner, normal) = self.planes[triangle as usize];
        let height = dot(normal, minus(position, corner));
        [0, 1, 2].map(|k| position[k] - height * normal[k])
    }

    /// Turns the photon into a diffuse direction, finds the next strike and moves there.
    pub(super) fn step(&mut self) {
        let direction = loop {
            let sphere = on_sphere(&mut self.rng);
            let normal = self
                .planes
                .get(self.standing as usize)
                .map_or([0.0; 3], |plane| plane.1);
            let sum = minus(sphere, normal);
            if dot(sum, sum) > 1e-20 {
                break unit(sum);
            }
        };
        let mut hit = self.hierarchy.next(self.position, direction, self.standing);
        if hit.is_none() {
            hit = self
                .hierarchy
                .overtaken(self.position, direction, self.standing);
            self.overtaken += usize::from(hit.is_some());
        }
        if hit.is_none() {
            let (_, nearest) = self.hierarchy.nearest_triangle(self.position);
            self.position = self.on_plane(self.position, nearest);
            hit = self.hierarchy.next(self.position, direction, nearest);
            self.nearest += usize::from(hit.is_some());
        }
        self.strikes += 1;
        if let Some(hit) = hit {
            let there = [0, 1, 2].map(|k| self.position[k] + hit.t * direction[k]);
            self.position = self.on_plane(there, hit.triangle);
            self.standing = hit.triangle;
            for bits in [hit.t.to_bits(), u64::from(hit.triangle)] {
                self.fingerprint = (self.fingerprint ^ bits)
                    .wrapping_mul(0x0100_0000_01b3)
                    .rotate_left(23);
            }
        } else {
            self.lost += 1;
            self.place(self.mesh.point(0, [1.0 / 3.0; 3]), 0);
        }
    }
}
