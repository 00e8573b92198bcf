//! The chores, each a list of steps.

use std::ffi::OsString;

use crate::failure::Failure;
use crate::place::Place;
use crate::step::Step;
use crate::venv::Venv;

/// The program that `cargo xtask demo` runs, from the root of the checkout.
const DEMO: &str = "python/demo/chamber.py";

/// Plots are drawn into files: neither the tests nor the demo may open a window.
const HEADLESS: (&str, &str) = ("MPLBACKEND", "Agg");

/// A named list of steps.
#[derive(Debug)]
pub(crate) struct Chore {
    /// What the user types.
    pub(crate) name: &'static str,
    /// The arguments that are passed on to the last step; none are taken if absent.
    pub(crate) extra: Option<&'static str>,
    /// What it does, for the list.
    pub(crate) about: &'static str,
    /// Gives the steps.
    pub(crate) steps: fn(&Place, &[OsString]) -> Result<Vec<Step>, Failure>,
}

/// Everything that can be asked for, in the order of the list.
pub(crate) const CHORES: &[Chore] = &[
    Chore {
        name: "demo",
        extra: Some("[ARG…]"),
        about: "install the Python package and run its demo",
        steps: demo,
    },
    Chore {
        name: "test",
        extra: None,
        about: "every check that is not long: what CI runs",
        steps: test,
    },
    Chore {
        name: "lint",
        extra: None,
        about: "formatting, clippy, rustdoc and ruff",
        steps: lint,
    },
    Chore {
        name: "stats",
        extra: Some("[ARG…]"),
        about: "the statistical tests, long ones included",
        steps: |place, extra| Ok(stats(place, extra)),
    },
    Chore {
        name: "py",
        extra: Some("[PYTEST ARG…]"),
        about: "the checks of the Python package",
        steps: py,
    },
    Chore {
        name: "bench",
        extra: Some("[ARG…]"),
        about: "the benches, with arguments for criterion",
        steps: |place, extra| Ok(bench(place, extra)),
    },
];

fn demo(place: &Place, extra: &[OsString]) -> Result<Vec<Step>, Failure> {
    let path = place.root.join(DEMO);
    if !path.is_file() {
        return Err(Failure::Missing {
            path,
            what: "the demo",
        });
    }
    let venv = Venv::ready(place, "demo-venv")?;
    Ok(vec![
        install(place, &venv, "./python[demo]"),
        venv.step(place, DEMO)
            .env(HEADLESS.0, HEADLESS.1)
            .args(extra),
    ])
}

fn test(place: &Place, _: &[OsString]) -> Result<Vec<Step>, Failure> {
    // First, so that a missing Python is not reported after minutes.
    let venv = Venv::ready(place, "test-venv")?;
    let mut steps = rust_lints(place);
    steps.extend([
        Step::cargo(place, "test --locked --package albedra").counted(),
        Step::cargo(place, "test --locked --package xtask -- --include-ignored").counted(),
        Step::cargo(place, "test --locked --release --package albedra-tests").counted(),
        Step::cargo(place, "bench --locked --package albedra-benches -- --test"),
    ]);
    steps.extend(python_checks(place, &venv, &[]));
    Ok(steps)
}

fn lint(place: &Place, _: &[OsString]) -> Result<Vec<Step>, Failure> {
    let venv = Venv::ready(place, "test-venv")?;
    let mut steps = rust_lints(place);
    steps.push(pip(place, &venv).arg("ruff"));
    steps.extend(python_lints(place, &venv));
    Ok(steps)
}

fn stats(place: &Place, extra: &[OsString]) -> Vec<Step> {
    [
        "test --locked --release --package albedra -- --ignored",
        "test --locked --release --package albedra-tests -- --include-ignored",
    ]
    .map(|long| Step::cargo(place, long).args(extra).counted())
    .into()
}

fn py(place: &Place, extra: &[OsString]) -> Result<Vec<Step>, Failure> {
    let venv = Venv::ready(place, "test-venv")?;
    Ok(python_checks(place, &venv, extra))
}

fn bench(place: &Place, extra: &[OsString]) -> Vec<Step> {
    vec![Step::cargo(place, "bench --locked --package albedra-benches --").args(extra)]
}

fn rust_lints(place: &Place) -> Vec<Step> {
    vec![
        Step::cargo(place, "fmt --all --check"),
        Step::cargo(
            place,
            "clippy --locked --workspace --all-targets -- -D warnings",
        ),
        Step::cargo(place, "doc --locked --no-deps --package albedra")
            .env("RUSTDOCFLAGS", "-D warnings"),
    ]
}

/// Needs ruff in the environment.
fn python_lints(place: &Place, venv: &Venv) -> Vec<Step> {
    let cache = place.target.join("ruff-cache");
    ["-m ruff format --check python", "-m ruff check python"]
        .map(|line| venv.step(place, line).env("RUFF_CACHE_DIR", &cache))
        .into()
}

/// Installs the package and checks it, with further arguments for pytest.
fn python_checks(place: &Place, venv: &Venv, extra: &[OsString]) -> Vec<Step> {
    let mypy_cache = place.target.join("mypy-cache");
    let mut pytest_cache = OsString::from("cache_dir=");
    pytest_cache.push(place.target.join("pytest-cache"));
    let mut steps = vec![install(place, venv, "./python[test]")];
    steps.extend(python_lints(place, venv));
    steps.extend([
        venv.step(place, "-m mypy.stubtest albedra")
            .env("MYPY_CACHE_DIR", mypy_cache),
        // Without colours, so that its conclusion can be read.
        venv.step(place, "-m pytest python/tests --color=no --override-ini")
            .arg(pytest_cache)
            .env(HEADLESS.0, HEADLESS.1)
            .args(extra)
            .counted(),
    ]);
    steps
}

/// Builds the compiled module in release mode and installs the package with the pinned versions of what it uses.
fn install(place: &Place, venv: &Venv, what: &str) -> Step {
    pip(place, venv)
        .arg(what)
        .env("MATURIN_PEP517_ARGS", "--locked")
}

fn pip(place: &Place, venv: &Venv) -> Step {
    venv.step(
        place,
        "-m pip install --quiet --disable-pip-version-check --constraint python/constraints.txt",
    )
}

#[cfg(test)]
mod tests {
    use super::{CHORES, demo};
    use crate::failure::Failure;
    use crate::place::Place;

    #[test]
    fn names_are_unique() {
        for (i, chore) in CHORES.iter().enumerate() {
            assert!(
                CHORES[..i].iter().all(|other| other.name != chore.name),
                "{}",
                chore.name
            );
        }
    }

    #[test]
    fn a_demo_that_is_not_there_is_named_before_anything_is_installed() {
        let root = std::env::temp_dir().join("albedra-no-such-checkout");
        let place = Place {
            target: root.join("target"),
            root,
            cargo: "cargo".into(),
        };
        let failure = demo(&place, &[]).expect_err("there is no demo");
        assert!(
            matches!(failure, Failure::Missing { path, .. } if path.ends_with("python/demo/chamber.py"))
        );
    }
}
