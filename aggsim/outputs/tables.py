"""A result as text for a report, and as CSV files for other programs."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.outputs import _units
from aggsim.outputs._units import Structure
from aggsim.outputs.csv_files import summary_csv as summary_csv
from aggsim.outputs.csv_files import to_csv as to_csv
from aggsim.result import Result
from aggsim.sizes import means

CAUTION = (
    "The model supports and does not replace jar tests, pilot trials or stability tests; "
    "local codes and licensed practice decide."
)

_ROWS = 11  # rows without `times`, so that an hour in minutes comes in steps of six
_WIDTH = 100  # characters per line of the notes


def summary(result: Result, times: Any = None, *, structure: Structure | None = None) -> str:
    """Return a table of the distribution over time, with the state of the run below.

    Parameters
    ----------
    result : Result
    times : float or (n,), optional
        Times [s]; the nearest outputs are shown with their own time. About 10 rows over the run without it.
    structure : Compact or Fractal, optional
        Gives d10, d50 and d90 as outer diameters; mean diameters remain volume-equivalent.

    Returns
    -------
    str
        Aligned columns: time, number [1/m3]; d10, d50, d90 by volume; mean diameters D[4,3] and D[3,2];
        geometric standard deviation by number [-]; volume beyond the grid [% of the start]; the kernel part
        with the largest volume flux, and its share.

    Raises
    ------
    TimesError
        If a time lies outside the run.
    """
    rows = _units.chosen_times(result, times, _ROWS)
    volume, number = result.grid.volume, result.number[rows]
    quantiles = means.quantile_diameter(volume, number, [0.1, 0.5, 0.9], structure=structure)
    d43, d32 = (means.mean_diameter(volume, number, p, q) for p, q in ((4, 3), (3, 2)))
    diameters = np.column_stack([quantiles, d43, d32])
    length = _units.length_unit(diameters)
    time = _units.table_time_unit(result.times[rows])
    gsd = means.geometric_standard_deviation(volume, number, 0)
    beyond = 100.0 * result.balance.beyond_grid[rows] / result.balance.initial
    columns = [
        ("time", f"[{time.name}]", _times(result.times[rows] / time.size)),
        ("number", "[1/m3]", [f"{n:.3e}" for n in number.sum(axis=-1)]),
        *(
            (name, f"[{length.name}]", _decimals(values / length.size))
            for name, values in zip(("d10", "d50", "d90", "D[4,3]", "D[3,2]"), diameters.T, strict=True)
        ),
        ("GSD", "[-]", [f"{g:.3f}" for g in gsd]),
        ("beyond grid", "[vol %]", [f"{share:.2g}" if abs(share) >= 1e-4 else "0" for share in beyond]),
        ("leading mechanism", "(of volume flux)", _leading(result, rows)),
    ]
    kind = "volume-equivalent" if structure is None else "outer"
    note = (
        f"d10, d50, d90: {kind} diameter, by volume. D[p,q]: volume-equivalent. GSD: of diameter, by number."
    )
    return "\n".join([*_aligned(columns), "", note, *_footer(result)])


def contributions(result: Result, times: Any = None) -> str:
    """Return a table of what each named part of the kernel did over time.

    Parameters
    ----------
    result : Result
    times : float or (n,), optional
        As in `summary`.

    Returns
    -------
    str
        Aligned columns: time; collision events of all parts [1/(m3 s)]; the share of each part in the volume
        flux and in the events [%].
    """
    rows = _units.chosen_times(result, times, _ROWS)
    time = _units.table_time_unit(result.times[rows])
    parts = result.contributions
    events = sum((part.events for part in parts.values()), start=np.zeros(result.times.size))[rows]
    columns: list[tuple[str, str, list[str]]] = [
        ("time", f"[{time.name}]", _times(result.times[rows] / time.size)),
        ("events", "[1/(m3 s)]", [f"{e:.3e}" for e in events]),
    ]
    for name, part in parts.items():
        columns.append((name, "[% of flux]", [f"{100.0 * share:.1f}" for share in part.volume_share[rows]]))
        columns.append(("", "[% of events]", [f"{100.0 * share:.1f}" for share in part.event_share[rows]]))
    note = "flux: volume of the colliding particles per volume of suspension and time."
    return "\n".join([*_aligned(columns), "", note, *_footer(result)])


def _leading(result: Result, rows: list[int]) -> list[str]:
    names = list(result.contributions)
    if not names:
        return ["-"] * len(rows)
    shares = np.array([part.volume_share[rows] for part in result.contributions.values()])
    first = shares.argmax(axis=0)
    return [
        f"{names[k]} {100.0 * shares[k, row]:.0f} %" if shares[k, row] > 0.0 else "-"
        for row, k in enumerate(first)
    ]


def _footer(result: Result) -> list[str]:
    balance = result.balance
    closure = float(np.abs(balance.closure).max())
    negative = float(balance.negative_share.max())
    notes = [
        f"Run {result.status}",
        f"Volume balance closes to {closure:.1e} of the start; at most {negative:.1e} in negative sections.",
    ]
    return [*(line for note in notes for line in textwrap.wrap(note, _WIDTH)), CAUTION]


def _times(values: FloatArray) -> list[str]:
    """Times to four significant figures, without idle zeros and powers of ten."""
    return [np.format_float_positional(v, 4, fractional=False, trim="-") for v in values]


def _decimals(values: FloatArray) -> list[str]:
    """Values with one number of decimals, which gives the smallest of them three significant figures."""
    decimals = int(np.clip(2 - np.floor(np.log10(values.min())), 0, 12))
    return [f"{v:.{decimals}f}" for v in values]


def _aligned(columns: Sequence[tuple[str, str, list[str]]]) -> list[str]:
    """Lines of right-aligned columns, each (name, unit, cells)."""
    table = [[name, unit, *cells] for name, unit, cells in columns]
    widths = [max(map(len, cells)) for cells in table]
    lines = [
        "  ".join(cell.rjust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
        for row in zip(*table, strict=True)
    ]
    rule = "-" * (sum(widths) + 2 * (len(widths) - 1))
    return [*lines[:2], rule, *lines[2:]]
