//! Where photons start.

mod emission;

use glam::DVec3;
use serde::{Deserialize, Serialize};

pub(crate) use emission::{
    Aim, DiskSite, Emission, Emitter, PointSite, Site, Spot, sine_squared, unit,
};

/// Where light starts, and in which directions; its radiant flux is in watts (for a pulse: joules).
///
/// Whether a source fits its enclosure is checked when an experiment is traced.
///
/// # Examples
///
/// ```
/// use albedra::Source;
///
/// let lamp = Source::point([0.2, 0.0, 0.0]).flux(5.0);
/// let glowing_wall = Source::wall("z-").flux(2.0);
/// let entering_beam = Source::beam([0.0, 0.0, -0.2], [0.0, 0.0, 1.0]).radius(0.01).divergence(0.05);
/// assert_eq!(lamp.watts() + glowing_wall.watts() + entering_beam.watts(), 8.0);
/// ```
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Source {
    pub(crate) place: Place,
    pub(crate) spread: Spread,
    pub(crate) flux: f64,
}

/// Where photons start.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case", deny_unknown_fields)]
#[non_exhaustive]
pub enum Place {
    /// A point.
    Point {
        /// Position in metres.
        position: DVec3,
    },
    /// A disk across a beam.
    Disk {
        /// Its centre in metres.
        centre: DVec3,
        /// Direction of the beam, of any length.
        axis: DVec3,
        /// Its radius in metres.
        radius: f64,
    },
    /// A wall, a region or an opening.
    Wall {
        /// Its name.
        name: String,
    },
    /// All walls, regions and openings by area.
    Walls,
    /// The volume.
    Volume,
}

/// In which directions photons start.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case", deny_unknown_fields)]
#[non_exhaustive]
pub enum Spread {
    /// In all directions alike.
    Isotropic,
    /// By the cosine law about an axis, or about the wall's normal; up to a half-angle in radians.
    Cosine {
        /// The axis, of any length; the wall's normal if there is none.
        axis: Option<DVec3>,
        /// The half-angle in radians.
        half_angle: f64,
    },
    /// All in one direction.
    Parallel {
        /// The direction, of any length.
        axis: DVec3,
    },
}

/// A quarter turn in radians: the half-angle of a whole hemisphere.
pub(crate) const HEMISPHERE: f64 = std::f64::consts::FRAC_PI_2;

impl Source {
    fn new(place: Place, spread: Spread) -> Self {
        Self {
            place,
            spread,
            flux: 1.0,
        }
    }

    /// Light from a point (metres), isotropic.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Source, Spread};
    ///
    /// let lamp = Source::point([0.2, 0.0, 0.0]);
    /// assert_eq!(lamp.spread(), Spread::Isotropic);
    /// assert_eq!(lamp.watts(), 1.0);
    /// ```
    pub fn point(position: impl Into<DVec3>) -> Self {
        Self::new(
            Place::Point {
                position: position.into(),
            },
            Spread::Isotropic,
        )
    }

    /// A pencil of light from a position (metres) along a direction of any length.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Source, SourcePlace};
    ///
    /// let laser = Source::beam([0.0, 0.0, -0.2], [0.0, 0.0, 1.0]).radius(1e-3).divergence(2e-3);
    /// assert!(matches!(laser.place(), SourcePlace::Disk { radius: 1e-3, .. }));
    /// ```
    pub fn beam(position: impl Into<DVec3>, direction: impl Into<DVec3>) -> Self {
        let axis = direction.into();
        let place = Place::Disk {
            centre: position.into(),
            axis,
            radius: 0.0,
        };
        Self::new(
            place,
            Spread::Cosine {
                axis: Some(axis),
                half_angle: 0.0,
            },
        )
    }

    /// Light from a wall, a region or an opening, uniform over its visible area and Lambertian.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Source, SourcePlace};
    ///
    /// let port = Source::wall("port").cone(0.3);
    /// assert_eq!(port.place(), &SourcePlace::Wall { name: "port".to_owned() });
    /// ```
    pub fn wall(name: impl Into<String>) -> Self {
        Self::new(
            Place::Wall { name: name.into() },
            Spread::Cosine {
                axis: None,
                half_angle: HEMISPHERE,
            },
        )
    }

