//! Runs one case and prints one line of JSON, as `peers/run_peers.py --also` wants it.
//!
//! `seconds` and `cpu_seconds` are transport alone: a run compiles its experiment first (checks, hierarchy), and what
//! that takes, measured once more beside it, is subtracted and goes into `setup_seconds`. `bits` is a hash of the exact
//! totals: a change for speed leaves it alone, or says why not. With `--level` the peer is named after it.
#![expect(clippy::print_stdout, reason = "the line is the result")]

use std::path::PathBuf;
use std::process::ExitCode;
use std::time::{Duration, Instant};

use albedra::{Level, Outcome};
use albedra_benches::Case;
use cpu_time::ProcessTime;

const USAGE: &str = "usage: contender --case CASE [--photons N] [--seed N] [--threads N] [--mesh FILE] \
                     [--lanes N] [--level base|avx2|avx512]";

struct Options {
    case: Case,
    photons: u64,
    seed: u64,
    threads: usize,
    mesh: Option<PathBuf>,
    lanes: Option<usize>,
    /// The instruction set and its name, where it was asked for.
    level: Option<(Level, String)>,
}

fn main() -> ExitCode {
    match options(std::env::args().skip(1)).and_then(|options| contend(&options)) {
        Ok(line) => {
            println!("{line}");
            ExitCode::SUCCESS
        }
        Err(error) => {
            eprintln!("contender: {error}\n{USAGE}");
            ExitCode::FAILURE
        }
    }
}

fn options(arguments: impl Iterator<Item = String>) -> Result<Options, Box<dyn std::error::Error>> {
    let mut options = Options {
        case: Case::Box,
        photons: 24_576,
        seed: 1,
        threads: 1,
        mesh: None,
        lanes: None,
        level: None,
    };
    let mut arguments = arguments;
    while let Some(name) = arguments.next() {
        let value = arguments
            .next()
            .ok_or_else(|| format!("{name} needs a value"))?;
        match name.as_str() {
            "--case" => options.case = value.parse()?,
            "--photons" => options.photons = value.parse()?,
            "--seed" => options.seed = value.parse()?,
            "--threads" => options.threads = value.parse()?,
            "--mesh" => options.mesh = Some(value.into()),
            "--lanes" => options.lanes = Some(value.parse()?),
            "--level" => options.level = Some((level(&value)?, value)),
            _ => return Err(format!("unknown option {name}").into()),
        }
    }
    Ok(options)
}

fn level(name: &str) -> Result<Level, String> {
    let levels = Level::available();
    let index = match name {
        "base" => 0,
        "avx2" => 1,
        "avx512" => 2,
        _ => return Err(format!("level must be base, avx2 or avx512, got {name}")),
    };
    levels
        .get(index)
        .copied()
        .ok_or_else(|| format!("this machine has no {name}"))
}

fn contend(options: &Options) -> Result<String, Box<dyn std::error::Error>> {
    let (experiment, described) = timed(|| options.case.experiment(options.mesh.as_deref()));
    let experiment = experiment?;
    let (checked, compiled) = timed(|| experiment.check());
    checked?;
    let mut trace = experiment
        .trace(options.photons)
        .seed(options.seed)
        .threads(options.threads);
    let mut peer = "albedra".to_owned();
    if let Some((level, name)) = &options.level {
        trace = trace.level(*level);
        peer = format!("albedra-{name}");
    }
    if let Some(lanes) = options.lanes {
        trace = trace.lanes(lanes);
    }
    let (outcome, run) = timed(|| trace.run());
    let outcome = outcome?;
    let counters = outcome.counters();
    let flights = counters.flights;
    let seconds = run.wall.saturating_sub(compiled.wall).as_secs_f64();
    let cpu_seconds = run.cpu.saturating_sub(compiled.cpu).as_secs_f64();
    Ok(format!(
        "{{\"peer\": \"{peer}\", \"case\": \"{}\", \"photons\": {}, \"seed\": {}, \"threads\": {}, \
         \"flights\": {flights}, \"seconds\": {seconds}, \"cpu_seconds\": {cpu_seconds}, \
         \"setup_seconds\": {}, \"ns_per_flight\": {}, \"mean_flight\": {}, \"untracked\": {}, \"bits\": \"{:016x}\"}}",
        options.case,
        options.photons,
        options.seed,
        options.threads,
        (described.wall + compiled.wall).as_secs_f64(),
        cpu_seconds / flights as f64 * 1e9,
        outcome.mean_free_path().value,
        counters.untracked,
        bits(&outcome),
    ))
}

struct Spent {
    wall: Duration,
    cpu: Duration,
}

fn timed<T>(f: impl FnOnce() -> T) -> (T, Spent) {
    let (wall, cpu) = (Instant::now(), ProcessTime::now());
    let value = f();
    let spent = Spent {
        wall: wall.elapsed(),
        cpu: cpu.elapsed(),
    };
    (value, spent)
}

/// FNV-1a (Fowler, Noll & Vo) over the exact sums.
fn bits(outcome: &Outcome) -> u64 {
    let sums = outcome.totals().groups().iter().flatten();
    sums.flat_map(|sum| sum.to_le_bytes())
        .fold(0xCBF2_9CE4_8422_2325, |hash: u64, byte| {
            (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01B3)
        })
}
