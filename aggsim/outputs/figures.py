"""Figures of a result: a result and an axis in, the axis out.

Every function draws on `ax`, or on a new figure without it, and returns the axis; nothing is shown or saved,
and no global setting is touched. `unit` is the length of the unit of the size axis in metres (1e-9 for nm,
1e-6 for um, 1e-3, 1), chosen from the data without it. `structure` (Compact or Fractal) puts the outer
diameter of the aggregates on the axis in place of the diameter of the sphere of equal volume; what is counted
stays the same. Several results may be drawn on one axis; `label` then names each in the legend. Where nothing
is there yet, as in a tank that starts from clear liquid, nothing is drawn.

References: [1] ISO 9276-1:1998 (graphical representation, q_r and Q_r); [2] ISO 9276-2:2014 (mean sizes).
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.outputs import _axes, _units
from aggsim.outputs._curves import DensityCurves, draw_classes, measured_classes
from aggsim.outputs._tanks import States
from aggsim.outputs._units import Structure
from aggsim.outputs.barrier_figures import pair_energy as pair_energy
from aggsim.outputs.barrier_figures import shelf_life as shelf_life
from aggsim.outputs.barrier_figures import stability_map as stability_map
from aggsim.outputs.barrier_figures import stability_over_salt as stability_over_salt
from aggsim.outputs.design_figures import settled_share as settled_share
from aggsim.outputs.design_figures import steady_size as steady_size
from aggsim.outputs.kernel_maps import dominant_mechanism_map as dominant_mechanism_map
from aggsim.outputs.kernel_maps import kernel_map as kernel_map
from aggsim.outputs.vessel_figures import account as account
from aggsim.outputs.vessel_figures import along_train as along_train
from aggsim.outputs.vessel_figures import train as train
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
    ax = frame.ax
    frame.curves.draw(ax, frame.scale.size, frame.looks, r)
    if frame.classes is not None:
        draw_classes(ax, frame.scale.size, *frame.classes)
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
    filled = States(result.grid, result.number).filled
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
    everything = np.concatenate([values[filled] for _, values in lines])
    ax, own = _axes.axis(ax)
    scale = _axes.size_axis(ax.yaxis, *_axes.around(everything), unit, _units.kind_of_diameter(structure))
    time = _axes.time_axis(ax, result.times)
    names = _axes.named(label, [name for name, _ in lines])
    for name, (_, values) in zip(names, lines, strict=True):
        look = _axes.look(len(ax.lines), result.times.size)
        ax.plot(result.times / time.size, values / scale.size, label=name, **look)
    _axes.dress(ax)
    _axes.legend(ax, own)
    return ax


def number(result: Result, *, label: str = "", ax: Any = None) -> Any:
    """Draw the total number of particles per volume of suspension [1/m3] against time."""
    total = result.total_number()
    total = np.where(total > 0.0, total, np.nan)  # a logarithmic axis has no zero
    there = total[States(result.grid, result.number).filled]
    ax, own = _axes.axis(ax)
    low, high = _axes.widen(ax.yaxis, float(there.min()), float(there.max()))
    time = _axes.time_axis(ax, result.times)
    look = _axes.look(len(ax.lines), result.times.size)
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
        ax.plot(t, events, label=name, **_axes.look(k, result.times.size))
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
    curves = DensityCurves.of(result.grid, result.number[rows], _units.quantity(r), structure)
    classes = None if measured is None else measured_classes(measured, r)
    low, high = curves.visible()
    if classes is not None:
        low, high = min(low, float(classes[0][0])), max(high, float(classes[0][-1]))
    ax, own = _axes.axis(ax)
    style = "--" if ax.has_data() else "-"
    scale = _axes.size_axis(ax.xaxis, low, high, unit, f"{_units.kind_of_diameter(structure)} $x$")
    names = _axes.named(label, _units.time_labels(result.times[rows]))
    looks = [
        {"label": name, "color": colour, "linestyle": style, "linewidth": 1.8}
        for name, colour in zip(names, _axes.sequence(len(rows)), strict=True)
    ]
    _axes.dress(ax)
    return _SizeFrame(ax, own, scale, rows, curves, classes, looks)


def _rows(result: Result, times: Any) -> list[int]:
    """Outputs to draw; of those spaced as logarithms, ones between which the number changes by like factors."""
    if times is not None:
        return _units.chosen_times(result, times, _CURVES)
    filled = States(result.grid, result.number).filled
    chosen = _units.evenly(len(filled), _CURVES)
    if len(filled) > _CURVES and _units.log_like(result.times):
        change = np.append(0.0, np.abs(np.diff(np.log(result.total_number()[filled]))).cumsum())
        if change[-1] > 0.0:
            wanted = np.linspace(0.0, change[-1], _CURVES)
            nearest = np.abs(change[:, None] - wanted).argmin(axis=0).tolist()
            chosen = sorted({*nearest[:-1], len(filled) - 1})
    return [filled[k] for k in chosen]


def _number_ticks(axis_part: Any, ratio: float) -> None:
    from matplotlib.ticker import LogLocator, MaxNLocator, NullLocator, ScalarFormatter

    axis_part.set_major_locator(MaxNLocator(5) if ratio < 4.0 else LogLocator(subs=(1, 2, 5)))
    axis_part.set_minor_locator(NullLocator())
    formatter = ScalarFormatter(useMathText=True)
    formatter.set_powerlimits((0, 0))
    axis_part.set_major_formatter(formatter)
