"""The right-hand side of one run on one grid: the terms of a vessel, added up."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.schemes import BEYOND, Scheme
from aggsim.sizes import SizeGrid, StartingDistribution
from aggsim.solvers.base import LARGEST_MATRIX
from aggsim.vessels import Site, Stream, Vessel


class NotFiniteError(ArithmeticError):
    """A rate of change was not finite; methods would step on with it without a word."""


class WorkLimitError(RuntimeError):
    """More rate evaluations were asked for than the run allows."""


class System:
    """Rates and exact Jacobian of a vessel on a grid, with counts of their use.

    The state is one after the other, for each tank: numbers (n_sections,), the number and the volume beyond the
    grid, and the volume that each stream of the account has carried.
    """

    def __init__(
        self,
        vessel: Vessel,
        scheme: Scheme,
        grid: SizeGrid,
        allowed: float = math.inf,
        streams: tuple[Stream, ...] | None = None,
        project: Callable[[StartingDistribution], FloatArray] | None = None,
    ) -> None:
        """Prepare the terms of `vessel` on `grid`; `allowed` rate evaluations may follow.

        `streams` to keep account of are those of the vessel unless given; `project` places what is fed on the
        grid, by the scheme unless given.
        """
        streams = vessel.streams if streams is None else streams
        first = grid.sections + BEYOND
        self.tanks = len(vessel.volumes)
        self.width = first + len(streams)
        self.size = self.tanks * self.width
        self.rate_evaluations = 0
        self._allowed = allowed
        self._stop = math.inf  # a method may look past the end of a stretch, a strength may not
        self.jacobian_evaluations = 0
        place = (lambda start: scheme.project(start, grid)) if project is None else project
        self.terms = vessel.terms(Site(scheme.prepare(grid), streams, place, first))
        self._active: list[tuple[Any, Callable[[float], float] | None, slice | None]] = []

    @property
    def jumps(self) -> list[float]:
        """Times [s] at which a strength jumps, sorted."""
        return sorted({t for term in self.terms if term.strength is not None for t in term.strength.jumps})

    def on(self, start: float, stop: float) -> None:
        """Use the strengths of the interval [start, stop], which holds no jump inside."""
        self._stop = stop
        self._active = [
            (
                term.operator,
                None if term.strength is None else term.strength.on(start, stop),
                self._where(term.tank),
            )
            for term in self.terms
        ]

    def _where(self, tank: int | None) -> slice | None:
        """Place of a tank in the state, None where it is the whole state."""
        if tank is None or self.tanks == 1:
            return None
        return slice(tank * self.width, (tank + 1) * self.width)

    def rates(self, time: float, state: FloatArray) -> FloatArray:
        """Rates of change of the state (size,)."""
        self.rate_evaluations += 1
        if self.rate_evaluations > self._allowed:
            raise WorkLimitError
        out = np.zeros(self.size)
        total = 0.0
        for operator, strength, where in self._active:
            factor = 1.0 if strength is None else strength(min(time, self._stop))
            if where is None:
                total += operator.add_rates(state, factor, out)
            else:
                total += operator.add_rates(state[where], factor, out[where])
        if total - total != 0.0:  # infinite or not a number; quicker than a call
            raise NotFiniteError(f"a rate of change was not finite at t = {time:.6g} s")
        return out

    def jacobian(self, time: float, state: FloatArray) -> FloatArray:
        """Exact Jacobian of `rates` (size, size)."""
        if self.size > LARGEST_MATRIX:
            raise GridError(
                f"the state has {self.size} entries; an implicit method allows {LARGEST_MATRIX}, for its full matrix. "
                "Try: method=methods.LSODA() or methods.DOP853(), or a geometric grid."
            )
        self.jacobian_evaluations += 1
        out = np.zeros((self.size, self.size))
        blocks = [np.zeros((self.width, self.width)) for _ in range(self.tanks)] if self.tanks > 1 else []
        for operator, strength, where in self._active:
            factor = 1.0 if strength is None else strength(min(time, self._stop))
            if where is None:
                operator.add_jacobian(state, factor, out)
            else:  # in one piece, which compiled code is quickest on
                operator.add_jacobian(state[where], factor, blocks[where.start // self.width])
        for k, block in enumerate(blocks):
            part = slice(k * self.width, (k + 1) * self.width)
            out[part, part] += block
        return out
