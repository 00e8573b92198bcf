//! What is counted in a run, fitted to its enclosure.

use super::ground::Ground;
use super::layout::MapLayout;
use super::{Experiment, ExperimentError, Layout};
use crate::enclosure::EnclosureError;
use crate::near::Near;
use crate::observe::{DecayBins, FluxRows, LossLedger, MapCells, MapGrid, Observable};

/// The maps that were asked for, with cells from `first` on.
pub(super) fn maps(
    experiment: &Experiment,
    first: usize,
) -> Result<Vec<MapLayout>, ExperimentError> {
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

/// All observables, each with the cells that it has.
pub(super) fn observables(
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
            .position(|row| row.wall == map.wall)
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
