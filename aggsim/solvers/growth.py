"""Watching the largest particles: when the grid must grow, and when the distribution is about to gel."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from aggsim._checks import FloatArray
from aggsim.sizes import SizeGrid

# Share of the volume in the uppermost sections at which more sections are taken into use. Less would follow
# particles too few to matter: where the largest ones sweep up the small faster than they grow (settling), a
# smaller share brings the numerical gelation forward by chasing a tail of round-off size.
TOP_SHARE = 1e-6  # or rtol, where that is less
# Of that share, what may pass the top in the step after which more sections are taken into use
LOST_SHARE = 1e-3
BEYOND_SHARE = 1e-3  # share of the volume past the top at which a run that cannot be extended is judged
REMAINING = 1e-3  # a run stops when gelation is nearer than this share of the time that led to it
AT_THE_END = 0.1  # the like where the run must end anyway, at the top of its grid or because the method fails
STEEPEST = -0.05  # slope of the growth time against time below which it runs into zero

NEGATIVE_LIMIT = 1e-2  # share of the volume in negative sections at which a result means nothing any more

_GUARD = 1.0  # doublings below the top that count as uppermost


@dataclass(frozen=True)
class Approach:
    """Growth time M2 / (dM2/dt) [s] of the second moment, seen at one moment."""

    time: float
    growth_time: float


class GrowthWatch:
    """Follows the top of the grid and the second volume moment M2 of one run.

    Where a kernel gels, M2 becomes infinite at a finite time t_g, and its growth time falls linearly,
    M2 / (dM2/dt) = (t_g - t) / p. Two sightings give p and with it t_g.
    """

    def __init__(self, volume: float) -> None:
        self._volume = volume
        self._seen: list[Approach] = []
        self._begin = 0.0
        self._next = 0.0

    def begin(self, time: float) -> None:
        """Forget what was seen before `time`: a strength has jumped."""
        self._seen, self._begin, self._next = [], time, 0.0

    def on(self, grid: SizeGrid, volumes: Sequence[float] = (1.0,), streams: int = 0) -> None:
        """Watch this grid from now on, in tanks of these shares of the volume and so many streams."""
        x = grid.volume
        first = min(int(np.searchsorted(x, x[-1] / 2.0**_GUARD)), x.size - 6)
        weights = np.zeros((3, x.size + 2 + streams))
        weights[0, max(first, 0) : x.size] = x[max(first, 0) :] / self._volume
        weights[0, x.size + 1] = 1.0 / self._volume
        weights[1, : x.size] = x * x
        weights[2, x.size + 1] = 1.0 / self._volume
        shares = np.array(volumes)
        self._weights = (shares[:, None] * weights[:, None, :]).reshape(3, -1)
        self._pivots = (shares[:, None] * x / self._volume).ravel()
        width = weights.shape[1]
        # a slice is quicker than a list of places, and one tank is the usual case
        self._sections: slice | NDArray[np.intp] = slice(0, x.size)
        if shares.size > 1:
            self._sections = np.flatnonzero(np.arange(shares.size * width) % width < x.size)
        self._top = float(x[-1])

    def look(self, state: FloatArray) -> tuple[float, float, bool]:
        """Shares of the volume at or beyond the top, and beyond it; and whether M2 has doubled since a sighting."""
        top, second, beyond = (self._weights @ state).tolist()
        return top, beyond, second >= self._next

    def negative_share(self, state: FloatArray) -> float:
        """Share of the volume that stands in sections with a negative number."""
        return -float(np.minimum(state[self._sections], 0.0) @ self._pivots)

    def sight(self, time: float, state: FloatArray, rates: FloatArray) -> None:
        """Note the growth time of M2."""
        second = float(self._weights[1] @ state)
        # what leaves the top would have counted at least with the volume of the top
        gain = float(self._weights[1] @ rates) + float(self._weights[2] @ rates) * self._volume * self._top
        self._next = 2.0 * second
        if gain > 0.0:
            self._seen.append(Approach(time, second / gain))

    def gelation_time(self) -> float | None:
        """Time [s] at which M2 is heading for infinity, None where its growth time does not run into zero."""
        if len(self._seen) < 3:
            return None
        before, last = self._seen[-2], self._seen[-1]
        if not (self._seen[-3].growth_time > before.growth_time > last.growth_time):
            return None
        slope = (last.growth_time - before.growth_time) / (last.time - before.time)
        if slope > STEEPEST:
            return None
        return last.time - last.growth_time / slope

    def gelation_near(self, time: float, within: float = REMAINING) -> float | None:
        """Gelation time [s] where it is nearer than the share `within` of the time since the start, else None."""
        expected = self.gelation_time()
        if expected is None or expected - time > within * (time - self._begin):
            return None
        return expected
