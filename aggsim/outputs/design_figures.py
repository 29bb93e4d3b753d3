"""Figures to choose by: steady sizes over a parameter, and settling over the overflow rate of a basin."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim.outputs import _axes, _units
from aggsim.outputs._units import Structure
from aggsim.result import SteadyCurve

_BAND = (0.1, 0.5, 0.9)
_HOUR, _DAY = 3600.0, 86400.0


def steady_size(
    curve: SteadyCurve,
    parameter: str = "shear rate [1/s]",
    *,
    structure: Structure | None = None,
    exponent: bool = False,
    label: str = "",
    unit: float | None = None,
    ax: Any = None,
) -> Any:
    """Draw the steady d50 by volume, in a band from d10 to d90, against the parameter on logarithmic axes.

    Parameters
    ----------
    curve : SteadyCurve
    parameter : str
        What the parameter is called on the axis, with its unit.
    structure, unit, ax
        As in every figure; see help(aggsim.figures).
    exponent : bool
        True writes the local slope d ln d50 / d ln(parameter) at the first, the middle and the last value.
    label : str
        Names the curve in the legend where several are drawn on one axis.

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    InputError
        If a value of the parameter is not positive, or the exponent is asked for with fewer than three values.

    Notes
    -----
    States that are not stable have open markers.
    """
    x = _checks.array("curve.values", curve.values, above=0.0, hint="a logarithmic axis has no zero")
    if exponent and x.size < 3:
        _checks.refuse("exponent", f"True with {x.size} values", "a slope from at least 3 values")
    order = np.argsort(x)
    d10, d50, d90 = (curve.quantile_diameter(p, 3, structure)[order] for p in _BAND)
    ax, own = _axes.axis(ax)
    colour = _axes.COLOURS[len(ax.collections) % len(_axes.COLOURS)]
    low, high = _axes.widen(ax.xaxis, float(x.min()) / 1.05, float(x.max()) * 1.05)
    kind = f"{_units.kind_of_diameter(structure)}, by volume"
    scale = _axes.size_axis(ax.yaxis, *_axes.around(np.array([d10, d90])), unit, kind)
    x = x[order]
    band, middle = _axes.named(label, ["$d_{10}$ to $d_{90}$", "$d_{50}$"])
    ax.fill_between(x, d10 / scale.size, d90 / scale.size, color=colour, alpha=0.18, linewidth=0, label=band)
    ax.plot(x, d50 / scale.size, color=colour, linewidth=1.8, label=middle)
    stable = np.array([state.stable for state in curve.states])[order]
    for here, face, text in ((stable, colour, None), (~stable, "white", "not stable")):
        if here.any():
            look = {"markersize": 4, "markerfacecolor": face, "color": colour, "label": text}
            ax.plot(x[here], d50[here] / scale.size, "o", **look)
    if exponent:
        slopes = curve.exponent(0.5, 3, structure)[order]
        for k in (0, x.size // 2, x.size - 1):
            _write_slope(
                ax, float(x[k]), float(d50[k]) / scale.size, float(slopes[k]), k == 0, k == x.size - 1
            )
    ax.set_xscale("log")
    ax.set_xlim(low, high)
    _axes.log_size(ax.xaxis, low, high)
    ax.set_xlabel(parameter)
    _axes.dress(ax)
    _axes.legend(ax, own)
    return ax


def settled_share(
    overflow_rates: Any,
    shares: Any,
    labels: Sequence[str] = (),
    *,
    per_day: bool = False,
    ax: Any = None,
) -> Any:
    """Draw the share of the solids that settles against the overflow rate of a basin.

    Parameters
    ----------
    overflow_rates : (n,)
        Flow over horizontal area [m/s]; on the axis in mm/s below, and above in m/h.
    shares : (n,) or (n_curves, n)
        Shares [1] that settle, drawn in percent.
    labels : sequence of str
        Names of the curves in the legend.
    per_day : bool
        True: the upper axis is in m3/(m2 d).
    ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    InputError
        If a rate is not positive, a share is not between 0 and 1, or the sizes do not fit.
    """
    rates = _checks.array("overflow_rates", overflow_rates, "m/s", above=0.0, increasing=True)
    rows = [
        _checks.array(f"shares[{k}]", row, least=0.0, most=1.0, size=rates.size, hint="0.9 for 90 %")
        for k, row in enumerate(np.atleast_2d(np.asarray(shares, dtype=np.float64)))
    ]
    names = [labels] if isinstance(labels, str) else list(labels)
    if names and len(names) != len(rows):
        _checks.refuse("labels", f"{len(names)} names", f"one for each of the {len(rows)} curves, or none")
    ax, own = _axes.axis(ax)
    x = 1e3 * rates
    low, high = _axes.widen(ax.xaxis, float(x[0]), float(x[-1]))
    low, high = (low, high) if low < high else (low / 2.0, high * 2.0)
    for k, row in enumerate(rows):
        look = _axes.look(len(ax.lines), rates.size)
        ax.plot(x, 100.0 * row, label=names[k] if names else None, **look)
    ax.set(xscale="log", xlim=(low, high), ylim=(0.0, 102.0))
    _axes.log_size(ax.xaxis, low, high)
    ax.set_xlabel("overflow rate [mm/s]")
    ax.set_ylabel("share of the solids that settles [%]")
    _axes.dress(ax)
    if not ax.child_axes:
        factor, text = (1e-3 * _DAY, "[m³/(m² d)]") if per_day else (1e-3 * _HOUR, "[m/h]")
        upper = ax.secondary_xaxis("top", functions=(lambda v: v * factor, lambda v: v / factor))
        _axes.log_size(upper.xaxis, low * factor, high * factor)
        upper.set_xlabel(f"overflow rate {text}")
    if names:
        _axes.legend(ax, own)
    return ax


def _write_slope(ax: Any, x: float, y: float, slope: float, first: bool, last: bool) -> None:
    """Write a slope where the curve does not pass: above a point and ahead of a falling curve, behind a rising one.

    At the end where there is no room for that it stands below the point, on the other side.
    """
    ahead, turned = slope <= 0.0, first if slope > 0.0 else last
    where = {
        "xytext": (0, -7 if turned else 7),
        "textcoords": "offset points",
        "ha": "left" if ahead != turned else "right",
        "va": "top" if turned else "bottom",
    }
    ax.annotate(f"slope {round(slope, 2) + 0.0:.2f}".replace("-", "−"), (x, y), fontsize="small", **where)
