//! One command of a chore, as data.

use std::ffi::{OsStr, OsString};
use std::fmt;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use crate::failure::Failure;
use crate::place::Place;
use crate::summary;

/// Variables that would let something outside the repository decide what Python loads or where pip installs.
pub(crate) const PYTHON_VARIABLES: [&str; 6] = [
    "PYTHONPATH",
    "PYTHONHOME",
    "PYTHONSTARTUP",
    "PIP_TARGET",
    "PIP_PREFIX",
    "PIP_USER",
];

/// A command with its arguments and variables, run in the root of the checkout.
#[derive(Clone, Debug)]
pub(crate) struct Step {
    program: OsString,
    arguments: Vec<OsString>,
    variables: Vec<(&'static str, OsString)>,
    folder: PathBuf,
    target: PathBuf,
    counted: bool,
}

impl Step {
    /// A command without arguments.
    pub(crate) fn new(place: &Place, program: impl Into<OsString>) -> Self {
        Self {
            program: program.into(),
            arguments: Vec::new(),
            variables: Vec::new(),
            folder: place.root.clone(),
            target: place.target.clone(),
            counted: false,
        }
    }

    /// A cargo command, written as one line without quotes.
    pub(crate) fn cargo(place: &Place, line: &str) -> Self {
        Self::new(place, &place.cargo).words(line)
    }

    /// Adds arguments that contain no spaces, written as one line.
    pub(crate) fn words(self, line: &str) -> Self {
        self.args(line.split_whitespace())
    }

    /// Adds arguments.
    pub(crate) fn args<T: Into<OsString>>(
        mut self,
        arguments: impl IntoIterator<Item = T>,
    ) -> Self {
        self.arguments.extend(arguments.into_iter().map(Into::into));
        self
    }

    /// Adds an argument.
    pub(crate) fn arg(self, argument: impl Into<OsString>) -> Self {
        self.args([argument.into()])
    }

    /// Sets a variable for the command.
    pub(crate) fn env(mut self, name: &'static str, value: impl Into<OsString>) -> Self {
        self.variables.push((name, value.into()));
        self
    }

    /// Marks a test runner: its conclusions are kept, and it fails if it ran no test.
    pub(crate) fn counted(mut self) -> Self {
        self.counted = true;
        self
    }

    /// Prints the command, runs it and gives the conclusions of a test runner, none for other commands.
    pub(crate) fn run(&self) -> Result<Vec<String>, Failure> {
        self.run_to(&mut io::stdout())
    }

    fn run_to(&self, out: &mut dyn Write) -> Result<Vec<String>, Failure> {
        eprintln!("\n$ {self}");
        let mut command = self.command();
        if self.counted {
            command.stdout(Stdio::piped());
        }
        let mut child = command.spawn().map_err(|error| Failure::Start {
            command: self.to_string(),
            error,
        })?;
        let conclusions = child
            .stdout
            .take()
            .map(|from| summary::forward(from, out))
            .transpose();
        let status = child.wait()?;
        if !status.success() {
            return Err(Failure::Step {
                command: self.to_string(),
                code: status.code(),
            });
        }
        match conclusions? {
            Some(lines) if lines.is_empty() => Err(Failure::NothingTested {
                command: self.to_string(),
            }),
            lines => Ok(lines.unwrap_or_default()),
        }
    }

    fn command(&self) -> Command {
        let mut command = Command::new(&self.program);
        command
            .args(&self.arguments)
            .current_dir(&self.folder)
            .stdin(Stdio::null());
        for name in PYTHON_VARIABLES {
            command.env_remove(name);
        }
        // Absolute, since a relative one would count from the folder of the command.
        command.env("CARGO_TARGET_DIR", &self.target);
        command.envs(self.variables.iter().map(|(name, value)| (name, value)));
        command
    }
}

/// The command as it can be pasted into a shell at the root of the checkout.
impl fmt::Display for Step {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (name, value) in &self.variables {
            write!(f, "{name}={} ", quoted(value))?;
        }
        // The full path of cargo says nothing; that of an interpreter says which one it is.
        let program = Path::new(&self.program);
        let is_cargo = program.file_stem().is_some_and(|stem| stem == "cargo");
        write!(
            f,
            "{}",
            quoted(if is_cargo {
                OsStr::new("cargo")
            } else {
                &self.program
            })
        )?;
        for argument in &self.arguments {
            write!(f, " {}", quoted(argument))?;
        }
        Ok(())
    }
}

fn quoted(word: &OsStr) -> String {
    let text = word.to_string_lossy();
    let plain = |letter: char| letter.is_alphanumeric() || "-_./:=,+@%\\".contains(letter);
    if !text.is_empty() && text.chars().all(plain) {
        text.into_owned()
    } else {
        format!("'{}'", text.replace('\'', r"'\''"))
    }
}

#[cfg(test)]
mod tests {
    use super::Step;
    use crate::failure::Failure;
    use crate::place::Place;
    use std::io;

    fn place() -> Place {
        let root = std::env::temp_dir();
        Place {
            target: root.join("target"),
            root,
            cargo: "/some/bin/cargo".into(),
        }
    }

    #[test]
    fn a_command_prints_as_a_shell_takes_it() {
        let step = Step::cargo(&place(), "test --locked")
            .arg("two words")
            .arg("it's")
            .env("A", "b c");
        assert_eq!(
            step.to_string(),
            r"A='b c' cargo test --locked 'two words' 'it'\''s'"
        );
    }

    #[test]
    fn a_program_that_does_not_exist_is_named() {
        let failure = Step::new(&place(), "no-such-program-here")
            .run()
            .expect_err("it cannot start");
        assert!(
            matches!(failure, Failure::Start { command, .. } if command == "no-such-program-here")
        );
    }

    #[cfg(unix)]
    #[test]
    fn the_exit_code_is_reported() {
        let failure = Step::new(&place(), "sh")
            .args(["-c", "exit 3"])
            .run()
            .expect_err("it fails");
        assert!(matches!(failure, Failure::Step { code: Some(3), .. }));
    }

    #[cfg(unix)]
    #[test]
    fn a_test_runner_that_ran_nothing_fails() {
        let runner = |line: &str| {
            Step::new(&place(), "echo")
                .arg(line)
                .counted()
                .run_to(&mut io::sink())
        };
        let nothing = "test result: ok. 0 passed; 0 failed; 0 ignored; finished in 0.00s";
        assert!(matches!(
            runner(nothing),
            Err(Failure::NothingTested { .. })
        ));
        let something = nothing.replace("0 passed", "2 passed");
        assert_eq!(runner(&something).expect("it ran two"), [something]);
    }

    #[test]
    fn settings_that_misdirect_python_are_removed() {
        let command = Step::new(&place(), "python").command();
        for name in super::PYTHON_VARIABLES {
            assert!(
                command
                    .get_envs()
                    .any(|(key, value)| key == name && value.is_none()),
                "{name}"
            );
        }
    }
}
