"""Random particles from a starting distribution."""

from __future__ import annotations

import numpy as np

from aggsim._checks import FloatArray
from aggsim.sizes import StartingDistribution

_REST = 1e-12  # share of the number below and of the volume above the sizes that are searched
_STEPS = 60  # bisection alone needs 50


def draw_volumes(start: StartingDistribution, count: int, random: np.random.Generator) -> FloatArray:
    """Volumes (count,) [m3], one drawn from each of `count` equal shares of the number.

    Every particle has the law of `start`, and the sample as a whole scatters far less than independent draws.
    """
    total = start.total_number
    atoms = np.array(sorted(start.atoms)).reshape(-1, 2)
    continuous = max(total - float(atoms[:, 1].sum()), 0.0) if start.log_width > 0.0 else 0.0
    marks = (np.arange(count) + random.random(count)) * (total / count)
    smooth = marks < continuous
    out = np.empty(count)
    out[smooth] = _inverse(start, atoms, marks[smooth])
    if not smooth.all():
        place = np.searchsorted(np.cumsum(atoms[:, 1]), marks[~smooth] - continuous, side="right")
        out[~smooth] = atoms[np.minimum(place, len(atoms) - 1), 0]
    return out


def _inverse(start: StartingDistribution, atoms: FloatArray, marks: FloatArray) -> FloatArray:
    """Volumes below which the continuous part of `start` has `marks` (m,) [1/m3]: Newton kept in a bracket."""
    if marks.size == 0:
        return marks
    low, high = np.log(start.limits(_REST))
    upto = np.concatenate([[0.0], np.cumsum(atoms[:, 1])])

    def below(log_volume: FloatArray) -> FloatArray:
        volume = np.exp(log_volume)
        discrete = upto[np.searchsorted(atoms[:, 0], volume, side="right")]
        return np.asarray(start.number_below(volume) - discrete)

    cells = int(np.clip((high - low) / (0.1 * start.log_width), 64.0, 20_000.0))
    table = np.linspace(low, high, cells + 1)
    number = np.maximum.accumulate(below(table))
    place = np.clip(np.searchsorted(number, marks), 1, cells)
    left, right = table[place - 1], table[place]
    rise = np.maximum(number[place] - number[place - 1], np.finfo(np.float64).tiny)
    x = left + (right - left) * np.clip((marks - number[place - 1]) / rise, 0.0, 1.0)
    for _ in range(_STEPS):
        excess = below(x) - marks
        left, right = np.where(excess < 0.0, x, left), np.where(excess > 0.0, x, right)
        slope = start.density(np.exp(x)) * np.exp(x)
        middle = 0.5 * (left + right)
        change = np.divide(excess, slope, out=np.full(x.size, np.inf), where=slope > np.abs(excess) / 50.0)
        new = np.where((x - change >= left) & (x - change <= right), x - change, middle)
        moved = np.abs(new - x).max()
        x = new
        if moved < 1e-13 * max(1.0, abs(low), abs(high)):
            break
    return np.asarray(np.exp(x))
