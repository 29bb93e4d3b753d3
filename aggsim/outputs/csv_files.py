"""A result as CSV files: figures in full precision, comment lines with # before the header.

Every number is written with the fewest digits that read back as the same floating-point number.
"""

from __future__ import annotations

import csv
import io
import os
from collections.abc import Sequence
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.outputs import _units
from aggsim.outputs._files import package_version, write_atomically
from aggsim.outputs._units import Structure
from aggsim.result import Result


def to_csv(result: Result, path: str | os.PathLike[str], times: Any = None) -> None:
    """Write the distribution over time: one row per section, one column per output time.

    Parameters
    ----------
    result : Result
    path : str or Path
        Written exactly there; a file that is there already is replaced.
    times : float or (n,), optional
        Times [s], of which the nearest outputs are written; all without it.

    Raises
    ------
    TimesError
        If a time lies outside the run.
    OSError
        If the file cannot be written.

    Notes
    -----
    Columns: volume [m3], volume-equivalent diameter [m] and width [m3] of the sections, then the number in
    each at every time [1/m3].
    """
    rows = _units.chosen_times(result, times, result.times.size)
    grid = result.grid
    columns = [("volume [m3]", grid.volume), ("diameter [m]", grid.diameter), ("width [m3]", grid.width)]
    columns += [(f"number at t={float(result.times[k])!r} s [1/m3]", result.number[k]) for k in rows]
    _write(result, path, "number of particles in each section", columns)


def summary_csv(result: Result, path: str | os.PathLike[str], *, structure: Structure | None = None) -> None:
    """Write the time series of a result: one row per output time.

    Parameters
    ----------
    result : Result
    path : str or Path
        Written exactly there; a file that is there already is replaced.
    structure : Compact or Fractal, optional
        Gives d10, d50 and d90 as outer diameters, named so in the header.

    Raises
    ------
    OSError
        If the file cannot be written.

    Notes
    -----
    Columns: time; number; volume fraction; d10, d50, d90 by volume; D43 and D32; geometric standard deviation
    by number; volume fraction beyond the grid; share of the volume in negative sections; what each
    stream brought (inward) or took (outward) since the start, as a volume fraction of the vessel; events and
    volume flux of each kernel part. Sizes of an output without particles are nan.
    """
    quantiles = result.quantile_diameter([0.1, 0.5, 0.9], structure=structure)
    kind = "" if structure is None else " outer"
    columns = [
        ("time [s]", result.times),
        ("number [1/m3]", result.total_number()),
        ("volume fraction [-]", result.moment(1)),
        *((f"{name}{kind} [m]", d) for name, d in zip(("d10", "d50", "d90"), quantiles.T, strict=True)),
        ("D43 [m]", result.mean_diameter(4, 3)),
        ("D32 [m]", result.mean_diameter(3, 2)),
        ("GSD by number [-]", result.geometric_standard_deviation(0)),
        ("volume fraction beyond grid [-]", result.balance.beyond_grid),
        ("negative share [-]", result.balance.negative_share),
        *((f"inward {name} [-]", volume) for name, volume in result.balance.inward.items()),
        *((f"outward {name} [-]", volume) for name, volume in result.balance.outward.items()),
    ]
    for name, part in result.contributions.items():
        columns.append((f"events of {name} [1/(m3 s)]", part.events))
        columns.append((f"volume flux of {name} [1/s]", part.volume_flux))
    _write(result, path, "time series", columns)


def _write(
    result: Result, path: str | os.PathLike[str], what: str, columns: Sequence[tuple[str, FloatArray]]
) -> None:
    settings = ", ".join(f"{k} {v}" for k, v in result.settings.items())
    comments = [f"aggsim {package_version()}: {what}", f"status: {result.status}", f"computed: {settings}"]
    text = io.StringIO()
    for comment in comments:
        text.write("# " + " ".join(comment.split()) + "\n")
    table = csv.writer(text, lineterminator="\n")
    table.writerow([name for name, _ in columns])
    table.writerows(np.column_stack([values for _, values in columns]).tolist())
    write_atomically(path, text.getvalue().encode())
