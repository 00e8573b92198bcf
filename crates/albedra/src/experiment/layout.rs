//! What the cells of an experiment's totals mean.

use std::ops::Range;

use crate::coating::Coating;
use crate::observe::{FlightMoments, TimeBins};

/// A disjoint piece of the boundary that is reported: a wall without its regions, or the visible part of a region.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Row {
    /// Name of the wall, region or opening.
    pub name: String,
    /// Name of the wall that it lies on.
    pub wall: String,
    /// Visible area in m².
    pub area: f64,
    /// What it does to light; nothing if it is an opening.
    pub coating: Option<Coating>,
}

impl Row {
    /// Whether light that meets it leaves.
    pub fn is_opening(&self) -> bool {
        self.coating.is_none()
    }
}

/// Cells and the scales that turn them into numbers with units.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Layout {
    pub(crate) rows: Vec<Row>,
    /// Radiant flux of all sources, W.
    pub(crate) watts: f64,
    /// Speed of a pulse, m/s.
    pub(crate) speed: f64,
    /// Edges of the time bins, s.
    pub(crate) edges: Vec<f64>,
    pub(crate) time: TimeBins,
    pub(crate) flights: FlightMoments,
    pub(crate) maps: Vec<MapLayout>,
    pub(crate) facts: Facts,
    /// First cells of the observables.
    pub(crate) rows_at: usize,
    pub(crate) losses_at: usize,
    pub(crate) decay_at: usize,
    pub(crate) flights_at: usize,
    pub(crate) outputs: usize,
    /// Quantum of each cell as a power of two.
    pub(crate) exponents: Vec<i32>,
}

/// What is known before any photon is traced.
#[derive(Clone, Copy, Debug, PartialEq)]
#[non_exhaustive]
pub struct Facts {
    /// m³.
    pub volume: f64,
    /// m².
    pub area: f64,
    /// 4V/S in metres.
    pub mean_chord: f64,
    /// Area of the openings over that of everything.
    pub opening_fraction: f64,
    /// Reflectance averaged over the area, openings counted as 0.
    pub mean_reflectance: f64,
    /// Decay time expected from 4V/S, the mean reflectance and the medium's absorption, s; infinite if nothing is lost.
    pub expected_decay_time: f64,
    /// Whether flights that start on surfaces must have the mean 4V/S: closed, one Lambertian reflectance, no absorption
    /// by the medium, and all light from the walls by area.
    pub mean_chord_must_hold: bool,
}

/// Cells of a map.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct MapLayout {
    pub(crate) wall: String,
    pub(crate) u_edges: Vec<f64>,
    pub(crate) v_edges: Vec<f64>,
    /// Areas of the cells on the wall in m², v outside, u inside.
    pub(crate) areas: Vec<f64>,
    pub(crate) cells: Range<usize>,
}
