"""The contract of an integration method.

A new method is one class with these duties:

1. Be a frozen dataclass of options with a `max_evaluations` field and a one-word `name`.
2. `stepper(problem)` returns an object that advances a little at a time, so that output, progress, limits and
   interruption stay in one loop outside the method.
3. `step(until)` never reports a time past `until`. Where the method has gone further inside, the state at
   `until` is interpolated without loss of order.
4. The stepper uses the exact Jacobian that it is given: that is what keeps linear invariants (the particle
   volume) at round-off when the method is implicit.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable
from contextlib import AbstractContextManager, nullcontext
from dataclasses import dataclass
from typing import Protocol

from aggsim import _checks
from aggsim._checks import FloatArray

LARGEST_MATRIX = 8000  # entries of a state up to which methods use a full Jacobian

Rates = Callable[[float, FloatArray], FloatArray]


@dataclass(frozen=True, eq=False)
class Problem:
    """An initial value problem over one stretch of time without jumps.

    Attributes
    ----------
    rates, jacobian : callable
        (time [s], state (n,)) -> rates of change (n,) and their exact Jacobian (n, n).
    start, stop : float
        Times [s].
    state : (n,)
        State at `start`.
    rtol : float
    atol : (n,)
        Tolerances of each step.
    """

    rates: Rates
    jacobian: Rates
    start: float
    state: FloatArray
    stop: float
    rtol: float
    atol: FloatArray


class Stepper(Protocol):
    """An integration under way."""

    @property
    def time(self) -> float:
        """Time [s] reached."""

    @property
    def state(self) -> FloatArray:
        """State at `time`, a flat array that the stepper does not write to again."""

    def step(self, until: float) -> str | None:
        """Advance by a step or a few, at most to `until`; return None, or the reason why it was not possible."""


@dataclass(frozen=True, kw_only=True)
class Method(ABC):
    """A way to integrate ordinary differential equations in time.

    Parameters
    ----------
    max_evaluations : int
        Rate evaluations after which a run is stopped.

    Raises
    ------
    InputError
        If max_evaluations is not a whole number of at least 1.
    """

    max_evaluations: int = 200_000

    def __post_init__(self) -> None:
        _checks.count("max_evaluations", self.max_evaluations)

    @property
    def name(self) -> str:
        """Name for reports."""
        return type(self).__name__

    def session(self) -> AbstractContextManager[None]:
        """Surroundings of a whole run, such as warnings that the method needs to see."""
        return nullcontext()

    @abstractmethod
    def stepper(self, problem: Problem) -> Stepper:
        """Begin to integrate a problem."""
