//! Energy onto the cells of planar walls.

use super::Observable;
use crate::engine::{Block, LANES, Level, Stage};
use crate::math::{index_below, wide};

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

    fn strike(&self, level: Level, block: &Block, cells: &mut [i128]) {
        for grid in 0..self.grids.len() {
            level.run(Count {
                maps: self,
                grid,
                block,
                cells,
            });
        }
    }
}

/// Books the strikes on one grid.
struct Count<'a> {
    maps: &'a MapCells,
    grid: usize,
    block: &'a Block,
    cells: &'a mut [i128],
}

/// Lanes whose cells are found together, in a loop that vectorises.
const CHUNK: usize = 32;

impl Stage for Count<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let Self {
            maps,
            grid: index,
            block,
            cells,
        } = self;
        let grid = &maps.grids[index];
        let cells = &mut cells[maps.firsts[index]..];
        // Which lanes are on this grid cannot be predicted, so all are written down and only those are kept.
        let mut lanes = [0; LANES];
        let mut kept = 0;
        for &lane in &block.placed {
            lanes[kept] = lane;
            let found = maps.grid_of[block.surface[usize::from(lane)] as usize];
            kept += usize::from(found == Some(index as u32));
        }
        let mut uv = [[0.0; CHUNK]; 2];
        let mut along = [[0; CHUNK]; 2];
        for lanes in lanes[..kept].chunks(CHUNK) {
            for axis in 0..2 {
                for (at, &lane) in uv[axis].iter_mut().zip(lanes) {
                    *at = block.uv[axis][usize::from(lane)];
                }
                let (lower, per_metre) = (grid.lower[axis], grid.per_metre[axis]);
                let count = grid.cells[axis] as f64;
                for (along, at) in along[axis].iter_mut().zip(&uv[axis]) {
                    *along = index_below((at - lower) * per_metre, count);
                }
            }
            for (k, &lane) in lanes.iter().enumerate() {
                let cell = along[1][k] as usize * grid.cells[0] + along[0][k] as usize;
                cells[cell] += wide(block.arriving[usize::from(lane)]);
            }
        }
    }
}
