"""The record of a run and the quantities that are read from it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from scipy.interpolate import PchipInterpolator
from scipy.optimize import brentq

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.result.account import Balance, Contributions
from aggsim.result.status import RunStatistics, Status
from aggsim.sizes import SizeGrid, means


@dataclass(frozen=True, eq=False)
class Result:
    """Particle-size distribution at each output time of a run.

    Attributes
    ----------
    times : (n_times,) s
        Output times that were reached. A run that ended early has one more, the time at which it ended.
    grid : SizeGrid
        Pivots of the sections; `grid.volume` and `grid.diameter` are (n_sections,).
    number : (n_times, n_sections) 1/m3
        Number of particles in each section.
    balance : Balance
        Account of the particle volume.
    contributions : Contributions
        What each named part of the kernel did.
    status : Status
        How the run ended; `str(status)` is a sentence.
    stats : RunStatistics
        What the run cost.
    settings : dict
        The numerical choices (scheme, method, tolerance) in words.
    """

    times: FloatArray
    grid: SizeGrid
    number: FloatArray
    balance: Balance
    contributions: Contributions
    status: Status
    stats: RunStatistics
    settings: Mapping[str, str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        for array in (self.times, self.number):
            array.setflags(write=False)

    def total_number(self) -> FloatArray:
        """Number of particles in all sections (n_times,) [1/m3]."""
        return self.moment(0)

    def moment(self, k: float) -> FloatArray:
        """Volume moment sum_i n_i v_i**k (n_times,) [m3**k / m3], k real; moment(1) is the volume fraction."""
        return means.moment(self.grid.volume, self.number, k)

    def mean_diameter(self, p: float, q: float) -> FloatArray:
        """Mean diameter D[p, q] (n_times,) [m], for example 4, 3 (by volume) or 3, 2 (Sauter)."""
        return means.mean_diameter(self.grid.volume, self.number, p, q)

    def quantile_diameter(self, p: Any, r: float = 3, structure: Any = None) -> FloatArray:
        """Diameter below which the share p of the quantity lies (n_times,) [m], or (n_times, n_p) for several p.

        Parameters
        ----------
        p : float or (n_p,)
            Shares between 0 and 1.
        r : float
            Type of quantity of ISO 9276-1: 0 number, 2 surface, 3 volume.
        structure : Compact or Fractal, optional
            Gives the outer (collision) diameter of the aggregates; without it the volume-equivalent diameter.
        """
        return means.quantile_diameter(self.grid.volume, self.number, p, r=r, structure=structure)

    def density(self, r: float = 3, log: bool = True) -> FloatArray:
        """Density q_r* = dQ_r / d ln x (n_times, n_sections) [-], or q_r = dQ_r / dx [1/m] with log=False."""
        return means.density(self.grid.volume, self.number, r, log=log)

    def cumulative(self, diameter: Any, r: float = 3) -> FloatArray:
        """Share Q_r of the quantity below each diameter [m], (n_times, n_diameters)."""
        sizes = _checks.array("diameter", np.atleast_1d(_checks.plain(diameter, "m")), "m", above=0.0)
        return means.cumulative(self.grid.volume, self.number, means.volume_of(sizes), r)

    def span(self, r: float = 3) -> FloatArray:
        """Span (d90 - d10) / d50 (n_times,) [-]."""
        d10, d50, d90 = np.moveaxis(self.quantile_diameter(np.array([0.1, 0.5, 0.9]), r), -1, 0)
        return np.asarray((d90 - d10) / d50)

    def geometric_standard_deviation(self, r: float = 0) -> FloatArray:
        """Geometric standard deviation of the diameter by quantity r (n_times,) [-]."""
        return means.geometric_standard_deviation(self.grid.volume, self.number, r)

    def first_time(self, quantity: Any, value: float) -> float:
        """First time [s] at which a quantity of this result passes a value, NaN if it never does.

        Parameters
        ----------
        quantity : (n_times,)
            A quantity at the output times, such as `result.mean_diameter(4, 3)`.
        value : float
            Value to pass, upward or downward.

        Notes
        -----
        Between outputs a monotone cubic is drawn (Fritsch and Carlson 1980, doi:10.1137/0717021), so the output
        times set the accuracy.
        """
        y = _checks.array("quantity", quantity, size=self.times.size)
        level = _checks.scalar("value", value)
        side = np.sign(y - level)
        hits = np.flatnonzero((side[1:] != side[:-1]) | (side[1:] == 0))
        if side[0] == 0:
            return float(self.times[0])
        if not hits.size:
            return float("nan")
        k = int(hits[0])
        if side[k + 1] == 0:
            return float(self.times[k + 1])
        curve = PchipInterpolator(self.times, y - level)
        low, high = float(self.times[k]), float(self.times[k + 1])
        return float(brentq(lambda t: float(curve(t)), low, high, xtol=1e-12 * high))

    def number_half_life(self) -> float:
        """Time [s] at which half of the particles that were there at the first output are left, NaN if never."""
        total = self.total_number()
        return self.first_time(total, 0.5 * float(total[0]))

    def __repr__(self) -> str:
        total, d43 = self.total_number(), self.mean_diameter(4, 3)
        return "\n".join(
            [
                f"Result: {self.status}",
                f"  times     {self.times.size} from {self.times[0]:.4g} to {self.times[-1]:.4g} s",
                f"  grid      {self.grid!r}",
                f"  number    {total[0]:.4g} to {total[-1]:.4g} 1/m3",
                f"  D[4,3]    {d43[0]:.4g} to {d43[-1]:.4g} m",
                f"  balance   {self.balance}",
                f"  computed  {', '.join(f'{k} {v}' for k, v in self.settings.items())}; {self.stats}",
            ]
        )
