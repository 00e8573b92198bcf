//! From a description to a plan: everything is checked here, once.

use std::sync::Arc;

use super::error::MOST_STRIKES;
use super::facts::{facts, kept_at_a_strike, retirement};
use super::ground::{ground, surfaces};
use super::layout::{Facts, Layout, Row};
use super::observing::{maps, observables};
use super::{Experiment, ExperimentError, TimeGrid, fingerprint, sites};
use crate::enclosure::Enclosure;
use crate::engine::{Plan, Retirement};
use crate::math::{power_of_two_above, smaller};
use crate::medium::Passage;
use crate::observe::{DecayBins, FlightMoments, FluxRows, LossLedger, Observable, TimeBins};

/// A plan, and what its cells mean.
#[derive(Debug)]
pub(crate) struct Compiled {
    pub(crate) plan: Plan,
    pub(crate) layout: Arc<Layout>,
}

pub(crate) fn compile(experiment: &Experiment) -> Result<Compiled, ExperimentError> {
    let enclosure = &experiment.enclosure;
    let settings = &experiment.settings;
    let rows = rows(enclosure)?;
    let facts = facts(experiment, &rows);
    if let Some(value) = settings.path_limit
        && !(value > 0.0 && value.is_finite())
    {
        return Err(ExperimentError::PathLimit { value });
    }
    let lossless = rows.iter().all(|row| {
        row.coating
            .is_some_and(|coating| coating.reflectance() == 1.0)
    });
    if lossless && enclosure.medium.absorption() == 0.0 && settings.path_limit.is_none() {
        return Err(ExperimentError::Endless);
    }
    let strikes = 1.0 / (1.0 - kept_at_a_strike(experiment, &facts));
    if strikes > MOST_STRIKES && settings.path_limit.is_none() {
        return Err(ExperimentError::NearlyEndless { strikes });
    }
    let retirement = retirement(experiment, &facts);
    let layout = layout(experiment, rows, facts, &retirement)?;
    let (ground, flight) = ground(&enclosure.solid);
    let surfaces = surfaces(enclosure, &layout, &ground);
    let observables = observables(&layout, &ground);
    let emission = sites::emitter(experiment, &ground, &surfaces)?;
    let history = fingerprint::history(experiment, &retirement);
    let plan = Plan {
        emission: Box::new(emission),
        flight,
        passage: Passage {
            absorption: enclosure.medium.absorption(),
        },
        mirrors: surfaces.specular_share.iter().any(|&share| share > 0.0),
        surfaces,
        retirement,
        observables,
        history,
        totals: fingerprint::totals(history, &layout),
    };
    Ok(Compiled {
        plan,
        layout: Arc::new(layout),
    })
}

/// The disjoint pieces of the boundary, each of which must have been given a finish.
fn rows(enclosure: &Enclosure) -> Result<Vec<Row>, ExperimentError> {
    let mut rows = Vec::new();
    for piece in enclosure.pieces() {
        let Some(finish) = piece.finish else {
            return Err(ExperimentError::Bare {
                wall: piece.name.to_owned(),
            });
        };
        rows.push(Row {
            name: piece.name.to_owned(),
            wall: enclosure.mesh().walls[piece.wall].clone(),
            area: piece.area,
            coating: finish.coating(),
        });
    }
    Ok(rows)
}

fn layout(
    experiment: &Experiment,
    rows: Vec<Row>,
    facts: Facts,
    retirement: &Retirement,
) -> Result<Layout, ExperimentError> {
    let (enclosure, settings) = (&experiment.enclosure, &experiment.settings);
    let speed = enclosure.medium.speed();
    // What never decays is watched as long as light needs for a thousand mean chords.
    let span = if facts.expected_decay_time.is_finite() {
        10.0 * facts.expected_decay_time
    } else {
        1000.0 * facts.mean_chord / speed
    };
    let own = TimeGrid::new(span, 200).ok();
    let Some(grid) = settings.time.clone().or(own) else {
        return Err(ExperimentError::PathLimit {
            value: span * speed,
        });
    };
    let diagonal = enclosure.solid.diagonal;
    let stop = grid.stop() * speed;
    let by_strikes = retirement.strike_limit as f64 * diagonal;
    let longest = smaller(by_strikes, retirement.path_limit + diagonal);
    let time = TimeBins {
        edges: grid.edges().iter().map(|edge| edge * speed).collect(),
        per_metre: grid.is_equal().then(|| grid.bins() as f64 / stop),
        // First moments of late losses stay below 2²⁰ of this.
        beyond: power_of_two_above(crate::math::larger(stop, longest / 1_048_576.0)),
    };
    let flights = FlightMoments {
        unit: power_of_two_above(diagonal),
        diagonal,
        absorbing: enclosure.medium.absorption() > 0.0,
    };

    let rows_at = 0;
    let losses_at = rows_at + FluxRows { rows: rows.len() }.outputs();
    let decay_at = losses_at + LossLedger.outputs();
    let flights_at = decay_at + DecayBins { time: time.clone() }.outputs();
    let mut outputs = flights_at + flights.outputs();
    let mut largest = (0, None);
    for map in &settings.maps {
        let cells = map.cells[0].saturating_mul(map.cells[1]);
        if cells > largest.0 {
            largest = (cells, Some(map.wall.clone()));
        }
        outputs = outputs.saturating_add(cells);
    }
    let needed = (outputs as u64).saturating_mul(1024);
    if needed > settings.memory {
        let largest_map = largest.1.filter(|_| largest.0 > 2 * grid.bins());
        return Err(ExperimentError::Memory {
            needed,
            allowed: settings.memory,
            largest_map,
        });
    }
    let maps = maps(experiment, flights_at + flights.outputs())?;
    let watts = settings.sources.iter().map(|source| source.flux).sum();
    let edges = grid.edges().to_vec();
    let exponents = vec![-60; outputs];
    Ok(Layout {
        rows,
        watts,
        speed,
        edges,
        time,
        flights,
        maps,
        facts,
        rows_at,
        losses_at,
        decay_at,
        flights_at,
        outputs,
        exponents,
    })
}
