//! Finds a Python that can make virtual environments, by running candidates: that a command exists proves nothing.

use std::env;
use std::ffi::{OsStr, OsString};
use std::io::ErrorKind;
use std::process::{Command, Stdio};

use crate::failure::Failure;
use crate::step::PYTHON_VARIABLES;

/// Prints the version and the folder of the installation, or says what is missing.
const PROBE: &str = "\
import sys
print(*sys.version_info[:2])
print(sys.base_prefix)
import venv, ensurepip";

/// The oldest minor version of Python 3 that will do; keep in step with `requires-python`.
const OLDEST: u32 = 11;

/// The newest minor version whose own command name is tried.
const NEWEST_NAME: u32 = 14;

/// An interpreter that passed the probe.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Python {
    /// The command that starts it.
    pub(crate) command: OsString,
    /// The minor version and the folder of the installation.
    pub(crate) identity: (u32, String),
}

/// The interpreter that `PYTHON` names, else the first that will do.
pub(crate) fn find() -> Result<Python, Failure> {
    let mut objections = Vec::new();
    for candidate in candidates(env::var_os("PYTHON")) {
        match probe(&candidate, PROBE) {
            Ok(python) => return Ok(python),
            Err(objection) => objections.push(format!("{} {objection}", candidate.display())),
        }
    }
    Err(Failure::NoPython { objections })
}

fn candidates(chosen: Option<OsString>) -> Vec<OsString> {
    match chosen {
        Some(chosen) if !chosen.is_empty() => vec![chosen],
        _ => ["python3".into(), "python".into()]
            .into_iter()
            .chain(
                (OLDEST..=NEWEST_NAME)
                    .rev()
                    .map(|minor| format!("python3.{minor}").into()),
            )
            .collect(),
    }
}

/// Whether the interpreter of a virtual environment will do; also that its pip is there.
pub(crate) fn probe_environment(command: &OsStr) -> Result<Python, String> {
    probe(command, &format!("{PROBE}, pip"))
}

/// Runs the interpreter; an objection continues a sentence that begins with its name.
fn probe(command: &OsStr, script: &str) -> Result<Python, String> {
    let mut call = Command::new(command);
    call.args(["-I", "-c", script]).stdin(Stdio::null());
    for name in PYTHON_VARIABLES {
        call.env_remove(name);
    }
    let answer = call.output().map_err(|error| match error.kind() {
        ErrorKind::NotFound => "is not found".to_owned(),
        _ => format!("cannot be started: {error}"),
    })?;
    let printed = String::from_utf8_lossy(&answer.stdout);
    let complaint = String::from_utf8_lossy(&answer.stderr);
    let identity = judge(&printed, &complaint, answer.status.success())?;
    Ok(Python {
        command: command.to_owned(),
        identity,
    })
}

/// What the output of the probe means.
fn judge(printed: &str, complaint: &str, success: bool) -> Result<(u32, String), String> {
    let mut lines = printed.lines();
    let version = lines.next().and_then(|line| {
        let (major, minor) = line.split_once(' ')?;
        Some((major.parse::<u32>().ok()?, minor.parse::<u32>().ok()?))
    });
    match version {
        Some((3, minor)) if minor >= OLDEST => {
            if success && let Some(folder) = lines.next() {
                return Ok((minor, folder.to_owned()));
            }
            let missing = ["venv", "ensurepip", "pip"]
                .iter()
                .find(|name| complaint.contains(&format!("'{name}'")));
            Err(match missing {
                Some(name) => {
                    format!("has no {name} module (Debian, Ubuntu: apt install python3-venv)")
                }
                None => format!("failed: {}", telling(complaint.lines().rev())),
            })
        }
        Some((major, minor)) => Err(format!("is {major}.{minor}, 3.{OLDEST} or newer is needed")),
        None => Err(format!("does not run: {}", telling(complaint.lines()))),
    }
}

/// The first line that is not blank: a shim says what is wrong at the top, a traceback at the bottom.
fn telling<'a>(lines: impl Iterator<Item = &'a str>) -> &'a str {
    lines
        .map(str::trim)
        .find(|line| !line.is_empty())
        .unwrap_or("it said nothing")
}

#[cfg(test)]
mod tests {
    use super::{candidates, judge, probe};
    use std::ffi::OsStr;

    #[test]
    fn a_good_answer_gives_version_and_folder() {
        assert_eq!(judge("3 11\n/usr\n", "", true), Ok((11, "/usr".into())));
        assert_eq!(
            judge("3 14\n/opt/py thon\n", "", true),
            Ok((14, "/opt/py thon".into()))
        );
    }

    #[test]
    fn an_old_python_is_refused_even_without_venv() {
        let complaint = "ModuleNotFoundError: No module named 'ensurepip'";
        assert_eq!(
            judge("3 8\n/usr\n", complaint, false),
            Err("is 3.8, 3.11 or newer is needed".into())
        );
        assert_eq!(
            judge("2 7\n/usr\n", "", true),
            Err("is 2.7, 3.11 or newer is needed".into())
        );
    }

    #[test]
    fn a_missing_module_is_named() {
        for name in ["venv", "ensurepip", "pip"] {
            let complaint = format!("Traceback\nModuleNotFoundError: No module named '{name}'\n");
            let objection = judge("3 12\n/usr\n", &complaint, false).expect_err("it is refused");
            assert!(
                objection.starts_with(&format!("has no {name} module")),
                "{objection}"
            );
        }
    }

    #[test]
    fn a_shim_without_a_python_behind_it_is_refused() {
        let objection = judge(
            "",
            "\npyenv: python3.12: command not found\n\nSee help.\n",
            false,
        );
        assert_eq!(
            objection,
            Err("does not run: pyenv: python3.12: command not found".into())
        );
        assert_eq!(
            judge("", "", false),
            Err("does not run: it said nothing".into())
        );
    }

    #[test]
    fn an_answer_without_a_folder_is_refused() {
        assert_eq!(
            judge("3 12\n", "", true),
            Err("failed: it said nothing".into())
        );
    }

    #[test]
    fn a_command_that_does_not_exist_is_not_found() {
        let objection =
            probe(OsStr::new("no-such-python-here"), "pass").expect_err("it is refused");
        assert_eq!(objection, "is not found");
    }

    #[test]
    fn a_chosen_python_is_the_only_candidate() {
        assert_eq!(candidates(Some("mine".into())), ["mine"]);
        let usual = candidates(None);
        assert_eq!(usual[..3], ["python3", "python", "python3.14"]);
        assert_eq!(usual.last().expect("not empty"), "python3.11");
        assert_eq!(candidates(Some("".into())), usual);
    }
}
