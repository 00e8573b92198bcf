"""Outcomes in files, labelled arrays and pictures."""

import os

import h5py
import numpy as np
import pytest
import xarray as xr
from matplotlib import pyplot as plt

import albedra as al


@pytest.fixture
def path(tmp_path):
    return tmp_path / "run.nc"


@pytest.fixture(autouse=True)
def _closed_figures():
    yield
    plt.close("all")


def tetrahedron():
    corners = [(0, 0, 0), (1, 0, 0), (0, 1, 0), (0, 0, 1)]
    faces = [[0, 2, 1], [0, 1, 3], [1, 2, 3], [2, 0, 3]]
    body = al.Enclosure.from_mesh(
        corners, faces, walls=["a", "b", "c", "d"], coating=al.Coating.lambertian(0.5)
    )
    return al.Experiment(body.with_opening("a"), al.Source.volume(), path_limit=3.0, title="ä tetrahedron")


def many_edges(enclosure):
    """Describe it by more text than an attribute of a file can hold."""
    grid = al.TimeGrid.from_edges(np.linspace(0, 1, 5000) ** 3)
    experiment = al.Experiment(enclosure, al.Source.volume(), time=grid)
    assert len(experiment.to_text()) > 2**16
    return experiment


@pytest.mark.parametrize("which", ["cuboid", "mesh", "target", "long text", "tiny", "parts"])
def test_a_file_gives_back_every_bit(experiment, outcome, path, which):
    saved = {
        "cuboid": lambda: outcome,
        "mesh": lambda: tetrahedron().trace(1000, seed=2**64 - 1),
        "target": lambda: experiment.trace(30_000, target=("z-.incident", 0.01)),
        "long text": lambda: many_edges(experiment.enclosure).trace(100),
        "tiny": lambda: experiment.trace(1),
        "parts": lambda: experiment.trace(100).merge(experiment.trace(100, first=2**61 - 100)),
    }[which]()
    saved.save(path)
    back = al.load(path)
    assert back == saved
    assert back.target == saved.target
    assert back.experiment == saved.experiment
    assert back.decay == saved.decay
    assert str(back) == str(saved)
    assert al.Outcome.load(str(path)) == saved


def test_a_loaded_outcome_goes_on_like_a_straight_run(experiment, outcome, path):
    experiment.trace(5000, seed=7).save(path)
    head = al.load(path)
    assert head.experiment.trace(15_000, resume=head) == outcome


def test_a_file_is_plain_netcdf(outcome, path):
    outcome.save(path)
    with xr.open_dataset(path, engine="h5netcdf") as data:
        assert data["high"].dims == data["low"].dims == ("output", "group")
        assert data["high"].dtype == np.int64
        assert data["low"].dtype == np.uint64
        assert data.attrs["format"] == "albedra outcome"
        assert data["experiment"].item() == outcome.experiment.to_text()


def test_saving_replaces_the_file_or_leaves_it(outcome, path, monkeypatch):
    path.write_text("old")
    path.chmod(0o640)
    outcome.save(path)
    assert al.load(path) == outcome
    assert path.stat().st_mode & 0o777 == 0o640
    before = path.read_bytes()

    def broken(*args):
        raise OSError("disk full")

    monkeypatch.setattr(os, "replace", broken)
    with pytest.raises(OSError, match="disk full"):
        outcome.save(path)
    assert path.read_bytes() == before
    assert [file.name for file in path.parent.iterdir()] == [path.name]


