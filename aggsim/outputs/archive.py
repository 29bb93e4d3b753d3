"""Results in one file each, restored bit for bit.

The file is a numpy .npz archive: the arrays under the names below, and `header`, a JSON text as UTF-8 bytes,
with everything that is not an array. Nothing in it is executed when it is read. Names of streams and of kernel
parts stand in the header, their arrays under a number. A tank of a train is a result of its own, with `tank_0_`
and so on before the names of its arrays. Version 1 knew neither streams nor tanks.
"""

from __future__ import annotations

import io
import json
import os
import zipfile
from dataclasses import asdict
from typing import Any

import numpy as np

from aggsim.errors import AggsimError, ArchiveError
from aggsim.outputs._files import package_version, write_atomically
from aggsim.result import Balance, Contributions, Outcome, Result, RunStatistics, Status
from aggsim.sizes import SizeGrid

FORMAT = "aggsim result"
FORMAT_VERSION = 2  # raised whenever an older release could not read, or would misread, what is written

_BALANCE = ("present", "beyond_grid", "beyond_grid_number", "negative_share")
_WAYS = ("inward", "outward")


def save(result: Result, path: str | os.PathLike[str]) -> None:
    """Write a result to one file, exactly at `path` (no suffix is added; .npz is usual).

    Parameters
    ----------
    result : Result
    path : str or Path
        A file that is there already is replaced at once, when the new one is complete.

    Raises
    ------
    ArchiveError
        If `result` is not a Result.
    OSError
        If the file cannot be written.
    """
    if not isinstance(result, Result):
        raise ArchiveError(f"result={result!r} is not a Result. Try: save(simulate(...), path).")
    header, arrays = _parts(result)
    header = {
        "format": FORMAT,
        "format_version": FORMAT_VERSION,
        "aggsim_version": package_version(),
        **header,
    }
    text = np.frombuffer(json.dumps(header, indent=1).encode(), dtype=np.uint8)
    buffer = io.BytesIO()
    np.savez_compressed(buffer, header=text, **arrays)
    write_atomically(path, buffer.getvalue())


def load(path: str | os.PathLike[str]) -> Result:
    """Read a result that `save` wrote.

    Parameters
    ----------
    path : str or Path
        The file, with the suffix that it was given.

    Returns
    -------
    Result
        Equal to the one saved, bit for bit.

    Raises
    ------
    ArchiveError
        If the file is not a saved result, is damaged, or comes from a later format version.
    OSError
        If the file cannot be opened.
    """
    name = os.fspath(path)
    with open(path, "rb") as file:
        content = file.read()
    arrays = _arrays(content, name)
    header = _header(arrays, name)
    try:
        return _result(_current(header), arrays)
    except (KeyError, TypeError, ValueError, AggsimError) as problem:
        raise ArchiveError(
            f"{name} is a saved aggsim result, but damaged ({_cause(problem)}). "
            "Try: a copy of the file, or run the simulation again."
        ) from problem


def _parts(result: Result) -> tuple[dict[str, Any], dict[str, Any]]:
    """Header and arrays of a result, its tanks included."""
    status, stats, grid, balance = result.status, result.stats, result.grid, result.balance
    header: dict[str, Any] = {
        "grid": {"ratio": _float(grid.ratio), "monomer": _float(grid.monomer)},
        "balance": {
            "initial": float(balance.initial),
            "inward": list(balance.inward),
            "outward": list(balance.outward),
        },
        "contributions": list(result.contributions),
        "status": {
            "outcome": status.outcome.name,
            "time": float(status.time),
            "detail": status.detail,
            "gelation_time": _float(status.gelation_time),
        },
        "stats": {k: float(v) if k == "seconds" else int(v) for k, v in asdict(stats).items()},
        "settings": {str(k): str(v) for k, v in result.settings.items()},
        "tanks": [],
    }
    arrays = {"times": result.times, "grid_volume": grid.volume, "number": result.number}
    arrays |= {f"balance_{name}": getattr(balance, name) for name in _BALANCE}
    for way in _WAYS:
        arrays |= {f"{way}_{k}": volume for k, volume in enumerate(getattr(balance, way).values())}
    for k, part in enumerate(result.contributions.values()):
        arrays |= {f"events_{k}": part.events, f"volume_flux_{k}": part.volume_flux}
    content: dict[str, Any] = {name: np.asarray(array, np.float64) for name, array in arrays.items()}
    for k, tank in enumerate(result.tanks):
        tank_header, tank_arrays = _parts(tank)
        header["tanks"].append(tank_header)
        content |= {f"tank_{k}_{name}": array for name, array in tank_arrays.items()}
    return header, content


