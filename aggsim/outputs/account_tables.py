"""The account of the particle volume as a text table."""

from __future__ import annotations

from typing import Any

import numpy as np

from aggsim.outputs import _layout, _units
from aggsim.result import Result, SteadyState


def account(result: Result | SteadyState, times: Any = None) -> str:
    """Return a table of where the particle volume came from and went.

    Parameters
    ----------
    result : Result or SteadyState
        The account of all tanks together; of one tank with `result.tanks[k]`.
    times : float or (n,), optional
        Times [s]; the nearest outputs are shown with their own time. About 10 rows over the run without it. A
        steady state has none.

    Returns
    -------
    str
        For a run, one row per output: the volume at the start, what each stream brought (in) and took (out)
        since then, what is present and what is beyond the grid, in percent of all that was there or came in
        until the last output; and the relative closure error. For a steady state, one row per stream: its rate
        [1/s] and its share in what flows in.

    Raises
    ------
    TimesError
        If a time lies outside the run, or is given for a steady state.
    """
    if isinstance(result, SteadyState):
        return _steady(result, times)
    rows = _units.chosen_times(result, times, _layout.ROWS)
    time = _units.table_time_unit(result.times[rows])
    balance = result.balance
    whole = balance.scale or 1.0  # nothing came yet
    initial = np.full(result.times.size, balance.initial)
    parts = [
        ("initial", "[%]", initial),
        *((name, "[% in]", volume) for name, volume in balance.inward.items()),
        *((name, "[% out]", volume) for name, volume in balance.outward.items()),
        ("present", "[%]", balance.present),
        ("beyond grid", "[%]", balance.beyond_grid),
    ]
    columns: list[_layout.Column] = [
        ("time", f"[{time.name}]", _layout.times(result.times[rows] / time.size)),
        *((_layout.one_line(n), unit, _layout.percent(v[rows] / whole)) for n, unit, v in parts),
        ("closure error", "[-]", [f"{error:.1e}" for error in balance.closure[rows]]),
    ]
    notes = [
        f"100 % is a volume fraction of {balance.scale:.6g}: all that was there or came in until the last output.",
        "initial + in = out + present + beyond grid, up to the closure error, a share of the 100 %.",
    ]
    return _layout.page(columns, notes, _layout.closing(result))


def _steady(state: SteadyState, times: Any) -> str:
    if times is not None:
        _units.refuse_time("times", times)
    balance = state.balance
    fed = sum(balance.inward.values())
    rows = [
        *((_layout.one_line(name), "in", rate) for name, rate in balance.inward.items()),
        *((_layout.one_line(name), "out", rate) for name, rate in balance.outward.items()),
        ("beyond grid", "out", balance.beyond_grid),
    ]
    shares = [_layout.percent(np.array([rate / fed]))[0] if fed > 0.0 else "-" for _, _, rate in rows]
    columns: list[_layout.Column] = [
        ("stream", "", [name for name, _, _ in rows]),
        ("", "", [direction for _, direction, _ in rows]),
        ("rate", "[1/s]", [f"{rate:.4e}" for _, _, rate in rows]),
        ("share", "[% of in]", shares),
    ]
    notes = [
        "rate: particle volume per volume of the vessel and time.",
        f"Present: a volume fraction of {balance.present:.6g}.",
    ]
    return _layout.page(columns, notes, _layout.steady(state))
