"""Figures of a result: a result and an axis in, the axis out.

Every function draws on `ax`, or on a new figure without it, and returns the axis; nothing is shown or saved,
and no global setting is touched. `unit` is the length of the unit of the size axis in metres (1e-9 for nm,
1e-6 for um, 1e-3, 1), chosen from the data without it. `structure` (Compact or Fractal) puts the outer
diameter of the aggregates on the axis in place of the diameter of the sphere of equal volume; what is counted
stays the same. Several results may be drawn on one axis; `label` then names each in the legend.

References: [1] ISO 9276-1:1998 (graphical representation, q_r and Q_r); [2] ISO 9276-2:2014 (mean sizes).
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.outputs import _axes, _units
from aggsim.outputs._curves import DensityCurves, measured_classes
from aggsim.outputs._units import Structure
from aggsim.outputs.barrier_figures import pair_energy as pair_energy
from aggsim.outputs.barrier_figures import shelf_life as shelf_life
from aggsim.outputs.barrier_figures import stability_map as stability_map
from aggsim.outputs.barrier_figures import stability_over_salt as stability_over_salt
from aggsim.outputs.kernel_maps import dominant_mechanism_map as dominant_mechanism_map
from aggsim.outputs.kernel_maps import kernel_map as kernel_map
from aggsim.result import Result
from aggsim.sizes import means as size_means

_CURVES = 5  # curves drawn without `times`
_POINTS = 400  # along a cumulative curve


def distribution(
    result: Result,
    times: Any = None,
    *,
    r: float = 3,
    structure: Structure | None = None,
    measured: Any = None,
    unit: float | None = None,
    label: str = "",
    ax: Any = None,
) -> Any:
    """Draw the density q_r* = dQ_r / d ln x at some output times.

    Parameters
    ----------
    result : Result
    times : float or (n,), optional
        Times [s]; the nearest outputs are drawn and labelled with their own time. Without it 5 or so: evenly
        spaced, or between like steps of growth where the outputs are spaced as logarithms.
    r : float
        Type of quantity [1]: 0 number, 2 surface, 3 volume.
    structure, unit, label, ax
        As in every figure; see help(aggsim.figures).
    measured : Measured or (limits, shares), optional
        A measured distribution of quantity r, drawn as stairs: class limits (n + 1,) [m] on the scale of the
        axis and shares (n,) [-]. A `Measured` holds both.

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    TimesError
        If a time lies outside the run.
    DistributionError
        If nothing is there at a time, or `measured` is no distribution of quantity r.

    Notes
    -----
    The curve is a smooth one through the densities at the pivots; it begins at the first pivot, so the lower
    half of the first section is not shown. A time at which one size holds at least 99 % of the quantity is a
    vertical line, since its density has no height.
    """
    frame = _size_frame(result, times, r, structure, measured, unit, label, ax)
    ax, scale = frame.ax, frame.scale
    top = max(ax.get_ylim()[1] / 1.06, 0.0) if ax.has_data() else 0.0
    for row, look in enumerate(frame.looks):
        lone = frame.curves.lone(row)
        if lone is not None:
            ax.axvline(lone / scale.size, **look | {"label": f"{look['label']} (one size)"})
            continue
        x, q = frame.curves.line(row)
        ax.plot(x / scale.size, q, **look)
        top = max(top, float(q.max()))
    if frame.classes is not None:
        edges, shares = frame.classes
        q = shares / np.diff(np.log(edges))
        ax.stairs(q, edges / scale.size, color="black", linewidth=1.2, label="measured")
        top = max(top, float(q.max()))
    ax.set_ylim(0.0, 1.06 * top if top > 0.0 else 1.0)
    ax.set_ylabel(rf"density $q_{{{r:g}}}^* = \mathrm{{d}}Q_{{{r:g}}}\,/\,\mathrm{{d}}\,\ln x$  [-]")
    _axes.legend(ax, frame.own)
    return ax


def cumulative(
    result: Result,
    times: Any = None,
    *,
    r: float = 3,
    structure: Structure | None = None,
    measured: Any = None,
    unit: float | None = None,
    label: str = "",
    ax: Any = None,
) -> Any:
    """Draw the share Q_r of the quantity in particles up to a size, in percent, at some output times.

    Arguments, return value and errors as in `distribution`; `measured` is drawn as points at the class limits.
    """
    frame = _size_frame(result, times, r, structure, measured, unit, label, ax)
    ax, scale, grid = frame.ax, frame.scale, result.grid
    whole = np.geomspace(grid.diameter[0], grid.diameter[-1], _POINTS)
    sphere = np.unique(np.concatenate([whole, np.geomspace(*frame.curves.visible_sphere(), _POINTS)]))
    volume = size_means.volume_of(sphere)
    shown = _units.shown_diameter(volume, sphere, structure) / scale.size
    shares = 100.0 * size_means.cumulative(grid.volume, result.number[frame.rows], volume, r)
    # nothing lies below the first pivot, everything below the last
    low, high = ax.get_xlim()
    x = np.concatenate([[min(low, shown[0]), shown[0]], shown, [max(high, shown[-1])]])
    for share, look in zip(shares, frame.looks, strict=True):
        ax.plot(x, np.concatenate([[0.0, 0.0], share, [100.0]]), **look)
    if frame.classes is not None:
        reached = 100.0 * np.append(0.0, np.cumsum(frame.classes[1]))
        points = {"marker": "o", "markersize": 4, "markerfacecolor": "none", "color": "black"}
        ax.plot(frame.classes[0] / scale.size, reached, linestyle="none", label="measured", **points)
    ax.set_ylim(0.0, 100.0)
    ax.set_ylabel(rf"share below size  $Q_{{{r:g}}}$  [%]")
    _axes.legend(ax, frame.own)
    return ax


def sizes(
    result: Result,
    *,
    shares: Sequence[float] = (0.1, 0.5, 0.9),
    means: Sequence[tuple[float, float]] | None = None,
    r: float = 3,
    structure: Structure | None = None,
    unit: float | None = None,
    label: str = "",
    ax: Any = None,
) -> Any:
    """Draw quantile and mean diameters against time.

    Parameters
    ----------
    result : Result
    shares : sequence of float
        Shares [1] whose quantile diameters are drawn, for example 0.1, 0.5, 0.9 for d10, d50, d90.
    means : sequence of (p, q), optional
        Mean diameters D[p, q]; ((4, 3),) without it. They are volume-equivalent, so with `structure` there
        are none unless asked for, and their labels then say so.
    r : float
        Type of quantity of the quantiles [1]: 0 number, 2 surface, 3 volume.
    structure, unit, label, ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes
    """
    if means is None:
        means = ((4, 3),) if structure is None else ()
    lines: list[tuple[str, FloatArray]] = []
    if len(shares):
        quantiles = result.quantile_diameter(np.asarray(shares, dtype=np.float64), r, structure)
        named = "" if r == 3 else rf",\,{r:g}"
        for k, share in reversed(list(enumerate(shares))):
            lines.append((rf"$d_{{{100.0 * share:g}{named}}}$", quantiles[:, k]))
    note = "" if structure is None else " (volume-equivalent)"
    lines += [(f"D[{p:g},{q:g}]{note}", result.mean_diameter(p, q)) for p, q in means]
    if not lines:
        _checks.refuse("shares", "no share, and no mean", "at least one of both", "shares=(0.5,)")
    everything = np.concatenate([values for _, values in lines])
    ax, own = _axes.axis(ax)
    scale = _axes.size_unit(ax.yaxis, everything, unit)
    low, high = everything.min() / scale.size / 1.1, everything.max() / scale.size * 1.1
    low, high = _axes.widen(ax.yaxis, float(low), float(high))
    time = _axes.time_axis(ax, result.times)
    names = _named(label, [name for name, _ in lines])
    for name, (_, values) in zip(names, lines, strict=True):
        look = _look(len(ax.lines), result.times)
        ax.plot(result.times / time.size, values / scale.size, label=name, **look)
    ax.set_yscale("log")
    ax.set_ylim(low, high)
    _axes.log_size(ax.yaxis, low, high)
    ax.set_ylabel(f"{_kind_of_diameter(structure)} [{scale.glyph}]")
    _axes.dress(ax)
    _axes.legend(ax, own)
    return ax


def number(result: Result, *, label: str = "", ax: Any = None) -> Any:
    """Draw the total number of particles per volume of suspension [1/m3] against time."""
    total = result.total_number()
    ax, own = _axes.axis(ax)
    low, high = _axes.widen(ax.yaxis, float(total.min()), float(total.max()))
    time = _axes.time_axis(ax, result.times)
    look = _look(len(ax.lines), result.times)
    ax.plot(result.times / time.size, total, label=label or None, **look)
    ax.set_yscale("log")
    margin = 1.02 * (high / low) ** 0.08
    ax.set_ylim(low / margin, high * margin)
    if high < 20.0 * low:  # decades alone would leave the axis without a figure to read
        _number_ticks(ax.yaxis, high / low)
    ax.set_ylabel("number concentration [1/m³]")
    _axes.dress(ax)
    if label:
        _axes.legend(ax, own)
    return ax


def history(result: Result, *, structure: Structure | None = None, unit: float | None = None) -> Any:
    """Draw `sizes` above `number` on a new figure with one time axis; returns both axes, (2,)."""
    import matplotlib.pyplot as plt

    _, axes = plt.subplots(2, 1, figsize=(6.4, 6.0), sharex=True, layout="constrained")
    sizes(result, structure=structure, unit=unit, ax=axes[0])
    _axes.legend(axes[0], own=True)
    number(result, ax=axes[1])
    axes[0].set_xlabel("")
    return axes


def contributions(result: Result, *, share: bool = True, ax: Any = None) -> Any:
    """Draw what each named part of the kernel did over time.

    Parameters
    ----------
    result : Result
    share : bool
        True: share of each part in the volume flux, 1/2 sum_ij K_ij n_i n_j (x_i + x_j), stacked to 100 %.
        False: collision events of each part [1/(m3 s)], 1/2 sum_ij K_ij n_i n_j.
    ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes
    """
    parts = result.contributions
    if not len(parts) or (share and result.times.size < 2):
        got = f"a result with {len(parts)} kernel parts and {result.times.size} output times"
        _checks.refuse("result", got, "at least one part, and two times for shares over time")
    ax, own = _axes.axis(ax)
    time = _axes.time_axis(ax, result.times)
    t = result.times / time.size
    if share:
        layers = [100.0 * part.volume_share for part in parts.values()]
        colours = [_axes.COLOURS[k % len(_axes.COLOURS)] for k in range(len(layers))]
        ax.stackplot(t, *layers, labels=list(parts), colors=colours, alpha=0.85, edgecolor="white")
        ax.set_ylim(0.0, 100.0)
        ax.set_ylabel("share of the volume flux [%]")
        _axes.dress(ax)
        _axes.legend_above(ax)
        return ax
    for k, (name, part) in enumerate(parts.items()):
        events = np.where(part.events > 0.0, part.events, np.nan)  # a logarithmic axis has no zero
        ax.plot(t, events, label=name, **_look(k, result.times))
    if any((part.events > 0.0).any() for part in parts.values()):
        ax.set_yscale("log")
    ax.set_ylabel("collision events [1/(m³ s)]")
    _axes.dress(ax)
    _axes.legend(ax, own)
    return ax


class _SizeFrame(NamedTuple):
    """A size axis made ready, and what is to be drawn on it."""

    ax: Any
    own: bool
    scale: _units.Unit
    rows: list[int]
    curves: DensityCurves
    classes: tuple[FloatArray, FloatArray] | None
    looks: list[dict[str, Any]]


def _size_frame(
    result: Result,
    times: Any,
    r: float,
    structure: Structure | None,
    measured: Any,
    unit: float | None,
    label: str,
    ax: Any,
) -> _SizeFrame:
    rows = _rows(result, times)
    curves = DensityCurves.of(result, rows, _units.quantity(r), structure)
    classes = None if measured is None else measured_classes(measured, r)
    low, high = curves.visible()
    if classes is not None:
        low, high = min(low, float(classes[0][0])), max(high, float(classes[0][-1]))
    ax, own = _axes.axis(ax)
    scale = _axes.size_unit(ax.xaxis, np.array([low, high]), unit)
    low, high = _axes.widen(ax.xaxis, low / scale.size, high / scale.size)
    names = _named(label, _units.time_labels(result.times[rows]))
    style = "--" if ax.has_data() else "-"
    looks = [
        {"label": name, "color": colour, "linestyle": style, "linewidth": 1.8}
        for name, colour in zip(names, _axes.sequence(len(rows)), strict=True)
    ]
    ax.set_xscale("log")
    ax.set_xlim(low, high)
    _axes.log_size(ax.xaxis, low, high)
    ax.set_xlabel(f"{_kind_of_diameter(structure)} $x$ [{scale.glyph}]")
    _axes.dress(ax)
    return _SizeFrame(ax, own, scale, rows, curves, classes, looks)


def _rows(result: Result, times: Any) -> list[int]:
    """Outputs to draw; of those spaced as logarithms, ones between which the number changes by like factors."""
    count = result.times.size
    if times is not None or count <= _CURVES or not _units.log_like(result.times):
        return _units.chosen_times(result, times, _CURVES)
    change = np.append(0.0, np.abs(np.diff(np.log(result.total_number()))).cumsum())
    if change[-1] == 0.0:
        return _units.evenly(count, _CURVES)
    wanted = np.linspace(0.0, change[-1], _CURVES)
    nearest = np.abs(change[:, None] - wanted).argmin(axis=0).tolist()
    return sorted({*nearest[:-1], count - 1})


def _named(label: str, texts: list[str]) -> list[str]:
    return [f"{label}, {text}" for text in texts] if label else texts


def _look(k: int, times: FloatArray) -> dict[str, Any]:
    """Colour and line of curve k; markers where the outputs are so few that a line alone would hide them."""
    look: dict[str, Any] = {
        "color": _axes.COLOURS[k % len(_axes.COLOURS)],
        "linestyle": _axes.LINES[k % len(_axes.LINES)],
        "linewidth": 1.8,
    }
    if times.size <= _axes.FEW:
        look |= {"marker": "o", "markersize": 4}
    return look


def _kind_of_diameter(structure: Structure | None) -> str:
    return "volume-equivalent diameter" if structure is None else "outer diameter"


def _number_ticks(axis_part: Any, ratio: float) -> None:
    from matplotlib.ticker import LogLocator, MaxNLocator, NullLocator, ScalarFormatter

    axis_part.set_major_locator(MaxNLocator(5) if ratio < 4.0 else LogLocator(subs=(1, 2, 5)))
    axis_part.set_minor_locator(NullLocator())
    formatter = ScalarFormatter(useMathText=True)
    formatter.set_powerlimits((0, 0))
    axis_part.set_major_formatter(formatter)
