"""Descriptions and results as Python objects: read-only, picklable, comparable, readable."""

import pickle

import numpy as np
import pytest

import albedra as al

REBUILT = [
    al.Coating.lambertian(0.97),
    al.Coating.mirror(0.5),
    al.Coating.mixed(0.9, specular_share=0.3),
    al.Coating.absorber(),
    al.Medium(1.33, absorption=0.02),
    al.Region.disk((0, 0.1), 0.05),
    al.Region.rectangle((0, 0), (0.1, 0.2), at=(1, 2, 3)),
    al.Region.polygon([(0, 0), (1, 0), (0, 1)]),
    al.Source.point((0.2, 0, 0), flux=5.0),
    al.Source.point((0.2, 0, 0), axis=(0, 0, 1)),
    al.Source.beam((0, 0, 0), (0, 0, 1), radius=0.01, divergence=0.1),
    al.Source.wall("it's", cone=0.3),
    al.Source.wall("z-", axis=(0, 0, 1), flux=2.0),
    al.Source.walls(),
    al.Source.volume(flux=3.0),
    al.TimeGrid(stop=4e-7, bins=200),
    al.TimeGrid.from_edges([0, 1e-9, 1e-8]),
    al.Estimate(0.27, 0.01, 63, unit="W"),
    al.Estimate(0.0, 0.0, upper=0.1),
]
NAMES = {name: getattr(al, name) for name in al.__all__}
ARRAYS = {
    "decay": ("edges", "energy", "u"),
    "switch_off": ("edges", "energy", "u"),
    "switch_on": ("edges", "energy", "u"),
    "flight_histogram": ("edges", "share", "u"),
}


def everything(outcome):
    """Give one object of each class, and what it is."""
    enclosure = outcome.experiment.enclosure
    yield from ((repr(thing), thing) for thing in REBUILT)
    yield from {
        "enclosure": enclosure,
        "audit": enclosure.audit(),
        "wall": enclosure.walls[0],
        "frame": enclosure.walls[0].frame,
        "experiment": outcome.experiment,
        "outcome": outcome,
        "decay time": outcome.decay.decay_time(),
        "map": outcome.maps["z-"],
        "interval": outcome.mean_path.coverage_interval(),
    }.items()
    names = ("ledger", "flux", "irradiance", "maps", "counters", "facts", "mean_free_path", *ARRAYS)
    yield from ((name, getattr(outcome, name)) for name in names)
    yield "row", outcome.flux["sample"]


@pytest.mark.parametrize("thing", REBUILT, ids=repr)
def test_a_representation_rebuilds(thing):
    assert eval(repr(thing), NAMES) == thing


def test_everything_survives_a_pickle_and_differs_from_something_else(outcome):
    for name, thing in everything(outcome):
        back = pickle.loads(pickle.dumps(thing))
        assert type(back) is type(thing), name
        assert back == thing, name
        assert thing != "something else", name


def test_changed_things_are_not_equal(experiment, outcome):
    other = experiment.trace(20_000, seed=8)
    assert other != outcome
    for name in (
        "ledger",
        "flux",
        "irradiance",
        "maps",
        "decay",
        "switch_off",
        "mean_path",
        "flight_histogram",
    ):
        assert getattr(other, name) != getattr(outcome, name), name
    for n, one in enumerate(REBUILT):
        assert all(one != another for another in REBUILT[:n])


def test_every_representation_fits_80_columns(outcome):
    long = [
        al.Source.wall("w" * 200),
        al.Region.polygon([(np.cos(t), np.sin(t)) for t in np.arange(60) / 10]),
        al.TimeGrid.from_edges(np.linspace(0, 1, 400) ** 2),
        al.Experiment(outcome.experiment.enclosure, al.Source.walls(), title="t" * 200),
        al.Estimate(np.pi, np.e, 63, upper=1 / 3, unit="W/m²" * 30),
    ]
    for thing in [thing for _, thing in everything(outcome)] + long:
        if not isinstance(thing, al.CoverageInterval):
            assert len(repr(thing)) <= 80, repr(thing)
    assert max(len(line) for line in str(outcome).splitlines()) <= 80


def test_records_are_printed_in_full(outcome):
    lines = str(outcome.ledger).splitlines()
    names = [line.split()[0] for line in lines]
    assert names == ["emitted", "absorbed", "escaped", "medium", "cut", "untracked", "roulette", "closes"]
    assert lines[2].split(maxsplit=1)[1] == str(outcome.ledger.escaped)
    assert str(outcome.flux["sample"].incident) in str(outcome.flux["sample"])


