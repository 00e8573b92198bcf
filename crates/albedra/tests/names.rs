//! The table in `docs/names.md` keeps the Rust and the Python surface in step: its Rust column is what compiles here.

use std::ops::ControlFlow;

use albedra::{
    Coating, Enclosure, Estimate, Experiment, Frame, Ledger, Medium, Mesh, Outcome, Progress,
    Region, Source, Target, TimeGrid, Trace, Unit,
};

/// The text of each path, which must also compile; where it takes `impl` arguments, within a closure.
macro_rules! names {
    ($($kind:ident :: $name:ident $(by $closure:expr)?),* $(,)?) => {
        vec![$({
            names!(@compiles $kind $name $($closure)?);
            concat!(stringify!($kind), "::", stringify!($name))
        }),*]
    };
    (@compiles $kind:ident $name:ident) => {
        let _ = $kind::$name;
    };
    (@compiles $kind:ident $name:ident $closure:expr) => {
        let _ = $closure;
    };
}

#[test]
#[expect(clippy::too_many_lines, reason = "a list")]
fn rust_column_of_the_table_of_names_is_the_surface() {
    let table = include_str!("../../../docs/names.md");
    let column: Vec<&str> = table
        .lines()
        .filter_map(|line| line.strip_prefix("| `")?.split('`').next())
        .collect();
    let surface = names![
        Coating::lambertian,
        Coating::mirror,
        Coating::mixed,
        Coating::absorber,
        Coating::reflectance,
        Coating::specular_share,
        Medium::new,
        Medium::group_index,
        Medium::absorption,
        Medium::speed,
        Region::disk,
        Region::rectangle,
        Region::polygon,
        Region::at,
        Frame::to_plane,
        Frame::to_space,
        Mesh::audit,
        Enclosure::cuboid,
        Enclosure::prism,
        Enclosure::extruded,
        Enclosure::from_mesh,
        Enclosure::load by |p: &str, u: Unit| Enclosure::load(p, u),
        Enclosure::coated,
        Enclosure::with_coating,
        Enclosure::paint,
        Enclosure::with_opening,
        Enclosure::opened,
        Enclosure::opened_as,
        Enclosure::with_medium,
        Enclosure::walls,
        Enclosure::medium,
        Enclosure::volume,
        Enclosure::area,
        Enclosure::mean_chord,
        Enclosure::audit,
        Source::point by |p: [f64; 3]| Source::point(p),
        Source::beam by |p: [f64; 3]| Source::beam(p, p),
        Source::wall by |n: &str| Source::wall(n),
        Source::walls,
        Source::volume,
        Source::flux,
        Source::watts,
        Source::cosine_about by |s: Source, p: [f64; 3]| s.cosine_about(p),
        Source::radius,
        Source::divergence,
        Source::cone,
        Source::parallel by |s: Source, p: [f64; 3]| s.parallel(p),
        TimeGrid::new,
        TimeGrid::from_edges,
        TimeGrid::edges,
        TimeGrid::bins,
        TimeGrid::stop,
        Experiment::new,
        Experiment::and,
        Experiment::time,
        Experiment::map by |e: Experiment, n: &str| e.map(n, (1, 1)),
        Experiment::path_limit,
        Experiment::memory,
        Experiment::title by |e: Experiment, n: &str| e.title(n),
        Experiment::enclosure,
        Experiment::sources,
        Experiment::to_text,
        Experiment::trace,
        Trace::seed,
        Trace::from,
        Trace::threads,
        Trace::continuing,
        Trace::target by |t: Trace<'_>| drop(t.target("x", 0.1)),
        Trace::watch by |t: Trace<'_>| drop(t.watch(|_| ControlFlow::Continue(()))),
        Progress::rate,
        Progress::left,
        Outcome::experiment,
        Outcome::photons,
        Outcome::seed,
        Outcome::counters,
        Outcome::target,
        Outcome::facts,
        Outcome::rows,
        Outcome::ledger,
        Outcome::flux,
        Outcome::irradiance,
        Outcome::map,
        Outcome::decay,
        Outcome::decay_time,
        Outcome::switch_off,
        Outcome::switch_on,
        Outcome::mean_free_path,
        Outcome::flight_moment,
        Outcome::first_flight_moment,
        Outcome::flight_histogram,
        Outcome::mean_strikes,
        Outcome::mean_path,
        Outcome::stored_energy,
        Outcome::output,
        Outcome::output_names,
        Outcome::ratio,
        Outcome::estimate by |o: &Outcome| o.estimate(|get| get("x")),
        Outcome::merge,
        Outcome::to_bytes,
        Outcome::from_bytes,
        Ledger::closes,
        Target::met,
        Estimate::new,
        Estimate::coverage_interval,
        Estimate::zeta,
        Estimate::p_value,
        Estimate::relative,
    ];
    assert_eq!(column, surface);
}
