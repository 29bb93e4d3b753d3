"""Upper bounds of rates on classes of size."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from aggsim._checks import FloatArray
from aggsim.ensembles import _loops
from aggsim.ensembles.mechanisms import Interval, Mechanism

_SAFETY = 1.1  # for what lies between the points at which a class is sampled
_MARGIN = 8  # classes beyond the particles that a table covers: four doublings of volume


class Bounds:
    """Bounds on classes of half a doubling of volume, from `lowest` on, extended as particles need it.

    `limits` holds them for the interval in use. A bound is 1.1 times the largest rate at the edges and the
    middle of its classes. That is no proof: a rate that is found above its bound raises it from then on and
    counts in `exceeded`.
    """

    def __init__(
        self, collisions: Sequence[Mechanism], breakages: Sequence[Mechanism], smallest: float
    ) -> None:
        self.collisions, self.breakages, self.smallest = collisions, breakages, smallest
        self.lowest = self.size = self.exceeded = 0
        self._raised_pairs, self._raised_single = np.ones((0, 0)), np.ones((len(breakages), 0))
        self._interval: Interval | None = None

    def cover(self, low: int, high: int) -> None:
        """Take in the classes `low` to `high`."""
        if self.size and low >= self.lowest and high < self.lowest + self.size:
            return
        bottom = low - _MARGIN if low < self.lowest else self.lowest
        top = max(high + 1 + _MARGIN, self.lowest + self.size)
        pad = (self.lowest - bottom, top - self.lowest - self.size)
        self._raised_pairs = np.pad(self._raised_pairs, (pad, pad), constant_values=1.0)
        self._raised_single = np.pad(self._raised_single, ((0, 0), pad), constant_values=1.0)
        self.lowest, self.size = bottom, top - bottom
        quarters = np.arange(2 * bottom, 2 * top + 1) * 0.25
        volume: FloatArray = self.smallest * np.exp2(quarters)
        self._pair_rates = np.zeros((len(self.collisions), self.size, self.size))
        for table, mechanism in zip(self._pair_rates, self.collisions, strict=True):
            table[:] = _class_maximum(_class_maximum(mechanism.matrix(volume)).T)
        self._single_rates = np.zeros((len(self.breakages), self.size))
        for row, mechanism in zip(self._single_rates, self.breakages, strict=True):
            row[:] = _class_maximum(mechanism.rate(volume))
        if self._interval is not None:
            self.use(self._interval)

    def use(self, interval: Interval) -> None:
        """Set `pairs` and `single` for an interval of time."""
        self._interval = interval
        strengths = [interval.largest(mechanisms) for mechanisms in (self.collisions, self.breakages)]
        pairs = _SAFETY * self._raised_pairs * np.tensordot(strengths[0], self._pair_rates, axes=1)
        single = _SAFETY * self._raised_single * strengths[1][:, None] * self._single_rates
        self.limits = _loops.Limits(self.smallest, self.lowest, pairs, single)

    def exceed(self, volume: float, partner: float, law: int, rate: float) -> None:
        """Raise the bound of two volumes [m3], or of one and a `law` of -1 - k, to hold a rate."""
        self.exceeded += 1
        i = _loops.class_of(volume, self.smallest) - self.lowest
        if law < 0:
            _raise(self.limits.single, self._raised_single, (-1 - law, i), rate)
        else:
            j = _loops.class_of(partner, self.smallest) - self.lowest
            for pair in {(i, j), (j, i)}:
                _raise(self.limits.pairs, self._raised_pairs, pair, rate)


def _raise(bound: FloatArray, raised: FloatArray, where: tuple[int, int], rate: float) -> None:
    ratio = max(_SAFETY * rate / bound[where], 1.0)
    bound[where] *= ratio
    raised[where] *= ratio


def _class_maximum(values: FloatArray) -> FloatArray:
    """Largest of the three points of each class along the last axis (..., 2 n + 1)."""
    out: FloatArray = np.maximum(np.maximum(values[..., :-2:2], values[..., 1:-1:2]), values[..., 2::2])
    return out
