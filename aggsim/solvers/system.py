"""The right-hand side of one run on one grid: the terms of a vessel, added up."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.schemes import BEYOND, Scheme
from aggsim.sizes import SizeGrid
from aggsim.vessels import Vessel


class NotFiniteError(ArithmeticError):
    """A rate of change was not finite; methods would step on with it without a word."""


class WorkLimitError(RuntimeError):
    """More rate evaluations were asked for than the run allows."""


class System:
    """Rates and exact Jacobian of a vessel on a grid, with counts of their use."""

    def __init__(self, vessel: Vessel, scheme: Scheme, grid: SizeGrid, allowed: float = math.inf) -> None:
        """Prepare the terms of `vessel` on `grid`; `allowed` rate evaluations may follow."""
        self.size = grid.sections + BEYOND
        self.rate_evaluations = 0
        self._allowed = allowed
        self._stop = math.inf  # a method may look past the end of a stretch, a strength may not
        self.jacobian_evaluations = 0
        self.terms = vessel.terms(scheme.prepare(grid))
        self._active: list[tuple[Any, Callable[[float], float] | None]] = []

    @property
    def jumps(self) -> list[float]:
        """Times [s] at which a strength jumps, sorted."""
        return sorted({t for term in self.terms if term.strength is not None for t in term.strength.jumps})

    def on(self, start: float, stop: float) -> None:
        """Use the strengths of the interval [start, stop], which holds no jump inside."""
        self._stop = stop
        self._active = [
            (term.operator, None if term.strength is None else term.strength.on(start, stop))
            for term in self.terms
        ]

    def rates(self, time: float, state: FloatArray) -> FloatArray:
        """Rates of change of the state (n_sections + 2,)."""
        self.rate_evaluations += 1
        if self.rate_evaluations > self._allowed:
            raise WorkLimitError
        out = np.zeros(self.size)
        total = 0.0
        for operator, strength in self._active:
            factor = 1.0 if strength is None else strength(min(time, self._stop))
            total = operator.add_rates(state, factor, out)
        if total - total != 0.0:  # infinite or not a number; quicker than a call
            raise NotFiniteError(f"a rate of change was not finite at t = {time:.6g} s")
        return out

    def jacobian(self, time: float, state: FloatArray) -> FloatArray:
        """Exact Jacobian of `rates` (n_sections + 2, n_sections + 2)."""
        self.jacobian_evaluations += 1
        out = np.zeros((self.size, self.size))
        for operator, strength in self._active:
            factor = 1.0 if strength is None else strength(min(time, self._stop))
            operator.add_jacobian(state, factor, out)
        return out
