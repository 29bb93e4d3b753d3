"""Figures of vessels: the sizes in the tanks of a train, and the account of the volume.

Tanks count from 1 in the order of the flow: tank 1 is `result.tanks[0]`.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.outputs import _axes, _units
from aggsim.outputs._curves import DensityCurves
from aggsim.outputs._layout import percent
from aggsim.outputs._tanks import States, tanks_at
from aggsim.outputs._units import Structure
from aggsim.result import Result, SteadyState
from aggsim.sizes import SizeGrid, StartingDistribution, project

_TICKS = 15  # tanks that get a figure on the axis


def train(
    result: Result | SteadyState,
    time: float | None = None,
    *,
    r: float = 3,
    structure: Structure | None = None,
    feed: StartingDistribution | None = None,
    unit: float | None = None,
    label: str = "",
    ax: Any = None,
) -> Any:
    """Draw the density q_r* = dQ_r / d ln x in each tank at one time.

    Parameters
    ----------
    result : Result or SteadyState
        Of a train, or of any vessel as one tank.
    time : float, optional
        Time [s]; the nearest output is drawn, the last one without it. A steady state has none.
    r : float
        Type of quantity [1]: 0 number, 2 surface, 3 volume.
    structure, unit, label, ax
        As in every figure; see help(aggsim.figures).
    feed : StartingDistribution, optional
        What flows in, drawn for comparison.

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    TimesError
        If the time lies outside the run.
    DistributionError
        If no tank holds particles yet.
    GridError
        If the grid of the result does not cover the feed.
    """
    tanks = tanks_at(result, time)
    rows = tanks.states.filled
    number = tanks.states.number[rows]
    if feed is not None:
        number = np.vstack([_feed(feed, result.grid), number])
    curves = DensityCurves.of(result.grid, number, _units.quantity(r), structure)
    ax, own = _axes.axis(ax)
    names = _axes.named(label, [f"tank {row + 1}" for row in rows])
    line = "--" if ax.has_data() else "-"
    looks: list[dict[str, Any]] = [
        {"label": name, "color": colour, "linestyle": line, "linewidth": 1.8}
        for name, colour in zip(names, _axes.sequence(len(rows)), strict=True)
    ]
    if feed is not None:
        looks.insert(0, {"label": "feed", "color": "black", "linestyle": ":", "linewidth": 1.8})
    name = f"{_units.kind_of_diameter(structure)} $x$"
    scale = _axes.size_axis(ax.xaxis, *curves.visible(), unit, name)
    curves.draw(ax, scale.size, looks, r)
    _axes.dress(ax)
    _axes.legend(ax, own, f"at {tanks.when}")
    return ax


def along_train(
    result: Result | SteadyState,
    time: float | None = None,
    *,
    shares: Sequence[float] = (0.1, 0.5, 0.9),
    r: float = 3,
    structure: Structure | None = None,
    feed: StartingDistribution | None = None,
    unit: float | None = None,
    label: str = "",
    ax: Any = None,
) -> Any:
    """Draw quantile diameters against the number of the tank at one time.

    Parameters
    ----------
    result, time, r, feed
        As in `train`; the feed stands before tank 1.
    shares : sequence of float
        Shares [1] whose quantile diameters are drawn: 0.1, 0.5, 0.9 for d10, d50, d90.
    structure, unit, label, ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    TimesError, DistributionError, GridError
        As in `train`.
    """
    tanks = tanks_at(result, time)
    number = tanks.states.number
    places = np.arange(1, len(number) + 1)
    filled = np.array(tanks.states.filled)
    if feed is not None:
        number, places = np.vstack([_feed(feed, result.grid), number]), np.append(0, places)
        filled = np.append(0, filled + 1)
    wanted = np.asarray(shares, dtype=np.float64)
    diameters = States(result.grid, number).quantile_diameter(wanted, r, structure)
    ax, own = _axes.axis(ax)
    first, last = _axes.widen(ax.xaxis, places[0] - 0.3, places[-1] + 0.3)
    scale = _axes.size_axis(
        ax.yaxis, *_axes.around(diameters[filled]), unit, _units.kind_of_diameter(structure)
    )
    named = "" if r == 3 else rf",\,{r:g}"
    texts = [rf"$d_{{{100.0 * share:g}{named}}}$" for share in wanted]
    names = _axes.named(label, texts)
    for k in reversed(range(len(names))):
        look = _axes.look(len(ax.lines), _axes.FEW)
        ax.plot(places, diameters[:, k] / scale.size, label=names[k], **look)
    _tank_ticks(ax, first, last)
    _axes.dress(ax)
    _axes.legend(ax, own, f"at {tanks.when}")
    return ax


def account(result: Result, *, ax: Any = None) -> Any:
    """Draw where the particle volume is over time, stacked, in percent of all that was there or came in.

    Parameters
    ----------
    result : Result
        The account of all tanks together; of one tank with `result.tanks[k]`.
    ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    InputError
        If the result has one output time alone.

    Notes
    -----
    The dashed line is what was there at the start and came in until then; where the layers end below or above it,
    the account does not close. The legend tells the last share of each.
    """
    balance = result.balance
    if result.times.size < 2:
        _checks.refuse("result", "a result with 1 output time", "at least 2 for shares over time")
    whole = balance.scale or 1.0  # nothing came yet
    # pairs, since a stream may bear any name
    layers = [("present", balance.present), *balance.outward.items(), ("beyond grid", balance.beyond_grid)]
    shares = [volume / whole for _, volume in layers]
    ax, _ = _axes.axis(ax)
    time = _axes.time_axis(ax, result.times)
    t = result.times / time.size
    last = percent(np.array([share[-1] for share in shares]))
    labels = [f"{name}, {value} % at last" for (name, _), value in zip(layers, last, strict=True)]
    look = {"colors": [_axes.COLOURS[k % len(_axes.COLOURS)] for k in range(len(shares))], "alpha": 0.85}
    ax.stackplot(t, *(100.0 * share for share in shares), labels=labels, edgecolor="white", **look)
    if balance.inward:
        known = 100.0 * (balance.initial + balance.fed) / whole
        text = "at the start, or " + ", ".join(balance.inward)
        ax.plot(t, known, color="black", linestyle="--", linewidth=1.2, label=text)
    ax.set_ylim(0.0, 100.0)
    ax.set_ylabel("share of the particle volume [%]")
    _axes.dress(ax)
    _axes.legend_above(ax, columns=2)
    return ax


def _feed(feed: Any, grid: SizeGrid) -> FloatArray:
    if not isinstance(feed, StartingDistribution):
        hint = "LogNormal(median_diameter=..., gsd=..., volume_fraction=...)"
        _checks.refuse("feed", repr(feed), "a starting distribution", hint)
    return project(feed, grid)


def _tank_ticks(ax: Any, first: float, last: float) -> None:
    """Whole tanks on an axis from `first` to `last`, with the feed at 0."""
    places = np.arange(int(np.ceil(first)), int(np.floor(last)) + 1)
    shown = places[_units.evenly(places.size, _TICKS)]
    ax.set_xticks(shown, ["feed" if place == 0 else f"{place}" for place in shown])
    ax.set_xlim(first, last)
    ax.set_xlabel("tank, in the order of the flow")
