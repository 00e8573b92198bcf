//! Whole runs that stress one layer each: criterion's time is for so many photons, emission included.
//!
//! Kernels are private, so a layer shows as the difference of two cases: `planes/26` has 20 planes more than `box`,
//! `facets/26` is a body that is not convex and so goes through the hierarchy.
#![expect(
    clippy::disallowed_methods,
    reason = "corners of a bench's body, which decide no result"
)]

use std::hint::black_box;

use albedra::{Coating, Enclosure, Experiment, Source};
use albedra_benches::Case;
use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};

const PHOTONS: u64 = 4096;

/// Upright walls of the bodies for the flight kernels.
const SIDES: u32 = 24;

fn bench(criterion: &mut Criterion, group: &str, name: &str, experiment: &Experiment) {
    let mut group = criterion.benchmark_group(group);
    group
        .sample_size(20)
        .throughput(Throughput::Elements(PHOTONS));
    group.bench_function(BenchmarkId::from_parameter(name), |bencher| {
        bencher.iter(|| {
            black_box(experiment.trace(PHOTONS).seed(1).threads(1).run())
                .expect("a valid experiment")
        });
    });
    group.finish();
}

fn runs(criterion: &mut Criterion) {
    for case in [Case::Box, Case::BoxMirror, Case::Dark] {
        let experiment = case.experiment(None).expect("no mesh is needed");
        bench(criterion, "run", &case.to_string(), &experiment);
    }
}

fn flights(criterion: &mut Criterion) {
    let prism = Enclosure::prism(SIDES, 0.5, 0.5).expect("a valid prism");
    let star: Vec<_> = (0..SIDES)
        .map(|k| {
            let angle = std::f64::consts::TAU * f64::from(k) / f64::from(SIDES);
            let radius = if k % 2 == 0 { 0.5 } else { 0.4 };
            (radius * angle.cos(), radius * angle.sin())
        })
        .collect();
    let star = Enclosure::extruded(&star, 0.5).expect("a valid outline");
    let white = Coating::lambertian(0.98).expect("in range");
    for (group, body) in [("planes", prism), ("facets", star)] {
        let experiment = Experiment::new(&body.coated(white), Source::walls());
        bench(criterion, group, &(SIDES + 2).to_string(), &experiment);
    }
}

criterion_group!(layers, runs, flights);
criterion_main!(layers);