def test_what_is_no_outcome_is_told(outcome, path):
    with pytest.raises(FileNotFoundError):
        al.load(path)
    path.write_bytes(b"not a file of this kind")
    with pytest.raises(ValueError, match=r"run.nc is no whole outcome of albedra"):
        al.load(path)
    with h5py.File(path, "w") as file:
        file.attrs["format"] = "something else"
    with pytest.raises(
        ValueError, match="its attribute format must be 'albedra outcome', got 'something else'"
    ):
        al.load(path)
    outcome.save(path)
    whole = path.read_bytes()
    path.write_bytes(whole[: len(whole) // 2])
    with pytest.raises(ValueError, match="no whole outcome"):
        al.load(path)


def change(name, value):
    def apply(file):
        if name in file.attrs:
            file.attrs[name] = value(file.attrs[name])
        else:
            values = value(file[name][()])
            del file[name]
            file[name] = values

    return apply


def with_one_more(array):
    array = array.copy()
    array.flat[0] += 1
    return array


@pytest.mark.parametrize(
    ("damage", "text"),
    [
        (change("low", with_one_more), "totals are damaged"),
        (change("high", with_one_more), "totals are damaged"),
        (change("seed", lambda seed: seed + np.uint64(1)), "totals are damaged"),
        (change("strikes", lambda strikes: strikes + np.uint64(1)), "totals are damaged"),
        (change("photons", with_one_more), "totals are damaged"),
        (change("high", lambda high: high[1:]), "sums must have the shape"),
        (change("history", lambda text: text[1:]), "32 hexadecimal digits"),
        (change("format_version", lambda version: version + 1), "version of its format must be 1, got 2"),
        (change("experiment", lambda text: text.replace(b"0.6", b"0.7")), "of another"),
        (change("experiment", lambda text: b"[" + text), "does not describe an experiment"),
        (lambda file: file.__delitem__("low"), "low"),
        (lambda file: file.attrs.__delitem__("seed"), "seed is missing"),
    ],
)
def test_damage_is_told(outcome, path, damage, text):
    outcome.save(path)
    with h5py.File(path, "r+") as file:
        damage(file)
    with pytest.raises(ValueError, match=text):
        al.load(path)


def test_flipped_bytes_never_pass_for_another_outcome(outcome, path):
    """One byte changed, all over the file: refused, or without influence."""
    outcome.save(path)
    whole = path.read_bytes()
    for at in range(0, len(whole), len(whole) // 150):
        path.write_bytes(whole[:at] + bytes([whole[at] ^ 0x55]) + whole[at + 1 :])
        try:
            back = al.load(path)
        except ValueError:
            continue
        assert back.flux == outcome.flux, at
        assert back.decay == outcome.decay, at


def test_labelled_arrays_hold_the_results(outcome):
    data = outcome.to_xarray()
    assert data.sizes["row"] == 8
    assert data["flux_incident"].sel(row="detector") == outcome.flux["detector"].incident.value
    assert data["flux_incident_u"].sel(row="detector") == outcome.flux["detector"].incident.u
    assert data["flux_incident"].attrs["units"] == "W"
    assert data["time_edge"].attrs["units"] == "s"
    np.testing.assert_array_equal(data["decay"], outcome.decay.energy)
    np.testing.assert_array_equal(data["decay_u"], outcome.decay.u)
    assert data["z-_map"].dims == ("z-_v_axis", "z-_u_axis")
    np.testing.assert_array_equal(data["z-_map"], outcome.maps["z-"].irradiance)
    for name, variable in data.data_vars.items():
        assert "units" in variable.attrs, name


def test_labelled_arrays_can_be_written(outcome, path):
    data = outcome.to_xarray()
    data.to_netcdf(path, engine="h5netcdf")
    with xr.open_dataset(path, engine="h5netcdf") as back:
        xr.testing.assert_equal(back, data)


@pytest.mark.parametrize(
    ("kind", "label"),
    [("decay", "energy inside / J"), ("flux", ""), ("map", "v / m")],
)
def test_a_plot_goes_where_it_is_told(outcome, kind, label):
    _, ax = plt.subplots()
    assert outcome.plot(kind, ax=ax) is ax
    assert ax.get_ylabel() == label
    assert ax.has_data()
    assert outcome.plot(kind) is not ax


def test_plots_show_the_numbers(outcome):
    decay = outcome.plot("decay")
    assert decay.get_yscale() == "log"
    assert "ns" in decay.get_xlabel()
    np.testing.assert_allclose(decay.lines[0].get_ydata(), outcome.decay.energy)
    flux = outcome.plot("flux")
    assert [label.get_text() for label in flux.get_yticklabels()] == list(outcome.rows)
    bars = {patch.get_width() for patch in flux.patches}
    assert outcome.flux["sample"].incident.value in bars
    map_ = outcome.plot("map", wall="z-")
    np.testing.assert_allclose(map_.collections[0].get_array().ravel(), outcome.maps["z-"].irradiance.ravel())


def test_an_overview_is_a_figure(outcome, tmp_path):
    figure = outcome.plot()
    figure.savefig(tmp_path / "overview.png")
    assert (tmp_path / "overview.png").stat().st_size > 10_000
    assert figure.get_suptitle() == "invented chamber"


def test_plots_of_few_photons_do_not_fail(experiment):
    for photons in (1, 200):
        experiment.trace(photons).plot().canvas.draw()


def test_bars_without_uncertainty_have_none_drawn(experiment):
    few, many = (experiment.trace(photons).plot("flux") for photons in (100, 1000))
    drawn = [sum(len(bars.get_segments()) for bars in ax.collections) for ax in (few, many)]
    assert drawn == [0, 3 * len(many.get_yticklabels())]


def test_wrong_plots_are_named(outcome, experiment):
    with pytest.raises(ValueError, match="kind must be 'decay', 'flux', 'map' or None, got 'pie'"):
        outcome.plot("pie")
    with pytest.raises(ValueError, match="leave ax out"):
        outcome.plot(ax=plt.figure().subplots())
    with pytest.raises(KeyError, match="no map is named"):
        outcome.plot("map", wall="x-")
    bare = al.Experiment(experiment.enclosure, al.Source.volume()).trace(100)
    with pytest.raises(ValueError, match="there is no map to draw"):
        bare.plot("map")
