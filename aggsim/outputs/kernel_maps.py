"""Maps of a collision kernel over the diameters of the two particles.

A kernel is anything with `names`, `kernel[name]` and `kernel(v, w, time)` [m3/s]. Diameters are those of the
spheres of equal volume. `ax` and `unit` as in the figures of a result.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import KernelError
from aggsim.outputs import _axes, _units
from aggsim.sizes import means

_PAIRS = 240  # diameters along each side
_LEVELS = 40  # filled contours at most
_MARGIN = 2.0  # decades; beyond this a lead is a lead


def kernel_map(
    kernel: Any,
    *,
    smallest: float,
    largest: float,
    time: float = 0.0,
    unit: float | None = None,
    ax: Any = None,
) -> Any:
    """Draw the collision rate K(v, w) [m3/s] over two particle diameters, with a logarithmic colour scale.

    White lines mark the rates that the colour bar names.

    Parameters
    ----------
    kernel : Kernel
    smallest, largest : float
        Range of diameters [m].
    time : float
        Time [s] at which a kernel that depends on time is taken.
    unit, ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    InputError
        If the range is empty.
    KernelError
        If no pair collides, or a rate is no collision rate.

    Notes
    -----
    Rates below the lowest level (equal sizes that settle never meet) get the lowest colour; the arrow at the
    colour bar says so.
    """
    d, v = _diameters(smallest, largest)
    at = _checks.scalar("time", time, "s")
    rate = np.asarray(kernel(v[:, None], v[None, :], at), dtype=np.float64)
    decades = _log10(rate)
    levels = _levels(decades)
    ax, scale = _square(ax, d, unit)
    x = d / scale.size
    extend = "min" if (decades < levels[0]).any() else "neither"
    decades = np.maximum(decades, levels[0] - 1.0)
    filled = ax.contourf(x, x, decades, levels, cmap="viridis", extend=extend)
    bar = ax.figure.colorbar(filled, ax=ax, shrink=0.86)
    ticks = _ticks(levels)
    bar.set_ticks(ticks, labels=[_power(level) for level in ticks])
    bar.minorticks_off()
    bar.set_label("collision rate $K$ [m³/s]")
    lines = [level for level in ticks if decades.min() < level < decades.max()]
    if lines:
        ax.contour(x, x, decades, lines, colors="white", linewidths=0.5, linestyles="solid")
    return ax


def dominant_mechanism_map(
    kernel: Any,
    *,
    smallest: float,
    largest: float,
    time: float = 0.0,
    unit: float | None = None,
    ax: Any = None,
) -> Any:
    """Draw which named part of a kernel gives the largest collision rate for each pair of diameters.

    Thin lines mark where the leading part holds 90 % of the rate, and 50 % where three or more parts compete.

    Arguments, return value and errors as in `kernel_map`.
    """
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    d, v = _diameters(smallest, largest)
    at = _checks.scalar("time", time, "s")
    names = list(kernel.names)
    rates = np.array([kernel[name](v[:, None], v[None, :], at) for name in names], dtype=np.float64)
    total = rates.sum(axis=0)
    if not (total > 0.0).any():
        _refuse_idle(total)
    leading = np.where(total > 0.0, rates.argmax(axis=0), -1)
    ax, scale = _square(ax, d, unit)
    x = d / scale.size
    handles: list[Any] = []
    for k, name in enumerate(names):
        if not (leading == k).any():
            handles.append(Patch(facecolor="none", edgecolor="0.6", label=f"{name} (leads nowhere)"))
            continue
        colour = _axes.COLOURS[k % len(_axes.COLOURS)]
        ax.contourf(x, x, _lead(rates, k), [0.0, np.inf], colors=[colour], alpha=0.75)
        handles.append(Patch(color=colour, alpha=0.75, label=name))
    share = np.divide(rates.max(axis=0), total, out=np.ones_like(total), where=total > 0.0)
    styles: tuple[tuple[float, Any], ...] = ((0.9, "solid"), (0.5, "dotted"))
    for level, style in styles:
        # near halves lie along the border between two parts, which the colours show already
        if share.min() < 0.9 * level and share.max() > level:
            ax.contour(x, x, share, [level], colors="black", linewidths=0.9, linestyles=style)
            line = Line2D([], [], color="black", linewidth=0.9, linestyle=style)
            line.set_label(f"leading part holds {100.0 * level:.0f} %")
            handles.append(line)
    _axes.legend_above(ax, handles, columns=2)
    return ax


def _diameters(smallest: float, largest: float) -> tuple[FloatArray, FloatArray]:
    low, high = _checks.diameter("smallest", smallest), _checks.diameter("largest", largest)
    if not high > low:
        _checks.refuse(
            "largest", f"{high:g} m", f"above smallest={low:g} m", "the range of diameters in metres"
        )
    d = np.geomspace(low, high, _PAIRS)
    return d, means.volume_of(d)


def _square(ax: Any, d: FloatArray, unit: float | None) -> tuple[Any, _units.Unit]:
    """A square axis with both diameters as logarithms."""
    ax, _ = _axes.axis(ax, size=(5.6, 5.0))
    scale = _axes.size_unit(ax.xaxis, d[[0, -1]], unit)
    low, high = d[0] / scale.size, d[-1] / scale.size
    ax.set(xscale="log", yscale="log", xlim=(low, high), ylim=(low, high))
    ax.set_aspect("equal")
    for part, which in ((ax.xaxis, "first"), (ax.yaxis, "second")):
        _axes.log_size(part, low, high)
        part.set_label_text(f"diameter of the {which} particle [{scale.glyph}]")
    return ax, scale


def _log10(rate: FloatArray) -> FloatArray:
    if not (rate > 0.0).any():
        _refuse_idle(rate)
    return np.log10(rate, out=np.full(rate.shape, -400.0), where=rate > 0.0)


def _refuse_idle(rate: FloatArray) -> None:
    _checks.refuse(
        "kernel",
        f"rates that are all zero ({rate.shape[0]} diameters)",
        "a kernel that lets some pair in this range collide",
        "another range of diameters, or another time",
        error=KernelError,
    )


def _levels(decades: FloatArray) -> FloatArray:
    """Contour levels in log10 K, in round steps.

    A few rates that vanish (1 % of the pairs, more than a decade below the others) do not stretch the scale.
    """
    present = decades[decades > -400.0]
    low, high = max(float(present.min()), float(np.quantile(present, 0.01)) - 1.0), float(present.max())
    span = high - low
    if span < 0.02:  # one rate everywhere
        return np.array([high - 0.5, low + 0.5])
    fitting = [step for step in (0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1.0) if span / step <= _LEVELS]
    step = fitting[0] if fitting else math.ceil(span / _LEVELS)
    first, last = math.floor(low / step + 1e-9), math.ceil(high / step - 1e-9)
    return np.asarray(step * np.arange(first, last + 1, dtype=np.float64))


def _ticks(levels: FloatArray) -> FloatArray:
    """Levels that get a label: whole decades, or 1, 2, 5 of each where there are few, or the one rate."""
    if levels.size == 2:
        return np.array([levels.mean()])
    low, high = levels[0] - 1e-9, levels[-1] + 1e-9
    whole = np.arange(math.ceil(low), math.floor(high) + 1, dtype=np.float64)
    if whole.size >= 4:
        return np.asarray(whole[:: math.ceil(whole.size / 10)])
    fine = (np.arange(math.floor(low), math.ceil(high))[:, None] + np.log10([1.0, 2.0, 5.0])).ravel()
    fine = fine[(fine >= low) & (fine <= high)]
    return fine if fine.size >= 2 else levels[[0, -1]]


def _power(level: float) -> str:
    """10**level, as a figure and a power of ten."""
    exponent = math.floor(level + 1e-9)
    figure = 10.0 ** (level - exponent)
    if abs(figure - 1.0) < 1e-6:
        return f"$10^{{{exponent}}}$"
    return rf"${figure:.3g}\times10^{{{exponent}}}$"


def _lead(rates: FloatArray, k: int) -> FloatArray:
    """Decades by which part k exceeds the largest other part, limited to what a contour needs."""
    mine = rates[k]
    others = np.delete(rates, k, axis=0).max(axis=0, initial=0.0)
    both = (mine > 0.0) & (others > 0.0)
    ratio = np.divide(mine, others, out=np.ones_like(mine), where=both)
    lead = np.where(both, np.clip(np.log10(ratio), -_MARGIN, _MARGIN), -_MARGIN)
    return np.where((mine > 0.0) & (others == 0.0), _MARGIN, lead)