def _arrays(content: bytes, name: str) -> dict[str, Any]:
    foreign = f"{name} is not a saved aggsim result. Try: a file that aggsim.save wrote."
    damaged = f"{name} is damaged ({{}}). Try: a copy of the file, or run the simulation again."
    if not zipfile.is_zipfile(io.BytesIO(content)):
        if content.startswith(b"PK\x03\x04"):  # the directory of the archive stands at its end
            raise ArchiveError(damaged.format("it ends too early"))
        raise ArchiveError(foreign)
    try:
        with np.load(io.BytesIO(content), allow_pickle=False) as archive:
            if "header" not in archive.files:
                raise ArchiveError(foreign)
            return {key: archive[key] for key in archive.files}
    except ArchiveError:
        raise
    except Exception as problem:  # readers of damaged bytes raise whatever comes up
        if "allow_pickle" in str(problem):  # objects of Python, which no result holds
            raise ArchiveError(foreign) from problem
        raise ArchiveError(damaged.format(problem)) from problem


def _header(arrays: dict[str, Any], name: str) -> dict[str, Any]:
    try:
        header = json.loads(arrays["header"].tobytes().decode())
    except ValueError:
        header = None
    if not isinstance(header, dict) or header.get("format") != FORMAT:
        raise ArchiveError(f"{name} is not a saved aggsim result. Try: a file that aggsim.save wrote.")
    version = header.get("format_version")
    if not isinstance(version, int) or version < 1:
        raise ArchiveError(
            f"{name} is a saved aggsim result, but damaged (its format version reads {version!r}). "
            "Try: a copy of the file, or run the simulation again."
        )
    if version > FORMAT_VERSION:
        raise ArchiveError(
            f"{name} has format version {version}, written by aggsim {header.get('aggsim_version')}; "
            f"this release, {package_version()}, reads versions up to {FORMAT_VERSION}. Try: a newer aggsim."
        )
    return header


def _current(header: dict[str, Any]) -> dict[str, Any]:
    """The header as this format version writes it."""
    if header["format_version"] == 1:
        return header | {"tanks": [], "balance": header["balance"] | {way: [] for way in _WAYS}}
    return header


def _result(header: dict[str, Any], arrays: dict[str, Any], prefix: str = "") -> Result:
    def array(name: str) -> Any:
        return arrays[prefix + name]

    times, number = array("times"), array("number")
    grid = SizeGrid(array("grid_volume"), **header["grid"])
    balance = {name: array(f"balance_{name}") for name in _BALANCE}
    streams: dict[str, Any] = {
        way: {name: array(f"{way}_{k}") for k, name in enumerate(header["balance"][way])} for way in _WAYS
    }
    parts = {
        name: (array(f"events_{k}"), array(f"volume_flux_{k}"))
        for k, name in enumerate(header["contributions"])
    }
    tanks = tuple(_result(tank, arrays, f"{prefix}tank_{k}_") for k, tank in enumerate(header["tanks"]))
    series = [*balance.values(), *(volume for way in streams.values() for volume in way.values())]
    shapes = {a.shape for a in (*series, *(a for pair in parts.values() for a in pair))}
    fitting = times.ndim == 1 and number.shape == (times.size, grid.sections) and shapes == {times.shape}
    if not fitting or any(tank.number.shape != number.shape for tank in tanks):
        raise ValueError("its arrays do not fit each other")
    status = header["status"] | {"outcome": Outcome[header["status"]["outcome"]]}
    return Result(
        times=times,
        grid=grid,
        number=number,
        balance=Balance(initial=header["balance"]["initial"], **balance, **streams),
        contributions=Contributions(parts),
        status=Status(**status),
        stats=RunStatistics(**header["stats"]),
        settings=header["settings"],
        tanks=tanks,
    )


def _float(value: float | None) -> float | None:
    return None if value is None else float(value)


def _cause(problem: Exception) -> str:
    return f"{problem} is missing or unknown" if isinstance(problem, KeyError) else str(problem)
