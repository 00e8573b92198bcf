//! Virtual environments under the target folder, made anew whenever their interpreter no longer runs.

use std::env;
use std::path::{Path, PathBuf};

use crate::failure::Failure;
use crate::place::Place;
use crate::python::{self, Python};
use crate::step::Step;

/// The interpreter of a virtual environment.
#[derive(Debug)]
pub(crate) struct Venv {
    python: PathBuf,
}

impl Venv {
    /// Finds or makes the environment of this name in the target folder.
    ///
    /// It is made anew if its interpreter does not pass the probe (the installation it came from is gone, or it was
    /// left half made), or if `PYTHON` asks for another one.
    pub(crate) fn ready(place: &Place, name: &str) -> Result<Self, Failure> {
        let folder = place.target.join(name);
        let python = interpreter(&folder);
        let base = python::find()?;
        let chosen = env::var_os("PYTHON").is_some_and(|value| !value.is_empty());
        let objection = match python::probe_environment(python.as_os_str()) {
            Ok(found) if chosen => objection_to_another(&found, &base),
            Ok(_) => None,
            Err(objection) => Some(objection),
        };
        if let Some(objection) = objection {
            if folder.exists() {
                eprintln!(
                    "\nxtask: {} is made anew, since its Python {objection}",
                    folder.display()
                );
            }
            Step::new(place, base.command)
                .words("-I -m venv --clear")
                .arg(folder)
                .run()?;
        }
        Ok(Self { python })
    }

    /// A step that runs the environment's interpreter without loading anything from the current folder.
    pub(crate) fn step(&self, place: &Place, line: &str) -> Step {
        Step::new(place, &self.python).arg("-P").words(line)
    }
}

fn interpreter(folder: &Path) -> PathBuf {
    if cfg!(windows) {
        folder.join("Scripts").join("python.exe")
    } else {
        folder.join("bin").join("python")
    }
}

fn objection_to_another(found: &Python, wanted: &Python) -> Option<String> {
    (found.identity != wanted.identity).then(|| {
        let (minor, folder) = &found.identity;
        format!("is 3.{minor} of {folder}, not the one that PYTHON names")
    })
}

#[cfg(test)]
mod tests {
    use super::{Venv, interpreter, objection_to_another};
    use crate::place::Place;
    use crate::python::{self, Python};
    use std::fs;

    fn python(minor: u32, folder: &str) -> Python {
        Python {
            command: "python3".into(),
            identity: (minor, folder.into()),
        }
    }

    #[test]
    fn another_version_or_installation_is_objected_to() {
        assert_eq!(
            objection_to_another(&python(11, "/usr"), &python(11, "/usr")),
            None
        );
        let objection = objection_to_another(&python(11, "/usr"), &python(13, "/usr"));
        assert_eq!(
            objection.as_deref(),
            Some("is 3.11 of /usr, not the one that PYTHON names")
        );
        assert!(objection_to_another(&python(11, "/usr"), &python(11, "/opt")).is_some());
    }

    /// Makes a real environment, takes its interpreter away and expects it back.
    #[test]
    #[ignore = "needs Python; run by cargo xtask test"]
    fn an_environment_without_its_interpreter_is_made_anew() {
        let root = std::env::temp_dir().join(format!("albedra xtask {}", std::process::id()));
        let place = Place {
            target: root.clone(),
            root: std::env::temp_dir(),
            cargo: "cargo".into(),
        };
        Venv::ready(&place, "venv").expect("made");
        let path = interpreter(&root.join("venv"));
        assert!(python::probe_environment(path.as_os_str()).is_ok());
        fs::remove_file(&path).expect("removed");
        assert!(python::probe_environment(path.as_os_str()).is_err());
        Venv::ready(&place, "venv").expect("made anew");
        assert!(python::probe_environment(path.as_os_str()).is_ok());
        fs::remove_dir_all(root).expect("cleaned up");
    }
}
