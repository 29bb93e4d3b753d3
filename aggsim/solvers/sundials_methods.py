"""CVODE of the SUNDIALS suite, through the package scikit-sundae, behind the house contract."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.solvers.base import Method, Problem

_STEPS_AT_ONCE = 8  # enough that the loop around them costs little, few enough to be watched


def _solver_class() -> Any:
    try:
        from sksundae.cvode import CVODE as SundialsCVODE
    except ImportError as error:
        raise ImportError(
            "CVODE() needs the package scikit-sundae, which cannot be imported. "
            'Try: pip install "aggsim[sundials]", or method=LSODA(), which needs nothing more.'
        ) from error
    return SundialsCVODE


class CvodeStepper:
    """CVODE, a few of its own steps at a time.

    It counts time from the start of the problem, so that a late start does not cut short how small a step can be.
    """

    def __init__(self, problem: Problem) -> None:
        start = self._start = problem.start

        def rates(elapsed: float, state: FloatArray, out: FloatArray) -> None:
            # a copy, since compiled code would be compiled again for the read-only array that comes
            out[:] = problem.rates(start + elapsed, np.array(state))

        def jacobian(elapsed: float, state: FloatArray, rates: FloatArray, out: FloatArray) -> None:
            out[:] = problem.jacobian(start + elapsed, np.array(state))

        self._solver = _solver_class()(rates, jacfn=jacobian, rtol=problem.rtol, atol=problem.atol)
        self._solver.init_step(0.0, problem.state)
        self._length = problem.stop - start
        self._elapsed = self._reached = 0.0  # to `time`, and by CVODE itself, perhaps past it
        self.time, self.state = start, problem.state

    def step(self, until: float) -> str | None:
        goal = until - self._start
        for _ in range(_STEPS_AT_ONCE):
            inside = self._reached > self._elapsed
            # after a state from inside the last step, CVODE first answers with the end of that step
            answer = self._solver.step(self._length, method="onestep", tstop=self._length)
            if not answer.success:
                return str(answer.message)
            if answer.t == self._reached and not inside:
                # CVODE would go on, and complain on the terminal
                return "the step size became too small for the time to advance"
            self._reached = answer.t
            if answer.t > goal:
                answer = self._solver.step(goal)
            self._elapsed, self.state = answer.t, answer.y
            self.time = until if answer.t == goal else min(self._start + answer.t, until)
            if self.time == until:
                break
        return None


@dataclass(frozen=True, kw_only=True)
class CVODE(Method):
    """Backward differentiation formulas of order 1 to 5 with variable coefficients, in compiled code.

    Needs the package scikit-sundae: pip install "aggsim[sundials]". For stiff problems, such as rapid breakage.

    Raises
    ------
    ImportError
        If scikit-sundae is not installed.

    References
    ----------
    .. [1] A. C. Hindmarsh et al., ACM Trans. Math. Softw. 31 (2005) 363, doi:10.1145/1089014.1089020.
    """

    def __post_init__(self) -> None:
        super().__post_init__()
        _solver_class()

    def stepper(self, problem: Problem) -> CvodeStepper:
        return CvodeStepper(problem)
