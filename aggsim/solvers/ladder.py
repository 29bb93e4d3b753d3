"""Which sections take part in the integration: those that the particles have reached, and some room above.

Empty sections far above the largest particle make a system stiff for nothing, and where large particles sweep
up small ones, numbers of round-off size in them run away. So a run begins on the lower part of its grid and
climbs when particles come near the top.
"""

from __future__ import annotations

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.schemes import Scheme
from aggsim.sizes import SizeGrid

NEAR = 8.0  # doublings from the largest particle to a top that is near enough to begin with
ROOM = 4.0  # doublings to begin with where the top is farther away
CLIMB = 5.0  # doublings of volume that one climb adds
UNSEEN = 1e-12  # share of the volume at the start that may wait in the uppermost section in use
LARGEST_AUTOMATIC_GRID = 400  # sections


class Ladder:
    """The grids of one run, each a lower part of the next."""

    def __init__(self, scheme: Scheme, grid: SizeGrid, automatic: bool, at_once: bool = False) -> None:
        """Climb `grid` to its top and, where `automatic`, continue it beyond by its own rule.

        With `at_once` it is used whole from the start, where it is known to be no longer than needed.
        """
        self._at_once = at_once
        self._scheme = scheme
        self._whole = grid
        self._automatic = automatic

    @property
    def automatic(self) -> bool:
        """True where the grid may be continued past its top."""
        return self._automatic

    @property
    def whole(self) -> SizeGrid:
        """The grid that was asked for."""
        return self._whole

    def first(self, number: FloatArray) -> SizeGrid:
        """Grid to begin with, for numbers on the whole grid."""
        if self._at_once:
            return self._whole
        x = self._whole.volume
        above = np.cumsum((number * x)[::-1])[::-1]
        used = int(np.flatnonzero(above > UNSEEN * above[0])[-1])
        if x[-1] <= 2.0**NEAR * x[used]:
            return self._whole
        return self._part(2.0**ROOM * float(x[used]))

    def cut(self, number: FloatArray, grid: SizeGrid) -> FloatArray:
        """Numbers of the whole grid on a part of it, or on its continuation.

        What stands above the part, a tail of no account, counts at its top with its volume.
        """
        x = self._whole.volume
        if grid.sections >= x.size:
            return np.concatenate([number, np.zeros(grid.sections - x.size)])
        kept = number[: grid.sections].copy()
        kept[-1] += float(number[grid.sections :] @ x[grid.sections :]) / float(grid.volume[-1])
        return kept

    def next(self, grid: SizeGrid) -> SizeGrid | None:
        """The next longer grid, None where there is none."""
        top = float(grid.volume[-1]) * 2.0**CLIMB
        if grid.sections < self._whole.sections:
            return self._part(top)
        if not self._automatic:
            return None
        try:
            longer = grid.extended(top)
            self._scheme.check(longer)
        except GridError:
            return None
        return longer if longer.sections <= LARGEST_AUTOMATIC_GRID else None

    def result_grid(self, grid: SizeGrid) -> SizeGrid:
        """Grid of the result of a run that ended on `grid`."""
        return grid if grid.sections > self._whole.sections else self._whole

    def _part(self, top: float) -> SizeGrid:
        whole = self._whole
        count = int(np.searchsorted(whole.volume, top * (1.0 - 1e-9))) + 1
        if count >= whole.sections:
            return whole
        part = SizeGrid(whole.volume[:count], ratio=whole.ratio, monomer=whole.monomer)
        try:
            self._scheme.check(part)
        except GridError:
            return whole
        return part
