//! Where the checkout and its target folder are.

use std::env;
use std::ffi::OsString;
use std::fs;
use std::io;
use std::path::{self, PathBuf};
use std::process::{Command, Stdio};

use crate::failure::Failure;

/// The folders and the cargo that all steps use.
#[derive(Debug)]
pub(crate) struct Place {
    /// The checkout.
    pub(crate) root: PathBuf,
    /// The target folder, wherever the user's settings put it.
    pub(crate) target: PathBuf,
    /// The cargo that runs this program.
    pub(crate) cargo: OsString,
}

impl Place {
    /// Asks cargo, so that a moved checkout and a moved target folder are found.
    pub(crate) fn find() -> Result<Self, Failure> {
        // The variable of the running cargo comes first: the folder compiled in is wrong once the checkout has moved.
        let package =
            env::var_os("CARGO_MANIFEST_DIR").unwrap_or_else(|| env!("CARGO_MANIFEST_DIR").into());
        let package = PathBuf::from(package);
        let root = package.ancestors().nth(2).unwrap_or(&package).to_path_buf();
        let cargo = env::var_os("CARGO").unwrap_or_else(|| "cargo".into());
        // In the caller's folder, since a relative CARGO_TARGET_DIR counts from there.
        let mut ask = Command::new(&cargo);
        ask.args([
            "metadata",
            "--no-deps",
            "--offline",
            "--format-version=1",
            "--manifest-path",
        ])
        .arg(root.join("Cargo.toml"))
        .stderr(Stdio::inherit());
        let shown = format!("{ask:?}");
        let answer = ask.output().map_err(|error| Failure::Start {
            command: shown.clone(),
            error,
        })?;
        if !answer.status.success() {
            return Err(Failure::Step {
                command: shown,
                code: answer.status.code(),
            });
        }
        let target = string_after(
            &String::from_utf8_lossy(&answer.stdout),
            "\"target_directory\":\"",
        )
        .ok_or(Failure::Metadata {
            wanted: "target_directory",
        })?;
        let target = plain(PathBuf::from(target))?;
        Ok(Self {
            root,
            target,
            cargo,
        })
    }
}

/// The same folder, made if need be, without `..`: not every program takes it.
fn plain(folder: PathBuf) -> io::Result<PathBuf> {
    fs::create_dir_all(&folder)?;
    // On Windows the canonical form is one that few programs understand, but the absolute one has no `..`.
    if cfg!(windows) {
        path::absolute(folder)
    } else {
        fs::canonicalize(folder)
    }
}

/// The JSON string that begins behind `key`, or nothing where there is none or it does not end.
fn string_after(json: &str, key: &str) -> Option<String> {
    let (_, rest) = json.split_once(key)?;
    let mut letters = rest.chars();
    let mut text = String::new();
    loop {
        match letters.next()? {
            '"' => return Some(text),
            '\\' => match letters.next()? {
                // Cargo writes non-ASCII letters as they are, and paths hold no other control characters.
                letter @ ('"' | '\\' | '/') => text.push(letter),
                _ => return None,
            },
            letter => text.push(letter),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{plain, string_after};

    #[test]
    fn steps_back_are_taken_out_of_a_path() {
        let root = std::env::temp_dir().join(format!("albedra xtask path {}", std::process::id()));
        let found = plain(root.join("a").join("..").join("b")).expect("made");
        assert!(found.is_absolute() && found.ends_with("b") && found.is_dir());
        assert!(
            found.components().all(|part| part.as_os_str() != ".."),
            "{}",
            found.display()
        );
        std::fs::remove_dir_all(root).expect("cleaned up");
    }

    const KEY: &str = "\"target_directory\":\"";

    fn target(json: &str) -> Option<String> {
        string_after(json, KEY)
    }

    #[test]
    fn spaces_and_accents_are_kept() {
        let json = r#"{"a":"b","target_directory":"/home/zoë/my target","version":1}"#;
        assert_eq!(target(json).as_deref(), Some("/home/zoë/my target"));
    }

    #[test]
    fn backslashes_and_quotes_are_unescaped() {
        let json = r#"{"target_directory":"C:\\a \"b\"\\target"}"#;
        assert_eq!(target(json).as_deref(), Some(r#"C:\a "b"\target"#));
    }

    #[test]
    fn what_is_absent_or_cut_short_is_none() {
        assert_eq!(target(r#"{"target":"x"}"#), None);
        assert_eq!(target(r#"{"target_directory":"/cut"#), None);
        assert_eq!(target(r#"{"target_directory":"/cut\"#), None);
    }

    #[test]
    fn an_unknown_escape_is_none() {
        assert_eq!(target(r#"{"target_directory":"a\nb"}"#), None);
    }
}
