//! Every check and chore of this repository: `cargo xtask help` lists them.
//!
//! A chore is a list of [`step::Step`]s, which are data; each prints the command that it runs, so that a failed step can
//! be repeated by hand. Only the standard library is used, so that this program is there in seconds.

mod chores;
mod failure;
mod place;
mod python;
mod step;
mod summary;
mod venv;

use std::ffi::OsString;
use std::io::{self, Write};
use std::process::ExitCode;
use std::time::Instant;

use chores::{CHORES, Chore};
use failure::Failure;
use place::Place;

fn main() -> ExitCode {
    let mut words = std::env::args_os().skip(1);
    let name = words.next().unwrap_or_else(|| "help".into());
    let extra: Vec<OsString> = words.collect();
    let outcome = match name.to_str() {
        Some("help" | "--help" | "-h") => help(),
        _ => find(&name).and_then(|chore| perform(chore, &extra)),
    };
    match outcome {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => {
            eprintln!("\nxtask: {failure}");
            ExitCode::from(failure.exit_code())
        }
    }
}

fn find(name: &OsString) -> Result<&'static Chore, Failure> {
    CHORES
        .iter()
        .find(|chore| name == chore.name)
        .ok_or_else(|| Failure::UnknownChore {
            name: name.to_string_lossy().into_owned(),
        })
}

/// Runs the steps of a chore in order, up to the first that fails, and then repeats what the test runners concluded.
fn perform(chore: &Chore, extra: &[OsString]) -> Result<(), Failure> {
    if chore.extra.is_none() && !extra.is_empty() {
        return Err(Failure::NoArguments { chore: chore.name });
    }
    let start = Instant::now();
    let steps = (chore.steps)(&Place::find()?, extra)?;
    let mut conclusions = Vec::new();
    for step in &steps {
        conclusions.extend(step.run()?);
    }
    let mut out = io::stdout().lock();
    if !conclusions.is_empty() {
        writeln!(out, "\nWhat the test runners concluded:")?;
        for line in conclusions {
            writeln!(out, "{line}")?;
        }
    }
    let seconds = start.elapsed().as_secs_f64();
    writeln!(
        out,
        "xtask: {} done in {seconds:.0} s, {} steps",
        chore.name,
        steps.len()
    )?;
    Ok(())
}

fn help() -> Result<(), Failure> {
    let mut out = io::stdout().lock();
    writeln!(out, "usage: cargo xtask CHORE\n")?;
    for chore in CHORES {
        let usage = [chore.name, chore.extra.unwrap_or_default()].join(" ");
        writeln!(out, "  {usage:22} {}", chore.about)?;
    }
    writeln!(
        out,
        "  {:22} this list\n\nPYTHON names the interpreter to use, else the first usable one is found.",
        "help"
    )?;
    Ok(())
}
