"""A factor in time that a kernel is multiplied by: dosing, mixing that starts and stops, ageing."""

from __future__ import annotations

import bisect
import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from aggsim._checks import array, refuse, scalar
from aggsim.errors import AggsimError, KernelError


@dataclass(frozen=True)
class Strength:
    """A factor that depends on time.

    Parameters
    ----------
    function : callable
        function(time [s]) -> factor [1], a finite number of at least 0.
    jumps : sequence of float
        Times [s] at which the factor jumps or has a kink. An integration stops at each of them; a jump that
        is not named here costs accuracy, and a short pulse may be missed altogether.

    Raises
    ------
    KernelError
        If `function` cannot be called or a time of jump is not finite; when called, if the factor is
        negative, not finite or not a number.
    """

    function: Callable[[float], float]
    jumps: tuple[float, ...] = ()

    def __post_init__(self) -> None:
        if not callable(self.function):
            refuse(
                "function",
                repr(self.function),
                "a function of time [s]",
                "Strength(lambda t: ...), Strength.steps(times, values), or plain numbers to scale a kernel",
                error=KernelError,
            )
        times: tuple[float, ...] = ()
        if len(self.jumps) > 0:
            times = tuple(sorted(set(array("jumps", self.jumps, "s", error=KernelError).tolist())))
        object.__setattr__(self, "jumps", times)

    @classmethod
    def steps(cls, times: Any, values: Any) -> Strength:
        """A factor that is constant between jumps.

        Parameters
        ----------
        times : array_like, shape (n,)
            Times of the jumps [s], strictly increasing.
        values : array_like, shape (n + 1,)
            Factors [1] before the first, between, and after the last jump. At times[i] values[i + 1] holds.

        Raises
        ------
        KernelError
            If the times do not increase, or the values are negative, not finite, or not n + 1.
        """
        at = array("times", times, "s", increasing=True, error=KernelError)
        factors = array(
            "values",
            values,
            least=0.0,
            size=at.size + 1,
            hint="one factor more than there are times",
            error=KernelError,
        )
        return cls(_Steps(tuple(at.tolist()), tuple(factors.tolist())), tuple(at.tolist()))

    def __call__(self, time: float) -> float:
        """Factor [1] at `time` [s]."""
        try:
            factor = float(self.function(time))
        except AggsimError:
            raise
        except (TypeError, ValueError, ArithmeticError) as problem:
            raise KernelError(
                f"the strength at time={time:g} s could not be evaluated ({problem}). "
                f"Try: a function that takes one float and returns one float."
            ) from problem
        if not (math.isfinite(factor) and factor >= 0.0):
            refuse(
                f"strength at time={time:g} s: factor",
                f"{factor:g}",
                "finite, at least 0",
                "check the function that was passed to Strength",
                error=KernelError,
            )
        return factor

    def on(self, start: float, stop: float) -> Callable[[float], float]:
        """The factor on the closed interval from `start` to `stop` [s], which lie between neighbouring jumps.

        At an end that is a jump, the answer is the limit from inside the interval, so that an integration up
        to a jump does not see what comes after it.

        Raises
        ------
        KernelError
            If the interval is empty or a jump lies inside it.
        """
        first = scalar("start", start, "s", error=KernelError)
        last = scalar("stop", stop, "s", above=first, error=KernelError)
        inside = [jump for jump in self.jumps if first < jump < last]
        if inside:
            refuse(
                "stop",
                f"{last:g} s",
                f"at most the next jump after start={first:g} s, which is {inside[0]:g} s",
                "split the interval at Strength.jumps",
                error=KernelError,
            )
        if isinstance(self.function, _Steps):
            return _Constant(self(0.5 * (first + last)))
        low = math.nextafter(first, last) if first in self.jumps else first
        high = math.nextafter(last, first) if last in self.jumps else last
        return _Inside(self, low, high)

    def __mul__(self, other: Any) -> Strength:
        if isinstance(other, Strength):
            jumps = tuple(sorted({*self.jumps, *other.jumps}))
            if isinstance(self.function, _Steps) and isinstance(other.function, _Steps):
                before = self.function.values[0] * other.function.values[0]
                values = (before, *(self(jump) * other(jump) for jump in jumps))
                return Strength(_Steps(jumps, values), jumps)
            return Strength(_Both(self, other), jumps)
        return NotImplemented


@dataclass(frozen=True)
class _Steps:
    times: tuple[float, ...]
    values: tuple[float, ...]

    def __call__(self, time: float) -> float:
        return self.values[bisect.bisect_right(self.times, time)]


@dataclass(frozen=True)
class _Constant:
    value: float

    def __call__(self, time: float) -> float:
        return self.value


@dataclass(frozen=True)
class _Inside:
    strength: Strength
    low: float
    high: float

    def __call__(self, time: float) -> float:
        return self.strength(min(max(time, self.low), self.high))


@dataclass(frozen=True)
class _Both:
    first: Strength
    second: Strength

    def __call__(self, time: float) -> float:
        return self.first(time) * self.second(time)
