"""Sizes and moments that are read from numbers at the pivots of a grid, whatever they are a record of."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.sizes import SizeGrid, means


class Readings:
    """What can be read from `number` (..., n_sections) on `grid`; "..." is the shape of what is returned.

    Sizes of a state without particles, such as a tank of clear liquid before the feed arrives, are NaN.
    """

    grid: SizeGrid
    number: FloatArray

    def total_number(self) -> FloatArray:
        """Number of particles in all sections (...) [1/m3]."""
        return self.moment(0)

    def moment(self, k: float) -> FloatArray:
        """Volume moment sum_i n_i v_i**k (...) [m3**k / m3], k real; moment(1) is the volume fraction."""
        return means.moment(self.grid.volume, self.number, k)

    def mean_diameter(self, p: float, q: float) -> FloatArray:
        """Mean diameter D[p, q] (...) [m], for example 4, 3 (by volume) or 3, 2 (Sauter)."""
        return self._where_any(lambda number: means.mean_diameter(self.grid.volume, number, p, q))

    def quantile_diameter(self, p: Any, r: float = 3, structure: Any = None) -> FloatArray:
        """Diameter below which the share p of the quantity lies (...) [m], or (..., n_p) for several p.

        Parameters
        ----------
        p : float or (n_p,)
            Shares between 0 and 1.
        r : float
            Type of quantity of ISO 9276-1: 0 number, 2 surface, 3 volume.
        structure : Compact or Fractal, optional
            Gives the outer (collision) diameter of the aggregates; without it the volume-equivalent diameter.
        """
        x = self.grid.volume
        return self._where_any(lambda n: means.quantile_diameter(x, n, p, r=r, structure=structure))

    def cumulative(self, diameter: Any, r: float = 3) -> FloatArray:
        """Share Q_r of the quantity below each diameter [m], (..., n_diameters)."""
        sizes = _checks.array("diameter", np.atleast_1d(_checks.plain(diameter, "m")), "m", above=0.0)
        x = self.grid.volume
        return self._where_any(lambda n: means.cumulative(x, n, means.volume_of(sizes), r))

    def span(self, r: float = 3) -> FloatArray:
        """Span (d90 - d10) / d50 (...) [-]."""
        d10, d50, d90 = np.moveaxis(self.quantile_diameter(np.array([0.1, 0.5, 0.9]), r), -1, 0)
        return np.asarray((d90 - d10) / d50)

    def geometric_standard_deviation(self, r: float = 0) -> FloatArray:
        """Geometric standard deviation of the diameter (...) [-], by quantity r (0 number, 3 volume)."""
        return self._where_any(lambda n: means.geometric_standard_deviation(self.grid.volume, n, r))

    def density(self, r: float = 3, log: bool = True) -> FloatArray:
        """Density q_r* = dQ_r / d ln x (..., n_sections) [-], or q_r = dQ_r / dx [1/m] with log=False."""
        return self._where_any(lambda n: means.density(self.grid.volume, n, r, log=log))

    def _where_any(self, read: Callable[[FloatArray], FloatArray]) -> FloatArray:
        """`read` of the states that hold particles, NaN for the others."""
        holds = self.number.any(axis=-1)
        if holds.all():
            return read(self.number)
        # where there is nothing at all, any state tells the shape
        some = np.asarray(read(self.number[holds] if holds.any() else np.ones((1, self.grid.sections))))[
            : holds.sum()
        ]
        out = np.full(holds.shape + some.shape[1:], np.nan)
        out[holds] = some
        return out