    /// Light from all walls, regions and openings by area, Lambertian.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure, Experiment, Source};
    ///
    /// // The equilibrium of a closed white body: its mean free path is 4V/S.
    /// let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::lambertian(0.9)?);
    /// let outcome = Experiment::new(&cube, Source::walls()).trace(10_000).run()?;
    /// assert!(outcome.facts().mean_chord_must_hold);
    /// assert!(outcome.mean_free_path().zeta(cube.mean_chord(), 0.0).abs() < 4.9);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn walls() -> Self {
        Self::new(
            Place::Walls,
            Spread::Cosine {
                axis: None,
                half_angle: HEMISPHERE,
            },
        )
    }

    /// Light that fills the volume uniformly and runs in all directions.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure, Experiment, Source};
    ///
    /// let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::absorber());
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(1_000).run()?;
    /// // No photon starts on a surface, and none leaves one.
    /// assert!(outcome.mean_free_path().value.is_nan());
    /// assert!(outcome.first_flight_moment(1).value < 1.0);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn volume() -> Self {
        Self::new(Place::Volume, Spread::Isotropic)
    }

    /// Sets the radiant flux in watts (for a pulse: the energy in joules).
    #[must_use]
    pub fn flux(mut self, watts: f64) -> Self {
        self.flux = watts;
        self
    }

    /// Lets a point emit by the cosine law about an axis of any length, into that half of space only.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure, Experiment, Source};
    ///
    /// let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::absorber());
    /// let spot = Source::point([0.0, 0.0, 0.4]).cosine_about([0.0, 0.0, -1.0]);
    /// let outcome = Experiment::new(&cube, spot).trace(1_000).run()?;
    /// assert_eq!(outcome.flux("z+")?.incident.value, 0.0);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    #[must_use]
    pub fn cosine_about(mut self, axis: impl Into<DVec3>) -> Self {
        self.spread = Spread::Cosine {
            axis: Some(axis.into()),
            half_angle: HEMISPHERE,
        };
        self
    }

    /// Gives a beam a radius in metres: its photons start uniformly on a disk across its axis.
    #[must_use]
    pub fn radius(mut self, metres: f64) -> Self {
        if let Place::Disk { radius, .. } = &mut self.place {
            *radius = metres;
        }
        self
    }

    /// Gives a beam a divergence, the half-angle in radians of a cone of uniform radiance about its axis.
    #[must_use]
    pub fn divergence(self, half_angle: f64) -> Self {
        self.cone(half_angle)
    }

    /// Keeps light by the cosine law within a half-angle in radians of its axis or of the wall's normal.
    ///
    /// # Examples
    ///
    /// ```
    /// let narrow = albedra::Source::wall("port").cone(0.1);
    /// assert!(matches!(narrow.spread(), albedra::Spread::Cosine { half_angle: 0.1, .. }));
    /// ```
    #[must_use]
    pub fn cone(mut self, radians: f64) -> Self {
        match &mut self.spread {
            Spread::Cosine { half_angle, .. } => *half_angle = radians,
            other => {
                *other = Spread::Cosine {
                    axis: None,
                    half_angle: radians,
                }
            }
        }
        self
    }

    /// Makes the light of walls parallel to a direction of any length, which must lead inward from all of them.
    ///
    /// # Examples
    ///
    /// ```
    /// use albedra::{Coating, Enclosure, Experiment, Source};
    ///
    /// let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.coated(Coating::absorber());
    /// let daylight = Source::wall("z+").parallel([0.0, 0.0, -1.0]);
    /// let outcome = Experiment::new(&cube, daylight).trace(1_000).run()?;
    /// assert_eq!(outcome.flux("z-")?.direct.value, 1.0);
    /// assert!(Experiment::new(&cube, Source::wall("z+").parallel([0.0, 0.0, 1.0])).check().is_err());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    #[must_use]
    pub fn parallel(mut self, direction: impl Into<DVec3>) -> Self {
        self.spread = Spread::Parallel {
            axis: direction.into(),
        };
        self
    }

    /// Where its photons start.
    pub fn place(&self) -> &Place {
        &self.place
    }

    /// In which directions its photons start.
    pub fn spread(&self) -> Spread {
        self.spread
    }

    /// Radiant flux in watts.
    pub fn watts(&self) -> f64 {
        self.flux
    }
}
