//! A block of lanes: one photon a lane, one column a property.

use super::streams::Streams;

/// Lanes that a block has room for; storage only, never visible in results. Fewer may be used.
pub(crate) const LANES: usize = 256;

/// One property of all lanes.
pub(crate) type Column = [f64; LANES];

/// No surface: the photon starts inside.
pub(crate) const NOWHERE: u64 = u64::MAX;

/// Why energy left a history away from a strike.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Cause {
    /// Absorbed by the medium.
    Medium,
    /// The path or strike limit ended the photon.
    Cut,
    /// No wall was found.
    Untracked,
    /// Taken by roulette (negative: given).
    Roulette,
}

/// Energy that left a history away from a strike, or came back by roulette.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Loss {
    /// Quanta of 2⁻⁶⁰ of the starting weight.
    pub(crate) quanta: i64,
    /// Path from the photon's start in metres.
    pub(crate) path: f64,
    pub(crate) cause: Cause,
}

/// Lanes `0 .. live` hold photons; the rest holds leftovers that loops may compute on but nobody reads.
#[derive(Debug)]
pub(crate) struct Block {
    pub(crate) live: usize,
    /// Metres.
    pub(crate) position: [Column; 3],
    /// Unit vectors.
    pub(crate) direction: [Column; 3],
    /// Unit normals of the surface struck last, inward.
    pub(crate) normal: [Column; 3],
    /// Share of the starting energy.
    pub(crate) weight: Column,
    /// Weight lost at this strike.
    pub(crate) lost: Column,
    /// Weight at the start of this flight.
    pub(crate) start_weight: Column,
    /// Path since the photon's start, metres.
    pub(crate) path: Column,
    /// Length of this flight, metres.
    pub(crate) flight: Column,
    /// Energy-weighted length of this flight, ∫ weight ds, metres; only in a medium that absorbs.
    pub(crate) dwell: Column,
    /// Quanta of the weight: at the start of the flight, on arrival, after the strike.
    pub(crate) departing: [i64; LANES],
    pub(crate) arriving: [i64; LANES],
    pub(crate) leaving: [i64; LANES],
    /// Surface struck last, or `NOWHERE`.
    pub(crate) surface: [u64; LANES],
    /// Row struck last.
    pub(crate) row: [u64; LANES],
    pub(crate) strikes: [u64; LANES],
    pub(crate) photon: [u64; LANES],
    /// Wall coordinates of the lanes in `placed`.
    pub(crate) uv: [Column; 2],
    /// Lanes whose wall has regions or a map.
    pub(crate) placed: Vec<u16>,
    /// Lanes that were emitted since the last strike.
    pub(crate) fresh: Vec<u16>,
    /// Lanes in `fresh` whose photon started inside, not on a surface.
    pub(crate) adrift: Vec<u16>,
    /// Lanes for which the flight kernel found no wall.
    pub(crate) missed: Vec<u16>,
    pub(crate) losses: Vec<Loss>,
    pub(crate) streams: Streams,
    /// For use within a stage.
    pub(crate) scratch: [Column; 2],
    pub(crate) marks: [u64; LANES],
}

impl Block {
    pub(crate) fn new() -> Box<Self> {
        let column = [0.0; LANES];
        Box::new(Self {
            live: 0,
            position: [column; 3],
            direction: [column; 3],
            normal: [column; 3],
            weight: column,
            lost: column,
            start_weight: column,
            path: column,
            flight: column,
            dwell: column,
            departing: [0; LANES],
            arriving: [0; LANES],
            leaving: [0; LANES],
            surface: [NOWHERE; LANES],
            row: [0; LANES],
            strikes: [0; LANES],
            photon: [0; LANES],
            uv: [column; 2],
            placed: Vec::with_capacity(LANES),
            fresh: Vec::with_capacity(LANES),
            adrift: Vec::with_capacity(LANES),
            missed: Vec::with_capacity(LANES),
            losses: Vec::with_capacity(3 * LANES),
            streams: Streams::new(),
            scratch: [column; 2],
            marks: [0; LANES],
        })
    }

    /// Moves a photon to another lane: what it carries from one strike to the next.
    pub(crate) fn carry(&mut self, from: usize, to: usize) {
        for column in self.position.iter_mut().chain(&mut self.direction) {
            column[to] = column[from];
        }
        self.weight[to] = self.weight[from];
        self.path[to] = self.path[from];
        self.departing[to] = self.departing[from];
        self.surface[to] = self.surface[from];
        self.strikes[to] = self.strikes[from];
        self.photon[to] = self.photon[from];
        self.streams.copy(from, to);
    }
}
