//! What decides histories, and what decides the meaning of totals.

use super::{Experiment, Layout};
use crate::engine::{Retirement, STREAM_VERSION};
use crate::estimate::{Fingerprint, FingerprintBuilder};

/// Fingerprint of all that decides what photons do: shape, coatings, sources, medium, roulette and the stream's version.
pub(super) fn history(experiment: &Experiment, retirement: &Retirement) -> Fingerprint {
    let mut builder = FingerprintBuilder::new("albedra history");
    builder.u64(STREAM_VERSION);
    let mesh = experiment.enclosure.mesh();
    for vertex in &mesh.vertices {
        builder.f64(vertex.x).f64(vertex.y).f64(vertex.z);
    }
    builder
        .u64(mesh.vertices.len() as u64)
        .u64(mesh.corners.len() as u64)
        .u64(mesh.walls.len() as u64);
    for &number in mesh
        .corners
        .iter()
        .chain(&mesh.starts)
        .chain(&mesh.facet_walls)
    {
        builder.u64(u64::from(number));
    }
    // Names take no part in histories, but a source may be named by them; the text form holds all the rest.
    builder.text(&text_of(&experiment.enclosure.to_form()));
    for source in &experiment.settings.sources {
        builder.text(&text_of(source));
    }
    builder
        .f64(retirement.decay_per_metre)
        .f64(retirement.stop)
        .f64(retirement.path_limit);
    builder.u64(retirement.strike_limit);
    builder.finish()
}

/// Fingerprint of the observables: time grid and maps.
pub(super) fn totals(history: Fingerprint, layout: &Layout) -> Fingerprint {
    let mut builder = FingerprintBuilder::new("albedra totals");
    builder.bytes(&history.0).u64(layout.outputs as u64);
    builder.u64(u64::from(layout.time.per_metre.is_some()));
    for &edge in &layout.time.edges {
        builder.f64(edge);
    }
    for map in &layout.maps {
        builder
            .text(&map.wall)
            .u64(map.u_edges.len() as u64)
            .u64(map.v_edges.len() as u64);
    }
    builder.finish()
}

fn text_of<T: serde::Serialize>(value: &T) -> String {
    // Descriptions are plain data, which always has a text form; the error text would only be another fingerprint.
    toml::to_string(value).unwrap_or_else(|error| error.to_string())
}
