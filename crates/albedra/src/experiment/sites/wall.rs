//! Starts on walls and regions.

use super::{Ground, Lane, RegionShape, Site, Solid, Spot, Surfaces};
use crate::engine::WallPlan;

/// Tries until a point that later paint does not cover is found; a visible share of 1e-4 is missed once in e⁻¹⁰⁰.
const TRIES: u32 = 1_000_000;

/// A wall without its regions, by area.
#[derive(Debug)]
pub(super) struct WallSite {
    triangles: Vec<Triangle>,
    /// Running sum of the areas' shares.
    shares: Vec<f64>,
    /// What covers parts of the wall, if anything does.
    plan: Option<WallPlan>,
}

#[derive(Clone, Copy, Debug)]
struct Triangle {
    corners: [[f64; 3]; 3],
    surface: u32,
    plane: [f64; 4],
}

impl WallSite {
    pub(super) fn new(solid: &Solid, ground: &Ground, surfaces: &Surfaces, wall: usize) -> Self {
        let mut triangles = Vec::new();
        let mut shares = Vec::new();
        let mut area = 0.0;
        for index in 0..solid.triangles.len() {
            if solid.triangle_wall(index) as usize != wall {
                continue;
            }
            let corners = solid.corners(index);
            let surface = ground.of_triangle[index];
            area += area_of(corners);
            shares.push(area);
            triangles.push(Triangle {
                corners,
                surface,
                plane: ground.planes[surface as usize],
            });
        }
        for share in &mut shares {
            *share /= area;
        }
        let plan = surfaces.plans[wall]
            .clone()
            .filter(|plan| !plan.regions.is_empty());
        Self {
            triangles,
            shares,
            plan,
        }
    }

    /// Surfaces of the wall.
    pub(super) fn surfaces(&self) -> impl Iterator<Item = usize> + '_ {
        self.triangles
            .iter()
            .map(|triangle| triangle.surface as usize)
    }

    /// The triangle that a point of the wall lies on.
    fn at(&self, point: [f64; 3]) -> &Triangle {
        let mut best = (f64::NEG_INFINITY, 0);
        if self.triangles.len() > 1 {
            for (index, triangle) in self.triangles.iter().enumerate() {
                let within = least_share(triangle, point);
                if within > best.0 {
                    best = (within, index);
                }
            }
        }
        &self.triangles[best.1]
    }
}

fn sub(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}

fn cross(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [
        a[1] * b[2] - a[2] * b[1],
        a[2] * b[0] - a[0] * b[2],
        a[0] * b[1] - a[1] * b[0],
    ]
}

fn dot(a: [f64; 3], b: [f64; 3]) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

fn area_of([a, b, c]: [[f64; 3]; 3]) -> f64 {
    let normal = cross(sub(b, a), sub(c, a));
    0.5 * dot(normal, normal).sqrt()
}

/// The least barycentric coordinate of a point: not negative within the triangle.
fn least_share(triangle: &Triangle, point: [f64; 3]) -> f64 {
    let [a, b, c] = triangle.corners;
    let normal = cross(sub(b, a), sub(c, a));
    let square = dot(normal, normal);
    let shares = [(a, b), (b, c), (c, a)]
        .map(|(from, to)| dot(normal, cross(sub(to, from), sub(point, from))) / square);
    let least = if shares[0] < shares[1] {
        shares[0]
    } else {
        shares[1]
    };
    if shares[2] < least { shares[2] } else { least }
}

impl Triangle {
    /// A point on the triangle, put exactly onto its plane, with the inward normal.
    fn spot(&self, point: [f64; 3]) -> Spot {
        let [a, b, c, offset] = self.plane;
        let off = offset - (a * point[0] + b * point[1] + c * point[2]);
        let at = [point[0] + off * a, point[1] + off * b, point[2] + off * c];
        (at, u64::from(self.surface), [-a, -b, -c])
    }
}

impl Site for WallSite {
    fn spot(&self, draw: &mut Lane<'_>) -> Option<Spot> {
        for _ in 0..TRIES {
            let share = draw.unit();
            let chosen = self.shares.partition_point(|&upper| upper <= share);
            let triangle = self.triangles.get(chosen).or(self.triangles.last())?;
            let (root, second) = (draw.unit().sqrt(), draw.unit());
            let [a, b, c] = triangle.corners;
            let weights = [1.0 - root, root * (1.0 - second), root * second];
            let point =
                [0, 1, 2].map(|i| weights[0] * a[i] + weights[1] * b[i] + weights[2] * c[i]);
            let spot = triangle.spot(point);
            let Some(plan) = &self.plan else {
                return Some(spot);
            };
            let (u, v) = plan.frame.to_plane(glam::DVec3::from_array(spot.0));
            if plan.region_row(u, v).is_none() {
                return Some(spot);
            }
        }
        None
    }
}

/// The visible part of a region.
#[derive(Debug)]
pub(super) struct RegionSite {
    pub(super) shape: RegionShape,
    pub(super) plan: WallPlan,
    pub(super) row: u64,
    pub(super) wall: WallSite,
}

impl Site for RegionSite {
    fn spot(&self, draw: &mut Lane<'_>) -> Option<Spot> {
        for _ in 0..TRIES {
            let (first, second) = (draw.unit(), draw.unit());
            let (u, v) = self.shape.point(first, second);
            // The border belongs to what is beneath; a point drawn on it is drawn again.
            if self.plan.region_row(u, v) == Some(self.row) {
                let point = self.plan.frame.to_space((u, v)).to_array();
                return Some(self.wall.at(point).spot(point));
            }
        }
        None
    }
}

/// All walls, regions and openings, by visible area.
#[derive(Debug)]
pub(super) struct AnyWall {
    shares: Vec<f64>,
    sites: Vec<Box<dyn Site>>,
}

impl AnyWall {
    pub(super) fn new(areas: &[f64], sites: Vec<Box<dyn Site>>) -> Self {
        let all: f64 = areas.iter().sum();
        let mut upper = 0.0;
        let shares = areas
            .iter()
            .map(|area| {
                upper += area / all;
                upper
            })
            .collect();
        Self { shares, sites }
    }
}

impl Site for AnyWall {
    fn spot(&self, draw: &mut Lane<'_>) -> Option<Spot> {
        let share = draw.unit();
        let chosen = self.shares.partition_point(|&upper| upper <= share);
        self.sites.get(chosen).or(self.sites.last())?.spot(draw)
    }
}
