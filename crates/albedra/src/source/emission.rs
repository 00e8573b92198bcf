//! How photons are drawn from sources.

use super::HEMISPHERE;
use crate::engine::{Lane, NOWHERE};
use crate::math::{larger, sin_cos_turn};

/// Where a photon starts.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Start {
    /// Metres.
    pub(crate) position: [f64; 3],
    /// Unit vector.
    pub(crate) direction: [f64; 3],
    /// The surface that it starts on, or `NOWHERE`.
    pub(crate) surface: u64,
}

/// Draws starts; what is drawn comes from the photon's own generator.
pub(crate) trait Emission: std::fmt::Debug + Send + Sync {
    /// A start, or nothing where none was found after a bounded number of tries.
    fn emit(&self, draw: &mut Lane<'_>) -> Option<Start>;
}

/// Where a photon starts and the inward normal there, if it starts on a surface.
pub(crate) type Spot = ([f64; 3], u64, [f64; 3]);

/// Draws positions.
pub(crate) trait Site: std::fmt::Debug + Send + Sync {
    fn spot(&self, draw: &mut Lane<'_>) -> Option<Spot>;
}

/// Draws directions.
#[derive(Clone, Copy, Debug)]
pub(crate) enum Aim {
    Isotropic,
    /// Cosine law about an axis, up to sin² of the half-angle.
    Cosine {
        axis: Option<[f64; 3]>,
        sine_squared: f64,
    },
    Parallel([f64; 3]),
}

impl Aim {
    fn direction(&self, normal: [f64; 3], draw: &mut Lane<'_>) -> [f64; 3] {
        match *self {
            Self::Parallel(axis) => axis,
            Self::Isotropic => {
                let (u, v) = (draw.unit(), draw.unit());
                let z = 1.0 - 2.0 * u;
                let radius = larger(1.0 - z * z, 0.0).sqrt();
                let (sine, cosine) = sin_cos_turn(v);
                [radius * cosine, radius * sine, z]
            }
            Self::Cosine { axis, sine_squared } => {
                let axis = axis.unwrap_or(normal);
                let (u, v) = (draw.unit() * sine_squared, draw.unit());
                let (sine, cosine) = sin_cos_turn(v);
                let (radius, height) = (u.sqrt(), (1.0 - u).sqrt());
                let (a, b) = across(axis);
                let x = radius * cosine;
                let y = radius * sine;
                unit([0, 1, 2].map(|i| x * a[i] + y * b[i] + height * axis[i]))
            }
        }
    }
}

/// Two unit vectors across a unit vector (Duff et al. 2017).
pub(crate) fn across(n: [f64; 3]) -> ([f64; 3], [f64; 3]) {
    let sign = if n[2] < 0.0 { -1.0 } else { 1.0 };
    let a = -1.0 / (sign + n[2]);
    let b = n[0] * n[1] * a;
    (
        [1.0 + sign * n[0] * n[0] * a, sign * b, -sign * n[0]],
        [b, sign + n[1] * n[1] * a, -n[1]],
    )
}

/// A vector brought to unit length.
pub(crate) fn unit(v: [f64; 3]) -> [f64; 3] {
    let length = (v[0] * v[0] + v[1] * v[1] + v[2] * v[2]).sqrt();
    v.map(|x| x / length)
}

/// Sine squared of a half-angle, exactly 1 for a hemisphere.
pub(crate) fn sine_squared(half_angle: f64) -> f64 {
    let (sine, _) = sin_cos_turn(half_angle / (4.0 * HEMISPHERE));
    if half_angle == HEMISPHERE {
        1.0
    } else {
        sine * sine
    }
}

/// Sites with their aims, chosen in proportion to their flux by one draw (also where there is only one).
#[derive(Debug)]
pub(crate) struct Emitter {
    /// Running sum of the shares, the last is 1.
    pub(crate) shares: Vec<f64>,
    pub(crate) parts: Vec<(Box<dyn Site>, Aim)>,
}

impl Emission for Emitter {
    fn emit(&self, draw: &mut Lane<'_>) -> Option<Start> {
        let share = draw.unit();
        let chosen = self.shares.partition_point(|&upper| upper <= share);
        let (site, aim) = &self.parts[if chosen < self.parts.len() {
            chosen
        } else {
            self.parts.len() - 1
        }];
        let (position, surface, normal) = site.spot(draw)?;
        Some(Start {
            position,
            direction: aim.direction(normal, draw),
            surface,
        })
    }
}

/// A point.
#[derive(Debug)]
pub(crate) struct PointSite(pub(crate) [f64; 3]);

impl Site for PointSite {
    fn spot(&self, _: &mut Lane<'_>) -> Option<Spot> {
        Some((self.0, NOWHERE, [0.0; 3]))
    }
}

/// A disk across an axis, uniformly.
#[derive(Debug)]
pub(crate) struct DiskSite {
    pub(crate) centre: [f64; 3],
    pub(crate) axis: [f64; 3],
    pub(crate) radius: f64,
}

impl DiskSite {
    /// Points all round the disk's border, and its centre.
    pub(crate) fn rim(&self) -> Vec<[f64; 3]> {
        let (a, b) = across(self.axis);
        let around = (0..64).map(|k| {
            let (sine, cosine) = sin_cos_turn(f64::from(k) / 64.0);
            [0, 1, 2].map(|i| self.centre[i] + self.radius * (cosine * a[i] + sine * b[i]))
        });
        std::iter::once(self.centre).chain(around).collect()
    }
}

impl Site for DiskSite {
    fn spot(&self, draw: &mut Lane<'_>) -> Option<Spot> {
        let radius = self.radius * draw.unit().sqrt();
        let (sine, cosine) = sin_cos_turn(draw.unit());
        let (a, b) = across(self.axis);
        let at = [0, 1, 2].map(|i| self.centre[i] + radius * (cosine * a[i] + sine * b[i]));
        Some((at, NOWHERE, [0.0; 3]))
    }
}
