"""Wrong arguments are refused, and the error names the culprit, the value and what is allowed."""

import re

import numpy as np
import pytest

import albedra as al

WHITE = al.Coating.lambertian(0.9)
BOX = al.Enclosure.cuboid((1, 1, 1), coating=WHITE)
DISK = al.Region.disk((0, 0), 0.1)
LAMP = al.Source.point((0, 0, 0))
CORNERS = [(0, 0, 0), (1, 0, 0), (0, 1, 0), (0, 0, 1)]
FACES = [[0, 2, 1], [0, 1, 3], [1, 2, 3], [2, 0, 3]]

CASES = {
    "reflectance": (
        lambda: al.Coating.lambertian(1.2),
        ValueError,
        "reflectance must lie in [0, 1], got 1.2",
    ),
    "not a number": (lambda: al.Coating.mirror(np.nan), ValueError, "got NaN"),
    "text": (lambda: al.Coating.mirror("x"), TypeError, "reflectance"),
    "share": (
        lambda: al.Coating.mixed(1, specular_share=2),
        ValueError,
        "specular share must lie in [0, 1], got 2",
    ),
    "index": (lambda: al.Medium(0), ValueError, "group index must lie in [0.001, 1000], got 0"),
    "size": (lambda: al.Enclosure.cuboid((1, 2)), ValueError, "size must have the shape (3,), got (2,)"),
    "infinite": (
        lambda: al.Enclosure.cuboid((1, np.inf, 1)),
        ValueError,
        "size must be finite, got inf at [1]",
    ),
    "negative": (lambda: al.Enclosure.cuboid((1, -1, 1)), al.EnclosureError, "-1"),
    "ragged": (
        lambda: al.Region.polygon([(0, 0), (1,)]),
        TypeError,
        "corners must be an array of numbers, got list",
    ),
    "complex": (lambda: al.Source.point((0, 1j, 0)), TypeError, "position must be an array of numbers"),
    "outline": (
        lambda: al.Enclosure.extruded([(0, 0), (1, 1), (1, 0), (0, 1)], 1),
        al.EnclosureError,
        "outline must not cross",
    ),
    "sides": (lambda: al.Enclosure.prism(6.5, 1, 1), TypeError, "sides must be a whole number, got 6.5"),
    "radius": (lambda: al.Region.disk((0, 0), -1), ValueError, "radius of a region must be positive"),
    "off": (
        lambda: BOX.with_opening("o", wall="x+", region=al.Region.disk((0.5, 0), 0.1)),
        al.EnclosureError,
        'region "o" on wall "x+": must lie on its wall, but leaves it by 0.1 m',
    ),
    "wall": (lambda: BOX.paint("p", wall="x", region=DISK, coating=WHITE), al.EnclosureError, '"x+"'),
    "no wall": (lambda: BOX.with_opening("o", region=DISK), ValueError, "wall must be given"),
    "taken": (lambda: BOX.with_opening("y+", wall="x+"), al.EnclosureError, 'name "y+" must be new'),
    "stop": (lambda: al.TimeGrid(stop=-1, bins=3), ValueError, "got -1"),
    "bins": (lambda: al.TimeGrid(stop=1, bins=-3), ValueError, "bins must lie in [0, 2^64 - 1], got -3"),
    "edges": (
        lambda: al.TimeGrid.from_edges([0, 2, 1]),
        ValueError,
        "edge 2 of the time grid must be above 2 s",
    ),
    "edges 2D": (
        lambda: al.TimeGrid.from_edges([[0, 2]]),
        ValueError,
        "edges must have the shape (any,), got (1, 2)",
    ),
    "both": (lambda: al.Source.wall("x+", cone=1, axis=(1, 0, 0)), ValueError, "either a cone or an axis"),
    "source": (
        lambda: al.Experiment(BOX, "lamp"),
        TypeError,
        "source must be a Source or a sequence of them, got str",
    ),
    "no source": (lambda: al.Experiment(BOX, []), ValueError, "source must hold at least one Source"),
    "outside": (
        lambda: al.Experiment(BOX, al.Source.point((9, 0, 0))),
        al.ExperimentError,
        "(9, 0, 0) m lies outside",
    ),
    "dark": (lambda: al.Experiment(BOX, al.Source.point((0, 0, 0), flux=-1)), al.ExperimentError, "got -1"),
    "bare": (
        lambda: al.Experiment(al.Enclosure.cuboid((1, 1, 1)), LAMP),
        al.ExperimentError,
        'wall "x-" has no',
    ),
    "maps": (lambda: al.Experiment(BOX, LAMP, maps={"x+": 3}), TypeError, 'maps["x+"] must be'),
    "map": (lambda: al.Experiment(BOX, LAMP, maps={"x+": (0, 3)}), al.ExperimentError, "x+"),
    "memory": (lambda: al.Experiment(BOX, LAMP, memory=10), al.ExperimentError, "allowed are 10"),
    "endless": (
        lambda: al.Experiment(al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.mirror(1)), LAMP),
        al.ExperimentError,
        "can never be absorbed or leave",
    ),
    "photons": (
        lambda: al.Experiment(BOX, LAMP).trace(0),
        ValueError,
        "photons must number at least 1, got 0",
    ),
    "float": (
        lambda: al.Experiment(BOX, LAMP).trace(1e3),
        TypeError,
        "photons must be a whole number, got 1000.0",
    ),
    "threads": (lambda: al.Experiment(BOX, LAMP).trace(10, threads=0), ValueError, "got 0"),
    "seed": (lambda: al.Experiment(BOX, LAMP).trace(10, seed=-1), ValueError, "seed must lie in"),
    "target": (
        lambda: al.Experiment(BOX, LAMP).trace(10, target=("x+.incidence", 0.1)),
        al.ExperimentError,
        "x+.incident",
    ),
    "progress": (lambda: al.Experiment(BOX, LAMP).trace(10, progress=3), TypeError, "progress must be"),
    "corner": (
        lambda: al.Enclosure.from_mesh(CORNERS, [*FACES[:3], [2, 0, 4]]),
        ValueError,
        "faces[3] must hold indices in [0, 3], got 4",
    ),
    "faces": (lambda: al.Enclosure.from_mesh(CORNERS, np.ones((2, 3))), TypeError, "faces"),
    "open": (
        lambda: al.Enclosure.from_mesh(CORNERS, FACES[:3]),
        al.EnclosureError,
        "does not enclose one body",
    ),
    "names": (
        lambda: al.Enclosure.from_mesh(CORNERS, FACES, walls=["a"]),
        ValueError,
        "walls must hold one name for each of the 4 faces, got 1",
    ),
    "missing": (lambda: al.Enclosure.load("no such.obj", unit="mm"), FileNotFoundError, "no such.obj"),
    "openings": (
        lambda: al.Enclosure.load("no such.obj", unit="mm", openings="lid"),
        TypeError,
        "openings must be a list of names, got 'lid'",
    ),
    "unit": (
        lambda: al.Enclosure.load("no such.obj", unit="yd"),
        ValueError,
        "unit of length must be m, cm, mm",
    ),
    "no unit": (lambda: al.Enclosure.load("no such.obj"), TypeError, "unit"),
}


