"""Curves of the density q_r* of several states, and measured classes to set beside them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import DistributionError
from aggsim.outputs._units import Structure, shown_diameter
from aggsim.sizes import Measured, SizeGrid, means

_LONE = 0.99  # share in one section from which a density has no meaningful height
_SHOWN = 3e-3  # of the peak; the size axis covers all sections above it
_SUM = 0.02  # how far measured shares may miss the sum 1 by rounding and by sizes outside the instrument
_ROOM = 1.06  # height of the axis over that of the highest curve
_FINE = 8  # points per section


@dataclass(frozen=True)
class DensityCurves:
    """Densities q_r* at the pivots of several states.

    `sphere`, `shown` (n,): volume-equivalent diameter and that on the axis [m]; `share`, `density` (rows, n).
    """

    sphere: FloatArray
    shown: FloatArray
    share: FloatArray
    density: FloatArray

    @classmethod
    def of(cls, grid: SizeGrid, number: FloatArray, r: float, structure: Structure | None) -> DensityCurves:
        density = means.density(grid.volume, number, r)
        share = density * grid.width / (3.0 * grid.volume)
        shown = shown_diameter(grid.volume, grid.diameter, structure)
        sphere_limits = means.diameter_of(grid.limits)
        limits = shown_diameter(grid.limits, sphere_limits, structure)
        if structure is not None:  # d ln x of the sphere over d ln x of the outer diameter
            density = density * np.diff(np.log(sphere_limits)) / np.diff(np.log(limits))
        return cls(grid.diameter, shown, share, density)

    def lone(self, row: int) -> float | None:
        """Diameter on the axis [m] of the one size that holds the row, None where there are several."""
        largest = int(self.share[row].argmax())
        return float(self.shown[largest]) if self.share[row, largest] >= _LONE else None

    def line(self, row: int) -> tuple[FloatArray, FloatArray]:
        """Diameters [m] and densities of the curve, which rises upright from zero at the first pivot."""
        q = self.density[row]
        log_x, curve = _akima(np.log(self.shown), q)
        return np.exp(np.append(log_x[:1], log_x)), np.append(0.0, curve)

    def draw(self, ax: Any, unit: float, looks: list[dict[str, Any]], r: float) -> None:
        """Draw each row on a size axis in `unit` [m], upright where one size holds it, and set up the other axis."""
        top = max(ax.get_ylim()[1] / _ROOM, 0.0) if ax.has_data() else 0.0
        for row, look in enumerate(looks):
            lone = self.lone(row)
            if lone is not None:
                ax.axvline(lone / unit, **look | {"label": f"{look['label']} (one size)"})
                continue
            x, q = self.line(row)
            ax.plot(x / unit, q, **look)
            top = max(top, float(q.max()))
        ax.set_ylim(0.0, _ROOM * top if top > 0.0 else 1.0)
        ax.set_ylabel(rf"density $q_{{{r:g}}}^* = \mathrm{{d}}Q_{{{r:g}}}\,/\,\mathrm{{d}}\,\ln x$  [-]")

    def visible(self) -> tuple[float, float]:
        """Range of diameters on the axis [m] in which any row is worth seeing."""
        first, last = self._visible()
        return float(self.shown[first]) / 1.15, float(self.shown[last]) * 1.15

    def visible_sphere(self) -> tuple[float, float]:
        """Volume-equivalent diameters [m] of the first and last section worth seeing."""
        first, last = self._visible()
        return float(self.sphere[first]), float(self.sphere[last])

    def _visible(self) -> tuple[int, int]:
        worth = (self.density > _SHOWN * self.density.max(axis=-1, keepdims=True)).any(axis=0)
        where = np.flatnonzero(worth)
        return max(int(where[0]) - 1, 0), min(int(where[-1]) + 1, self.shown.size - 1)


def draw_classes(ax: Any, unit: float, edges: FloatArray, shares: FloatArray) -> None:
    """Draw measured shares between class limits [m] as stairs of density on an axis that was set up."""
    q = shares / np.diff(np.log(edges))
    ax.stairs(q, edges / unit, color="black", linewidth=1.2, label="measured")
    ax.set_ylim(0.0, max(ax.get_ylim()[1], _ROOM * float(q.max())))


def measured_classes(measured: Any, r: float) -> tuple[FloatArray, FloatArray]:
    """Class limits [m] and shares [1] of a measured distribution of quantity r."""
    if isinstance(measured, Measured):
        kind = {"number": 0, "volume": 3}[measured.kind]
        if r != kind:
            _checks.refuse(
                "measured",
                f"a distribution by {measured.kind}",
                f"one of the quantity that is drawn, r={r:g}",
                f"r={kind}",
                error=DistributionError,
            )
        return measured.class_limits, measured.class_shares
    try:
        raw_limits, raw_shares = measured
    except (TypeError, ValueError):
        _checks.refuse(
            "measured",
            repr(measured),
            "(class limits [m], shares), or a Measured distribution",
            "measured=(limits, shares) with one limit more than there are shares",
            error=DistributionError,
        )
    limits = _checks.array(
        "measured limits", raw_limits, "m", above=0.0, increasing=True, error=DistributionError
    )
    shares = _checks.array(
        "measured shares",
        raw_shares,
        least=0.0,
        size=limits.size - 1,
        hint="one share per class, which is one less than there are limits",
        error=DistributionError,
    )
    total = float(shares.sum())
    if abs(total - 1.0) > _SUM:
        _checks.refuse(
            "measured shares",
            f"values with the sum {total:g}",
            f"shares with the sum 1 (within {_SUM:g})",
            "divide percentages by 100",
            error=DistributionError,
        )
    return limits, shares


def _akima(x: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Points on a cubic through (x, y) that follows peaks and flats without swinging.

    Slopes after H. Akima (1970), J. ACM 17, 589, doi:10.1145/321607.321609; each weight also gets half the sum
    of its two secants, so that flats next to slopes stay flat.
    """
    peak = np.abs(y).max()
    h, values = np.diff(x), y / peak
    m = np.diff(values) / h
    if m.size == 1:
        m = np.repeat(m, 5)
    else:  # two more secants at either end, on a parabola
        before = np.array([3.0, 2.0]) * m[0] - np.array([2.0, 1.0]) * m[1]
        after = np.array([2.0, 3.0]) * m[-1] - np.array([1.0, 2.0]) * m[-2]
        m = np.concatenate([before, m, after])
    bend = np.abs(np.diff(m)) + 0.5 * np.abs(m[1:] + m[:-1])
    left, right = bend[2:], bend[:-2]
    weight = left + right
    mean = left * m[1:-2] + right * m[2:-1]
    slope = np.divide(mean, weight, out=np.zeros_like(weight), where=weight > 1e-30)
    t = np.arange(_FINE) / _FINE
    a, b, d = values[:-1, None], values[1:, None], h[:, None]
    curve = (
        (1.0 + 2.0 * t) * (1.0 - t) ** 2 * a
        + t * (1.0 - t) ** 2 * d * slope[:-1, None]
        + t**2 * (3.0 - 2.0 * t) * b
        + t**2 * (t - 1.0) * d * slope[1:, None]
    )
    fine = x[:-1, None] + d * t
    return np.append(fine.ravel(), x[-1]), peak * np.append(curve.ravel(), values[-1])
