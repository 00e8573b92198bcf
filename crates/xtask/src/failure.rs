//! What can go wrong, said so that the reader knows what to do next.

use std::fmt;
use std::io;
use std::path::PathBuf;

/// Why a chore stopped.
#[derive(Debug)]
pub(crate) enum Failure {
    /// No chore has this name.
    UnknownChore { name: String },
    /// Arguments were given to a chore that takes none.
    NoArguments { chore: &'static str },
    /// No interpreter is good enough; one objection each.
    NoPython { objections: Vec<String> },
    /// A file that the chore needs does not exist.
    Missing { path: PathBuf, what: &'static str },
    /// A program could not be started.
    Start { command: String, error: io::Error },
    /// A program reported failure; no code if a signal ended it.
    Step { command: String, code: Option<i32> },
    /// A test runner ended well without having run a test.
    NothingTested { command: String },
    /// `cargo metadata` printed something else than expected.
    Metadata { wanted: &'static str },
    /// The terminal, a pipe or the file system failed.
    Io(io::Error),
}

impl Failure {
    /// 2 for a wrong call, 1 for everything else.
    pub(crate) fn exit_code(&self) -> u8 {
        match self {
            Self::UnknownChore { .. } | Self::NoArguments { .. } => 2,
            _ => 1,
        }
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::UnknownChore { name } => {
                write!(f, "no chore is called '{name}', see cargo xtask help")
            }
            Self::NoArguments { chore } => write!(f, "{chore} takes no arguments"),
            Self::NoPython { objections } => {
                writeln!(f, "no usable Python found:")?;
                for objection in objections {
                    writeln!(f, "  {objection}")?;
                }
                write!(
                    f,
                    "Install Python 3.11 or newer with venv, or set PYTHON to one."
                )
            }
            Self::Missing { path, what } => write!(f, "{what} is missing: {}", path.display()),
            Self::Start { command, error } => write!(f, "could not start ({error}):\n  {command}"),
            Self::Step {
                command,
                code: Some(code),
            } => write!(f, "failed with exit code {code}:\n  {command}"),
            Self::Step {
                command,
                code: None,
            } => write!(f, "ended by a signal:\n  {command}"),
            Self::NothingTested { command } => write!(f, "no test was run by:\n  {command}"),
            Self::Metadata { wanted } => write!(f, "cargo metadata did not print \"{wanted}\""),
            Self::Io(error) => write!(f, "{error}"),
        }
    }
}

impl std::error::Error for Failure {}

impl From<io::Error> for Failure {
    fn from(error: io::Error) -> Self {
        Self::Io(error)
    }
}
