"""The states of all tanks at one time, whether they come from a run or are steady."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import DistributionError
from aggsim.outputs import _units
from aggsim.result import Contributions, Readings, Result, SteadyState
from aggsim.sizes import SizeGrid


@dataclass(frozen=True, eq=False)
class States(Readings):
    """What can be read from numbers (n_states, n_sections) [1/m3] on one grid."""

    grid: SizeGrid
    number: FloatArray

    @property
    def filled(self) -> list[int]:
        """The states that hold particles; DistributionError where none does."""
        held = [int(k) for k in np.flatnonzero(self.number.any(axis=-1))]
        if not held:
            raise DistributionError(
                "no particles are there yet, so there are no sizes to draw. Try: a later time, or later outputs."
            )
        return held


@dataclass(frozen=True, eq=False)
class Tanks:
    """States of the tanks in the order of the flow; a run also has a time [s], its row, and contributions."""

    states: States
    time: float | None
    row: int
    contributions: tuple[Contributions, ...]

    @property
    def when(self) -> str:
        """The time with its unit, or that the state is steady."""
        if self.time is None:
            return "the steady state"
        return f"t = {_units.time_labels(np.array([self.time]))[0]}"


def tanks_at(result: Result | SteadyState, time: float | None) -> Tanks:
    """The tanks of a run at the output nearest to `time` [s], the last without it; or those of a steady state."""
    if isinstance(result, SteadyState):
        if time is not None:
            _units.refuse_time("time", time)
        return Tanks(States(result.grid, result.tanks), None, 0, ())
    row = _units.chosen_time(result, time)
    tanks = result.tanks or (result,)
    number = np.array([tank.number[row] for tank in tanks])
    contributions = tuple(tank.contributions for tank in tanks)
    return Tanks(States(result.grid, number), float(result.times[row]), row, contributions)
