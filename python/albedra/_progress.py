"""What a run shows while it goes on."""

from __future__ import annotations

import sys
from typing import TYPE_CHECKING, Any, TextIO

if TYPE_CHECKING:
    from collections.abc import Callable

    from ._albedra import Progress

WIDTH = 10
"""Characters of the bar."""

LINE_EVERY = 5.0
"""Seconds between lines where there is no terminal."""


def teller(progress: bool | Callable[[Progress], object] | None) -> Any:
    """Give what is to be called with each Progress; None if nothing is to be."""
    if progress is None:
        if _is_terminal(sys.stderr):
            return Bar(sys.stderr)
        return _notebook_bar() if _in_notebook() else None
    if progress is True:
        if _is_terminal(sys.stderr):
            return Bar(sys.stderr)
        return (_notebook_bar() if _in_notebook() else None) or Lines(sys.stderr)
    if progress is False:
        return None
    if callable(progress):
        return progress
    raise TypeError(f"progress must be True, False, None or callable, got {progress!r}")


def close(teller: object, complete: bool) -> None:
    """End what `teller` gave."""
    if isinstance(teller, Bar | Lines | _NotebookBar):
        teller.close(complete)


def line(progress: Progress) -> str:
    """Write a state in one line: share, photons, rate, time left, relative uncertainty."""
    share = min(1.0, progress.done / max(1, progress.wanted))
    parts = [f"{100 * share:5.1f} %", f"{_si(progress.done)}/{_si(progress.wanted)} photons"]
    if progress.rate > 0:
        parts.append(f"{_si(progress.rate)}/s")
    if progress.left is not None and share < 1:
        parts.append(f"{_clock(progress.left)} left")
    elif share >= 1:
        parts.append(_clock(progress.elapsed))
    if progress.relative_uncertainty is not None:
        parts.append(f"u {100 * progress.relative_uncertainty:.2g} %")
    return "  ".join(parts)


class Bar:
    """A bar that is drawn again and again on one line of a terminal."""

    def __init__(self, stream: TextIO) -> None:
        self._stream = stream
        self._shown = False

    def __call__(self, progress: Progress) -> None:
        """Draw the bar."""
        share = min(1.0, progress.done / max(1, progress.wanted))
        full = round(WIDTH * share)
        text = f"[{'#' * full}{'.' * (WIDTH - full)}] {line(progress)}"
        self._stream.write(f"\r{text[:79]:<79}")
        self._stream.flush()
        self._shown = True

    def close(self, complete: bool) -> None:
        """Leave the line as it is."""
        if self._shown:
            self._stream.write("\n" if complete else "  stopped\n")
            self._stream.flush()


class Lines:
    """A line every few seconds, for logs."""

    def __init__(self, stream: TextIO) -> None:
        self._stream = stream
        self._last = 0.0

    def __call__(self, progress: Progress) -> None:
        """Write a line if it is time, or if it is the last."""
        if progress.elapsed - self._last >= LINE_EVERY or progress.left == 0:
            self._last = progress.elapsed
            self._stream.write(line(progress).strip() + "\n")
            self._stream.flush()

    def close(self, complete: bool) -> None:
        """Say so if the run was stopped."""
        if not complete:
            self._stream.write("stopped\n")


class _NotebookBar:
    """A bar of tqdm, for notebooks."""

    def __init__(self, make: Callable[..., Any]) -> None:
        self._make = make
        self._bar: Any = None

    def __call__(self, progress: Progress) -> None:
        if self._bar is None:
            self._bar = self._make(total=progress.wanted, unit="photons", unit_scale=True)
        self._bar.total = progress.wanted
        self._bar.n = progress.done
        if progress.relative_uncertainty is not None:
            self._bar.set_postfix_str(f"u {100 * progress.relative_uncertainty:.2g} %", refresh=False)
        self._bar.refresh()

    def close(self, complete: bool) -> None:
        if self._bar is not None:
            self._bar.close()


def _notebook_bar() -> _NotebookBar | None:
    try:
        from tqdm.auto import tqdm  # type: ignore[import-untyped, unused-ignore]
    except ImportError:
        return None
    return _NotebookBar(tqdm)


def _in_notebook() -> bool:
    """Tell whether a kernel runs us; one that does has imported its own package."""
    if "ipykernel" not in sys.modules:
        return False
    from IPython import get_ipython  # type: ignore[import-not-found, unused-ignore]

    return get_ipython() is not None


def _is_terminal(stream: TextIO | None) -> bool:
    return stream is not None and stream.isatty()


def _si(number: float) -> str:
    for size, name in ((1e12, "T"), (1e9, "G"), (1e6, "M"), (1e3, "k")):
        if number >= size:
            return f"{number / size:.3g} {name}"
    return f"{number:.0f}"


def _clock(seconds: float) -> str:
    if seconds < 60:
        return f"{seconds:.1f} s" if seconds < 10 else f"{seconds:.0f} s"
    minutes, seconds = divmod(round(seconds), 60)
    hours, minutes = divmod(minutes, 60)
    if hours >= 100:
        return f"{hours} h"
    return f"{hours} h {minutes:02d} min" if hours else f"{minutes} min {seconds:02d} s"
