"""The adjustable geometric discretisation: sections whose limits keep the ratio 2**(1/q)."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from aggsim.errors import GridError
from aggsim.schemes.base import Births, Scheme, SegmentScheme, continued, require_sections
from aggsim.sizes import SizeGrid, StartingDistribution, starting_grid


@dataclass(frozen=True)
class Sectional(Scheme):
    """Adjustable sectional method on a geometric grid with a whole number q of sections per doubling.

    Particles of section i meet those of section j <= i, and the birth is shared between two sections by the
    published coefficients, written with r = 2**(1/q) and the interval number k of the birth,

        upper share = (r**-(d + k - 1) - 1 + r**-(k - 1)) / (r - 1),   d = i - j,   into section i + k
        lower share = 1 - upper share,                                            into section i + k - 1

    where k is the smallest number with S_k - k <= d and S_k = floor(1 - q ln(1 - 2**(-k/q)) / ln 2); equal
    sections give one particle in section i + q. Number and volume are kept; second order in 1/q. On the same
    grid the shares equal those of FixedPivot(moments=2), so the two are no independent check of each other.

    Raises
    ------
    GridError
        In `check`, if the grid is not geometric with a whole number of sections per doubling.

    References
    ----------
    .. [1] J. D. Litster, D. J. Smit and M. J. Hounslow, AIChE J. 41 (1995) 591, doi:10.1002/aic.690410317;
       interval limits for every q as corrected by E. J. W. Wynn, AIChE J. 42 (1996) 2084,
       doi:10.1002/aic.690420729.
    """

    def check(self, grid: SizeGrid) -> None:
        require_sections(grid, 2, self)
        _sections_per_doubling(grid)

    @property
    def order(self) -> float:
        return 2.0

    def default_grid(self, start: StartingDistribution, finer: float = 1.0) -> SizeGrid:
        return starting_grid(start, per_doubling=8, geometric=True, finer=finer, whole=True)

    def coarser(self, grid: SizeGrid, factor: float) -> SizeGrid:
        density = _sections_per_doubling(grid)
        whole = max(1, math.floor(density / factor + 1e-9))
        if whole == density:
            raise GridError(
                f"grid={grid!r} has one section per doubling, and Sectional() no coarser grid to judge its error by. "
                "Try: more sections per doubling."
            )
        return grid.coarser(density / whole)

    def prepare(self, grid: SizeGrid) -> SegmentScheme:
        self.check(grid)
        births = _births(grid.sections, _sections_per_doubling(grid))
        return SegmentScheme.build(grid, continued(grid, 1), births)


def _sections_per_doubling(grid: SizeGrid) -> int:
    q = math.log(2.0) / math.log(grid.volume[1] / grid.volume[0])
    if not grid.is_geometric or abs(q - round(q)) > 1e-6 or round(q) < 1:
        raise GridError(
            f"grid={grid!r} has {q:.6g} sections in its first doubling; Sectional() needs a geometric grid with "
            "a whole number of sections per doubling throughout. Try: SizeGrid.geometric(..., per_doubling=3), "
            "or FixedPivot() on this grid."
        )
    return round(q)


def _births(n: int, q: int) -> Births:
    """First target, number of targets and weights of each pair (i, j <= i), as `_loops.layout` reads them."""
    ratio = 2.0 ** (1.0 / q)
    # the interval depends on the distance d = i - j alone; 1e-9 keeps exact integers from rounding down
    limit = np.array([math.floor(1.0 - q * math.log2(1.0 - 2.0 ** (-k / q)) + 1e-9) for k in range(1, q + 1)])
    distance = np.arange(n)
    interval = 1 + np.argmax(limit - np.arange(1, q + 1) <= distance[1:, None], axis=1)
    upper = (ratio ** -(distance[1:] + interval - 1.0) - 1.0 + ratio ** -(interval - 1.0)) / (ratio - 1.0)
    # beside the larger partner (k = 1) the share is that of the smaller partner alone, without cancellation
    upper = np.where(interval == 1, ratio ** -distance[1:].astype(float) / (ratio - 1.0), upper)

    i, j = np.tril_indices(n)
    d = i - j
    equal = d == 0
    k = np.where(equal, q, interval[np.maximum(d, 1) - 1])
    share = np.where(equal, 1.0, upper[np.maximum(d, 1) - 1])
    first = np.where(equal, i + q, i + k - 1)
    count = np.where(equal, 1, 2)
    weight = np.zeros((i.size, 2))
    weight[:, 0] = np.where(equal, 1.0, 1.0 - share)
    weight[:, 1] = np.where(equal, 0.0, share)
    own = ~equal & (k == 1)
    weight[own, 0] = -share[own]  # net change of section i, its own loss included
    return first.astype(np.int64), count.astype(np.int64), weight
