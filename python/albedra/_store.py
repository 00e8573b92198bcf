"""Outcomes as NetCDF-4 files: the exact totals, the experiment as text, and what tells damage."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path
from typing import TYPE_CHECKING, Any

from ._albedra import Outcome, __version__

if TYPE_CHECKING:
    import numpy as np

FORMAT = "albedra outcome"
"""Attribute `format` of our files."""

VERSION = 1
"""Attribute `format_version`; readers refuse others."""

COUNTERS = ("strikes", "flights", "retried", "untracked")

NO_SCALE = b"This is a netCDF dimension but not a netCDF variable."
"""How NetCDF-4 marks a dimension without a variable (its file format specification, from memory)."""


def save(outcome: Outcome, path: str | os.PathLike[str]) -> None:
    """Save an outcome; a crash leaves the old file or the new one, never a part of one."""
    import h5py  # type: ignore[import-untyped, unused-ignore]

    path = Path(path)
    handle, beside = tempfile.mkstemp(prefix=f".{path.name}.", suffix=".part", dir=path.parent)
    os.close(handle)
    try:
        with h5py.File(beside, "w", track_order=True) as file:
            _write(file, outcome._store())
        _flush(beside)
        os.chmod(beside, _mode(path))
        os.replace(beside, path)
    except BaseException:
        Path(beside).unlink(missing_ok=True)
        raise
    _flush(path.parent)


def load(path: str | os.PathLike[str]) -> Outcome:
    """Read an outcome from a file that `Outcome.save` wrote; equal to the saved one, bit for bit.

    Parameters
    ----------
    path : path-like
        The file.

    Returns
    -------
    Outcome
        The outcome, with its experiment.

    Raises
    ------
    OSError
        If the file cannot be opened.
    ValueError
        If it is no such file, or damaged.

    Examples
    --------
    >>> import pathlib, tempfile
    >>> import albedra as al
    >>> box = al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.lambertian(0.5))
    >>> result = al.Experiment(box, al.Source.volume()).trace(1000)
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     result.save(pathlib.Path(folder, "run.nc"))
    ...     al.load(pathlib.Path(folder, "run.nc")) == result
    True
    """
    import h5py  # type: ignore[import-untyped, unused-ignore]

    path = Path(path)
    with path.open("rb"):
        pass  # a file that is missing or locked is told by its own error
    try:
        with h5py.File(path, "r") as file:
            return Outcome._restore(_read(file))
    except (OSError, KeyError, ValueError, TypeError, IndexError, RuntimeError, OverflowError) as error:
        raise ValueError(f"{path} is no whole outcome of albedra: {_reason(error)}") from error


def _write(file: Any, parts: dict[str, Any]) -> None:
    import numpy as np

    file.attrs["format"] = FORMAT
    file.attrs["format_version"] = VERSION
    file.attrs["program_version"] = __version__
    file.attrs["title"] = "exact totals of photons traced by albedra, with their experiment"
    for name in ("history", "outputs", "checksum"):
        file.attrs[name] = parts[name]
    # Not an attribute, as those hold no more than 64 KiB.
    text = file.create_dataset("experiment", data=parts["experiment"])
    text.attrs["long_name"] = "the experiment, as TOML"
    file.attrs["seed"] = np.uint64(parts["seed"])
    for name, count in zip(COUNTERS, parts["counters"], strict=True):
        file.attrs[name] = np.uint64(count)
    if parts["target"] is not None:
        output, relative, reached = parts["target"]
        file.attrs["target_output"] = output
        file.attrs["target_relative"] = np.array([relative, reached])

    high, low = parts["high"], parts["low"]
    photons = np.array(parts["photons"], dtype=np.uint64).reshape(-1, 2)
    scales = {"output": high.shape[0], "group": high.shape[1], "interval": len(photons), "side": 2}
    _variable(file, "high", high, ("output", "group"), scales, "sums, high 64 bits, in quanta of each output")
    _variable(file, "low", low, ("output", "group"), scales, "sums, low 64 bits, in quanta of each output")
    _variable(file, "photons", photons, ("interval", "side"), scales, "indices: first, and last + 1")
    if parts["mesh"] is not None:
        mesh = np.frombuffer(parts["mesh"], dtype=np.uint8)
        _variable(file, "mesh", mesh, ("byte",), {"byte": len(mesh)}, "mesh of the walls, little-endian")


def _variable(
    file: Any,
    name: str,
    values: np.ndarray[Any, Any],
    dimensions: tuple[str, ...],
    sizes: dict[str, int],
    meaning: str,
) -> None:
    import numpy as np

    options = {"fletcher32": True, "compression": "gzip", "shuffle": True} if values.size else {}
    variable = file.create_dataset(name, data=values, **options)
    variable.attrs["long_name"] = meaning
    for axis, dimension in enumerate(dimensions):
        if dimension not in file:
            scale = file.create_dataset(dimension, data=np.zeros(sizes[dimension], dtype=">f4"))
            scale.make_scale(NO_SCALE + f"{sizes[dimension]:10d}".encode())
        variable.dims[axis].attach_scale(file[dimension])


def _read(file: Any) -> dict[str, Any]:
    import numpy as np

    attributes = dict(file.attrs)
    if attributes.get("format") != FORMAT:
        raise ValueError(f"its attribute format must be {FORMAT!r}, got {attributes.get('format')!r}")
    version = int(attributes["format_version"])
    if version != VERSION:
        raise ValueError(f"version of its format must be {VERSION}, got {version}")
    parts: dict[str, Any] = {name: str(attributes[name]) for name in ("history", "outputs", "checksum")}
    parts["experiment"] = file["experiment"].asstr()[()]
    parts["seed"] = int(attributes["seed"])
    parts["counters"] = tuple(int(attributes[name]) for name in COUNTERS)
    parts["target"] = None
    if "target_output" in attributes:
        relative, reached = (float(x) for x in attributes["target_relative"])
        parts["target"] = (str(attributes["target_output"]), relative, reached)
    parts["photons"] = [(int(first), int(end)) for first, end in file["photons"][()]]
    parts["high"] = np.ascontiguousarray(file["high"][()], dtype=np.int64)
    parts["low"] = np.ascontiguousarray(file["low"][()], dtype=np.uint64)
    parts["mesh"] = file["mesh"][()].tobytes() if "mesh" in file else None
    return parts


def _reason(error: BaseException) -> str:
    """Give the text of an error; that of a KeyError is written in quotes."""
    return f"{error.args[0]} is missing" if isinstance(error, KeyError) and error.args else str(error)


def _mode(path: Path) -> int:
    """Give the mode of the file that is replaced, or that of a new file."""
    if path.exists():
        return path.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask


def _flush(path: str | Path) -> None:
    """Have the system write a file, or the names in a folder, to its disk."""
    try:
        handle = os.open(path, os.O_RDONLY)
    except (PermissionError, IsADirectoryError):
        return  # folders cannot be opened on Windows
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
