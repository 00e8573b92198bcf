//! What a strike finds: the row that was struck and what it does to the weight.

use super::block::Block;
use super::level::{Level, Stage};
use crate::geometry::{Frame, RegionShape};
use crate::math::quanta;

/// The surfaces of the flight kernel, the rows that they belong to and the rows' coatings, flattened into tables.
#[derive(Debug, Default)]
pub(crate) struct Surfaces {
    /// Wall of each surface.
    pub(crate) walls: Vec<u32>,
    /// Row of each surface where no region covers it.
    pub(crate) rows: Vec<u64>,
    /// Whether a strike on this surface needs wall coordinates (regions or a map).
    pub(crate) placed: Vec<bool>,
    pub(crate) any_placed: bool,
    /// By wall: its frame and its regions with their rows, the earliest first.
    pub(crate) plans: Vec<Option<WallPlan>>,
    /// By row; openings and absorbers have 0.
    pub(crate) reflectance: Vec<f64>,
    pub(crate) specular_share: Vec<f64>,
}

/// A planar wall's coordinates and what is painted on it.
#[derive(Clone, Debug)]
pub(crate) struct WallPlan {
    pub(crate) frame: Frame,
    pub(crate) regions: Vec<(RegionShape, u64)>,
}

impl WallPlan {
    /// The row of the latest region that covers a point, if any does.
    pub(crate) fn region_row(&self, u: f64, v: f64) -> Option<u64> {
        self.regions
            .iter()
            .rev()
            .find(|(shape, _)| shape.contains(u, v))
            .map(|&(_, row)| row)
    }
}

impl Surfaces {
    /// Finds the rows that were struck, and books the reflectance on the weight.
    pub(crate) fn strike(&self, level: Level, block: &mut Block) {
        self.find_rows(block);
        level.run(Weigh { block });
    }

    /// Looks up each lane's row and, in the first scratch column, its reflectance.
    fn find_rows(&self, block: &mut Block) {
        let live = block.live;
        let (row, surface) = (&mut block.row[..live], &block.surface[..live]);
        let rho = &mut block.scratch[0][..live];
        if !self.any_placed {
            for i in 0..live {
                row[i] = self.rows[surface[i] as usize];
                rho[i] = self.reflectance[row[i] as usize];
            }
            return;
        }
        // Which lanes are placed cannot be predicted, so all are written down and only those are kept.
        block.placed.clear();
        block.placed.resize(live, 0);
        let placed = &mut block.placed[..live];
        let mut kept = 0;
        for i in 0..live {
            let surface = surface[i] as usize;
            row[i] = self.rows[surface];
            rho[i] = self.reflectance[row[i] as usize];
            placed[kept] = i as u16;
            kept += usize::from(self.placed[surface]);
        }
        block.placed.truncate(kept);
        self.find_places(block);
    }

    /// Finds the wall coordinates where they are needed, and the regions there.
    fn find_places(&self, block: &mut Block) {
        for &lane in &block.placed {
            let lane = usize::from(lane);
            let Some(plan) = &self.plans[self.walls[block.surface[lane] as usize] as usize] else {
                continue;
            };
            let [x, y, z] = [
                block.position[0][lane],
                block.position[1][lane],
                block.position[2][lane],
            ];
            let (u, v) = plan.frame.to_plane(glam::DVec3::new(x, y, z));
            block.uv[0][lane] = u;
            block.uv[1][lane] = v;
            if let Some(row) = plan.region_row(u, v) {
                block.row[lane] = row;
                block.scratch[0][lane] = self.reflectance[row as usize];
            }
        }
    }
}

struct Weigh<'a> {
    block: &'a mut Block,
}

impl Stage for Weigh<'_> {
    type Output = ();

    #[inline(always)]
    fn run(self) {
        let live = self.block.live;
        let Block {
            scratch: [rho, _],
            weight,
            lost,
            leaving,
            path,
            flight,
            strikes,
            ..
        } = self.block;
        let (rho, weight) = (&rho[..live], &mut weight[..live]);
        let (lost, leaving) = (&mut lost[..live], &mut leaving[..live]);
        let (path, flight, strikes) = (&mut path[..live], &flight[..live], &mut strikes[..live]);
        for i in 0..live {
            let after = weight[i] * rho[i];
            lost[i] = weight[i] - after;
            weight[i] = after;
            leaving[i] = quanta(after);
            path[i] += flight[i];
            strikes[i] += 1;
        }
    }
}
