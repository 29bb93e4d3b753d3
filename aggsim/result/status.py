"""How a run ended."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum


class Outcome(Enum):
    """Why a run ended; the value is the sentence that the user reads."""

    COMPLETED = "completed: every output time was reached"
    GELATION = "stopped at gelation: the largest particles grow without bound in a finite time"
    OUTGROWN = "stopped because the distribution outgrew the largest grid that is built automatically"
    UNRESOLVED = (
        "stopped because the grid is too coarse: sections with negative numbers hold too much of the volume"
    )
    INTERRUPTED = "interrupted by the user"
    STALLED = "stopped because the integration method could not go on"
    NOT_FINITE = "stopped because a rate of change was not a finite number"
    WORK_LIMIT = "stopped at the largest number of rate evaluations that the method allows"


@dataclass(frozen=True)
class Status:
    """Outcome of a run, the time that it reached, and what more there is to say.

    Attributes
    ----------
    outcome : Outcome
        Why the run ended.
    time : float
        Time [s] that was reached.
    detail : str
        Figures and advice that belong to the outcome.
    gelation_time : float or None
        Estimated time [s] at which the second moment becomes infinite, where gelation was met.
    """

    outcome: Outcome
    time: float
    detail: str = ""
    gelation_time: float | None = None

    @property
    def completed(self) -> bool:
        """True where every output time was reached."""
        return self.outcome is Outcome.COMPLETED

    def __str__(self) -> str:
        sentence = f"{self.outcome.value} (t = {self.time:.6g} s)"
        return f"{sentence}. {self.detail}" if self.detail else sentence


@dataclass(frozen=True)
class RunStatistics:
    """What a run cost.

    Attributes
    ----------
    rate_evaluations, jacobian_evaluations, steps : int
        Counts over the whole run; a step of LSODA is a stride that holds a few steps inside.
    restarts : int
        Times the method was started anew, at a jump in time or for a longer grid.
    grid_extensions : int
        Times the grid was continued upward.
    seconds : float
        Wall-clock time [s], preparation included.
    """

    rate_evaluations: int
    jacobian_evaluations: int
    steps: int
    restarts: int
    grid_extensions: int
    seconds: float

    def __str__(self) -> str:
        return (
            f"{self.rate_evaluations} rate and {self.jacobian_evaluations} Jacobian evaluations, {self.steps} steps, "
            f"{self.restarts} restarts, {self.grid_extensions} grid extensions, {self.seconds * 1e3:.1f} ms"
        )
