//! What every statistical run shares: budgets, seeds, and the way from an outcome to a measured value.

use albedra::{Coating, Curve, Enclosure, Estimate, Experiment, Outcome, TimeGrid};

use crate::Measured;

/// Speed of light, in m/s, exact by definition of the metre.
pub const SPEED_OF_LIGHT: f64 = 299_792_458.0;

/// Walls of a cuboid in the order of the records.
pub const FACES: [&str; 6] = ["x-", "x+", "y-", "y+", "z-", "z+"];

/// How many photons a case gets.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Budget {
    /// Always on: seconds for a topic.
    Fast,
    /// By name: 16 times the photons, another seed.
    Long,
}

impl Budget {
    /// Gives the number of photons of a case that has `fast` in the fast slice.
    pub fn photons(self, fast: u64) -> u64 {
        if self == Self::Fast { fast } else { 16 * fast }
    }

    /// Gives the seed of a case: a hash of its name (64-bit FNV-1a), so that nobody picks one.
    pub fn seed(self, case: &str) -> u64 {
        let step = |hash: u64, byte: u8| (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3);
        let hash = case.bytes().fold(0xcbf2_9ce4_8422_2325, step);
        if self == Self::Fast { hash } else { !hash }
    }

    /// Runs an experiment under the seed of its name.
    ///
    /// # Panics
    ///
    /// If the run fails or its ledger does not close.
    #[track_caller]
    pub fn run(self, case: &str, fast: u64, experiment: &Experiment) -> Outcome {
        let outcome = experiment
            .trace(self.photons(fast))
            .seed(self.seed(case))
            .run();
        let outcome = outcome.unwrap_or_else(|error| panic!("{case}: {error}"));
        assert!(
            outcome.ledger().closes(),
            "{case}: the ledger does not close: {:?}",
            outcome.ledger()
        );
        outcome
    }
}

/// Makes two tests of one function of a [`Budget`]: `fast`, and `long` behind `#[ignore]`.
#[macro_export]
macro_rules! statistical {
    ($($case:ident),+ $(,)?) => { $(
        mod $case {
            #[test]
            fn fast() {
                super::$case($crate::Budget::Fast);
            }

            #[test]
            #[ignore = "long: cargo xtask stats"]
            fn long() {
                super::$case($crate::Budget::Long);
            }
        }
    )+ };
}

impl From<Estimate> for Measured {
    fn from(estimate: Estimate) -> Self {
        Self {
            value: estimate.value,
            u: estimate.u,
            degrees_of_freedom: estimate.degrees_of_freedom,
        }
    }
}

/// Gives a Lambertian coating.
///
/// # Panics
///
/// If the reflectance is out of range.
#[track_caller]
pub fn lambertian(reflectance: f64) -> Coating {
    Coating::lambertian(reflectance).expect("a reflectance")
}

/// Gives a mirror.
///
/// # Panics
///
/// If the reflectance is out of range.
#[track_caller]
pub fn mirror(reflectance: f64) -> Coating {
    Coating::mirror(reflectance).expect("a reflectance")
}

/// Gives a box with one coating on all walls.
///
/// # Panics
///
/// If the size is out of range.
#[track_caller]
pub fn cuboid(size: [f64; 3], coating: Coating) -> Enclosure {
    Enclosure::cuboid(size).expect("a size").coated(coating)
}

/// Gives a time grid with edges where light in a medium of index 1 has gone these paths, in metres.
///
/// # Panics
///
/// If the paths do not start at 0 or do not grow.
#[track_caller]
pub fn after_paths(paths: &[f64]) -> TimeGrid {
    after_paths_in(1.0, paths)
}

/// Gives the same in a medium of another group index.
///
/// # Panics
///
/// If the paths do not start at 0 or do not grow.
#[track_caller]
pub fn after_paths_in(index: f64, paths: &[f64]) -> TimeGrid {
    let edges = paths.iter().map(|s| s * index / SPEED_OF_LIGHT).collect();
    TimeGrid::from_edges(edges).expect("growing edges")
}

/// Gives the energy left at an edge of the time grid.
pub fn decay_at(outcome: &Outcome, edge: usize) -> Measured {
    let decay = outcome.decay();
    let (value, u) = (decay.energy[edge], decay.u[edge]);
    Measured {
        value,
        u,
        degrees_of_freedom: decay.degrees_of_freedom,
    }
}

/// Gives the energy at an edge of a switch-off or switch-on curve.
pub fn curve_at(curve: &Curve, edge: usize) -> Measured {
    let (value, u) = (curve.energy[edge], curve.u[edge]);
    Measured {
        value,
        u,
        degrees_of_freedom: curve.degrees_of_freedom,
    }
}

/// Makes a time grid that starts at 0 and has nine equally spaced edges from one path to another, at index 1.
///
/// # Panics
///
/// If the paths are not in order.
#[track_caller]
pub fn late_window(from: f64, to: f64) -> TimeGrid {
    let inside = (0..=8).map(|k| from + (to - from) * f64::from(k) / 8.0);
    after_paths(&std::iter::once(0.0).chain(inside).collect::<Vec<_>>())
}

/// Gives the path in which the energy falls to 1/e, fitted to all edges of a [`late_window`].
///
/// # Panics
///
/// If nothing could be fitted there.
#[track_caller]
pub fn late_length(outcome: &Outcome) -> Measured {
    let decay = outcome.decay();
    let window = (decay.edges[1], decay.edges[decay.edges.len() - 1]);
    let fit = outcome
        .decay_time(Some(window))
        .expect("energy at all edges");
    assert_eq!(fit.window, window);
    Measured::from(fit.estimate).scaled(SPEED_OF_LIGHT)
}
