"""Outcomes as labelled arrays."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    import xarray as xr

    from ._albedra import Estimate, Outcome

LEDGER = ("absorbed", "escaped", "medium", "cut", "untracked", "roulette")
FLUXES = ("incident", "direct", "absorbed", "reflected", "escaped")
SINGLE = {"mean_free_path": "m", "mean_strikes": "1", "mean_path": "m", "stored_energy": "J"}


def dataset(outcome: Outcome) -> xr.Dataset:
    """Put all results into one Dataset: dimensions row, loss, time_edge, flight_bin, and two for each map."""
    import xarray as xr

    data = xr.Dataset(
        coords={
            "row": ("row", list(outcome.rows), {"long_name": "wall, region or opening"}),
            "loss": ("loss", list(LEDGER), {"long_name": "where the energy went"}),
            "time_edge": ("time_edge", outcome.decay.edges, {"units": "s", "long_name": "time"}),
        },
        attrs={
            "title": outcome.experiment.title,
            "photons": outcome.photons,
            "seed": outcome.seed,
            "fingerprint": outcome.fingerprint,
            "degrees_of_freedom": outcome.decay.degrees_of_freedom,
            "comment": "_u: standard uncertainty of the simulation alone (Type A)",
        },
    )
    for kind in FLUXES:
        estimates = [getattr(outcome.flux[row], kind) for row in outcome.rows]
        _add(data, f"flux_{kind}", ("row",), *_columns(estimates), "W")
    _add(data, "irradiance", ("row",), *_columns(list(outcome.irradiance.values())), "W m-2")
    _add(data, "ledger", ("loss",), *_columns([getattr(outcome.ledger, loss) for loss in LEDGER]), "W")
    data["emitted"] = ((), outcome.ledger.emitted, {"units": "W"})
    for name in ("decay", "switch_off", "switch_on"):
        curve = getattr(outcome, name)
        _add(data, name, ("time_edge",), curve.energy, curve.u, "J")
    for name, units in SINGLE.items():
        estimate = outcome.output(name)
        _add(data, name, (), estimate.value, estimate.u, units)

    histogram = outcome.flight_histogram
    data.coords["flight_bin"] = ("flight_bin", _middles(histogram.edges), {"units": "m"})
    _add(data, "flight_share", ("flight_bin",), histogram.share, histogram.u, "1")
    for wall, map_ in outcome.maps.items():
        u, v = f"{wall}_u_axis", f"{wall}_v_axis"
        data.coords[u] = (u, _middles(map_.u_edges), {"units": "m", "long_name": "middle of cell along u"})
        data.coords[v] = (v, _middles(map_.v_edges), {"units": "m", "long_name": "middle of cell along v"})
        _add(data, f"{wall}_map", (v, u), map_.irradiance, map_.u, "W m-2")
        data[f"{wall}_cell_area"] = ((v, u), map_.area, {"units": "m2"})
    return data


def _add(data: xr.Dataset, name: str, dimensions: tuple[str, ...], values: Any, u: Any, units: str) -> None:
    data[name] = (dimensions, values, {"units": units, "ancillary_variables": f"{name}_u"})
    data[f"{name}_u"] = (dimensions, u, {"units": units, "long_name": f"standard uncertainty of {name}"})


def _columns(estimates: list[Estimate]) -> tuple[np.ndarray[Any, Any], np.ndarray[Any, Any]]:
    return np.array([e.value for e in estimates]), np.array([e.u for e in estimates])


def _middles(edges: np.ndarray[Any, Any]) -> np.ndarray[Any, Any]:
    return 0.5 * (edges[:-1] + edges[1:])
