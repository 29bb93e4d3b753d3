"""scipy's integration methods behind the house contract."""

from __future__ import annotations

import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy import integrate

from aggsim._checks import FloatArray
from aggsim.solvers.base import Method, Rates


class SolverStepper:
    """One of scipy's step-wise solver objects."""

    def __init__(self, solver: Any) -> None:
        self._solver = solver
        self.time = float(solver.t)
        self.state: FloatArray = solver.y

    def step(self, until: float) -> str | None:
        solver = self._solver
        if solver.t <= self.time:
            message: str | None = solver.step()
            if solver.status == "failed":
                return message
        if solver.t <= until:
            self.time, self.state = float(solver.t), solver.y
        else:
            self.time, self.state = until, solver.dense_output()(until)
        return None


# Strides of LSODA: long enough that the loop around them costs nothing, short enough to be watched
_FIRST_STRIDE = 0.05  # share of the time in which the fastest section would change by its own scale
_FEW_EVALUATIONS = 10  # a stride that needs fewer is doubled
_MANY_EVALUATIONS = 30  # a stride that needs more is halved
_TOO_MANY_EVALUATIONS = 200  # a stride that needs more is given up, and taken again in small pieces


class _StrideGivenUp(Exception):
    """A stride runs into something far faster than what came before, such as gelation."""


class LsodaStepper:
    """LSODA, left to run inside compiled code for strides of a few steps."""

    def __init__(
        self,
        rates: Rates,
        jacobian: Rates,
        start: float,
        state: FloatArray,
        stop: float,
        rtol: float,
        atol: FloatArray,
    ) -> None:
        self._rates, self._jacobian = rates, jacobian
        self._rtol, self._atol = rtol, atol
        self.time, self.state = start, state
        speed = float(np.max(np.abs(rates(start, state)) / (np.abs(state) + atol / rtol)))
        self._stride = min(_FIRST_STRIDE / speed, stop - start) if speed > 0.0 else stop - start
        self._begin()

    def _begin(self) -> None:
        self._left = _TOO_MANY_EVALUATIONS
        self._ode = integrate.ode(self._counted, self._jacobian)
        tolerance: Any = self._atol  # an array is allowed; the type stubs know a float alone
        self._ode.set_integrator("lsoda", rtol=self._rtol, atol=tolerance, nsteps=_TOO_MANY_EVALUATIONS)
        self._ode.set_initial_value(self.state, self.time)

    def _counted(self, time: float, state: FloatArray) -> FloatArray:
        self._left -= 1
        if self._left < 0:
            raise _StrideGivenUp
        return self._rates(time, state)

    def step(self, until: float) -> str | None:
        self._left = _TOO_MANY_EVALUATIONS
        goal = min(self.time + self._stride, until)
        try:
            state = self._ode.integrate(goal)
        except _StrideGivenUp:
            self._stride = 0.1 * (goal - self.time)
            if self.time + self._stride == self.time:
                return "lsoda: the step size became too small for the time to advance"
            self._begin()
            return None
        except UserWarning as reason:  # see `LSODA.session`
            return str(reason)
        self.time, self.state = goal, np.array(state)
        used = _TOO_MANY_EVALUATIONS - self._left
        if used < _FEW_EVALUATIONS:
            self._stride *= 2.0
        elif used > _MANY_EVALUATIONS:
            self._stride *= 0.5
        return None


@dataclass(frozen=True, kw_only=True)
class LSODA(Method):
    """Adams methods that turn to backward differentiation by themselves where the problem is stiff.

    The default: about half the rate evaluations of the other methods on aggregation, stiff or not.

    References
    ----------
    .. [1] L. Petzold, SIAM J. Sci. Stat. Comput. 4 (1983) 136, doi:10.1137/0904010.
    """

    @contextmanager
    def session(self) -> Iterator[None]:
        # LSODA gives the reason of a failure as a warning; as an exception it reaches `step`
        with warnings.catch_warnings():
            warnings.filterwarnings("error", message="lsoda", category=UserWarning)
            yield

    def stepper(
        self,
        rates: Rates,
        jacobian: Rates,
        start: float,
        state: FloatArray,
        stop: float,
        rtol: float,
        atol: FloatArray,
    ) -> LsodaStepper:
        return LsodaStepper(rates, jacobian, start, state, stop, rtol, atol)


@dataclass(frozen=True, kw_only=True)
class SolverMethod(Method):
    """Base of the methods that scipy provides as step-wise solver classes of the same name."""

    def stepper(
        self,
        rates: Rates,
        jacobian: Rates,
        start: float,
        state: FloatArray,
        stop: float,
        rtol: float,
        atol: FloatArray,
    ) -> SolverStepper:
        solver: Any = getattr(integrate, self.name)
        return SolverStepper(solver(rates, start, np.array(state), stop, rtol=rtol, atol=atol, jac=jacobian))


@dataclass(frozen=True, kw_only=True)
class BDF(SolverMethod):
    """Backward differentiation formulas of order 1 to 5, implicit throughout.

    References
    ----------
    .. [1] L. F. Shampine and M. W. Reichelt, SIAM J. Sci. Comput. 18 (1997) 1, doi:10.1137/S1064827594276424.
    """


@dataclass(frozen=True, kw_only=True)
class Radau(SolverMethod):
    """Implicit Runge-Kutta method of the Radau IIA family, order 5; an independent check of the others.

    References
    ----------
    .. [1] E. Hairer and G. Wanner, Solving Ordinary Differential Equations II, Sec. IV.8, Springer 1996,
       doi:10.1007/978-3-642-05221-7.
    """
