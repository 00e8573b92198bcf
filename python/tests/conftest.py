"""What several tests share."""

import matplotlib

matplotlib.use("Agg")

import pytest

import albedra as al


@pytest.fixture(scope="session")
def chamber():
    """Give a box with a painted sample and a detector opening; all numbers are invented."""
    box = al.Enclosure.cuboid((1.2, 0.8, 0.5), coating=al.Coating.lambertian(0.9))
    sample = al.Region.rectangle((0, 0), (0.1, 0.1))
    return (
        box.with_coating("z-", al.Coating.mixed(0.8, specular_share=0.3))
        .paint("sample", wall="y+", region=sample, coating=al.Coating.lambertian(0.6))
        .with_opening("detector", wall="x+", region=al.Region.disk((0, 0), radius=0.05))
    )


@pytest.fixture(scope="session")
def experiment(chamber):
    """Put a lamp into the chamber, with a time grid and a map."""
    grid = al.TimeGrid(stop=100e-9, bins=50)
    lamp = al.Source.point((0.2, 0, 0), flux=5.0)
    return al.Experiment(chamber, lamp, time=grid, maps={"z-": (6, 4)}, title="invented chamber")


@pytest.fixture(scope="session")
def outcome(experiment):
    """Trace twenty thousand photons of it."""
    return experiment.trace(20_000, seed=7)


@pytest.fixture(scope="session")
def endless():
    """Give an experiment whose photons live long."""
    bright = al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.lambertian(0.99))
    return al.Experiment(bright, al.Source.volume())
