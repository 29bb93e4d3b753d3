"""scipy's integration methods behind the house contract."""

from __future__ import annotations

import warnings
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy import integrate

from aggsim._checks import FloatArray
from aggsim.solvers.base import Method, Rates


class ScipyStepper:
    """One of scipy's step-wise solver objects."""

    def __init__(self, solver: Any) -> None:
        self._solver = solver

    @property
    def time(self) -> float:
        return float(self._solver.t)

    @property
    def state(self) -> FloatArray:
        state: FloatArray = self._solver.y
        return state

    def step(self) -> str | None:
        try:
            message: str | None = self._solver.step()
        except UserWarning as reason:  # see `ScipyMethod.session`
            return str(reason)
        return message if self._solver.status == "failed" else None

    def at(self, times: FloatArray) -> FloatArray:
        states: FloatArray = self._solver.dense_output()(times).T
        return states


@dataclass(frozen=True, kw_only=True)
class ScipyMethod(Method):
    """Base of the methods that scipy provides."""

    @contextmanager
    def session(self) -> Iterator[None]:
        # LSODA gives the reason of a failure as a warning; as an exception it reaches `step`
        with warnings.catch_warnings():
            warnings.filterwarnings("error", message="lsoda", category=UserWarning)
            yield

    def _solver(self) -> Callable[..., Any]:
        return getattr(integrate, self.name)  # type: ignore[no-any-return]

    def stepper(
        self,
        rates: Rates,
        jacobian: Rates,
        start: float,
        state: FloatArray,
        stop: float,
        rtol: float,
        atol: FloatArray,
    ) -> ScipyStepper:
        solver = self._solver()(rates, start, np.array(state), stop, rtol=rtol, atol=atol, jac=jacobian)
        return ScipyStepper(solver)


@dataclass(frozen=True, kw_only=True)
class LSODA(ScipyMethod):
    """Adams methods that turn to backward differentiation by themselves where the problem is stiff.

    The default: about half the rate evaluations of the other methods on aggregation, stiff or not.

    References
    ----------
    .. [1] L. Petzold, SIAM J. Sci. Stat. Comput. 4 (1983) 136, doi:10.1137/0904010.
    """


@dataclass(frozen=True, kw_only=True)
class BDF(ScipyMethod):
    """Backward differentiation formulas of order 1 to 5, implicit throughout.

    References
    ----------
    .. [1] L. F. Shampine and M. W. Reichelt, SIAM J. Sci. Comput. 18 (1997) 1, doi:10.1137/S1064827594276424.
    """


@dataclass(frozen=True, kw_only=True)
class Radau(ScipyMethod):
    """Implicit Runge-Kutta method of the Radau IIA family, order 5; an independent check of the others.

    References
    ----------
    .. [1] E. Hairer and G. Wanner, Solving Ordinary Differential Equations II, Sec. IV.8, Springer 1996,
       doi:10.1007/978-3-642-05221-7.
    """
