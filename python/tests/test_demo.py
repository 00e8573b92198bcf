"""The demo runs, and its chamber is what its script makes."""

import importlib.util
import subprocess
import sys
from pathlib import Path

import albedra as al

DEMO = Path(__file__).resolve().parents[1] / "demo"


def test_the_demo_leaves_its_files(tmp_path):
    command = [sys.executable, "-P", str(DEMO / "chamber.py"), "--photons", "3000", "--out", str(tmp_path)]
    child = subprocess.run(command, capture_output=True, text=True, timeout=100, check=False)
    assert child.returncode == 0, child.stderr
    assert "INVENTED" in child.stdout
    assert "not a hazard assessment" in child.stdout
    assert sorted(file.name for file in tmp_path.iterdir()) == [
        "decay.png",
        "flux.png",
        "map.png",
        "outcome.nc",
    ]
    result = al.load(tmp_path / "outcome.nc")
    assert result.photons == 3000
    assert len(result.experiment.enclosure.walls) == 8
    # The leaf lies round the corner.
    assert result.flux["leaf"].direct.value == 0.0
    assert result.flux["leaf"].incident.value > 0.0


def test_the_chamber_is_what_its_script_makes():
    spec = importlib.util.spec_from_file_location("make_chamber", DEMO / "make_chamber.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    kept = (DEMO / "chamber.obj").read_text(encoding="utf-8")
    assert kept == "\n".join(module.lines()) + "\n"
