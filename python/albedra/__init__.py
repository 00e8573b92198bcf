"""Where light goes in a closed cavity: Monte Carlo photon transport with an uncertainty on every number.

Lengths are metres, times seconds, angles radians, fluxes watts, absorption coefficients m⁻¹ (Napierian).

Examples
--------
>>> import albedra as al
>>> chamber = al.Enclosure.cuboid((1.2, 0.8, 0.5), coating=al.Coating.lambertian(0.97))
>>> chamber = chamber.with_opening("detector", wall="x+", region=al.Region.disk((0, 0), radius=0.05))
>>> result = al.Experiment(chamber, al.Source.point((0.2, 0, 0), flux=5.0)).trace(10_000, seed=7)
>>> result.ledger.closes
True
"""

from ._albedra import (
    Audit,
    Coating,
    Counters,
    Curve,
    Decay,
    DecayTime,
    Enclosure,
    EnclosureError,
    Estimate,
    Experiment,
    ExperimentError,
    Facts,
    FlightHistogram,
    Flux,
    Frame,
    Interrupted,
    Ledger,
    Map,
    Medium,
    MergeError,
    Outcome,
    Progress,
    Region,
    Source,
    Target,
    TimeGrid,
    Wall,
    __version__,
)
from ._records import CoverageInterval
from ._store import load

__all__ = [
    "Audit",
    "Coating",
    "Counters",
    "CoverageInterval",
    "Curve",
    "Decay",
    "DecayTime",
    "Enclosure",
    "EnclosureError",
    "Estimate",
    "Experiment",
    "ExperimentError",
    "Facts",
    "FlightHistogram",
    "Flux",
    "Frame",
    "Interrupted",
    "Ledger",
    "Map",
    "Medium",
    "MergeError",
    "Outcome",
    "Progress",
    "Region",
    "Source",
    "Target",
    "TimeGrid",
    "Wall",
    "__version__",
    "load",
]
