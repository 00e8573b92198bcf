//! From a description to a plan: everything is checked here, once.

use std::sync::Arc;

use super::layout::{Facts, Layout, MapLayout, Row};
use super::{Experiment, ExperimentError, TimeGrid, fingerprint, sites};
use crate::enclosure::{Enclosure, EnclosureError, Finish, Solid};
use crate::engine::{Plan, Retirement, Surfaces, WallPlan};
use crate::flight::{Facets, Flight, Planes};
use crate::math::{ln, power_of_two_above, smaller};
use crate::medium::Passage;
use crate::near::Near;
use crate::observe::{
    DecayBins, FlightMoments, FluxRows, LossLedger, MapCells, MapGrid, Observable, TimeBins,
};

/// A plan, and what its cells mean.
#[derive(Debug)]
pub(crate) struct Compiled {
    pub(crate) plan: Plan,
    pub(crate) layout: Arc<Layout>,
}

/// Mean reflectances are kept this far from 0 and 1 where a decay time is expected from them.
const LEAST_REFLECTANCE: f64 = 1e-6;
const MOST_REFLECTANCE: f64 = 1.0 - 1e-9;

/// The surfaces that a flight kernel hits.
#[derive(Debug)]
pub(crate) struct Ground {
    /// Wall of each surface.
    pub(crate) walls: Vec<u32>,
    /// Plane n·x = offset of each surface, outward unit normal.
    pub(crate) planes: Vec<[f64; 4]>,
    /// Surface of each triangle of the solid.
    pub(crate) of_triangle: Vec<u32>,
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

/// The layout alone, without hierarchies and sources.
pub(crate) fn rows(enclosure: &Enclosure) -> Result<Vec<Row>, ExperimentError> {
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

fn facts(experiment: &Experiment, rows: &[Row]) -> Facts {
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

fn retirement(experiment: &Experiment, facts: &Facts) -> Retirement {
    let medium = experiment.enclosure.medium;
    let kept = facts.mean_reflectance
        * (1.0 - crate::math::one_minus_exp_neg(medium.absorption() * facts.mean_chord));
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

fn maps(experiment: &Experiment, first: usize) -> Result<Vec<MapLayout>, ExperimentError> {
    let enclosure = &experiment.enclosure;
    let mut at = first;
    let mut maps: Vec<MapLayout> = Vec::new();
    for request in &experiment.settings.maps {
        let wrong = |required| ExperimentError::Map {
            wall: request.wall.clone(),
            required,
            cells: request.cells,
        };
        let Some(wall) = enclosure.solid.wall(&request.wall) else {
            let near = Near::to(
                &request.wall,
                enclosure.mesh().walls.iter().map(String::as_str),
            );
            return Err(ExperimentError::UnknownWall {
                name: request.wall.clone(),
                near,
            });
        };
        if maps.iter().any(|map| map.wall == request.wall) {
            return Err(wrong("a wall can have one map only"));
        }
        let [columns, rows] = request.cells;
        if !((1..=100_000).contains(&columns) && (1..=100_000).contains(&rows)) {
            return Err(wrong("cells along u and v must number from 1 to 100000"));
        }
        let plane = enclosure
            .plane(wall)
            .map_err(|_: EnclosureError| wrong("the wall must be planar and in one piece"))?;
        let cells = plane.cells(columns, rows);
        maps.push(MapLayout {
            wall: request.wall.clone(),
            u_edges: cells.u_edges,
            v_edges: cells.v_edges,
            areas: cells.areas,
            cells: at..at + columns * rows,
        });
        at += columns * rows;
    }
    Ok(maps)
}

/// The kernel for a body, chosen by its shape, and its surfaces.
fn ground(solid: &Solid) -> (Ground, Box<dyn Flight>) {
    if let Some(convex) = &solid.convex {
        let planes: Vec<_> = convex
            .iter()
            .map(|plane| [plane.normal.x, plane.normal.y, plane.normal.z, plane.offset])
            .collect();
        let mut of_facet = vec![0; solid.mesh.facets()];
        for (index, plane) in (0_u32..).zip(convex) {
            for &facet in &plane.facets {
                of_facet[facet as usize] = index;
            }
        }
        let of_triangle = solid
            .triangle_facets
            .iter()
            .map(|&facet| of_facet[facet as usize])
            .collect();
        let walls = convex.iter().map(|plane| plane.wall).collect();
        let flight = Box::new(Planes::new(&planes));
        return (
            Ground {
                walls,
                planes,
                of_triangle,
            },
            flight,
        );
    }
    let planes: Vec<_> = (0..solid.triangles.len())
        .map(|triangle| solid.plane_of(triangle))
        .collect();
    let walls = (0..solid.triangles.len())
        .map(|triangle| solid.triangle_wall(triangle))
        .collect();
    let of_triangle = (0_u32..).take(planes.len()).collect();
    let flight = Facets::new(solid.hierarchy(false), planes.clone());
    (
        Ground {
            walls,
            planes,
            of_triangle,
        },
        Box::new(flight),
    )
}

fn surfaces(enclosure: &Enclosure, layout: &Layout, ground: &Ground) -> Surfaces {
    let pieces = enclosure.pieces();
    let mut plans: Vec<Option<WallPlan>> = vec![None; enclosure.solid.walls.len()];
    for (wall, plan) in plans.iter_mut().enumerate() {
        let mapped = layout
            .maps
            .iter()
            .any(|map| map.wall == enclosure.mesh().walls[wall]);
        let regions: Vec<_> = (0_u64..)
            .zip(&pieces)
            .filter(|(_, piece)| piece.wall == wall)
            .filter_map(|(row, piece)| Some((enclosure.patches[piece.patch?].shape.clone(), row)))
            .collect();
        if let (true, Some(plane)) = (
            mapped || !regions.is_empty(),
            &enclosure.solid.walls[wall].plane,
        ) {
            *plan = Some(WallPlan {
                frame: plane.frame,
                regions,
            });
        }
    }
    let placed: Vec<bool> = ground
        .walls
        .iter()
        .map(|&wall| plans[wall as usize].is_some())
        .collect();
    let coating = |piece: &crate::enclosure::Piece<'_>| piece.finish.and_then(Finish::coating);
    Surfaces {
        walls: ground.walls.clone(),
        // Walls come first among the rows, in their order.
        rows: ground.walls.iter().map(|&wall| u64::from(wall)).collect(),
        any_placed: placed.contains(&true),
        placed,
        plans,
        reflectance: pieces
            .iter()
            .map(|piece| coating(piece).map_or(0.0, |c| c.reflectance()))
            .collect(),
        specular_share: pieces
            .iter()
            .map(|piece| coating(piece).map_or(0.0, |c| c.specular_share()))
            .collect(),
    }
}

fn observables(
    layout: &Layout,
    ground: &Ground,
) -> Vec<(std::ops::Range<usize>, Box<dyn Observable>)> {
    let mut all: Vec<Box<dyn Observable>> = vec![
        Box::new(FluxRows {
            rows: layout.rows.len(),
        }),
        Box::new(LossLedger),
        Box::new(DecayBins {
            time: layout.time.clone(),
        }),
        Box::new(layout.flights.clone()),
    ];
    if !layout.maps.is_empty() {
        all.push(Box::new(map_cells(layout, ground)));
    }
    let mut at = 0;
    all.into_iter()
        .map(|observable| {
            let range = at..at + observable.outputs();
            at = range.end;
            (range, observable)
        })
        .collect()
}

fn map_cells(layout: &Layout, ground: &Ground) -> MapCells {
    let mut firsts = Vec::new();
    let mut at = 0;
    let mut grids = Vec::new();
    for map in &layout.maps {
        let wall = layout
            .rows
            .iter()
            .position(|row| row.name == map.wall)
            .unwrap_or(usize::MAX);
        let cells = [map.u_edges.len() - 1, map.v_edges.len() - 1];
        let lower = [map.u_edges[0], map.v_edges[0]];
        let span = [
            map.u_edges[cells[0]] - lower[0],
            map.v_edges[cells[1]] - lower[1],
        ];
        let per_metre = [cells[0] as f64 / span[0], cells[1] as f64 / span[1]];
        firsts.push(at);
        at += cells[0] * cells[1];
        grids.push(MapGrid {
            wall,
            cells,
            lower,
            per_metre,
        });
    }
    let grid_of = |&wall: &u32| {
        grids
            .iter()
            .position(|grid| grid.wall == wall as usize)
            .and_then(|grid| u32::try_from(grid).ok())
    };
    let grid_of = ground.walls.iter().map(grid_of).collect();
    MapCells {
        grids,
        firsts,
        grid_of,
    }
}