def test_representations_count_well(outcome):
    bare = al.Experiment(al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.absorber()), al.Source.volume())
    assert repr(bare) == "<Experiment: 6 rows, 1 source, 0 maps>"
    assert repr(bare.trace(10).maps) == "<by map: none>"
    assert repr(outcome.maps).startswith("<by map: z-")


@pytest.mark.parametrize("thing", REBUILT, ids=repr)
def test_descriptions_cannot_be_changed(thing):
    with pytest.raises(AttributeError):
        thing.reflectance = 0.5
    with pytest.raises(AttributeError):
        thing.flux = 2.0


def checked(array, dimensions=1):
    assert array.dtype == np.float64
    assert array.ndim == dimensions
    assert array.flags.c_contiguous
    with pytest.raises(ValueError, match="read-only"):
        array[...] = 0.0
    with pytest.raises(ValueError, match="WRITEABLE"):
        array.setflags(write=True)


def test_arrays_are_read_only_and_made_once(outcome):
    for round_trip in (False, True):
        if round_trip:
            outcome = pickle.loads(pickle.dumps(outcome))
        for name, arrays in ARRAYS.items():
            curve = getattr(outcome, name)
            assert getattr(outcome, name) is curve
            if round_trip:
                curve = pickle.loads(pickle.dumps(curve))
            for array in arrays:
                checked(getattr(curve, array))
                assert getattr(curve, array) is getattr(curve, array)
        map_ = pickle.loads(pickle.dumps(outcome.maps["z-"])) if round_trip else outcome.maps["z-"]
        for array in ("area", "irradiance", "u"):
            checked(getattr(map_, array), 2)
            assert getattr(map_, array).shape == (4, 6)
            assert getattr(map_, array) is getattr(map_, array)
        grid = outcome.experiment.time
        checked(grid.edges)
        assert grid.edges is grid.edges


def test_an_array_outlives_its_outcome(experiment):
    energy = experiment.trace(1000).decay.energy
    assert energy[0] == 5.0


def test_an_estimate_prints_and_computes():
    estimate = al.Estimate(0.274131, 0.00088, 63, unit="W")
    assert str(estimate) == "0.274 13(88) W"
    assert f"{estimate:>20}" == "      0.274 13(88) W"
    assert f"{estimate:.2f}" == "0.27"
    assert float(estimate) == 0.274131
    interval = estimate.coverage_interval()
    assert interval._fields == ("low", "high")
    # Student's t for 63 degrees of freedom, 97.5 %: 1.998341 (computed with SciPy 1.17).
    assert interval.high - 0.274131 == pytest.approx(1.998341 * 0.00088, rel=1e-6)
    assert estimate.zeta(0.275, 0.00088) == pytest.approx(-0.000869 / (0.00088 * 2**0.5))
    assert estimate.p_value(0.274131) == 1.0
    with pytest.raises(ValueError, match=r"p must lie in \[0, 1\], got 95"):
        estimate.coverage_interval(95)


def test_a_frame_maps_there_and_back(chamber):
    frame = chamber.walls[1].frame
    assert frame.origin == (0.6, 0.0, 0.0)
    assert frame.normal == (-1.0, 0.0, 0.0)
    assert frame.to_plane(frame.to_space((0.1, 0.2))) == pytest.approx((0.1, 0.2))


def test_named_results_behave_as_a_mapping(outcome):
    flux = outcome.flux
    assert tuple(flux) == flux.keys() == outcome.rows
    assert len(flux) == len(flux.values()) == 8
    assert dict(flux.items())["sample"] == flux["sample"]
    assert "sample" in flux
    assert "simple" not in flux
    assert flux.get("simple") is None
    assert flux["sample"] is flux["sample"]


def test_meshes_come_from_arrays_and_lists():
    corners = [(x, y, z) for z in (0, 1) for y in (0, 1) for x in (0, 1)]
    faces = [[0, 2, 3, 1], [4, 5, 7, 6], [0, 1, 5, 4], [2, 6, 7, 3], [0, 4, 6, 2], [1, 3, 7, 5]]
    white = al.Coating.lambertian(0.9)
    box = al.Enclosure.from_mesh(corners, np.array(faces), coating=white)
    assert (box.volume, box.area, [wall.name for wall in box.walls]) == (1.0, 6.0, ["mesh"])
    split = [*faces[1:], [0, 2, 3], [0, 3, 1]]
    names = ["top", "s", "s", "s", "s", "floor", "floor"]
    box = al.Enclosure.from_mesh(
        corners, split, walls=names, coating=white, coatings={"floor": al.Coating.absorber()}
    )
    assert {wall.name: wall.area for wall in box.walls} == {"top": 1.0, "s": 4.0, "floor": 1.0}
    assert box.walls[2].coating == al.Coating.absorber()
    assert pickle.loads(pickle.dumps(box)) == box
