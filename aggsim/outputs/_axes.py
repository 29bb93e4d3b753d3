"""The house look: colours, size and time axes, legends.

Axes are annotated as Any because the drawing library is imported inside functions only.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.outputs._units import LENGTHS, TIMES, Unit, length_unit, log_like, time_unit

# Okabe and Ito (2008), Color Universal Design, in an order that keeps neighbours apart; the pale one is last
COLOURS = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#000000", "#F0E442")
FEW = 12  # output times up to which curves over time show markers
LINES = ("-", "--", "-.", (0, (1, 1.2)), (0, (6, 1.5, 1, 1.5, 1, 1.5)))


def axis(ax: Any, *, size: tuple[float, float] = (6.4, 4.0)) -> tuple[Any, bool]:
    """The axis to draw on, and whether its figure was made here."""
    if ax is not None:
        return ax, False
    import matplotlib.pyplot as plt

    return plt.subplots(figsize=size, layout="constrained")[1], True


def dress(ax: Any) -> None:
    """Light grid behind the data and no frame on the upper and right side."""
    ax.grid(True, which="major", color="0.9", linewidth=0.8)
    ax.set_axisbelow(True)
    ax.spines[["top", "right"]].set_visible(False)


def sequence(count: int) -> list[Any]:
    """Colours from dark to bright for curves in order of time, without the palest end."""
    import matplotlib as mpl

    return list(mpl.colormaps["viridis"](np.linspace(0.0, 0.86, count) if count > 1 else [0.35]))


def look(k: int, points: int) -> dict[str, Any]:
    """Colour and line of curve k; markers where the points are so few that a line alone would hide them."""
    out: dict[str, Any] = {
        "color": COLOURS[k % len(COLOURS)],
        "linestyle": LINES[k % len(LINES)],
        "linewidth": 1.8,
    }
    if points <= FEW:
        out |= {"marker": "o", "markersize": 4}
    return out


def named(label: str, texts: list[str]) -> list[str]:
    """Names of curves in the legend, with the name of their result before them where it has one."""
    return [f"{label}, {text}" for text in texts] if label else texts


def legend(ax: Any, own: bool, title: str = "") -> None:
    """Legend beside the axis where the figure is ours, else where it hides least of the data.

    What the title tells holds for one result, so a legend of several has none.
    """
    look: dict[str, Any] = {"frameon": False, "fontsize": "small", "title_fontsize": "small"}
    if own:
        look |= {"title": title or None, "alignment": "left"}
        ax.legend(loc="center left", bbox_to_anchor=(1.01, 0.5), borderaxespad=0.0, **look)
    else:
        ax.legend(loc="best", **look)


def legend_above(ax: Any, handles: list[Any] | None = None, columns: int = 3) -> None:
    """Legend above an axis that is filled with data to its frame."""
    look: dict[str, Any] = {"frameon": False, "fontsize": "small", "borderaxespad": 0.2}
    if handles is not None:
        look["handles"] = handles
    ax.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=columns, **look)


def log_size(axis_part: Any, low: float, high: float) -> None:
    """Ticks of a logarithmic size axis (`ax.xaxis` or `ax.yaxis`) from `low` to `high`, as plain numbers."""
    from matplotlib.ticker import FuncFormatter, LogLocator, MaxNLocator, NullFormatter, NullLocator

    decades = math.log10(high / low)
    major: Any
    minor: Any = LogLocator(subs=tuple(range(2, 10)), numticks=100)
    if decades > 3.0:
        major = LogLocator(numticks=100)
    elif decades > 1.2:
        major = LogLocator(subs=(1, 2, 5), numticks=100)
    elif decades > 0.6:
        major = LogLocator(subs=(1, 1.5, 2, 3, 4, 5, 7), numticks=100)
    else:
        major = MaxNLocator(6, steps=[1, 2, 2.5, 5, 10])
        minor = NullLocator()
    axis_part.set_major_locator(major)
    axis_part.set_minor_locator(minor)
    axis_part.set_major_formatter(FuncFormatter(lambda value, _: f"{value:.6g}"))
    axis_part.set_minor_formatter(NullFormatter())


def around(lengths: FloatArray) -> tuple[float, float]:
    """Limits of a size axis with a little room around these lengths [m]."""
    return float(lengths.min()) / 1.1, float(lengths.max()) * 1.1


def size_unit(axis_part: Any, lengths: FloatArray, unit: float | None) -> Unit:
    """Unit of a size axis: that of what was drawn on it before, else the one asked for, else a fitting one."""
    drawn = _drawn_unit(axis_part, LENGTHS)
    if drawn is None:
        return length_unit(lengths, unit)
    if unit is not None and length_unit(lengths, unit) != drawn:
        _checks.refuse("unit", f"{unit:g} m", f"the unit of what is on the axis already, {drawn.size:g} m")
    return drawn


def size_axis(part: Any, low: float, high: float, unit: float | None, name: str) -> Unit:
    """Make `ax.xaxis` or `ax.yaxis` a size axis that takes in `low` to `high` [m], and return its unit.

    Everything that is on the axis must have been drawn by these figures; what is drawn next fits by itself.
    """
    scale = size_unit(part, np.array([low, high]), unit)
    low, high = widen(part, low / scale.size, high / scale.size)
    part.axes.set(**{f"{part.axis_name}scale": "log", f"{part.axis_name}lim": (low, high)})
    log_size(part, low, high)
    part.set_label_text(f"{name} [{scale.glyph}]")
    return scale


def widen(axis_part: Any, low: float, high: float) -> tuple[float, float]:
    """Limits of a size axis that take in `low` to `high` and what was drawn before."""
    if axis_part.axes.has_data():
        before = axis_part.get_view_interval()
        low, high = min(low, float(before[0])), max(high, float(before[1]))
    return low, high


def time_axis(ax: Any, times: FloatArray) -> Unit:
    """Set up the time axis for these output times [s] and return its unit.

    Outputs that are spaced as logarithms get a logarithmic axis; a start at t = 0 is kept on it by a linear
    stretch up to the first output after it.
    """
    drawn = _drawn_unit(ax.xaxis, TIMES) if ax.has_data() else None
    if drawn is not None:
        left, right = ax.get_xlim()
        ax.set_xlim(min(left, float(times[0]) / drawn.size), max(right, float(times[-1]) / drawn.size))
        return drawn
    positive = times[times > 0.0]
    if not log_like(times):
        unit = time_unit(float(times[-1]))
        first, last = float(times[0]) / unit.size, float(times[-1]) / unit.size
        if last == first:
            first, last = 0.0, 2.0 * last or 1.0
        margin = 0.02 * (last - first) if times.size <= FEW else 0.0
        ax.set_xlim(first - margin, last + margin)
    else:
        unit = time_unit(float(np.median(positive)))
        first, last = float(positive[0]) / unit.size, float(times[-1]) / unit.size
        if times[0] == 0.0:
            ax.set_xscale("symlog", linthresh=first, linscale=0.5)
            ax.set_xlim(0.0, last)
            _thin_decades(ax, first, last)
        else:
            ax.set_xscale("log")
            ax.set_xlim(first, last)
    ax.set_xlabel(f"time [{unit.glyph}]")
    return unit


def _drawn_unit(axis_part: Any, units: tuple[Unit, ...]) -> Unit | None:
    """The unit in the label of an axis on which one of these figures was drawn before."""
    label = axis_part.get_label_text()
    return next((unit for unit in units if label.endswith(f"[{unit.glyph}]")), None)


def _thin_decades(ax: Any, first: float, last: float) -> None:
    """Zero and whole decades on the axis that is linear up to `first`."""
    from matplotlib.ticker import FixedLocator, NullFormatter

    lowest, highest = math.ceil(math.log10(first) - 1e-9), math.floor(math.log10(last) + 1e-9)
    step = max(1, (highest - lowest) // 6)
    decades = [10.0**k for k in range(lowest, highest + 1, step)]
    ax.xaxis.set_major_locator(FixedLocator([0.0, *decades]))
    between = [m * 10.0**k for k in range(lowest - 1, highest + 1) for m in range(2, 10)]
    ax.xaxis.set_minor_locator(FixedLocator([t for t in between if first <= t <= last]))
    ax.xaxis.set_minor_formatter(NullFormatter())
