"""Figures of the barrier: pair energy, stability over salt and zeta potential, shelf life.

They take the records of `interaction` and `studies` as plain objects.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from aggsim import _checks
from aggsim.outputs import _axes

_YEAR = 365.25 * 86400.0
_SPANS = (("minute", 60.0), ("hour", 3600.0), ("day", 86400.0), ("year", _YEAR), ("100 years", 100 * _YEAR))


def pair_energy(energy: Any, *, closest: float = 1e-10, farthest: float | None = None, ax: Any = None) -> Any:
    """Draw the energy of a pair [kT] and its parts over the separation of the surfaces [nm].

    Parameters
    ----------
    energy : PairEnergy
        Of `interaction.pair_energy`.
    closest, farthest : float
        Range of separations [m]; without `farthest`, ten Debye lengths, at most 100 nm.
    ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    InputError
        If the range is empty.
    """
    near = _checks.scalar("closest", closest, "m", above=0.0)
    reach = min(10.0 * energy.medium.debye_length, 1e-7)
    far = _checks.scalar("farthest", reach if farthest is None else farthest, "m", above=near)
    ax, own = _axes.axis(ax)
    h = np.geomspace(near, far, 600)
    thermal = energy.medium.thermal_energy
    total = energy(h) / thermal
    for k, (name, part) in enumerate(energy.parts.items()):
        look = _axes.LINES[1 + k % (len(_axes.LINES) - 1)]
        ax.plot(h * 1e9, part(h) / thermal, color=_axes.COLOURS[1 + k], linestyle=look, label=name)
    ax.plot(h * 1e9, total, color=_axes.COLOURS[0], linewidth=2.0, label="sum")
    marks = (
        ("barrier", energy.barrier, energy.barrier_separation, "^"),
        ("secondary minimum", energy.secondary_minimum, energy.secondary_minimum_separation, "v"),
    )
    for name, value, where, marker in marks:
        if where is not None and near <= where <= far:
            label = f"{name}, {value / thermal:.3g} kT at {where * 1e9:.2g} nm"
            ax.plot([where * 1e9], [value / thermal], marker, color="black", markersize=6, label=label)
    # the walls at contact run out of any frame; what decides is around the barrier
    top = max(1.3 * max(energy.barrier / thermal, float(total[-1])), 5.0)
    ax.set_ylim(-1.2 * top, 1.6 * top)
    ax.set_xlim(0.0, far * 1e9)
    ax.axhline(0.0, color="0.5", linewidth=0.8)
    ax.set_xlabel("separation of the surfaces $h$ [nm]")
    ax.set_ylabel("energy / kT [-]")
    _axes.dress(ax)
    _axes.legend(ax, own)
    return ax


def stability_over_salt(scan: Any, *, ax: Any = None) -> Any:
    """Draw the stability ratio over ionic strength on logarithmic axes, by double-layer model.

    The critical coagulation concentration of each model is marked on the lower edge.

    Parameters
    ----------
    scan : SaltScan
        Of `interaction.salt_scan`.
    ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes
    """
    ax, own = _axes.axis(ax)
    for k, (name, decades) in enumerate(scan.log10_ratio.items()):
        colour, line = _axes.COLOURS[k], _axes.LINES[k % len(_axes.LINES)]
        critical = scan.critical.get(name)
        label = name if critical is None else f"{name}, critical at {critical:.3g} mol/m³"
        ax.plot(scan.ionic_strength, decades, color=colour, linestyle=line, label=label)
        if critical is not None and scan.ionic_strength[0] <= critical <= scan.ionic_strength[-1]:
            ax.axvline(critical, color=colour, linewidth=0.8, alpha=0.6)
    ax.set_xscale("log")
    ax.set_xlabel("ionic strength [mol/m³]")
    ax.set_ylabel("log$_{10}$ of the stability ratio $W$ [-]")
    _axes.dress(ax)
    _axes.legend(ax, own)
    return ax


def stability_map(stability: Any, *, model: str | None = None, ax: Any = None) -> Any:
    """Draw the stability ratio over surface potential and ionic strength.

    Filled contours show one model; dashed and dotted lines show where the other models have W = 1e6, so that
    the band between them is seen.

    Parameters
    ----------
    stability : StabilityMap
        Of `interaction.stability_map`.
    model : str, optional
        Name of the model that is filled, the first one without it.
    ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes

    Raises
    ------
    InputError
        If the map has no such model.
    """
    names = list(stability.log10_ratio)
    shown = names[0] if model is None else model
    if shown not in names:
        _checks.refuse("model", repr(model), "one of " + ", ".join(map(repr, names)))
    ax, _ = _axes.axis(ax)
    x, y = stability.ionic_strength, stability.surface_potential * 1e3
    levels = [0, 1, 2, 4, 6, 9, 12, 20]
    filled = ax.contourf(x, y, stability.log10_ratio[shown], levels, cmap="viridis", extend="both")
    bar = ax.figure.colorbar(filled, ax=ax)
    bar.set_label(f"log$_{{10}}$ W, {shown}")
    handles = []
    from matplotlib.lines import Line2D

    for name, line in zip(
        [shown, *(n for n in names if n != shown)], ("solid", "dashed", "dotted"), strict=False
    ):
        decades = stability.log10_ratio[name]
        if decades.min() < 6.0 < decades.max():
            ax.contour(x, y, decades, [6.0], colors="white" if name == shown else "black", linestyles=line)
        look: Any = line
        colour = "0.6" if name == shown else "black"
        handles.append(Line2D([], [], color=colour, linestyle=look, label=f"W = 10⁶, {name}"))
    ax.set_xscale("log")
    ax.set_xlabel("ionic strength [mol/m³]")
    ax.set_ylabel("surface potential [mV]")
    _axes.legend_above(ax, handles, columns=2)
    return ax


def shelf_life(life: Any, *, ax: Any = None) -> Any:
    """Draw the band of a shelf life, its time by model, and which input the band comes from.

    Bars show by how much each input moves the time over its range, in powers of ten; the header tells the band.

    Parameters
    ----------
    life : ShelfLife
        Of `shelf_life`.
    ax
        As in every figure; see help(aggsim.figures).

    Returns
    -------
    matplotlib.axes.Axes
    """
    ax, _ = _axes.axis(ax, size=(8.0, 4.0))
    rows: list[tuple[str, float, float, str]] = [
        ("all ranges and models, 5 to 95 %", life.low, life.high, _axes.COLOURS[0])
    ]
    rows += [(f"{name}, central inputs", time, time, _axes.COLOURS[1]) for name, time in life.models.items()]
    rows += [(f"range of {s.label} alone", *s.times, "0.6") for s in life.sources]
    left, right = _limits([time for _, low, high, _ in rows for time in (low, high)])
    for y, (_, low, high, colour) in zip(range(len(rows))[::-1], rows, strict=True):
        ends = np.log10(np.clip([low, high], 1e-300, 1e300))
        if low == high and left <= ends[0] <= right:
            ax.plot(ends[:1], [y], "o", color=colour)
        else:
            ax.plot(ends, [y, y], color=colour, linewidth=8, solid_capstyle="butt")
        for end, edge, marker in ((ends[0], left, "<"), (ends[1], right, ">")):
            if (end < left) if marker == "<" else (end > right):
                ax.plot([edge], [y], marker, color=colour, markersize=9, clip_on=False)
    for word, seconds in _SPANS:
        if left < np.log10(seconds) < right:
            ax.axvline(np.log10(seconds), color="0.85", linewidth=0.8, zorder=0)
            place = {"xy": (np.log10(seconds), 1.0), "xycoords": ("data", "axes fraction")}
            ax.annotate(word, **place, fontsize="small", ha="center", va="bottom")
    if life.wanted is not None:
        ax.axvline(np.log10(life.wanted), color="black", linestyle="--", linewidth=1.2)
    ax.set_yticks(range(len(rows))[::-1], [row[0] for row in rows])
    ax.set_ylim(-0.7, len(rows) - 0.3)
    ax.set_xlim(left, right)
    dashed = "; dashed: wanted" if life.wanted is not None else ""
    ax.set_xlabel(f"log$_{{10}}$ of the shelf life in seconds{dashed}; arrows: beyond the frame")
    ax.spines[["top", "right"]].set_visible(False)
    return ax


def _limits(times: list[float]) -> tuple[float, float]:
    """Powers of ten [s] of the frame: what matters to a product lies between a second and 30,000 years."""
    decades = np.log10(np.clip(times, 1e-300, 1e300))
    left = float(np.clip(np.floor(decades.min()), -1.0, 7.0))
    return left, float(np.clip(np.ceil(decades.max()), left + 3.0, 12.0))
