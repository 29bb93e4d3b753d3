"""The record of a run and the quantities that are read from it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import PchipInterpolator
from scipy.optimize import brentq

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import SimulationError
from aggsim.result.account import Balance, Contributions
from aggsim.result.error import ErrorEstimate, Later
from aggsim.result.readings import Readings
from aggsim.result.status import RunStatistics, Status
from aggsim.sizes import SizeGrid


@dataclass(frozen=True, eq=False)
class Result(Readings):
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
    tanks : tuple of Result
        One result per tank where the vessel has several, with its own account; the numbers above are then those
        of the last tank, which is what leaves, and the account is that of all tanks. Empty for one tank.
    estimate : Later, optional
        Where `error` comes from.
    """

    times: FloatArray
    grid: SizeGrid
    number: FloatArray
    balance: Balance
    contributions: Contributions
    status: Status
    stats: RunStatistics
    settings: Mapping[str, str] = field(default_factory=dict)
    tanks: tuple[Result, ...] = ()
    estimate: Later | None = field(default=None, repr=False)

    def __post_init__(self) -> None:
        for array in (self.times, self.number):
            array.setflags(write=False)

    @property
    def error(self) -> ErrorEstimate:
        """Estimated numerical error of every figure; without an `accuracy` from one coarse run, made at first use.

        Raises SimulationError where there is nothing to estimate it from: a loaded result, a run that ended
        early, one tank of several.
        """
        if self.estimate is None:
            raise SimulationError(
                "this result carries no error estimate (it was loaded, or is one tank of several). "
                "Try: the `error` of the result that simulate returned."
            )
        return self.estimate.get()

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
        level = _checks.scalar("value", value)
        y = np.array(quantity, dtype=np.float64)
        known = ~np.isnan(y)  # a tank that is still empty has no size
        if y.shape == self.times.shape and not known.all():
            return self._among(known).first_time(y[known], value) if known.sum() > 1 else float("nan")
        y = _checks.array("quantity", quantity, size=self.times.size)
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

    def _among(self, outputs: NDArray[np.bool_]) -> Result:
        """The same with some of the outputs alone."""
        return replace(self, times=self.times[outputs], number=self.number[outputs], tanks=())

    def number_half_life(self) -> float:
        """Time [s] at which half of the particles that were there at the first output are left, NaN if never."""
        total = self.total_number()
        if not total[0] > 0.0:
            return float("nan")
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
