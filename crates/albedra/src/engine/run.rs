//! Threads, progress and cancelling: batches of photons in order, each batch a task for each group.

use std::collections::VecDeque;
use std::ops::ControlFlow;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};
use std::sync::mpsc::{RecvTimeoutError, SyncSender, sync_channel};
use std::time::{Duration, Instant};

use super::block::Block;
use super::level::Level;
use super::plan::Plan;
use super::task::{Part, Task, Workplace};
use crate::estimate::{Counters, GROUPS, Totals};

/// Photons of a task. More lengthens the wait for a batch; fewer leave lanes empty at the end of every task.
const TASK: u64 = 1024;

/// Photons of a batch.
const BATCH: u64 = TASK * GROUPS as u64;

/// Memory that sums of unfinished batches may take: past it, photons that come after a long-lived one wait for it.
const AHEAD: u64 = 16 << 20;

/// How long a thread that is too far ahead sleeps before it looks again.
const NAP: Duration = Duration::from_micros(200);

/// How often progress is told and cancelling is asked for.
const TICK: Duration = Duration::from_millis(50);

/// How far a run is.
#[derive(Clone, Debug)]
#[non_exhaustive]
pub struct Progress {
    /// Photons that have ended so far, those of unfinished batches included.
    pub done: u64,
    /// Photons wanted.
    pub wanted: u64,
    /// Time since the run began.
    pub elapsed: Duration,
    /// Relative standard uncertainty so far of the output that is watched, if there is any yet.
    pub relative_uncertainty: Option<f64>,
}

impl Progress {
    /// Photons a second so far.
    pub fn rate(&self) -> f64 {
        let seconds = self.elapsed.as_secs_f64();
        if seconds > 0.0 {
            self.done as f64 / seconds
        } else {
            0.0
        }
    }

    /// Expected time until the end, once any photon has ended.
    pub fn left(&self) -> Option<Duration> {
        let rate = self.rate();
        (rate > 0.0)
            .then(|| (self.wanted.saturating_sub(self.done)) as f64 / rate)
            .and_then(|seconds| Duration::try_from_secs_f64(seconds).ok())
    }
}

/// What to run, and how; the last three are not visible in results.
#[derive(Debug)]
pub(crate) struct Order<'a> {
    pub(crate) plan: &'a Plan,
    pub(crate) seed: u64,
    pub(crate) first: u64,
    pub(crate) photons: u64,
    pub(crate) threads: usize,
    pub(crate) lanes: usize,
    pub(crate) level: Level,
}

/// Why a run has no totals.
#[derive(Debug)]
pub(crate) enum EngineError {
    /// The operating system gave no threads.
    Threads(String),
}

/// Traces the photons. With `Break` from the watch, the totals hold the longest unbroken run of finished batches.
pub(crate) fn run(
    order: &Order<'_>,
    watch: &mut dyn FnMut(&Progress, &Totals) -> ControlFlow<()>,
) -> Result<(Totals, ControlFlow<()>), EngineError> {
    let plan = order.plan;
    let begun = Instant::now();
    let (stop, ended) = (AtomicBool::new(false), AtomicU64::new(0));
    let queue = Queue {
        next: AtomicU64::new(0),
        finished: AtomicU64::new(0),
        ahead: batches_ahead(plan.outputs()),
    };
    let place = Workplace {
        plan,
        seed: order.seed,
        level: order.level,
        lanes: order.lanes,
        stop: &stop,
        ended: &ended,
    };
    let mut gathered = Gathered::new(order);
    let mut flow = ControlFlow::Continue(());
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(order.threads)
        .thread_name(|i| format!("albedra-{i}"))
        .build()
        .map_err(|error| EngineError::Threads(error.to_string()))?;
    pool.in_place_scope(|scope| {
        let _guard = StopOnPanic(&stop);
        let (sender, receiver) = sync_channel(2 * order.threads);
        for _ in 0..order.threads {
            let (sender, place, queue) = (sender.clone(), &place, &queue);
            scope.spawn(move |_| work(order, place, queue, &sender));
        }
        drop(sender);
        let mut told = Instant::now();
        loop {
            match receiver.recv_timeout(TICK.saturating_sub(told.elapsed())) {
                Ok((number, part)) => {
                    gathered.add(number, part);
                    queue.finished.store(gathered.finished, Ordering::Relaxed);
                }
                Err(RecvTimeoutError::Timeout) => {}
                Err(RecvTimeoutError::Disconnected) => break,
            }
            if told.elapsed() < TICK {
                continue;
            }
            told = Instant::now();
            if flow.is_continue() {
                let done = ended.load(Ordering::Relaxed);
                let progress = Progress {
                    done,
                    wanted: order.photons,
                    elapsed: begun.elapsed(),
                    relative_uncertainty: None,
                };
                flow = watch(&progress, &gathered.totals);
                if flow.is_break() {
                    stop.store(true, Ordering::Relaxed);
                }
            }
        }
    });
    Ok((gathered.totals, flow))
}

