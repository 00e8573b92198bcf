//! The loop: the photons of one group in one batch.

use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

use super::block::{Block, Cause, LANES, Loss, NOWHERE};
use super::level::Level;
use super::plan::Plan;
use super::turn::turn;
use crate::estimate::{Counters, GROUPS};
use crate::flight::Retries;
use crate::math::{ONE, quanta};

/// Photons `first`, `first + 64`, … of one group.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Task {
    pub(crate) first: u64,
    pub(crate) photons: u64,
}

/// What a task has counted.
#[derive(Debug)]
pub(crate) struct Part {
    pub(crate) cells: Vec<i128>,
    pub(crate) counters: Counters,
}

/// How tasks are run; none of it is visible in results.
#[derive(Debug)]
pub(crate) struct Workplace<'a> {
    pub(crate) plan: &'a Plan,
    pub(crate) seed: u64,
    pub(crate) level: Level,
    pub(crate) lanes: usize,
    /// Set to abandon what runs.
    pub(crate) stop: &'a AtomicBool,
    /// Photons that ended, for the progress display.
    pub(crate) ended: &'a AtomicU64,
}

impl Task {
    /// Follows the photons to their ends; nothing, if the run was stopped.
    pub(crate) fn run(self, place: &Workplace<'_>, block: &mut Block) -> Option<Part> {
        let Workplace { plan, level, .. } = *place;
        let mut cells = vec![0; plan.outputs()];
        let mut counters = Counters::default();
        let mut retries = Retries::default();
        let mut crew = Crew {
            task: self,
            emitted: 0,
            unplaced: 0,
            place,
        };
        let mut ended = Vec::with_capacity(LANES);
        block.live = 0;
        crew.fill(block, &[]);
        book_losses(plan, block, &mut cells);
        while block.live > 0 {
            if place.stop.load(Ordering::Relaxed) {
                return None;
            }
            counters.flights += block.live as u64;
            plan.flight.next(level, block, &mut retries);
            counters.strikes += (block.live - block.missed.len()) as u64;
            give_up_missed(block, &mut counters);
            plan.passage.pass(level, block);
            plan.surfaces.strike(level, block);
            for (range, observable) in &plan.observables {
                observable.strike(level, block, &mut cells[range.clone()]);
            }
            turn(level, &plan.surfaces, plan.mirrors, block);
            plan.retirement.retire(level, block, &mut ended);
            crew.fill(block, &ended);
            book_losses(plan, block, &mut cells);
        }
        counters.untracked += crew.unplaced;
        counters.retried += retries.retried;
        Some(Part { cells, counters })
    }
}

/// Books what has left away from strikes.
fn book_losses(plan: &Plan, block: &mut Block, cells: &mut [i128]) {
    for (range, observable) in &plan.observables {
        observable.losses(&block.losses, &mut cells[range.clone()]);
    }
    block.losses.clear();
}

/// Books photons without a wall as untracked; what is left in their lanes weighs nothing and ends at this strike.
fn give_up_missed(block: &mut Block, counters: &mut Counters) {
    while let Some(lane) = block.missed.pop() {
        let lane = usize::from(lane);
        let (quanta, path) = (block.departing[lane], block.path[lane]);
        block.losses.push(Loss {
            quanta,
            path,
            cause: Cause::Untracked,
        });
        counters.untracked += 1;
        block.weight[lane] = 0.0;
        block.departing[lane] = 0;
        block.flight[lane] = 0.0;
        if block.surface[lane] == NOWHERE {
            block.surface[lane] = 0;
        }
    }
}

/// Puts photons into lanes.
struct Crew<'a> {
    task: Task,
    emitted: u64,
    /// Photons for which no start was found.
    unplaced: u64,
    place: &'a Workplace<'a>,
}

impl Crew<'_> {
    /// Gives ended lanes (ascending) to new photons, opens new lanes while there is room, and closes the gaps that
    /// stay at the end of the task.
    fn fill(&mut self, block: &mut Block, ended: &[u16]) {
        block.fresh.clear();
        block.adrift.clear();
        self.place
            .ended
            .fetch_add(ended.len() as u64, Ordering::Relaxed);
        let mut refilled = 0;
        while refilled < ended.len() && self.start(block, usize::from(ended[refilled])) {
            refilled += 1;
        }
        // From the last gap down, every lane above is live and none of those moved is fresh.
        for &gap in ended[refilled..].iter().rev() {
            block.live -= 1;
            block.carry(block.live, usize::from(gap));
        }
        while block.live < self.place.lanes && self.start(block, block.live) {
            block.live += 1;
        }
    }

    /// Starts the task's next photon in a lane, if there is one left.
    fn start(&mut self, block: &mut Block, lane: usize) -> bool {
        while self.emitted < self.task.photons {
            let photon = self.task.first + self.emitted * GROUPS as u64;
            self.emitted += 1;
            block.streams.seed(lane, self.place.seed, photon);
            let start = self.place.plan.emission.emit(&mut block.streams.lane(lane));
            let Some(start) = start else {
                block.losses.push(Loss {
                    quanta: ONE,
                    path: 0.0,
                    cause: Cause::Untracked,
                });
                self.unplaced += 1;
                self.place.ended.fetch_add(1, Ordering::Relaxed);
                continue;
            };
            for axis in 0..3 {
                block.position[axis][lane] = start.position[axis];
                block.direction[axis][lane] = start.direction[axis];
            }
            block.weight[lane] = 1.0;
            block.departing[lane] = quanta(1.0);
            block.path[lane] = 0.0;
            block.surface[lane] = start.surface;
            block.strikes[lane] = 0;
            block.photon[lane] = photon;
            block.fresh.push(lane as u16);
            if start.surface == NOWHERE {
                block.adrift.push(lane as u16);
            }
            return true;
        }
        false
    }
}
