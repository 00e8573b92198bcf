//! Energy onto the cells of planar walls.

use super::Observable;
use crate::engine::{Block, Level};
use crate::math::index_below;

/// Equal cells over a wall's bounding rectangle.
#[derive(Clone, Debug)]
pub(crate) struct MapGrid {
    pub(crate) wall: usize,
    /// Cells along u and v.
    pub(crate) cells: [usize; 2],
    /// Lower corner and cells per metre, along u and v.
    pub(crate) lower: [f64; 2],
    pub(crate) per_metre: [f64; 2],
}

/// Incident energy of the cells of all maps, row by row: v outside, u inside.
#[derive(Clone, Debug)]
pub(crate) struct MapCells {
    pub(crate) grids: Vec<MapGrid>,
    /// First cell of each grid.
    pub(crate) firsts: Vec<usize>,
    /// Grid of each surface, if its wall has one.
    pub(crate) grid_of: Vec<Option<u32>>,
}

impl Observable for MapCells {
    fn outputs(&self) -> usize {
        self.grids
            .iter()
            .map(|grid| grid.cells[0] * grid.cells[1])
            .sum()
    }

    fn strike(&self, _: Level, block: &Block, cells: &mut [i128]) {
        for &lane in &block.placed {
            let lane = usize::from(lane);
            let Some(index) = self.grid_of[block.surface[lane] as usize] else {
                continue;
            };
            let grid = &self.grids[index as usize];
            let along = |axis: usize| {
                let offset = (block.uv[axis][lane] - grid.lower[axis]) * grid.per_metre[axis];
                index_below(offset, grid.cells[axis] as f64) as usize
            };
            let cell = self.firsts[index as usize] + along(1) * grid.cells[0] + along(0);
            cells[cell] += i128::from(block.arriving[lane]);
        }
    }
}