/// Stops the workers when a thread panics, so that none waits for ever and the panic comes out.
struct StopOnPanic<'a>(&'a AtomicBool);

impl Drop for StopOnPanic<'_> {
    fn drop(&mut self) {
        if std::thread::panicking() {
            self.0.store(true, Ordering::Relaxed);
        }
    }
}

/// Which tasks are begun.
struct Queue {
    next: AtomicU64,
    /// Batches that are in the totals.
    finished: AtomicU64,
    /// Batches that may be begun before the first of them is finished.
    ahead: u64,
}

/// So many batches fit into the memory, but two at least, so that no thread waits for a batch's last task in vain.
fn batches_ahead(outputs: usize) -> u64 {
    let bytes = size_of::<[i128; GROUPS]>() as u64 * outputs as u64 + 1;
    (AHEAD / bytes).clamp(2, 64)
}

/// Takes tasks in order until there are none left or the run stops.
fn work(order: &Order<'_>, place: &Workplace<'_>, queue: &Queue, sender: &SyncSender<(u64, Part)>) {
    let mut block = Block::new();
    let _guard = StopOnPanic(place.stop);
    while !place.stop.load(Ordering::Relaxed) {
        let number = queue.next.fetch_add(1, Ordering::Relaxed);
        let batch = number / GROUPS as u64;
        if batch
            .checked_mul(BATCH)
            .is_none_or(|before| before >= order.photons)
        {
            return;
        }
        while batch >= queue.finished.load(Ordering::Relaxed) + queue.ahead {
            if place.stop.load(Ordering::Relaxed) {
                return;
            }
            std::thread::sleep(NAP);
        }
        let Some(part) = task(order.first, order.photons, number).run(place, &mut block) else {
            return;
        };
        if sender.send((number, part)).is_err() {
            return;
        }
    }
}

/// Photons of a batch: from where, and how many.
fn batch_range(first: u64, photons: u64, batch: u64) -> (u64, u64) {
    let before = batch * BATCH;
    let left = photons - before;
    (first + before, if left < BATCH { left } else { BATCH })
}

/// The task of this number: group `number % 64` of batch `number / 64`.
fn task(first: u64, photons: u64, number: u64) -> Task {
    let groups = GROUPS as u64;
    let (begin, length) = batch_range(first, photons, number / groups);
    let skip = (number % groups + groups - begin % groups) % groups;
    Task {
        first: begin + skip,
        photons: (length.saturating_sub(skip)).div_ceil(groups),
    }
}

/// Parts that have come in: finished batches in order are in the totals, the others wait.
struct Gathered<'a> {
    order: &'a Order<'a>,
    totals: Totals,
    finished: u64,
    waiting: VecDeque<Batch>,
}

#[derive(Default)]
struct Batch {
    parts: usize,
    groups: Vec<[i128; GROUPS]>,
    counters: Counters,
}

impl<'a> Gathered<'a> {
    fn new(order: &'a Order<'a>) -> Self {
        let plan = order.plan;
        let totals = Totals::empty(plan.history, plan.totals, order.seed, plan.outputs());
        Self {
            order,
            totals,
            finished: 0,
            waiting: VecDeque::new(),
        }
    }

    fn add(&mut self, number: u64, part: Part) {
        let slot = (number / GROUPS as u64 - self.finished) as usize;
        while self.waiting.len() <= slot {
            let groups = vec![[0; GROUPS]; self.order.plan.outputs()];
            self.waiting.push_back(Batch {
                groups,
                ..Batch::default()
            });
        }
        let batch = &mut self.waiting[slot];
        for (output, cell) in batch.groups.iter_mut().zip(part.cells) {
            output[(number % GROUPS as u64) as usize] += cell;
        }
        batch.counters.strikes += part.counters.strikes;
        batch.counters.flights += part.counters.flights;
        batch.counters.retried += part.counters.retried;
        batch.counters.untracked += part.counters.untracked;
        batch.parts += 1;
        while self
            .waiting
            .front()
            .is_some_and(|batch| batch.parts == GROUPS)
        {
            if let Some(batch) = self.waiting.pop_front() {
                self.close(&batch);
            }
        }
    }

    fn close(&mut self, batch: &Batch) {
        let (begin, length) = batch_range(self.order.first, self.order.photons, self.finished);
        self.totals
            .absorb(begin..begin + length, &batch.groups, batch.counters);
        self.finished += 1;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn tasks_cover_every_photon_once() {
        for (first, photons) in [
            (0, 1),
            (0, 64),
            (1, 255),
            (257, 65_536),
            (5, 200_000),
            (63, 65),
        ] {
            let mut seen = vec![0_u8; photons as usize];
            let mut number = 0;
            while number / 64 * BATCH < photons {
                let task = task(first, photons, number);
                for k in 0..task.photons {
                    let photon = task.first + 64 * k;
                    assert_eq!(photon % 64, task.first % 64);
                    seen[(photon - first) as usize] += 1;
                }
                number += 1;
            }
            assert!(seen.iter().all(|&times| times == 1), "{first} {photons}");
        }
    }
}
