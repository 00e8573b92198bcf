"""Pictures of outcomes."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from ._albedra import Map, Outcome

COVERAGE = 0.95
"""Chance of the intervals that are drawn."""

BLUE, ORANGE, GREEN, GREY = "#2166ac", "#d6604d", "#4d9221", "#777777"
"""Told apart in greys and with the usual defects of colour vision."""


def plot(outcome: Outcome, kind: str | None, wall: str | None, ax: Axes | None) -> Axes | Figure:
    """Draw what `kind` says; without it, an overview."""
    if wall is not None and kind != "map":
        raise ValueError(f"wall is for kind 'map' only, got kind {kind!r}")
    if kind is None:
        if ax is not None:
            raise ValueError("an overview makes its own figure: leave ax out, or give a kind")
        return _overview(outcome)
    if kind not in ("decay", "flux", "map"):
        raise ValueError(f"kind must be 'decay', 'flux', 'map' or None, got {kind!r}")
    if ax is None:
        from matplotlib import pyplot as plt

        size = (6.4, 1.6 + 0.42 * len(outcome.rows)) if kind == "flux" else (6.4, 4.4)
        _, ax = plt.subplots(figsize=size, layout="constrained")
    if kind == "decay":
        return _decay(outcome, ax)
    if kind == "flux":
        return _flux(outcome, ax)
    return _map(_chosen(outcome, wall), ax)


def _overview(outcome: Outcome) -> Figure:
    from matplotlib import pyplot as plt

    maps = list(outcome.maps.values())
    height = max(3.6, 1.4 + 0.3 * len(outcome.rows))
    figure, panels = plt.subplots(
        1 + (len(maps) + 1) // 2,
        2,
        figsize=(11, height + 3.6 * ((len(maps) + 1) // 2)),
        layout="constrained",
        squeeze=False,
    )
    _decay(outcome, panels[0, 0])
    _flux(outcome, panels[0, 1])
    free = panels[1:].ravel()
    for map_, panel in zip(maps, free, strict=False):
        _map(map_, panel)
    for panel in free[len(maps) :]:
        panel.set_axis_off()
    title = outcome.experiment.title
    if title:
        figure.suptitle(title)
    return figure


def _factor(degrees_of_freedom: float) -> float:
    """Give half the width of the coverage interval in units of u."""
    from ._albedra import Estimate

    return Estimate(0.0, 1.0, degrees_of_freedom).coverage_interval(COVERAGE).high


def _decay(outcome: Outcome, ax: Axes) -> Axes:
    decay = outcome.decay
    scale, unit = _prefix(decay.edges[-1], "s")
    times = decay.edges * scale
    half = _factor(decay.degrees_of_freedom) * decay.u
    shown = decay.energy > 0
    (curve,) = ax.plot(times[shown], decay.energy[shown], color=BLUE, lw=1.4, label="energy inside")
    if np.all(np.isfinite(half)):
        # On a log axis a band that reaches 0 would have no lower end.
        low = np.maximum(decay.energy - half, 1e-3 * decay.energy)[shown]
        high = (decay.energy + half)[shown]
        ax.fill_between(
            times[shown], low, high, color=curve.get_color(), alpha=0.3, lw=0, label="95 % coverage"
        )
    ax.set_yscale("log")
    least = max(decay.energy[shown].min() * 0.5, decay.energy[0] * 1e-7)
    ax.set_ylim(least, decay.energy[0] * 1.6)
    try:
        time = decay.decay_time()
    except ValueError:
        pass
    else:
        start, stop = (edge * scale for edge in time.window)
        ax.axvspan(start, stop, color=GREY, alpha=0.1, lw=0)
        value, prefix = _prefix(time.estimate.value, "s")
        shown_time = _concise(time.estimate, value, prefix)
        flag = "\nNOT ONE EXPONENTIAL" if time.not_one_exponential else ""
        label = f"decay time {shown_time}\n(shaded window){flag}"
        ax.plot([], [], color=GREY, alpha=0.3, lw=8, label=label)
    ax.set(xlim=(0, times[-1]), xlabel=f"time after a short pulse / {unit}", ylabel="energy inside / J")
    ax.set_title("decay", loc="left")
    ax.grid(True, which="major", alpha=0.3)
    ax.legend(frameon=False)
    return ax


def _flux(outcome: Outcome, ax: Axes) -> Axes:
    names = list(outcome.rows)
    places = np.arange(len(names))
    kinds = (("incident", BLUE, -0.27), ("direct", ORANGE, 0.0), ("absorbed", GREEN, 0.27))
    for kind, colour, shift in kinds:
        label = "absorbed or escaped" if kind == "absorbed" else kind
        estimates = [getattr(outcome.flux[name], kind) for name in names]
        if kind == "absorbed":
            pairs = zip(estimates, (outcome.flux[name].escaped for name in names), strict=True)
            estimates = [absorbed if absorbed.value else escaped for absorbed, escaped in pairs]
        values = np.array([estimate.value for estimate in estimates])
        intervals = [estimate.coverage_interval(COVERAGE) for estimate in estimates]
        half = np.array([interval.high for interval in intervals]) - values
        known = np.isfinite(half)
        if kind == "incident":
            ends = values + np.where(known, half, 0.0)
            for place, estimate, end in zip(places, estimates, ends, strict=True):
                ax.annotate(f" {estimate}", (end, place + shift), va="center", fontsize=7)
        ax.barh(places + shift, values, 0.25, color=colour, label=label)
        # Where there are too few photons for an uncertainty, none is drawn.
        ax.errorbar(
            values[known],
            (places + shift)[known],
            xerr=half[known],
            fmt="none",
            ecolor="black",
            elinewidth=1.0,
            capsize=2.5,
        )
    ax.set_yticks(places, names)
    ax.invert_yaxis()
    ax.set_xlim(0, 1.35 * ax.get_xlim()[1])
    ax.set_xlabel("radiant flux / W (bars: 95 % coverage)")
    ax.set_title("flux", loc="left")
    ax.grid(True, axis="x", alpha=0.3)
    ax.set_axisbelow(True)
    # Above the bars, which may fill the axes down to the last row.
    ax.legend(frameon=False, loc="lower right", bbox_to_anchor=(1, 1), borderaxespad=0, ncols=3, fontsize=8)
    return ax


def _map(map_: Map, ax: Axes) -> Axes:
    cells = np.ma.masked_invalid(map_.irradiance)
    mesh = ax.pcolormesh(map_.u_edges, map_.v_edges, cells, cmap="viridis", shading="flat")
    bar = ax.figure.colorbar(mesh, ax=ax)
    bar.set_label("irradiance / (W/m²)")
    ax.set_aspect("equal")
    ax.set(xlabel="u / m", ylabel="v / m")
    with np.errstate(divide="ignore", invalid="ignore"):
        relative = np.ma.masked_invalid(map_.u / map_.irradiance)
    noise = f", median u of a cell {100 * float(np.ma.median(relative)):.2g} %" if relative.count() else ""
    ax.set_title(f"{map_.wall}{noise}", loc="left")
    return ax


def _chosen(outcome: Outcome, wall: str | None) -> Map:
    if wall is not None:
        return outcome.maps[wall]
    for map_ in outcome.maps.values():
        return map_
    raise ValueError("there is no map to draw: ask for one with Experiment(..., maps={wall: (nu, nv)})")


def _prefix(size: float, unit: str) -> tuple[float, str]:
    """Give the factor and the name of the multiple of a unit that suits numbers of this size."""
    for factor, name in ((1.0, ""), (1e3, "m"), (1e6, "µ"), (1e9, "n"), (1e12, "p")):
        if size * factor >= 1:
            return factor, name + unit
    return 1e15, "f" + unit


def _concise(estimate: Any, factor: float, unit: str) -> str:
    from ._albedra import Estimate

    scaled = Estimate(estimate.value * factor, estimate.u * factor, estimate.degrees_of_freedom, unit=unit)
    return str(scaled)
