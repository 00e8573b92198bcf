"""The package as a whole: its version, what it exports and what importing it costs."""

import importlib.metadata
import subprocess
import sys
import tomllib
from pathlib import Path

import albedra

ROOT = Path(__file__).resolve().parents[2]


def test_the_version_is_that_of_the_workspace():
    workspace = tomllib.loads((ROOT / "Cargo.toml").read_text(encoding="utf-8"))
    wanted = workspace["workspace"]["package"]["version"]
    assert albedra.__version__ == wanted
    assert importlib.metadata.version("albedra") == wanted


def test_every_public_name_exists():
    assert [name for name in albedra.__all__ if not hasattr(albedra, name)] == []


def test_types_are_shipped():
    folder = Path(albedra.__file__).parent
    assert (folder / "py.typed").is_file()
    assert (folder / "_albedra.pyi").is_file()


def test_importing_pulls_in_no_optional_package():
    """An import stays quick only while plotting and file formats are loaded by the methods that need them."""
    script = "import sys, albedra; print(*{name.partition('.')[0] for name in sys.modules})"
    child = subprocess.run([sys.executable, "-I", "-c", script], check=True, capture_output=True, text=True)
    loaded = set(child.stdout.split())
    assert "albedra" in loaded
    assert loaded.isdisjoint({"numpy", "matplotlib", "xarray", "pandas", "h5netcdf", "h5py", "tqdm"})
