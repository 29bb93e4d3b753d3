from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest

import aggsim as ag
from aggsim.solvers.base import Method, Problem


class EulerStepper:
    """Explicit Euler with a fixed number of steps: the shortest stepper there is."""

    def __init__(self, problem: Problem) -> None:
        self._rates, self.time, self.state = problem.rates, problem.start, problem.state
        self._size = (problem.stop - problem.start) / 2000

    def step(self, until: float) -> str | None:
        end = min(self.time + self._size, until)
        self.state = self.state + (end - self.time) * self._rates(self.time, self.state)
        self.time = until if until - end < 1e-9 * until else end
        return None


@dataclass(frozen=True, kw_only=True)
class Euler(Method):
    """A method of a user's own."""

    def stepper(self, problem: Problem) -> EulerStepper:
        return EulerStepper(problem)


def test_a_method_of_ones_own_is_one_small_class() -> None:
    start = ag.Monodisperse(volume=1.0, number=1.0)
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e3)
    result = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), start, [1.0, 2.0], grid=grid, method=Euler())
    np.testing.assert_allclose(result.total_number(), [2 / 3, 0.5], rtol=1e-3)
    assert result.settings["method"] == "Euler"
    assert result.balance.closure == pytest.approx([0.0, 0.0], abs=1e-12)
