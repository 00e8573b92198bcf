//! What is known before any photon is traced, and what follows for when photons end.

use super::layout::{Facts, Row};
use super::{Experiment, sites};
use crate::engine::Retirement;
use crate::math::{ln, one_minus_exp_neg, smaller};

/// Mean reflectances are kept this far from 0 and 1 where a decay time is expected from them.
const LEAST_REFLECTANCE: f64 = 1e-6;
const MOST_REFLECTANCE: f64 = 1.0 - 1e-9;

pub(super) fn facts(experiment: &Experiment, rows: &[Row]) -> Facts {
    let enclosure = &experiment.enclosure;
    let medium = enclosure.medium;
    let area: f64 = rows.iter().map(|row| row.area).sum();
    let mean =
        |f: &dyn Fn(&Row) -> f64| rows.iter().map(|row| row.area * f(row)).sum::<f64>() / area;
    let reflectance = mean(&|row| row.coating.map_or(0.0, |coating| coating.reflectance()));
    let mean_chord = enclosure.mean_chord();
    let per_metre = decay_per_metre(reflectance, mean_chord, medium.absorption());
    let lossless = reflectance == 1.0 && medium.absorption() == 0.0;
    let alike = rows
        .iter()
        .all(|row| row.coating.is_some_and(|c| c.specular_share() == 0.0))
        && rows.iter().all(|row| row.coating == rows[0].coating);
    let plain = experiment.settings.path_limit.is_none() && medium.absorption() == 0.0;
    Facts {
        volume: enclosure.volume(),
        area: enclosure.area(),
        mean_chord,
        opening_fraction: mean(&|row| f64::from(u8::from(row.is_opening()))),
        mean_reflectance: reflectance,
        expected_decay_time: if lossless {
            f64::INFINITY
        } else {
            1.0 / (per_metre * medium.speed())
        },
        mean_chord_must_hold: alike
            && plain
            && experiment
                .settings
                .sources
                .iter()
                .all(sites::is_equilibrium),
    }
}

/// The rate per metre at which energy is expected to fall.
fn decay_per_metre(mean_reflectance: f64, mean_chord: f64, absorption: f64) -> f64 {
    let above = if mean_reflectance > LEAST_REFLECTANCE {
        mean_reflectance
    } else {
        LEAST_REFLECTANCE
    };
    let clamped = smaller(above, MOST_REFLECTANCE);
    -ln(clamped) / mean_chord + absorption
}

/// Share of the energy that is left after a mean flight and a strike on the average wall.
pub(super) fn kept_at_a_strike(experiment: &Experiment, facts: &Facts) -> f64 {
    let depth = experiment.enclosure.medium.absorption() * facts.mean_chord;
    facts.mean_reflectance * (1.0 - one_minus_exp_neg(depth))
}

pub(super) fn retirement(experiment: &Experiment, facts: &Facts) -> Retirement {
    let medium = experiment.enclosure.medium;
    let kept = kept_at_a_strike(experiment, facts);
    // A hundred times the mean number of strikes, where that is more than a million.
    let strikes = 100.0 / (1.0 - smaller(kept, 1.0 - 1e-10));
    Retirement {
        decay_per_metre: decay_per_metre(
            facts.mean_reflectance,
            facts.mean_chord,
            medium.absorption(),
        ),
        stop: experiment
            .settings
            .time
            .as_ref()
            .map_or(0.0, |grid| grid.stop() * medium.speed()),
        path_limit: experiment.settings.path_limit.unwrap_or(f64::INFINITY),
        strike_limit: if strikes > 1e6 {
            strikes as u64
        } else {
            1_000_000
        },
    }
}
