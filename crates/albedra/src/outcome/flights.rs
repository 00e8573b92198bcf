//! Free paths, strikes and what follows from them.

use super::Outcome;
use crate::estimate::Estimate;
use crate::observe::{FlightMoments, HISTOGRAM_BINS};

/// Lengths of flights that start on a surface.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct FlightHistogram {
    /// Edges of equal bins in m, from 0 to the diagonal of the body's bounding box.
    pub edges: Vec<f64>,
    /// Share of the flights in each bin, weighted by the energy at their start.
    pub share: Vec<f64>,
    /// Standard uncertainty of the share.
    pub u: Vec<f64>,
    /// Degrees of freedom of the uncertainty.
    pub degrees_of_freedom: f64,
}

impl Outcome {
    /// Mean free path in m: flights that start on a surface, weighted by the energy at their start.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let path = outcome.mean_free_path();
    /// assert!(path.u > 0.0 && path.value < 3_f64.sqrt());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn mean_free_path(&self) -> Estimate {
        self.flight_moment(1)
    }

    /// Mean of the k-th power (1 to 4) of the length of flights that start on a surface, in mᵏ.
    ///
    /// NaN for other powers.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let (first, second) = (outcome.flight_moment(1), outcome.flight_moment(2));
    /// assert!(second.value > first.value * first.value);
    /// assert!(outcome.flight_moment(5).value.is_nan());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn flight_moment(&self, power: usize) -> Estimate {
        self.moment(power, FlightMoments::from_surface)
    }

    /// The same of first flights that start inside, as from a point, a beam or the volume; NaN if there are none.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// assert!(outcome.first_flight_moment(1).value > 0.0);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn first_flight_moment(&self, power: usize) -> Estimate {
        self.moment(power, FlightMoments::from_inside)
    }

    fn moment(&self, power: usize, cell: fn(usize) -> usize) -> Estimate {
        if !(1..=4).contains(&power) {
            return Estimate::new(f64::NAN, f64::INFINITY, 0.0);
        }
        let (at, unit) = (self.layout.flights_at, self.layout.flights.unit);
        let scale = [
            1.0,
            unit,
            unit * unit,
            unit * unit * unit,
            unit * unit * (unit * unit),
        ][power];
        self.jackknife()
            .estimate(|sums| scale * sums.sum(at + cell(power)) / sums.sum(at + cell(0)))
    }

    /// Histogram of the lengths of flights that start on a surface.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let flights = outcome.flight_histogram();
    /// assert_eq!(flights.edges.len(), flights.share.len() + 1);
    /// assert!((flights.share.iter().sum::<f64>() - 1.0).abs() < 1e-12);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn flight_histogram(&self) -> FlightHistogram {
        let at = self.layout.flights_at;
        let all = self.jackknife().estimate_many(|sums| {
            let flights = sums.sum(at + FlightMoments::from_surface(0));
            (0..HISTOGRAM_BINS)
                .map(|bin| sums.sum(at + FlightMoments::HISTOGRAM + bin) / flights)
                .collect()
        });
        let width = self.layout.flights.diagonal / HISTOGRAM_BINS as f64;
        let edges = (0..=HISTOGRAM_BINS).map(|bin| bin as f64 * width).collect();
        FlightHistogram {
            edges,
            share: all.values,
            u: all.u,
            degrees_of_freedom: all.degrees_of_freedom,
        }
    }

    /// Mean number of strikes of a photon, openings included, weighted by the energy that arrives.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// // At each strike at least a fifth is lost, so there are five at most.
    /// let strikes = outcome.mean_strikes();
    /// assert!(1.0 < strikes.value && strikes.value < 5.0);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn mean_strikes(&self) -> Estimate {
        self.single("mean_strikes")
    }

    /// Mean path of the light from its start to its end in m, weighted by energy.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// assert!(outcome.mean_path().value > outcome.mean_free_path().value);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn mean_path(&self) -> Estimate {
        self.single("mean_path")
    }

    /// Energy inside under a steady lamp, in J: flux times mean path over the speed of light in the medium.
    ///
    /// # Examples
    ///
    /// ```
    /// # use albedra::{Coating, Enclosure, Experiment, Source};
    /// # let cube = Enclosure::cuboid([1.0, 1.0, 1.0])?.opened("z+")?.coated(Coating::lambertian(0.8)?);
    /// let outcome = Experiment::new(&cube, Source::volume()).trace(2_000).seed(7).run()?;
    /// let expected = outcome.watts() * outcome.mean_path().value / albedra::SPEED_OF_LIGHT;
    /// assert!((outcome.stored_energy().value / expected - 1.0).abs() < 1e-12);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn stored_energy(&self) -> Estimate {
        self.single("stored_energy")
    }

    fn single(&self, name: &str) -> Estimate {
        self.output(name)
            .unwrap_or(Estimate::new(f64::NAN, f64::INFINITY, 0.0))
    }
}