@pytest.mark.parametrize("name", CASES)
def test_wrong_arguments_are_named(name):
    call, error, text = CASES[name]
    with pytest.raises(error, match=re.escape(text)) as caught:
        call()
    assert str(caught.value)


def test_a_bad_file_is_noted(tmp_path):
    path = tmp_path / "half.obj"
    path.write_text("v 0 0 0\nv 1 0 0\nv x 1 0\n")
    with pytest.raises(al.EnclosureError, match="line 3: a number required") as caught:
        al.Enclosure.load(path, unit="mm")
    assert caught.value.__notes__ == [f"while loading {path}"]


def test_wrong_names_of_outputs_are_named(outcome):
    with pytest.raises(KeyError, match='"detecter"; there are: "detector"'):
        outcome.flux["detecter"]
    with pytest.raises(KeyError, match=r"no map is named .x\+."):
        outcome.maps["x+"]
    with pytest.raises(al.ExperimentError, match=r"sample\.incident"):
        outcome.output("sample.incidente")
    with pytest.raises(al.ExperimentError, match="nothing"):
        outcome.ratio("sample.incident", "nothing")
    with pytest.raises(ValueError, match=r"power must lie in \[1, 4\], got 5"):
        outcome.flight_moment(5)
    with pytest.raises(ValueError, match=r"power must lie in \[1, 4\], got 0"):
        outcome.first_flight_moment(0)
    with pytest.raises(ValueError, match="stop must be above start"):
        outcome.decay.decay_time(2e-8, 1e-8)


def test_errors_have_their_families():
    for error in (al.EnclosureError, al.ExperimentError, al.MergeError):
        assert issubclass(error, ValueError)
        assert error.__module__ == "albedra"
    assert issubclass(al.Interrupted, KeyboardInterrupt)
    assert al.Interrupted.result is None


def test_an_unsound_mesh_comes_with_its_audit():
    vertices = [(0, 0, 0), (1, 0, 0), (0, 1, 0), (0, 0, 1)]
    with pytest.raises(al.EnclosureError) as raised:
        al.Enclosure.from_mesh(vertices, [(0, 2, 1), (0, 1, 3), (0, 3, 2)])
    audit = raised.value.audit
    assert not audit.is_sound
    assert len(audit.problems) == 3
    with pytest.raises(al.EnclosureError) as raised:
        BOX.with_coating("nowhere", WHITE)
    assert raised.value.audit is None
