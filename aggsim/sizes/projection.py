"""From a law of sizes to numbers at the pivots of a grid, keeping the moments that the scheme keeps."""

from __future__ import annotations

import numpy as np
from scipy.optimize import nnls

from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.sizes.grid import SizeGrid
from aggsim.sizes.starting import StartingDistribution

NUMBER_BELOW = 1e-2  # share of the number that may lie below the first pivot (it is kept, see `project`)
VOLUME_ABOVE = 1e-6  # share of the volume that may lie above the last pivot (likewise)
_REACH = 8.0  # volume ratio between the two pivots that take up what lies outside


def project(start: StartingDistribution, grid: SizeGrid, moments: int = 2) -> FloatArray:
    """Number of particles at each pivot (n_sections,) [1/m3] that stands for a starting distribution.

    Each particle of volume v is shared among the `moments` nearest pivots by Lagrange weights, so that the
    moments 0 to moments - 1 in v come out as those of the law. Where such weights leave a negative number (at
    the edges of a box, on narrow peaks) the nearest non-negative numbers with the same moments take their
    place. Number and volume agree with the law to round-off in every case. A discrete size that is no pivot
    is shared linearly between its two neighbours.

    Parameters
    ----------
    start : StartingDistribution
        Law of sizes.
    grid : SizeGrid
        Pivots.
    moments : int
        Moments to keep: 2, 4 or 6.

    Raises
    ------
    GridError
        If more than 1 % of the number lies below the first pivot, or more than 1e-6 of the volume above the
        last one.
    """
    x = grid.volume
    _refuse_missed(start, grid)
    number = np.zeros(x.size)
    smallest, largest = start.limits(1e-16)
    edges = x
    if smallest < x[0]:
        edges = np.concatenate([[smallest], edges])
    if largest > x[-1]:
        edges = np.concatenate([edges, [largest]])
    at, mass = start.quadrature(edges)
    if at.size:
        number = _share(at, mass, x, moments)
        if number.min() < 0.0:
            number = _nearest_positive(number, _share(at, mass, x, 2), x, moments)
    for volume, amount in start.atoms:
        k = int(np.argmin(np.abs(x - volume)))
        if abs(x[k] - volume) <= 1e-9 * volume:
            number[k] += amount
        else:
            number += _share(np.array([volume]), np.array([amount]), x, 2)
    return _exact_balance(number, x, start.total_number, start.total_volume)


def _refuse_missed(start: StartingDistribution, grid: SizeGrid) -> None:
    x = grid.volume
    below = float(start.number_below(x[0] * (1 - 1e-9))) / start.total_number
    above = 1.0 - float(start.volume_below(x[-1] * (1 + 1e-9))) / start.total_volume
    smallest, largest = start.limits(1e-6)
    if below > NUMBER_BELOW or above > VOLUME_ABOVE:
        raise GridError(
            f"the grid covers volumes {x[0]:.3g} to {x[-1]:.3g} m3 and misses {below:.2g} of the number below "
            f"and {above:.2g} of the volume above; allowed: {NUMBER_BELOW:g} and {VOLUME_ABOVE:g}. The start "
            f"spans {smallest:.3g} to {largest:.3g} m3 (diameters {_d(smallest):.3g} to {_d(largest):.3g} m). "
            "Try: grid=None, or a grid that covers this span and room to grow."
        )


def _d(volume: float) -> float:
    return float((6.0 * volume / np.pi) ** (1.0 / 3.0))


def _share(at: FloatArray, mass: FloatArray, x: FloatArray, moments: int) -> FloatArray:
    """Share point masses among the nearest pivots; outside the grid by a line through two pivots (see `_tail`)."""
    nodes = min(moments, x.size)
    out = np.zeros(x.size)
    inside = (at >= x[0]) & (at <= x[-1])
    v, m = at[inside], mass[inside]
    cell = np.clip(np.searchsorted(x, v, side="right") - 1, 0, x.size - 2)
    first = np.clip(cell - nodes // 2 + 1, 0, x.size - nodes)
    near = x[first[:, None] + np.arange(nodes)]
    for p in range(nodes):
        weight = m.copy()
        for q in range(nodes):
            if q != p:
                weight *= (v - near[:, q]) / (near[:, p] - near[:, q])
        out += np.bincount(first + p, weight, x.size)
    far = min(int(np.searchsorted(x, _REACH * x[0])), x.size - 1)
    _tail(out, at[at < x[0]], mass[at < x[0]], x, 0, far)
    far = max(int(np.searchsorted(x, x[-1] / _REACH)) - 1, 0)
    _tail(out, at[at > x[-1]], mass[at > x[-1]], x, x.size - 1, far)
    return out


def _tail(out: FloatArray, v: FloatArray, m: FloatArray, x: FloatArray, end: int, far: int) -> None:
    """Put the few particles outside the grid on its end pivot, and what keeps their volume on a far one.

    The far pivot loses a little; a near one could be left with a negative number.
    """
    moved = float(m @ (v - x[end])) / (x[far] - x[end])
    out[far] += moved
    out[end] += float(m.sum()) - moved


def _nearest_positive(wanted: FloatArray, linear: FloatArray, x: FloatArray, moments: int) -> FloatArray:
    """Non-negative numbers close to `wanted` with its first moments (a small non-negative least squares)."""
    linear = np.maximum(linear, 0.0)
    negative = -np.minimum(wanted, 0.0)
    if negative.sum() <= 1e-13 * linear.sum() and negative @ x <= 1e-13 * (linear @ x):
        return np.maximum(wanted, 0.0)
    used = np.flatnonzero(linear > 1e-16 * linear.max())
    scale = linear[used]
    mean = float(linear @ x) / float(linear.sum())
    powers = (x / mean) ** np.arange(min(moments, used.size))[:, None]
    size = powers @ linear
    rows = powers[:, used] * scale / size[:, None]
    # how far a number may move counts little beside the moments, and by its share of number and volume
    stiffness = 1e-5 * np.sqrt(scale / scale.sum() + scale * x[used] / (scale @ x[used]))
    matrix = np.vstack([rows, np.diag(stiffness)])
    aim = np.concatenate([powers @ wanted / size, stiffness * wanted[used] / scale])
    solution, _ = nnls(matrix, aim)
    out = np.zeros(x.size)
    out[used] = solution * scale
    return out


def _exact_balance(number: FloatArray, x: FloatArray, total: float, volume: float) -> FloatArray:
    """Multiply by a line in x that differs from 1 by round-off so that number and volume are those asked for."""
    m0, m1, m2 = (float(number @ x**k) for k in range(3))
    determinant = m0 * m2 - m1 * m1
    if determinant <= 1e-12 * m0 * m2:  # one size only: there is nothing to tilt
        return number * (total / m0)
    a = (total * m2 - volume * m1) / determinant
    b = (volume * m0 - total * m1) / determinant
    return number * (a + b * x)
