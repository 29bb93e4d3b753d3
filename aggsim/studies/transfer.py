"""Flocs through a pump, a valve or a weir: a short spell of high shear, and what grows again after it."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.result import Result
from aggsim.sizes import StartingDistribution
from aggsim.solvers.simulate import simulate
from aggsim.vessels import Schedule, Stage, Vessel


@dataclass(frozen=True, eq=False)
class Transfer:
    """Sizes before, after and some time after a spell of high shear.

    Attributes
    ----------
    result : Result
        The whole run, with outputs at the limits of the stages.
    before, after, regrown : float
        Quantile diameter [m] when the spell begins, when it ends, and at the end of the run.
    smallest : float
        Smallest quantile diameter [m] from the beginning of the spell on.
    share : float
        The quantile, by volume [1].
    """

    result: Result
    before: float
    after: float
    regrown: float
    smallest: float
    share: float

    @property
    def strength_factor(self) -> float:
        """Size after the spell over size before it [1]: what the flocs withstand [1]_.

        .. [1] R. J. Francois, Water Res. 21 (1987) 1023, doi:10.1016/0043-1354(87)90023-6.
        """
        return self.after / self.before

    @property
    def recovery_factor(self) -> float:
        """Share of the size lost in the spell that came back until the end of the run [1]; NaN if none was lost.

        (regrown - after) / (before - after); sources as in `strength_factor`. Above 1 where what follows is calmer
        than what came before, and without meaning where little was lost.
        """
        lost = self.before - self.after
        return (self.regrown - self.after) / lost if lost > 0.0 else float("nan")

    def __str__(self) -> str:
        name = f"d{100.0 * self.share:g}"
        um = [1e6 * size for size in (self.before, self.after, self.regrown)]
        return (
            f"{name} by volume: {um[0]:.4g} um before, {um[1]:.4g} um after, {um[2]:.4g} um regrown\n"
            f"strength factor {self.strength_factor:.0%}, recovery factor {self.recovery_factor:.0%}\n"
            "A model supports and does not replace jar tests and trials on the plant."
        )


def transfer(
    start: StartingDistribution,
    *,
    before: tuple[Vessel, float],
    during: tuple[Vessel, float],
    after: tuple[Vessel, float],
    share: float = 0.5,
    structure: Any = None,
    outputs: int = 41,
    **options: Any,
) -> Transfer:
    """Compute the size of flocs before and after a short spell of high shear, and how they grow again.

    Parameters
    ----------
    start : StartingDistribution
        Particles when the stage `before` begins.
    before, during, after : (Vessel, float)
        Vessel and duration [s] of the stage that forms the flocs, of the spell (its residence time at its shear
        rate), and of what follows. Breakage belongs in every stage, at that stage's shear rate.
    share : float
        The quantile that is followed, by volume; 0.5 for the median.
    structure : Compact or Fractal, optional
        Gives outer diameters; volume-equivalent ones without it.
    outputs : int
        Output times in each stage.
    **options
        Of `simulate`: grid, scheme, method, rtol, progress.

    Returns
    -------
    Transfer

    Raises
    ------
    InputError
        If a stage is not a pair of a vessel and a duration, or a value is outside its limits.
    SimulationError
        If the run does not reach its end.
    """
    wanted = _checks.scalar("share", share, above=0.0, below=1.0, hint="0.5 for the median")
    _checks.count("outputs", outputs, least=2)
    stages, limits = [], [0.0]
    for name, pair in (("before", before), ("during", during), ("after", after)):
        if not (isinstance(pair, tuple) and len(pair) == 2 and isinstance(pair[0], Vessel)):
            raise InputError(
                f"{name}={pair!r} is not a pair of a vessel and a duration [s]. Try: {name}=(Batch(kernel), 600.0)."
            )
        duration = _checks.scalar(f"duration of {name}", pair[1], "s", above=0.0)
        stages.append(Stage(pair[0], start=limits[-1], stop=limits[-1] + duration, name=name))
        limits.append(limits[-1] + duration)
    times = np.unique(np.concatenate([_between(a, b, outputs) for a, b in pairwise(limits)]))
    result = simulate(Schedule(stages), start, times, **options)
    sizes = result.quantile_diameter(wanted, r=3, structure=structure)
    first, last = (int(np.searchsorted(times, limit)) for limit in limits[1:3])
    return Transfer(
        result=result,
        before=float(sizes[first]),
        after=float(sizes[last]),
        regrown=float(sizes[-1]),
        smallest=float(sizes[first:].min()),
        share=wanted,
    )


def _between(start: float, stop: float, count: int) -> FloatArray:
    times: FloatArray = np.linspace(start, stop, count)
    return times
