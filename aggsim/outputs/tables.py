"""A result as text for a report, and as CSV files for other programs."""

from __future__ import annotations

from typing import Any

import numpy as np

from aggsim.outputs import _layout, _units
from aggsim.outputs._layout import CAUTION as CAUTION
from aggsim.outputs._tanks import States, tanks_at
from aggsim.outputs._units import Structure
from aggsim.outputs.account_tables import account as account
from aggsim.outputs.csv_files import summary_csv as summary_csv
from aggsim.outputs.csv_files import to_csv as to_csv
from aggsim.result import Contributions, Result, SteadyState


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
        geometric standard deviation by number [-]; volume beyond the grid [% of what was there or came in]; the
        kernel part with the largest volume flux, and its share.

    Raises
    ------
    TimesError
        If a time lies outside the run.
    """
    rows = _units.chosen_times(result, times, _layout.ROWS)
    time = _units.table_time_unit(result.times[rows])
    beyond = 100.0 * result.balance.beyond_grid[rows] / (result.balance.scale or 1.0)
    states = States(result.grid, result.number[rows])
    parts = [(result.contributions, row) for row in rows]
    columns = [
        ("time", f"[{time.name}]", _layout.times(result.times[rows] / time.size)),
        ("number", "[1/m3]", [f"{n:.3e}" for n in states.total_number()]),
        *_sizes(states, structure),
        ("beyond grid", "[vol %]", [f"{share:.2g}" if abs(share) >= 1e-4 else "0" for share in beyond]),
        ("leading mechanism", "(of volume flux)", [_leading(*one) for one in parts]),
    ]
    return _layout.page(columns, [_size_note(structure)], _layout.closing(result))


def train(
    result: Result | SteadyState, time: float | None = None, *, structure: Structure | None = None
) -> str:
    """Return a table of the distributions in the tanks at one time, one row per tank.

    Parameters
    ----------
    result : Result or SteadyState
        Of a train, or of any vessel as one tank.
    time : float, optional
        Time [s]; the nearest output is shown, the last one without it. A steady state has none.
    structure : Compact or Fractal, optional
        As in `summary`.

    Returns
    -------
    str
        Aligned columns: tank, in the order of the flow from 1; number [1/m3]; volume fraction [-]; d10, d50, d90
        by volume; D[4,3] and D[3,2]; geometric standard deviation by number [-]; for a run the kernel part with
        the largest volume flux, and its share.

    Raises
    ------
    TimesError
        If the time lies outside the run, or is given for a steady state.
    """
    tanks = tanks_at(result, time)
    states = tanks.states
    columns = [
        ("tank", "", [f"{k + 1}" for k in range(len(states.number))]),
        ("number", "[1/m3]", [f"{n:.3e}" for n in states.total_number()]),
        ("volume fraction", "[-]", [f"{v:.3e}" for v in states.moment(1)]),
        *_sizes(states, structure),
    ]
    if tanks.contributions:
        cells = [_leading(parts, tanks.row) for parts in tanks.contributions]
        columns.append(("leading mechanism", "(of volume flux)", cells))
    closing = _layout.steady(result) if isinstance(result, SteadyState) else _layout.closing(result)
    return _layout.page(columns, [f"At {tanks.when}.", _size_note(structure)], closing)


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
    rows = _units.chosen_times(result, times, _layout.ROWS)
    time = _units.table_time_unit(result.times[rows])
    parts = result.contributions
    events = sum((part.events for part in parts.values()), start=np.zeros(result.times.size))[rows]
    columns: list[_layout.Column] = [
        ("time", f"[{time.name}]", _layout.times(result.times[rows] / time.size)),
        ("events", "[1/(m3 s)]", [f"{e:.3e}" for e in events]),
    ]
    for name, part in parts.items():
        columns.append((name, "[% of flux]", [f"{100.0 * share:.1f}" for share in part.volume_share[rows]]))
        columns.append(("", "[% of events]", [f"{100.0 * share:.1f}" for share in part.event_share[rows]]))
    note = "flux: volume of the colliding particles per volume of suspension and time."
    return _layout.page(columns, [note], _layout.closing(result))


def _sizes(states: States, structure: Structure | None) -> list[_layout.Column]:
    """Columns of the sizes of states (n,), all diameters in one unit; - where nothing is there."""
    names = ("d10", "d50", "d90", "D[4,3]", "D[3,2]")
    if not states.number.any():
        return [(name, "", ["-"] * len(states.number)) for name in (*names, "GSD")]
    quantiles = states.quantile_diameter([0.1, 0.5, 0.9], structure=structure)
    diameters = np.column_stack([quantiles, states.mean_diameter(4, 3), states.mean_diameter(3, 2)])
    length = _units.length_unit(diameters[~np.isnan(diameters)])
    columns: list[_layout.Column] = [
        (name, f"[{length.name}]", _layout.decimals(values / length.size))
        for name, values in zip(names, diameters.T, strict=True)
    ]
    columns.append(("GSD", "[-]", _layout.fixed(states.geometric_standard_deviation(0), 3)))
    return columns


def _size_note(structure: Structure | None) -> str:
    kind = "volume-equivalent" if structure is None else "outer"
    return (
        f"d10, d50, d90: {kind} diameter, by volume. D[p,q]: volume-equivalent. GSD: of diameter, by number."
    )


def _leading(parts: Contributions, row: int) -> str:
    """The part with the largest volume flux at an output, and its share."""
    if not len(parts):
        return "-"
    shares = {name: float(part.volume_share[row]) for name, part in parts.items()}
    first = max(shares, key=lambda name: shares[name])
    return f"{first} {100.0 * shares[first]:.0f} %" if shares[first] > 0.0 else "-"
