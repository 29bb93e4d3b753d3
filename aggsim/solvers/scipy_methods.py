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
from aggsim.solvers.base import LARGEST_MATRIX, Method, Problem

# Strides of LSODA: long enough that the loop around them costs nothing, short enough to be watched
_FIRST_STRIDE = 0.05  # share of the time in which the fastest section changes by its own scale
_FEW_EVALUATIONS = 10  # a stride that needs fewer is doubled
_MANY_EVALUATIONS = 30  # a stride that needs more is halved
_TOO_MANY_EVALUATIONS = 200  # a stride that needs more is given up, and taken again in small pieces


class _StrideGivenUp(Exception):
    """A stride runs into something far faster than what came before, such as gelation."""


class LsodaStepper:
    """LSODA, left to run inside compiled code for strides of a few steps."""

    def __init__(self, problem: Problem) -> None:
        self._problem = problem
        self.time, self.state = problem.start, problem.state
        scale = np.abs(problem.state) + problem.atol / problem.rtol
        speed = float(np.max(np.abs(problem.rates(problem.start, problem.state)) / scale))
        length = problem.stop - problem.start
        self._stride = min(_FIRST_STRIDE / speed, length) if speed > 0.0 else length
        self._begin()

    def _begin(self) -> None:
        self._left = _TOO_MANY_EVALUATIONS
        # for a long state a full matrix would not fit in memory; the Adams methods of LSODA need none
        long = self.state.size > LARGEST_MATRIX
        self._ode = integrate.ode(self._counted, None if long else self._problem.jacobian)
        atol: Any = self._problem.atol  # an array is allowed; the type stubs know a float alone
        band: Any = 0 if long else None
        self._ode.set_integrator(
            "lsoda",
            rtol=self._problem.rtol,
            atol=atol,
            nsteps=_TOO_MANY_EVALUATIONS,
            lband=band,
            uband=band,
        )
        self._ode.set_initial_value(self.state, self.time)

    def _counted(self, time: float, state: FloatArray) -> FloatArray:
        self._left -= 1
        if self._left < 0:
            raise _StrideGivenUp
        return self._problem.rates(time, state)

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


class SolverStepper:
    """One of scipy's step-wise solver objects."""

    def __init__(self, kind: Any, problem: Problem, implicit: bool = True) -> None:
        options = {"jac": problem.jacobian} if implicit else {}
        self._solver = kind(
            problem.rates,
            problem.start,
            np.array(problem.state),
            problem.stop,
            rtol=problem.rtol,
            atol=problem.atol,
            **options,
        )
        self.time, self.state = problem.start, problem.state

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


@dataclass(frozen=True, kw_only=True)
class LSODA(Method):
    """Adams methods that turn to backward differentiation by themselves where the problem is stiff.

    The default: the quickest of the three on aggregation, steep or not.

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

    def stepper(self, problem: Problem) -> LsodaStepper:
        return LsodaStepper(problem)


@dataclass(frozen=True, kw_only=True)
class BDF(Method):
    """Backward differentiation formulas of order 1 to 5, implicit throughout.

    References
    ----------
    .. [1] L. F. Shampine and M. W. Reichelt, SIAM J. Sci. Comput. 18 (1997) 1, doi:10.1137/S1064827594276424.
    """

    def stepper(self, problem: Problem) -> SolverStepper:
        return SolverStepper(integrate.BDF, problem)


@dataclass(frozen=True, kw_only=True)
class Radau(Method):
    """Implicit Runge-Kutta method of the Radau IIA family, order 5; an independent check of the others.

    References
    ----------
    .. [1] E. Hairer and G. Wanner, Solving Ordinary Differential Equations II, Sec. IV.8, Springer 1996,
       doi:10.1007/978-3-642-05221-7.
    """

    def stepper(self, problem: Problem) -> SolverStepper:
        return SolverStepper(integrate.Radau, problem)


@dataclass(frozen=True, kw_only=True)
class DOP853(Method):
    """Explicit Runge-Kutta method of order 8, for long states that are not stiff, such as 100 000 monomer sizes.

    References
    ----------
    .. [1] E. Hairer, S. P. Norsett and G. Wanner, Solving Ordinary Differential Equations I, Sec. II.5,
       Springer 1993, doi:10.1007/978-3-540-78862-1.
    """

    def stepper(self, problem: Problem) -> SolverStepper:
        return SolverStepper(integrate.DOP853, problem, implicit=False)
